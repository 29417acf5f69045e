//! One candidate element: its sizes, and what the law and the instrument say of it.

use crate::input::element_file::{ElementFile, Shape};
use crate::planning::state::State;
use crate::planning::stock::{BUNDLE_FILL, EXPANSION_PER_K, OUTER_OVER_BORE, PLATE_MM, REFERENCE_TEMPERATURE_C};
use crate::planning::task::Task;
use crate::resources::elements::nominal;
use evenbore::calibration::{Cause, CommonPart, Quality};
use evenbore::quantity::Temperature;
use evenbore::regime::{EXPANSION_LIMIT, LAMINAR_LIMIT, SLIP_LIMIT};
use evenbore::{Element, Meter};
use serde::Serialize;

/// Shares of full-scale flow at which the uncertainty is stated.
pub const SHARES: [f64; 4] = [1.0, 0.3, 0.1, 0.03];
/// L/D below which the law is not checked.
pub const LEAST_SLENDERNESS: f64 = 50.0;
/// Kinetic share of the loss at full scale above which the element is no longer mainly viscous (common practice).
pub const MOST_KINETIC: f64 = 0.30;

/// Why a candidate is not proposed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Reject {
    /// One channel passes more than twice the flow, or no length within the limits serves.
    Length,
    /// More channels than wanted.
    TooMany,
    /// L/D below 50.
    Short,
    /// Re above 1800 at full scale, somewhere in the temperature range.
    NotLaminar,
    /// Kinetic loss above 30 % of the whole.
    Kinetic,
    /// ln(p1/p2) above 0.7.
    Expansion,
    /// Slip above its limit.
    Slip,
    /// The fluid's table does not reach the pressures, or no pressure drives the flow.
    Fluid,
}

impl Reject {
    /// The reason in words.
    pub const fn words(self) -> &'static str {
        match self {
            Self::Length => "no length of 15 to 400 mm gives the flow at the pressure drop",
            Self::TooMany => "more channels than --most-channels",
            Self::Short => "L/D below 50, where the entrance is not checked",
            Self::NotLaminar => "not laminar: Re above 1800 at full scale",
            Self::Kinetic => "kinetic loss above 30 % at full scale",
            Self::Expansion => "ln(p1/p2) above 0.7",
            Self::Slip => "slip above 6 %",
            Self::Fluid => "pressures outside the fluid's table",
        }
    }
}

/// Uncertainty at a share of full scale.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct At {
    /// Share of full-scale flow.
    pub share: f64,
    /// Pressure drop there, Pa.
    #[serde(rename = "pressure_drop_Pa")]
    pub pressure_drop: f64,
    /// Expanded relative uncertainty (k = 2), the worst of the temperature range.
    pub expanded_rel: f64,
}

/// A candidate that the law accepts.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Design {
    /// `round-tubes` or `parallel-plates`.
    pub shape: &'static str,
    /// Tubes or slots in parallel.
    pub count: u32,
    /// Bore, mm; of tubes.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub bore_mm: Option<f64>,
    /// Full gap, mm; of plates.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub gap_mm: Option<f64>,
    /// Width of all slots together, mm; of plates.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub width_mm: Option<f64>,
    /// Length, mm.
    pub length_mm: f64,
    /// Largest pressure drop at full-scale flow over the temperature range, Pa.
    #[serde(rename = "pressure_drop_Pa")]
    pub pressure_drop: f64,
    /// Largest Reynolds number at full scale.
    pub reynolds: f64,
    /// Share of the laminar limit that is left.
    pub reynolds_margin: f64,
    /// Kinetic share of the loss at full scale.
    pub kinetic_share: f64,
    /// Length over hydraulic diameter.
    pub length_over_diameter: f64,
    /// Share of the flow that slip makes, at full scale.
    pub slip_share: f64,
    /// ln(p1/p2) at full scale.
    pub log_pressure_ratio: f64,
    /// Relative error of the flow reading per kelvin that the element is warmer, when temperature is not compensated; at
    /// full scale.
    #[serde(rename = "uncompensated_per_K")]
    pub per_kelvin: f64,
    /// Expected uncertainty over the range.
    pub uncertainty: Vec<At>,
    /// Open area, mm2.
    pub open_area_mm2: f64,
    /// Outer size about the channels, mm: diameter and length of a bundle, or width, height and length of a stack.
    pub envelope_mm: Vec<f64>,
    /// The element file of this design.
    #[serde(skip)]
    pub file: ElementFile,
}

