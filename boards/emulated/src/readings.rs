//! Twelve thousand seeded readings and the digest of every bit that comes out of them.
//!
//! Compiled for the machines and for the desktop (`tests/boards.rs`): the digests must be equal.

use evenbore::calibration::{Cause, CommonPart, Quality};
use evenbore::error::Error;
use evenbore::flow::Flow;
use evenbore::flow_curve::Arithmetic;
use evenbore::fluid::catalogue::{self, CatalogueEntry};
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::{Phase, StoredFluid};
use evenbore::quantity::{
    AbsolutePressure, Density, KinematicViscosity, Length, MassFlow, PressureDrop, RelativeHumidity, Temperature,
};
use evenbore::record::RECORD_LENGTH;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Meter, Reading, Record, Refusal};

/// Readings of a section.
pub const READINGS: u32 = 500;

/// Elements of a section: what they are made of, and how the meter comes about.
#[derive(Clone, Copy)]
enum Kind {
    /// Round tubes, calibrated on nitrogen, the record written and read back.
    Tubes,
    /// Parallel plates of nominal geometry.
    Plates,
    /// Unknown channels, calibrated on the fluid itself.
    Other,
    /// Round tubes calibrated on nitrogen, by the fast arithmetic.
    Curve,
}

/// Fluids by kind of element; where there is no entry, an oil is built.
type Row = (Kind, Option<&'static CatalogueEntry>);

#[rustfmt::skip]
static SECTIONS: [Row; 24] = [
    (Kind::Tubes, Some(&catalogue::NITROGEN)),
    (Kind::Tubes, Some(&catalogue::AIR)),
    (Kind::Tubes, Some(&catalogue::HELIUM)),
    (Kind::Tubes, Some(&catalogue::HYDROGEN)),
    (Kind::Tubes, Some(&catalogue::CARBON_DIOXIDE)),
    (Kind::Tubes, Some(&catalogue::SULFUR_HEXAFLUORIDE)),
    (Kind::Tubes, Some(&catalogue::WATER)),
    (Kind::Tubes, None),
    (Kind::Plates, Some(&catalogue::NITROGEN)),
    (Kind::Plates, Some(&catalogue::AIR)),
    (Kind::Plates, Some(&catalogue::ARGON)),
    (Kind::Plates, Some(&catalogue::METHANE)),
    (Kind::Plates, Some(&catalogue::PROPANE)),
    (Kind::Plates, Some(&catalogue::XENON)),
    (Kind::Plates, Some(&catalogue::WATER)),
    (Kind::Plates, None),
    (Kind::Other, Some(&catalogue::AIR)),
    (Kind::Other, Some(&catalogue::OXYGEN)),
    (Kind::Other, Some(&catalogue::KRYPTON)),
    (Kind::Other, None),
    (Kind::Curve, Some(&catalogue::NITROGEN)),
    (Kind::Curve, Some(&catalogue::AIR)),
    (Kind::Curve, Some(&catalogue::HELIUM)),
    (Kind::Curve, Some(&catalogue::WATER)),
];

/// What came out of a section.
pub struct Section<'a> {
    /// The kind of element.
    pub element: &'static str,
    /// The fluid's name.
    pub fluid: &'a str,
    /// How many readings were refused.
    pub refused: u32,
    /// Bits of the volume flow of the last reading that gave one.
    pub last_flow: u32,
    /// Digest of all bits of the section.
    pub digest: u64,
}

