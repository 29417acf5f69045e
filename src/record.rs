//! The calibration record: all that makes a meter out of an instrument, as bytes.
//!
//! A fixed little-endian layout (DEVELOPERS.md, "Record format") that starts with a mark, a version and its length and
//! ends with a CRC-32 (ISO 3309, IEEE 802.3) over all that precedes it. It carries the stored table of its fluid and
//! the constants of its law, so an instrument needs no file and a later version of this code computes the same flow.

use crate::calibration::{Cause, CommonPart, MOST_COMMON_PARTS, Quality};
use crate::element::geometry::ShapeConstants;
use crate::element::{Element, Shape};
use crate::error::{Error, within};
use crate::flow::Meter;
use crate::fluid::stored::{Curve, Name};
use crate::fluid::{Phase, StoredFluid};
use crate::quantity::{AbsolutePressure, Temperature};
use crate::reading::{SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use crate::status::Status;
use heapless::{String, Vec};

/// Bytes of an encoded record.
pub const RECORD_LENGTH: usize = 1044;
/// Longest serial number.
pub const SERIAL_LENGTH: usize = 16;
/// Longest reason for using a refused run.
pub const REASON_LENGTH: usize = 64;

const MARK: [u8; 4] = *b"EVBR";
const VERSION: u16 = 1;
const CRC: crc::Crc<u32> = crc::Crc::<u32>::new(&crc::CRC_32_ISO_HDLC);

/// Which arithmetic computes the flow; named in the record so that certificate and instrument agree to the bit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Arithmetic {
    /// IEEE 754 single precision, as written in this crate.
    Single,
}

/// A calibration record.
///
/// ```
/// use evenbore::record::{RECORD_LENGTH, Record};
/// use evenbore::{Element, calibration::Quality, fluid::catalogue::NITROGEN, quantity::Length};
/// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
/// let quality = Quality::nominal(element.a(), element.b());
/// let record = Record::new("EB-0042", 20261201, element, *NITROGEN.fluid(), quality)?;
/// let mut bytes = [0; RECORD_LENGTH];
/// record.encode(&mut bytes);
/// assert_eq!(Record::decode(&bytes)?, record);
/// let _meter = record.meter()?;
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct Record {
    /// Serial number of the element: 1 to 16 printable ASCII characters.
    pub serial: String<SERIAL_LENGTH>,
    /// Date of the calibration as YYYYMMDD.
    pub date: u32,
    /// How often a calibration was written to this instrument.
    pub events: u32,
    /// The arithmetic that computes the flow.
    pub arithmetic: Arithmetic,
    /// Why a refused run is used all the same; empty when the run was accepted.
    pub reason: String<REASON_LENGTH>,
    /// Corrections of the instrument's sensors.
    pub trims: Trims,
    /// Standard uncertainties of the instrument's sensors.
    pub sensors: SensorUncertainty,
    /// Conditions at which standard flow is quoted.
    pub reference: ReferenceConditions,
    /// How well A and B are known.
    pub quality: Quality,
    /// The element with its calibrated A and B.
    pub element: Element,
    /// The fluid of the calibration.
    pub fluid: StoredFluid,
}

impl Record {
    /// A record with perfect trims, sensors of a good instrument and DIN 1343 reference conditions.
    ///
    /// # Errors
    /// Names the field that makes no sense.
    pub fn new(serial: &str, date: u32, element: Element, fluid: StoredFluid, quality: Quality) -> Result<Self, Error> {
        let record = Self {
            serial: String::try_from(serial).map_err(|_| Error::BadText { field: "serial", most: SERIAL_LENGTH })?,
            date,
            events: 0,
            arithmetic: Arithmetic::Single,
            reason: String::new(),
            trims: Trims::NONE,
            sensors: SensorUncertainty::COMMON,
            reference: ReferenceConditions::DIN_1343,
            quality,
            element,
            fluid,
        };
        record.check()?;
        Ok(record)
    }

    /// Accepts a record whose every field makes sense, whatever its origin.
    ///
    /// # Errors
    /// Names the field.
    pub fn check(&self) -> Result<(), Error> {
        let printable = |text: &str| text.bytes().all(|c| (b' '..=b'~').contains(&c));
        if self.serial.is_empty() || !printable(&self.serial) {
            return Err(Error::BadText { field: "serial", most: SERIAL_LENGTH });
        }
        if !printable(&self.reason) {
            return Err(Error::BadText { field: "reason", most: REASON_LENGTH });
        }
        within("date (YYYYMMDD)", self.date as f32, 19_700_101.0, 99_991_231.0)?;
        self.trims.check()?;
        self.sensors.check()?;
        ReferenceConditions::new(self.reference.temperature, self.reference.pressure)?;
        self.quality.check()?;
        self.element.check()?;
        self.fluid.name.check()?;
        self.fluid.check()
    }