/// Element file of a shape.
pub fn element_file(shape: Shape, count: u32, length_mm: f64) -> ElementFile {
    ElementFile {
        serial: "DESIGN".into(),
        shape,
        count,
        length_mm,
        expansion_per_k: EXPANSION_PER_K,
        reference_temperature_c: REFERENCE_TEMPERATURE_C,
    }
}

/// Full scale at one temperature.
struct FullScale {
    state: State,
    drop: f64,
    reynolds: f64,
    kinetic: f64,
    slip: f64,
    log_ratio: f64,
}

fn full_scale(task: &Task<'_>, element: &Element, temperature: f64) -> Option<FullScale> {
    let state = State::dry(temperature, task.line_pressure);
    let law = state.law(element, task.fluid).ok()?;
    let drop = law.pressure_drop(task.flow * law.line_density()).ok()?;
    let flow = law.flow(drop).ok()?;
    Some(FullScale {
        state,
        drop,
        reynolds: f64::from(element.reynolds(flow.x as f32)),
        kinetic: flow.kinetic_share / (1.0 + flow.kinetic_share),
        slip: flow.slip / (1.0 + flow.slip),
        log_ratio: flow.log_ratio,
    })
}

/// Judges a candidate.
///
/// # Errors
/// Why it is not proposed.
pub fn judge(task: &Task<'_>, file: ElementFile) -> Result<Design, Reject> {
    let element = nominal(&file).map_err(|_| Reject::Length)?;
    if file.count > task.most_channels {
        return Err(Reject::TooMany);
    }
    let ends: Option<Vec<FullScale>> = task.temperatures().iter().map(|&t| full_scale(task, &element, t)).collect();
    let ends = ends.ok_or(Reject::Fluid)?;
    let most = |of: fn(&FullScale) -> f64| ends.iter().map(of).fold(0.0, f64::max);
    let slender = f64::from(element.length().as_metres() / element.hydraulic_diameter().as_metres());
    check(slender, [most(|e| e.reynolds), most(|e| e.kinetic), most(|e| e.log_ratio), most(|e| e.slip)])?;
    let uncertainty = SHARES.iter().map(|&share| at(task, &element, &ends, share)).collect::<Option<Vec<At>>>();
    Ok(Design {
        reynolds: most(|e| e.reynolds),
        reynolds_margin: 1.0 - most(|e| e.reynolds) / f64::from(LAMINAR_LIMIT),
        kinetic_share: most(|e| e.kinetic),
        length_over_diameter: slender,
        slip_share: most(|e| e.slip),
        log_pressure_ratio: most(|e| e.log_ratio),
        pressure_drop: most(|e| e.drop),
        per_kelvin: per_kelvin(task, &element, &ends).ok_or(Reject::Fluid)?,
        uncertainty: uncertainty.ok_or(Reject::Fluid)?,
        open_area_mm2: f64::from(element.open_area()) * 1e6,
        ..drawn(file)
    })
}

fn check(slender: f64, [reynolds, kinetic, log_ratio, slip]: [f64; 4]) -> Result<(), Reject> {
    if reynolds > f64::from(LAMINAR_LIMIT) {
        return Err(Reject::NotLaminar);
    }
    if slender < LEAST_SLENDERNESS {
        return Err(Reject::Short);
    }
    if kinetic > MOST_KINETIC {
        return Err(Reject::Kinetic);
    }
    if log_ratio > f64::from(EXPANSION_LIMIT) {
        return Err(Reject::Expansion);
    }
    if slip > f64::from(SLIP_LIMIT) { Err(Reject::Slip) } else { Ok(()) }
}

