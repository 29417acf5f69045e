//! An element as drawn, for the calibration, and as made, for the truth.

use crate::calibrate::verdict::{Order, Verdict, calibrate};
use crate::input::points::{Point, Points, Reference};
use crate::input::problem::Problem;
use crate::input::readings::RowUncertainty;
use crate::input::uncertain::Parts;
use crate::virtual_element::{Refused, Section, Substance, Upstream, VirtualElement};
use evenbore::Element;
use evenbore::fluid::StoredFluid;
use evenbore::quantity::{Length, Temperature};
use evenbore::reading::SensorUncertainty;
use evenbore::reference::ReferenceConditions;

/// Linear thermal expansion of stainless steel, 1/K, and the temperature of the drawing, K.
const EXPANSION: (f32, f64) = (16e-6, 293.15);
/// What the workshop delivered: bores that much larger, relative. They are all alike: each class of a spread costs a
/// solution, and 2 % of spread move a calibrated flow by less than 0.002 % (virtual element).
const DELIVERED: f64 = 1.006;

/// No uncertainty of sensors: what is judged is the calibration alone.
pub const EXACT_SENSORS: SensorUncertainty = SensorUncertainty {
    pressure_drop_pa: 0.0,
    pressure_drop_rel: 0.0,
    temperature_k: 0.0,
    line_pressure_pa: 0.0,
    line_pressure_rel: 0.0,
    relative_humidity: 0.0,
};

/// A drawn element and what was made of it.
#[derive(Debug, Clone)]
pub struct Rig {
    /// Name in a table.
    pub name: &'static str,
    /// As drawn.
    pub drawn: Element,
    /// As made.
    pub truth: VirtualElement,
    /// Pressure drop of full scale, Pa.
    pub full_scale: f64,
}

impl Rig {
    /// `count` tubes of a bore and a length in millimetres, as drawn; the made ones are a little wider.
    pub fn tubes(name: &'static str, count: u32, [bore, length]: [f64; 2], full_scale: f64) -> Self {
        let drawn =
            Element::round_tubes(count, Length::from_millimetres(bore as f32), Length::from_millimetres(length as f32));
        let made = Section::RoundTube { bore: bore * 1e-3 * DELIVERED };
        Self::new(name, drawn, (made, count, length), full_scale)
    }

    /// A slot of gap, width and length in millimetres.
    pub fn plates(name: &'static str, [gap, width, length]: [f64; 3], full_scale: f64) -> Self {
        let [g, w, l] = [gap, width, length].map(|mm| Length::from_millimetres(mm as f32));
        let made = Section::ParallelPlates { gap: gap * 1e-3 * DELIVERED, width: width * 1e-3 };
        Self::new(name, Element::parallel_plates(g, w, l), (made, 1, length), full_scale)
    }

    fn new(
        name: &'static str,
        drawn: Result<Element, evenbore::error::Error>,
        (made, count, length): (Section, u32, f64),
        full_scale: f64,
    ) -> Self {
        let reference = Temperature::from_kelvin(EXPANSION.1 as f32);
        let drawn = drawn.and_then(|element| element.with_expansion(EXPANSION.0, reference)).expect("sizes in range");
        let truth = VirtualElement::new(made, count, length * 1e-3)
            .and_then(|element| element.with_expansion(f64::from(EXPANSION.0), EXPANSION.1))
            .expect("sizes in range");
        Self { name, drawn, truth, full_scale }
    }

    /// The true mass flow (kg/s) and volume flow at the line (m3/s) of a pressure drop.
    ///
    /// # Errors
    /// The case is impossible.
    pub fn flow(&self, fluid: &StoredFluid, [t, p]: [f64; 2], drop: f64) -> Result<[f64; 2], Refused> {
        let outcome = self.truth.flow(&Substance::new(fluid), &Upstream::at(p, t), drop)?;
        Ok([outcome.mass_flow, outcome.volume_flow])
    }

    /// The run calibrated, its record made whatever the verdict.
    ///
    /// # Errors
    /// The run cannot be used at all.
    pub fn calibrated(&self, fluid: &StoredFluid, points: Vec<Point>, without: &[u64]) -> Result<Verdict, Problem> {
        let run = Points { file: "run".into(), fluid: None, extra_headers: Vec::new(), points };
        calibrate(
            &run,
            &Order {
                serial: "PROOF",
                element: self.drawn,
                has_nominal: true,
                fluid,
                alternatives: Vec::new(),
                without: without.to_vec(),
                accept_anyway: Some("proof".into()),
                date: (2026, 12, 1),
                sensors: EXACT_SENSORS,
                reference: ReferenceConditions::DIN_1343,
            },
        )
    }
}

/// A point without stated uncertainties.
pub fn point(line: u64, drop: f64, [t, p]: [f64; 2], mass_flow: f64) -> Point {
    Point {
        line,
        pressure_drop: drop,
        temperature: t,
        line_pressure: p,
        relative_humidity: None,
        reference: Reference::Mass(mass_flow),
        u: RowUncertainty::default(),
        u_reference: Parts::default(),
        extra: Vec::new(),
    }
}

/// `n` shares of full scale from `lowest` to 1, evenly spaced in their logarithm.
pub fn shares(n: usize, lowest: f64) -> Vec<f64> {
    (0..n).map(|i| lowest.powf(1.0 - i as f64 / (n - 1) as f64)).collect()
}