/// Runs every section and hands over what came out of each; returns the digest of all.
///
/// # Errors
/// What could not be built; nothing, as long as the library accepts what is written here.
pub fn run(mut report: impl FnMut(&Section<'_>)) -> Result<u64, Error> {
    let mut all = Digest::new();
    let mut seed = Seed::new(0x6576_656e_626f_7265);
    for (kind, entry) in &SECTIONS {
        let fluid = match entry {
            Some(entry) => *entry.fluid(),
            None => oil()?,
        };
        let mut section = Section { element: "", fluid: fluid.name(), refused: 0, last_flow: 0, digest: 0 };
        let mut digest = Digest::new();
        match kind {
            Kind::Tubes => {
                let record = write_and_read(&record()?, &mut digest)?;
                let meter = record.meter()?.with_fluid(&fluid)?;
                section.element = "round-tubes";
                readings(&meter, &mut seed, &mut digest, &mut section);
            }
            Kind::Curve => {
                let mut record = record()?;
                record.arithmetic = Arithmetic::Curve;
                let record = write_and_read(&record, &mut digest)?;
                let meter = record.meter()?.with_fluid(&fluid)?;
                section.element = "round-tubes-by-curve";
                readings(&meter, &mut seed, &mut digest, &mut section);
            }
            Kind::Plates => {
                let meter = Meter::nominal(plates()?, &fluid)?.with_reference(ReferenceConditions::IUPAC_AMBIENT);
                section.element = "parallel-plates";
                readings(&meter, &mut seed, &mut digest, &mut section);
            }
            Kind::Other => {
                let element = Element::other(3e11, 2e7)?.with_hydraulic_size(Length::from_millimetres(0.3), 2e-5)?;
                let meter = Meter::calibrated(element, &fluid, quality())?;
                section.element = "other";
                readings(&meter, &mut seed, &mut digest, &mut section);
            }
        }
        section.digest = digest.0;
        all.long(digest.0);
        report(&section);
    }
    Ok(all.0)
}

/// The element whose record travels: a bundle of steel tubes.
///
/// # Errors
/// None as long as the library accepts the sizes.
pub fn tubes() -> Result<Element, Error> {
    Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?
        .with_expansion(16e-6, Temperature::from_celsius(20.0))
}

fn plates() -> Result<Element, Error> {
    let (gap, width) = (Length::from_millimetres(0.2), Length::from_millimetres(400.0));
    Element::parallel_plates(gap, width, Length::from_millimetres(60.0))?
        .with_expansion(23e-6, Temperature::from_celsius(20.0))
}

/// A calibration with three parts that its points shared.
pub fn quality() -> Quality {
    let mut quality = Quality::nominal(1.0, 1e-5);
    quality.common.clear();
    let parts =
        [(Cause::ReferenceFlow, 2e-3, 1e-9), (Cause::Viscosity, 1.5e-3, 0.0), (Cause::PressureDrop, 5e-4, 2e-9)];
    for (cause, effect_a, effect_b_m) in parts {
        let _ = quality.common.push(CommonPart { cause, effect_a, effect_b_m }); // there is room for six
    }
    Quality { u_a: 4e-4, u_b_m: 3e-8, correlation: -0.6, degrees_of_freedom: 21.0, x_max_m: 40.0, ..quality }
}

/// The record of the bundle, calibrated on nitrogen, its sensors trimmed.
///
/// # Errors
/// None as long as the library accepts the numbers.
pub fn record() -> Result<Record, Error> {
    let mut record = Record::new("EB-0042", 20_261_201, tubes()?, *catalogue::NITROGEN.fluid(), quality())?;
    record.trims.pressure_drop_zero_pa = 0.37;
    record.trims.pressure_drop_gain = 1.0008;
    record.trims.temperature_offset_k = -0.06;
    record.trims.line_pressure_offset_pa = 41.0;
    Ok(record)
}

fn write_and_read(record: &Record, digest: &mut Digest) -> Result<Record, Error> {
    let mut bytes = [0; RECORD_LENGTH];
    record.encode(&mut bytes);
    for byte in bytes {
        digest.byte(byte);
    }
    Record::decode(&bytes)
}

fn oil() -> Result<StoredFluid, Error> {
    let at =
        |celsius, nu| (Temperature::from_celsius(celsius), KinematicViscosity::from_square_millimetres_per_second(nu));
    mineral_oil(&OilData {
        name: "workshop-oil",
        viscosities: [at(40.0, 32.0), at(100.0, 5.4)],
        density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
        expansion_per_kelvin: 7.3e-4,
        u_viscosity: 0.005,
    })
}

/// Every eighth reading is one of these.
#[rustfmt::skip]
static EDGES: [fn(Reading, &StoredFluid) -> Reading; 24] = [
    |r, _| drop(r, 0.0),
    |r, _| drop(r, -0.0),
    |r, _| drop(r, f32::from_bits(1)),
    |r, _| drop(r, -f32::from_bits(0x0040_0000)),
    |r, _| drop(r, f32::MIN_POSITIVE),
    |r, _| drop(r, f32::MAX),
    |r, _| drop(r, f32::NAN),
    |r, _| drop(r, f32::NEG_INFINITY),
    |r, _| drop(r, r.line_pressure.as_pascals()),
    |r, _| drop(r, r.line_pressure.as_pascals() * 0.999_999),
    |r, _| drop(r, -r.line_pressure.as_pascals()),
    |r, _| kelvin(r, f32::INFINITY),
    |r, _| kelvin(r, 0.0),
    |r, f| kelvin(r, f.temperature_range()[0].as_kelvin()),
    |r, f| kelvin(r, f.temperature_range()[1].as_kelvin()),
    |r, f| kelvin(r, f.temperature_range()[1].as_kelvin() + 1.0),
    |r, _| pascals(r, f32::NAN),
    |r, _| pascals(r, -101_325.0),
    |r, f| pascals(r, f.pressure_range()[0].as_pascals()),
    |r, f| pascals(r, f.pressure_range()[1].as_pascals()),
    |r, _| r.with_relative_humidity(RelativeHumidity::from_fraction(0.0)),
    |r, _| r.with_relative_humidity(RelativeHumidity::from_fraction(1.0)),
    |r, _| r.with_relative_humidity(RelativeHumidity::from_fraction(1.5)),
    |r, _| r.with_relative_humidity(RelativeHumidity::from_fraction(f32::NAN)),
];

fn drop(reading: Reading, pa: f32) -> Reading {
    Reading { pressure_drop: PressureDrop::from_pascals(pa), ..reading }
}

fn kelvin(reading: Reading, k: f32) -> Reading {
    Reading { temperature: Temperature::from_kelvin(k), ..reading }
}

fn pascals(reading: Reading, pa: f32) -> Reading {
    Reading { line_pressure: AbsolutePressure::from_pascals(pa), ..reading }
}

fn readings(meter: &Meter<'_>, seed: &mut Seed, digest: &mut Digest, section: &mut Section<'_>) {
    let fluid = meter.fluid();
    for i in 0..READINGS {
        let mut reading = seed.reading(fluid);
        if i % 8 == 7 {
            let edge = EDGES.get((i / 8) as usize % EDGES.len());
            reading = edge.map_or(reading, |edge| edge(reading, fluid));
        }
        match meter.flow(&reading) {
            Ok(flow) => {
                digest.flow(&flow);
                section.last_flow = flow.volume.as_cubic_metres_per_second().to_bits();
                if i % 8 == 0 {
                    digest.inverse(inverse(meter, &reading, flow.mass));
                }
            }
            Err(refusal) => {
                section.refused += 1;
                digest.word(u32::from(refusal.bits()));
            }
        }
    }
}

fn inverse(meter: &Meter<'_>, reading: &Reading, mass: MassFlow) -> Result<PressureDrop, Refusal> {
    meter.conditions(reading.temperature, reading.line_pressure, reading.relative_humidity)?.pressure_drop(mass)
}

/// Seeded numbers: Vigna's SplitMix64.
pub struct Seed(u64);

impl Seed {
    /// Numbers from a seed.
    pub const fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// The next number from 0 to 1, a multiple of 2^-24: exact on every machine.
    pub fn unit(&mut self) -> f32 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let z = (self.0 ^ (self.0 >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        let z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 40) as f32 / 16_777_216.0
    }

    /// The next number from `low` to `high`.
    pub fn between(&mut self, low: f32, high: f32) -> f32 {
        low + (high - low) * self.unit()
    }

    /// A reading over the fluid's table and a little beyond, of both directions, its pressure drop over many decades.
    fn reading(&mut self, fluid: &StoredFluid) -> Reading {
        let [t_low, t_high] = fluid.temperature_range().map(Temperature::as_kelvin);
        let [p_low, p_high] = fluid.pressure_range().map(AbsolutePressure::as_pascals);
        let t = self.between(t_low - 1.0, t_high + 1.0);
        let most = if matches!(fluid.phase(), Phase::Gas) { 4e5 } else { 2e6 };
        let p = p_low + (if p_high < most { p_high } else { most } - p_low) * (self.unit() * 1.01);
        let share = self.unit() * self.unit() * self.unit();
        let sign = if self.unit() < 0.3 { -1.0 } else { 1.0 };
        let reading = Reading::new(
            PressureDrop::from_pascals(sign * p * share),
            Temperature::from_kelvin(t),
            AbsolutePressure::from_pascals(p),
        );
        let humidity = self.unit();
        if fluid.name() == "air" && humidity < 0.5 {
            reading.with_relative_humidity(RelativeHumidity::from_fraction(humidity * 2.0))
        } else {
            reading
        }
    }
}

/// FNV-1a of 64 bits.
struct Digest(u64);

impl Digest {
    fn new() -> Self {
        Self(0xcbf2_9ce4_8422_2325)
    }
    fn byte(&mut self, byte: u8) {
        self.0 = (self.0 ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3);
    }
    fn word(&mut self, word: u32) {
        word.to_le_bytes().into_iter().for_each(|byte| self.byte(byte));
    }
    fn long(&mut self, word: u64) {
        word.to_le_bytes().into_iter().for_each(|byte| self.byte(byte));
    }
    fn number(&mut self, number: f32) {
        self.word(number.to_bits());
    }
    fn flow(&mut self, flow: &Flow) {
        self.number(flow.volume.as_cubic_metres_per_second());
        self.number(flow.mass.as_kilograms_per_second());
        self.number(flow.standard.map_or(-1.0, |standard| standard.as_cubic_metres_per_second()));
        self.number(flow.viscosity.as_pascal_seconds());
        self.number(flow.density.as_kilograms_per_cubic_metre());
        self.number(flow.reynolds);
        self.number(flow.kinetic_share);
        self.word(u32::from(flow.status.bits()));
        let s = &flow.sensitivities;
        for number in [s.pressure_drop, s.temperature, s.line_pressure, s.viscosity, s.relative_humidity, s.x] {
            self.number(number);
        }
        let u = &flow.uncertainty;
        for number in [u.fit, u.common, u.sensors, u.combined()] {
            self.number(number);
        }
    }
    fn inverse(&mut self, drop: Result<PressureDrop, Refusal>) {
        match drop {
            Ok(drop) => self.number(drop.as_pascals()),
            Err(refusal) => self.word(u32::from(refusal.bits())),
        }
    }
}
