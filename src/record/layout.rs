//! The bytes of a record, version 1: written and read side by side, in the order of DEVELOPERS.md, "Record format".

use super::{Arithmetic, REASON_LENGTH, Record, SERIAL_LENGTH};
use crate::calibration::{Cause, CommonPart, MOST_COMMON_PARTS, Quality};
use crate::element::geometry::ShapeConstants;
use crate::element::{Element, Shape};
use crate::error::Error;
use crate::fluid::stored::{Curve, FINE_NODES, NAME_LENGTH, Name};
use crate::fluid::{Phase, StoredFluid};
use crate::quantity::{AbsolutePressure, Temperature};
use crate::reading::{SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use heapless::{String, Vec};

/// Bytes of an encoded record.
pub const RECORD_LENGTH: usize = 1044;
/// Newest version of a record's bytes that this code reads, and the one it writes.
pub const RECORD_VERSION: u16 = 1;

const MARK: [u8; 4] = *b"EVBR";
const CRC: crc::Crc<u32> = crc::Crc::<u32>::new(&crc::CRC_32_ISO_HDLC);

impl Record {
    /// Writes the record's bytes.
    pub fn encode(&self, bytes: &mut [u8; RECORD_LENGTH]) {
        let mut w = Writer { bytes, at: 0 };
        w.put(&MARK);
        w.put(&RECORD_VERSION.to_le_bytes());
        w.put(&(RECORD_LENGTH as u16).to_le_bytes());
        w.text::<SERIAL_LENGTH>(&self.serial);
        w.put(&self.date.to_le_bytes());
        w.put(&self.events.to_le_bytes());
        w.put(&[self.arithmetic as u8, self.element.shape as u8, self.fluid.phase as u8, 0]);
        w.text::<REASON_LENGTH>(&self.reason);
        w.numbers(&numbers_of(&self.trims, &self.sensors, &self.reference));
        w.quality(&self.quality);
        w.element(&self.element);
        w.fluid(&self.fluid);
        let sum = CRC.checksum(w.written());
        w.put(&sum.to_le_bytes());
    }

    /// Reads a record's bytes.
    ///
    /// # Errors
    /// Not a record, another version, another length, damaged (any changed bit is found), or a field that makes no
    /// sense.
    pub fn decode(bytes: &[u8]) -> Result<Self, Error> {
        let mut r = Reader { bytes, at: 0 };
        let length = Error::WrongLength { found: bytes.len(), expected: RECORD_LENGTH };
        if r.take::<4>().ok_or(length)? != MARK {
            return Err(Error::NotARecord);
        }
        let version = u16::from_le_bytes(r.take().ok_or(length)?);
        if version == 0 || version > RECORD_VERSION {
            return Err(Error::UnknownVersion { found: version, newest: RECORD_VERSION });
        }
        let stated = usize::from(u16::from_le_bytes(r.take().ok_or(length)?));
        if stated != RECORD_LENGTH || bytes.len() != RECORD_LENGTH {
            return Err(length);
        }
        check_sum(bytes)?;
        let record = r.record()?;
        record.check()?;
        Ok(record)
    }

    /// The checksum that stands at the end of the record's bytes.
    pub fn checksum(&self) -> u32 {
        let mut bytes = [0; RECORD_LENGTH];
        self.encode(&mut bytes);
        let [.., a, b, c, d] = bytes;
        u32::from_le_bytes([a, b, c, d])
    }
}

fn check_sum(bytes: &[u8]) -> Result<(), Error> {
    let Some((body, stored)) = bytes.split_last_chunk::<4>() else {
        return Err(Error::WrongLength { found: bytes.len(), expected: RECORD_LENGTH });
    };
    let (computed, stored) = (CRC.checksum(body), u32::from_le_bytes(*stored));
    if computed == stored { Ok(()) } else { Err(Error::WrongChecksum { computed, stored }) }
}

/// Trims, sensors and reference conditions in the order of the layout.
fn numbers_of(t: &Trims, s: &SensorUncertainty, r: &ReferenceConditions) -> [f32; 12] {
    [
        t.pressure_drop_zero_pa,
        t.pressure_drop_gain,
        t.temperature_offset_k,
        t.line_pressure_offset_pa,
        s.pressure_drop_pa,
        s.pressure_drop_rel,
        s.temperature_k,
        s.line_pressure_pa,
        s.line_pressure_rel,
        s.relative_humidity,
        r.temperature.as_kelvin(),
        r.pressure.as_pascals(),
    ]
}

struct Writer<'a> {
    bytes: &'a mut [u8; RECORD_LENGTH],
    at: usize,
}