    /// The meter this record describes.
    ///
    /// # Errors
    /// Names the field that makes no sense.
    pub fn meter(&self) -> Result<Meter<'_>, Error> {
        self.check()?;
        let standing = if self.reason.is_empty() { Status::empty() } else { Status::REFUSED_RUN };
        Ok(Meter::of_checked(self.element, &self.fluid, self.quality.clone(), true, standing)
            .with_sensors(self.trims, self.sensors)?
            .with_reference(self.reference))
    }

    /// Writes the record's bytes.
    pub fn encode(&self, bytes: &mut [u8; RECORD_LENGTH]) {
        let mut w = Writer { bytes, at: 0 };
        w.put(&MARK);
        w.put(&VERSION.to_le_bytes());
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
        if version == 0 || version > VERSION {
            return Err(Error::UnknownVersion { found: version, newest: VERSION });
        }
        let stated = usize::from(u16::from_le_bytes(r.take().ok_or(length)?));
        if stated != RECORD_LENGTH || bytes.len() != RECORD_LENGTH {
            return Err(length);
        }
        check_sum(bytes)?;
        // Checked where it stands, since a record is too large to be moved about on a small stack.
        let record = r.record();
        match &record {
            Ok(sound) => sound.check().and(record),
            Err(_) => record,
        }
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
    /// The next bytes; the length of the whole was checked, so they are there.
    fn bytes<const N: usize>(&mut self) -> [u8; N] {
        self.take().unwrap_or([0; N])
    }
    #[inline(never)] // most of a record is numbers
    fn fill(&mut self, numbers: &mut [f32]) {
        for number in numbers {
            *number = f32::from_le_bytes(self.bytes());
        }
    }
    fn numbers<const N: usize>(&mut self) -> [f32; N] {
        let mut numbers = [0.0; N];
        self.fill(&mut numbers);
        numbers
    }
    fn text<const N: usize>(&mut self, field: &'static str) -> Result<String<N>, Error> {
        let mut text = String::new();
        for code in self.bytes::<N>().into_iter().take_while(|&code| code != 0) {
            text.push(char::from(code)).map_err(|_| Error::BadText { field, most: N })?;
        }
        Ok(text)
    }
    fn record(&mut self) -> Result<Record, Error> {
        let serial = self.text("serial")?;
        let (date, events) = (u32::from_le_bytes(self.bytes()), u32::from_le_bytes(self.bytes()));
        let [arithmetic, shape, phase, _] = self.bytes();
        let arithmetic = choice("arithmetic", &[Arithmetic::Single], arithmetic)?;
        let shape = choice("shape", &[Shape::RoundTubes, Shape::ParallelPlates, Shape::Other], shape)?;
        let phase = choice("phase", &[Phase::Gas, Phase::Liquid], phase)?;
        let reason = self.text("reason")?;
        let (trims, sensors, reference) = self.settings();
        Ok(Record {
            serial,
            date,
            events,
            arithmetic,
            reason,
            trims,
            sensors,
            reference,
            quality: self.quality()?,
            element: self.element(shape),
            fluid: self.fluid(phase),
        })
    }
    fn settings(&mut self) -> (Trims, SensorUncertainty, ReferenceConditions) {
        let [zero, gain, offset_t, offset_p, drop_pa, drop_rel, t, p_pa, p_rel, humidity, ref_t, ref_p] =
            self.numbers();
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
        (trims, sensors, reference)
    }
    fn quality(&mut self) -> Result<Quality, Error> {
        let [u_a, u_b_m, correlation, degrees_of_freedom, x_min_m, x_max_m, t] = self.numbers();
        let causes = self.bytes::<MOST_COMMON_PARTS>();
        self.bytes::<2>();
        let mut common = Vec::new();
        for code in causes {
            let [effect_a, effect_b_m] = self.numbers();
            if code == u8::MAX {
                continue;
            }
            let cause = choice("cause", &Cause::ALL, code)?;
            let part = CommonPart { cause, effect_a, effect_b_m };
            common.push(part).map_err(|_| Error::TooMany { field: "common", most: MOST_COMMON_PARTS })?;
        }
        let temperature_k = Temperature::from_kelvin(t);
        Ok(Quality { u_a, u_b_m, correlation, degrees_of_freedom, common, x_min_m, x_max_m, temperature_k })
    }
    fn element(&mut self, shape: Shape) -> Element {
        let [a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature] = self.numbers();
        let [friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor] = self.numbers();
        let entrance = self.numbers();
        let constants =
            ShapeConstants { friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor, entrance };
        Element { shape, constants, a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature }
    }
    fn fluid(&mut self, phase: Phase) -> StoredFluid {
        let name = Name { bytes: self.bytes() };
        let [molar_mass, t_low, t_high, p_low, p_high, u_viscosity, u_viscosity_ratio] = self.numbers();
        let (fine, coarse) = (Curve::constant(0.0), Curve::constant(0.0));
        let mut fluid = StoredFluid {
            name,
            phase,
            molar_mass,
            temperature_range: [t_low, t_high],
            pressure_range: [p_low, p_high],
            u_viscosity,
            u_viscosity_ratio,
            viscosity: fine,
            viscosity_pressure: [coarse; 2],
            density_pressure: [coarse; 3],
            extra: coarse,
        };
        self.fill(fluid.viscosity.nodes.as_flattened_mut());
        for curve in fluid.viscosity_pressure.iter_mut().chain(&mut fluid.density_pressure) {
            self.fill(curve.nodes.as_flattened_mut());
        }
        self.fill(fluid.extra.nodes.as_flattened_mut());
        fluid
    }
}

/// The choice that a code stands for.
fn choice<T: Copy>(field: &'static str, choices: &[T], code: u8) -> Result<T, Error> {
    choices.get(usize::from(code)).copied().ok_or(Error::UnknownCode { field, code })
}
