//! The parts of a record's bytes: how each is written, and how it is read back.

use crate::calibration::{Cause, CommonPart, MOST_COMMON_PARTS, Quality};
use crate::element::geometry::ShapeConstants;
use crate::element::{Element, Shape};
use crate::error::Error;
use crate::fluid::stored::{Curve, Name};
use crate::fluid::{Phase, StoredFluid};
use crate::quantity::{AbsolutePressure, Temperature};
use crate::reading::{SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use heapless::{String, Vec};

/// Bytes of an encoded record.
pub const RECORD_LENGTH: usize = 1044;

/// Trims, sensors and reference conditions in the order of the layout.
pub(super) fn numbers_of(t: &Trims, s: &SensorUncertainty, r: &ReferenceConditions) -> [f32; 12] {
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

/// Puts parts one after another.
pub(super) struct Writer<'a> {
    pub bytes: &'a mut [u8; RECORD_LENGTH],
    pub at: usize,
}

impl Writer<'_> {
    pub fn put(&mut self, part: &[u8]) {
        let end = self.at + part.len();
        if let Some(place) = self.bytes.get_mut(self.at..end) {
            place.copy_from_slice(part);
        }
        self.at = end;
    }
    pub fn written(&self) -> &[u8] {
        self.bytes.get(..self.at).unwrap_or(&[])
    }
    pub fn text<const N: usize>(&mut self, text: &str) {
        let mut place = [0; N];
        for (to, from) in place.iter_mut().zip(text.bytes()) {
            *to = from;
        }
        self.put(&place);
    }
    pub fn numbers(&mut self, numbers: &[f32]) {
        for number in numbers {
            self.put(&number.to_le_bytes());
        }
    }
    pub fn quality(&mut self, q: &Quality) {
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
    pub fn element(&mut self, e: &Element) {
        let c = &e.constants;
        self.numbers(&[e.a, e.b, e.open_area, e.hydraulic_diameter, e.length, e.expansion, e.reference_temperature]);
        self.numbers(&[c.friction_reynolds, c.kinetic_loss, c.kinetic_energy_factor, c.thermal_factor]);
        self.numbers(&c.entrance);
    }
    pub fn fluid(&mut self, f: &StoredFluid) {
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

/// Takes parts one after another.
pub(super) struct Reader<'a> {
    pub bytes: &'a [u8],
    pub at: usize,
}

impl Reader<'_> {
    pub fn take<const N: usize>(&mut self) -> Option<[u8; N]> {
        let part = self.bytes.get(self.at..)?.first_chunk::<N>()?;
        self.at += N;
        Some(*part)
    }
    /// The next bytes; the length of the whole was checked, so they are there.
    pub fn bytes<const N: usize>(&mut self) -> [u8; N] {
        self.take().unwrap_or([0; N])
    }
    #[inline(never)] // most of a record is numbers
    pub fn fill(&mut self, numbers: &mut [f32]) {
        for number in numbers {
            *number = f32::from_le_bytes(self.bytes());
        }
    }
    pub fn numbers<const N: usize>(&mut self) -> [f32; N] {
        let mut numbers = [0.0; N];
        self.fill(&mut numbers);
        numbers
    }
    pub fn text<const N: usize>(&mut self, field: &'static str) -> Result<String<N>, Error> {
        let mut text = String::new();
        for code in self.bytes::<N>().into_iter().take_while(|&code| code != 0) {
            text.push(char::from(code)).map_err(|_| Error::BadText { field, most: N })?;
        }
        Ok(text)
    }
    pub fn settings(&mut self) -> (Trims, SensorUncertainty, ReferenceConditions) {
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
    pub fn quality(&mut self) -> Result<Quality, Error> {
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
    pub fn element(&mut self, shape: Shape) -> Element {
        let [a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature] = self.numbers();
        let [friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor] = self.numbers();
        let entrance = self.numbers();
        let constants =
            ShapeConstants { friction_reynolds, kinetic_loss, kinetic_energy_factor, thermal_factor, entrance };
        Element { shape, constants, a, b, open_area, hydraulic_diameter, length, expansion, reference_temperature }
    }
    pub fn fluid(&mut self, phase: Phase) -> StoredFluid {
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
pub(super) fn choice<T: Copy>(field: &'static str, choices: &[T], code: u8) -> Result<T, Error> {
    choices.get(usize::from(code)).copied().ok_or(Error::UnknownCode { field, code })
}