impl Writer<'_> {
    fn put(&mut self, part: &[u8]) {
        let end = self.at + part.len();
        if let Some(place) = self.bytes.get_mut(self.at..end) {
            place.copy_from_slice(part);
        }
        self.at = end;
    }
    fn written(&self) -> &[u8] {
        self.bytes.get(..self.at).unwrap_or(&[])
    }
    fn text<const N: usize>(&mut self, text: &str) {
        let mut place = [0; N];
        for (to, from) in place.iter_mut().zip(text.bytes()) {
            *to = from;
        }
        self.put(&place);
    }
    fn numbers(&mut self, numbers: &[f32]) {
        for number in numbers {
            self.put(&number.to_le_bytes());
        }
    }
    fn quality(&mut self, q: &Quality) {
        self.numbers(&[q.u_a, q.u_b_m, q.correlation, q.degrees_of_freedom]);
        self.numbers(&[q.x_min_m, q.x_max_m, q.temperature_k.as_kelvin()]);
        let mut causes = [u8::MAX; MOST_COMMON_PARTS];
        let mut effects = [[0.0; 2]; MOST_COMMON_PARTS];
        for ((part, cause), effect) in q.common.iter().zip(&mut causes).zip(&mut effects) {
            *cause = part.cause as u8;
            *effect = [part.effect_a, part.effect_b_m];
        }
        self.put(&causes);
        self.put(&[0; 2]);
        self.numbers(effects.as_flattened());
    }
    fn element(&mut self, e: &Element) {
        let c = &e.constants;
        self.numbers(&[e.a, e.b, e.open_area, e.hydraulic_diameter, e.length, e.expansion, e.reference_temperature]);
        self.numbers(&[c.friction_reynolds, c.kinetic_loss, c.kinetic_energy_factor, c.thermal_factor]);
        self.numbers(&c.entrance);
    }
    fn fluid(&mut self, f: &StoredFluid) {
        self.put(&f.name.bytes);
        self.numbers(&[f.molar_mass]);
        self.numbers(&f.temperature_range);
        self.numbers(&f.pressure_range);
        self.numbers(&[f.u_viscosity, f.u_viscosity_ratio]);
        self.numbers(f.viscosity.nodes.as_flattened());
        for curve in f.viscosity_pressure.iter().chain(&f.density_pressure) {
            self.numbers(curve.nodes.as_flattened());
        }
        self.numbers(f.extra.nodes.as_flattened());
    }
}

struct Reader<'a> {
    bytes: &'a [u8],
    at: usize,
}

