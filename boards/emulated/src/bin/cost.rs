//! Prints, for each piece of work, the mean and the largest number of instructions and the stack it needs.
#![no_std]
#![no_main]

use evenbore::error::Error;
use evenbore::flow_curve::FlowCurve;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use evenbore::record::RECORD_LENGTH;
use evenbore::{Reading, Refusal};
use evenbore_emulated::baseline::Simple;
use evenbore_emulated::bench::{self, Bench};
use evenbore_emulated::counter::{Cost, Counter};
use evenbore_emulated::line::Line;
use evenbore_emulated::{machine, readings};

const READINGS: u32 = 100;

/// Why nothing could be measured; never, as long as the library accepts its own record.
enum Failure {
    Built,
    Refused,
}

impl From<Error> for Failure {
    fn from(_: Error) -> Self {
        Self::Built
    }
}

impl From<Refusal> for Failure {
    fn from(_: Refusal) -> Self {
        Self::Refused
    }
}

#[derive(Default)]
struct Total {
    sum: u32,
    worst: u32,
    stack: u32,
}

impl Total {
    fn add(&mut self, cost: Cost) {
        self.sum += cost.instructions;
        self.worst = self.worst.max(cost.instructions);
        self.stack = self.stack.max(cost.stack);
    }
    fn print(&self, name: &str, count: u32) {
        Line::new(name).number((self.sum + count / 2) / count.max(1)).number(self.worst).number(self.stack).print();
    }
}

/// Nitrogen from 5 Pa to 2.5 kPa, -30 to 90 C, 80 to 120 kPa.
fn reading(seed: &mut readings::Seed) -> Reading {
    Reading::new(
        PressureDrop::from_pascals(seed.between(5.0, 2505.0)),
        Temperature::from_kelvin(seed.between(243.0, 363.0)),
        AbsolutePressure::from_pascals(seed.between(8e4, 1.2e5)),
    )
}

fn measure() -> Result<(), Failure> {
    let counter = Counter::new();
    let record = readings::record()?;
    let mut bytes = [0; RECORD_LENGTH];
    record.encode(&mut bytes);
    let meter = record.meter()?;
    let element = meter.element();
    let simple =
        Simple { a: element.a(), b: element.b(), mu: 1.79e-5, exponent: 0.69, gas_constant: 8.314_463 / 0.028_013_4 };
    let mut seed = readings::Seed::new(1);
    let [mut baseline, mut curve_sample, mut sample, mut full, mut flow] =
        [const { Total { sum: 0, worst: 0, stack: 0 } }; 5];
    for _ in 0..READINGS {
        let reading = reading(&mut seed);
        let conditions = meter.conditions(reading.temperature, reading.line_pressure, None)?;
        let curve = FlowCurve::of(&conditions)?;
        let input =
            Bench { meter: &meter, conditions: &conditions, curve: &curve, reading, simple: &simple, record: &bytes };
        curve_sample.add(counter.cost(bench::curve_sample, &input));
        baseline.add(counter.cost(bench::baseline, &input));
        sample.add(counter.cost(bench::sample, &input));
        full.add(counter.cost(bench::full, &input));
        flow.add(counter.cost(bench::flow, &input));
    }
    baseline.print("baseline", READINGS);
    curve_sample.print("curve-sample", READINGS);
    sample.print("sample", READINGS);
    full.print("full", READINGS);
    flow.print("flow", READINGS);
    let reading = reading(&mut seed);
    let conditions = meter.conditions(reading.temperature, reading.line_pressure, None)?;
    let curve = FlowCurve::of(&conditions)?;
    let input =
        Bench { meter: &meter, conditions: &conditions, curve: &curve, reading, simple: &simple, record: &bytes };
    let mut preparation = Total::default();
    preparation.add(counter.cost(bench::curve, &input));
    preparation.print("curve", 1);
    let mut decode = Total::default();
    decode.add(counter.cost(bench::decode, &input));
    decode.print("decode", 1);
    Ok(())
}

#[machine::entry]
fn main() -> ! {
    match measure() {
        Ok(()) => machine::exit(0),
        Err(Failure::Built) => machine::exit(1),
        Err(Failure::Refused) => machine::exit(2),
    }
}