/// The sizes of a design and its envelope; all else is zero.
fn drawn(file: ElementFile) -> Design {
    let count = f64::from(file.count);
    let (shape, bore_mm, gap_mm, width_mm, envelope_mm) = match file.shape {
        Shape::RoundTubes { bore_mm } => {
            let fill = if file.count == 1 { 1.0 } else { BUNDLE_FILL };
            let diameter = OUTER_OVER_BORE * bore_mm * (count / fill).sqrt();
            ("round-tubes", Some(bore_mm), None, None, vec![diameter, file.length_mm])
        }
        Shape::ParallelPlates { gap_mm, width_mm } => {
            let height = count * (gap_mm + PLATE_MM) + PLATE_MM;
            let envelope = vec![width_mm / count + 2.0 * PLATE_MM, height, file.length_mm];
            ("parallel-plates", None, Some(gap_mm), Some(width_mm), envelope)
        }
        Shape::Other { .. } => ("other", None, None, None, Vec::new()),
    };
    Design {
        shape,
        count: file.count,
        bore_mm,
        gap_mm,
        width_mm,
        length_mm: file.length_mm,
        pressure_drop: 0.0,
        reynolds: 0.0,
        reynolds_margin: 0.0,
        kinetic_share: 0.0,
        length_over_diameter: 0.0,
        slip_share: 0.0,
        log_pressure_ratio: 0.0,
        per_kelvin: 0.0,
        uncertainty: Vec::new(),
        open_area_mm2: 0.0,
        envelope_mm,
        file,
    }
}

/// The meter that this element would be after a calibration of the stated quality in the middle of the range.
///
/// A relative error of the reference flow moves A by as much and B by twice as much; both parts of the stated quality
/// are of that kind, so each stands at every flow.
pub fn meter<'a>(task: &Task<'a>, element: &Element, x_max: f64) -> Option<Meter<'a>> {
    let (a, b) = (f64::from(element.a()), f64::from(element.b()));
    let shift = |u: f64| [u as f32, (2.0 * u * b / a) as f32];
    let ([u_a, u_b_m], [effect_a, effect_b_m]) = (shift(task.u_fit), shift(task.u_common));
    let [low, high] = task.range;
    let quality = Quality {
        u_a,
        u_b_m,
        correlation: 1.0,
        degrees_of_freedom: 0.0,
        common: [CommonPart { cause: Cause::ReferenceFlow, effect_a, effect_b_m }].into_iter().collect(),
        x_min_m: 0.0,
        x_max_m: x_max as f32,
        temperature_k: Temperature::from_kelvin((0.5 * (low + high)) as f32),
    };
    Meter::calibrated(*element, task.fluid, quality).ok()?.with_sensor_uncertainty(task.sensors).ok()
}

/// The worst uncertainty over the temperature range at a share of full-scale flow.
fn at(task: &Task<'_>, element: &Element, ends: &[FullScale], share: f64) -> Option<At> {
    let one = |end: &FullScale| {
        let law = end.state.law(element, task.fluid).ok()?;
        let drop = law.pressure_drop(share * task.flow * law.line_density()).ok()?;
        let meter = meter(task, element, law.flow(end.drop).ok()?.x)?;
        let flow = meter.flow(&end.state.reading(drop)).ok()?;
        Some(At { share, pressure_drop: drop, expanded_rel: 2.0 * f64::from(flow.uncertainty.combined()) })
    };
    let all = ends.iter().map(one).collect::<Option<Vec<At>>>()?;
    all.into_iter().max_by(|p, q| p.expanded_rel.total_cmp(&q.expanded_rel))
}

/// The largest change per kelvin over the temperature range, with its sign.
fn per_kelvin(task: &Task<'_>, element: &Element, ends: &[FullScale]) -> Option<f64> {
    let one = |end: &FullScale| {
        let flow = meter(task, element, 1.0)?.flow(&end.state.reading(end.drop)).ok()?;
        // What the computed flow would have fallen by is what the uncompensated one reads too high.
        Some(-f64::from(flow.sensitivities.temperature))
    };
    let all = ends.iter().map(one).collect::<Option<Vec<f64>>>()?;
    all.into_iter().max_by(|p, q| p.abs().total_cmp(&q.abs()))
}