impl Reader<'_> {
    fn take<const N: usize>(&mut self) -> Option<[u8; N]> {
        let part = self.bytes.get(self.at..)?.first_chunk::<N>()?;
        self.at += N;
        Some(*part)
    }
    fn need<const N: usize>(&mut self) -> Result<[u8; N], Error> {
        self.take().ok_or(Error::WrongLength { found: self.bytes.len(), expected: RECORD_LENGTH })
    }
    fn number(&mut self) -> Result<f32, Error> {
        Ok(f32::from_le_bytes(self.need()?))
    }
    fn numbers<const N: usize>(&mut self) -> Result<[f32; N], Error> {
        let mut numbers = [0.0; N];
        for number in &mut numbers {
            *number = self.number()?;
        }
        Ok(numbers)
    }
    fn text<const N: usize>(&mut self, field: &'static str) -> Result<String<N>, Error> {
        let place = self.need::<N>()?;
        let length = place.iter().position(|&c| c == 0).unwrap_or(N);
        let bad = Error::BadText { field, most: N };
        let text = place.get(..length).and_then(|b| core::str::from_utf8(b).ok()).ok_or(bad)?;
        String::try_from(text).map_err(|_| bad)
    }
    fn curve<const NODES: usize>(&mut self) -> Result<Curve<NODES>, Error> {
        let mut nodes = [[0.0; 2]; NODES];
        for node in &mut nodes {
            *node = self.numbers()?;
        }
        Ok(Curve { nodes })
    }
    fn record(&mut self) -> Result<Record, Error> {
        let serial = self.text("serial")?;
        let (date, events) = (u32::from_le_bytes(self.need()?), u32::from_le_bytes(self.need()?));
        let [arithmetic, shape, phase, _] = self.need()?;
        let reason = self.text("reason")?;
        let (trims, sensors, reference) = self.settings()?;
        Ok(Record {
            serial,
            date,
            events,
            arithmetic: if arithmetic == Arithmetic::Single as u8 {
                Arithmetic::Single
            } else {
                return Err(Error::UnknownCode { field: "arithmetic", code: arithmetic });
            },
            reason,
            trims,
            sensors,
            reference,
            quality: self.quality()?,
            element: self.element(shape)?,
            fluid: self.fluid(phase)?,
        })
    }
    fn settings(&mut self) -> Result<(Trims, SensorUncertainty, ReferenceConditions), Error> {
        let [zero, gain, offset_t, offset_p, drop_pa, drop_rel, t, p_pa, p_rel, humidity, ref_t, ref_p] =
            self.numbers()?;
        let trims = Trims {
            pressure_drop_zero_pa: zero,
            pressure_drop_gain: gain,
            temperature_offset_k: offset_t,
            line_pressure_offset_pa: offset_p,
        };
        let sensors = SensorUncertainty {
            pressure_drop_pa: drop_pa,
            pressure_drop_rel: drop_rel,
            temperature_k: t,
            line_pressure_pa: p_pa,
            line_pressure_rel: p_rel,
            relative_humidity: humidity,
        };
        let reference = ReferenceConditions {
            temperature: Temperature::from_kelvin(ref_t),
            pressure: AbsolutePressure::from_pascals(ref_p),
        };
        Ok((trims, sensors, reference))
    }
    fn quality(&mut self) -> Result<Quality, Error> {
        let [u_a, u_b_m, correlation, degrees_of_freedom, x_min_m, x_max_m, t] = self.numbers()?;
        let causes = self.need::<MOST_COMMON_PARTS>()?;
        self.need::<2>()?;
        let mut common = Vec::new();
        for code in causes {
            let [effect_a, effect_b_m] = self.numbers()?;
            if code == u8::MAX {
                continue;
            }
            let cause = *Cause::ALL.get(usize::from(code)).ok_or(Error::UnknownCode { field: "cause", code })?;
            let part = CommonPart { cause, effect_a, effect_b_m };
            common.push(part).map_err(|_| Error::TooMany { field: "common", most: MOST_COMMON_PARTS })?;
        }
        let temperature_k = Temperature::from_kelvin(t);
        Ok(Quality { u_a, u_b_m, correlation, degrees_of_freedom, common, x_min_m, x_max_m, temperature_k })
    }
    fn element(&mut self, shape: u8) -> Result<Element, Error> {
        let shapes = [Shape::RoundTubes, Shape::ParallelPlates, Shape::Other];
        let unknown = Error::UnknownCode { field: "shape", code: shape };
        let shape = *shapes.get(usize::from(shape)).ok_or(unknown)?;
        let [a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature] = self.numbers()?;
        let [friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor] = self.numbers()?;
        let entrance = self.numbers()?;
        let constants =
            ShapeConstants { friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor, entrance };
        Ok(Element { shape, constants, a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature })
    }
    fn fluid(&mut self, phase: u8) -> Result<StoredFluid, Error> {
        let phases = [Phase::Gas, Phase::Liquid];
        let unknown = Error::UnknownCode { field: "phase", code: phase };
        Ok(StoredFluid {
            name: Name { bytes: self.need::<NAME_LENGTH>()? },
            phase: *phases.get(usize::from(phase)).ok_or(unknown)?,
            molar_mass: self.number()?,
            temperature_range: self.numbers()?,
            pressure_range: self.numbers()?,
            u_viscosity: self.number()?,
            u_viscosity_ratio: self.number()?,
            viscosity: self.curve::<FINE_NODES>()?,
            viscosity_pressure: [self.curve()?, self.curve()?],
            density_pressure: [self.curve()?, self.curve()?, self.curve()?],
            extra: self.curve()?,
        })
    }
}
