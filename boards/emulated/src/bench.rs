//! The work whose cost is counted, each a function of its own that returns its result.

use crate::baseline::Simple;
use core::mem::MaybeUninit;
use evenbore::conditions::{Conditions, Sample};
use evenbore::error::Error;
use evenbore::flow::Flow;
use evenbore::flow_curve::{FlowCurve, Quick};
use evenbore::record::RECORD_LENGTH;
use evenbore::{Meter, Reading, Record, Refusal};

/// What the work works on.
pub struct Bench<'a> {
    /// The meter of the record below.
    pub meter: &'a Meter<'a>,
    /// Conditions of the reading.
    pub conditions: &'a Conditions,
    /// Their curve over pressure drop.
    pub curve: &'a FlowCurve,
    /// The reading.
    pub reading: Reading,
    /// The hand-written model of the same element.
    pub simple: &'a Simple,
    /// The record as bytes.
    pub record: &'a [u8; RECORD_LENGTH],
}

/// By hand: the simple model.
pub fn baseline(b: &Bench<'_>) -> MaybeUninit<[f32; 2]> {
    let r = &b.reading;
    let (drop, t, p) = (r.pressure_drop.as_pascals(), r.temperature.as_kelvin(), r.line_pressure.as_pascals());
    MaybeUninit::new(b.simple.flow(drop, t, p))
}

/// A pressure drop at conditions that are prepared.
pub fn sample(b: &Bench<'_>) -> MaybeUninit<Result<Sample, Refusal>> {
    MaybeUninit::new(b.conditions.sample(b.reading.pressure_drop))
}

/// The same by the fast arithmetic.
pub fn curve_sample(b: &Bench<'_>) -> MaybeUninit<Result<Quick, Refusal>> {
    MaybeUninit::new(b.curve.sample(b.reading.pressure_drop))
}

/// The curve of conditions that are prepared.
pub fn curve(b: &Bench<'_>) -> MaybeUninit<Result<FlowCurve, Refusal>> {
    MaybeUninit::new(FlowCurve::of(b.conditions))
}

/// Conditions prepared anew, then a pressure drop.
pub fn full(b: &Bench<'_>) -> MaybeUninit<Result<Sample, Refusal>> {
    let r = &b.reading;
    MaybeUninit::new(match &b.meter.conditions(r.temperature, r.line_pressure, r.relative_humidity) {
        Ok(conditions) => conditions.sample(r.pressure_drop),
        Err(refusal) => Err(*refusal),
    })
}

/// The whole walk, from trims to uncertainty.
pub fn flow(b: &Bench<'_>) -> MaybeUninit<Result<Flow, Refusal>> {
    MaybeUninit::new(b.meter.flow(&b.reading))
}

/// A record read, its checksum and every field checked.
pub fn decode(b: &Bench<'_>) -> MaybeUninit<Result<Record, Error>> {
    MaybeUninit::new(Record::decode(b.record))
}
