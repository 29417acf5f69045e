//! The whole run judged: the fit chosen, the record made, the outcome put together.

use crate::calibrate::certainty::{budget, effect, uncertainty_rows};
use crate::calibrate::findings::{self, Run};
use crate::calibrate::fit::{self, Prior, Solution, UNFIXED_B};
use crate::calibrate::outcome::{Calibration, Finding, GeometryRatio, MeanState, Range, ResidualRow};
use crate::calibrate::samples::{Sample, Setup, Slope, Source};
use crate::input::points::{Point, Points};
use crate::input::problem::Problem;
use crate::input::uncertain::Parts;
use evenbore::calibration::{CommonPart, Quality};
use evenbore::fluid::StoredFluid;
use evenbore::quantity::Temperature;
use evenbore::reading::SensorUncertainty;
use evenbore::reference::ReferenceConditions;
use evenbore::status::Refusal;
use evenbore::{Element, Record};

/// What a calibration is told beside its points.
#[derive(Debug, Clone)]
pub struct Order<'a> {
    /// Serial number of the element.
    pub serial: &'a str,
    /// The element of nominal geometry.
    pub element: Element,
    /// Whether its nominal A and B mean anything.
    pub has_nominal: bool,
    /// The fluid of the run.
    pub fluid: &'a StoredFluid,
    /// Fluids to name when the declared one does not fit.
    pub alternatives: Vec<&'a StoredFluid>,
    /// Lines of points to leave out.
    pub without: Vec<u64>,
    /// Reason for using a refused run.
    pub accept_anyway: Option<String>,
    /// Date as (year, month, day).
    pub date: (i16, i8, i8),
    /// Sensors of the instrument the record is for.
    pub sensors: SensorUncertainty,
    /// Conditions at which the instrument quotes standard flow.
    pub reference: ReferenceConditions,
}

/// A judged run.
#[derive(Debug, Clone)]
pub struct Verdict {
    /// All that was found.
    pub calibration: Calibration,
    /// The record, unless the run is refused.
    pub record: Option<Record>,
}

/// Calibrates an element.
///
/// # Errors
/// Points that cannot be used at all: outside the fluid's table, too few, all at one flow, or without uncertainty
/// where others have one.
pub fn calibrate(points: &Points, order: &Order<'_>) -> Result<Verdict, Problem> {
    let all = samples(points, order)?;
    let used = used(&all, order);
    check_spread(points, &used)?;
    let general = |error: crate::statistics::StatisticsError| Problem::new(&points.file, error.to_string());
    let mean_temperature = Temperature::from_kelvin(mean(&used, |s| s.temperature) as f32);
    let u_viscosity = f64::from(order.fluid.u_viscosity_at(mean_temperature));
    let solution = best_fit(&used, nominal(order), u_viscosity).map_err(general)?;
    let run = Run {
        samples: &used,
        solution: &solution,
        u_viscosity,
        nominal: nominal(order),
        reynolds_per_x: f64::from(order.element.reynolds(1.0)),
    };
    let mut findings = findings::diagnose(&run).map_err(general)?;
    name_other_fluids(&mut findings, points, order);
    findings.iter_mut().for_each(|finding| finding.message.push('.'));
    let refused = findings.iter().any(|finding| finding.refuses);
    let record = record(order, &solution, &used).map_err(|e| Problem::new(&points.file, e.to_string()))?;
    let calibration = outcome(points, order, &run, &all, findings, &record);
    Ok(Verdict { calibration, record: (!refused || order.accept_anyway.is_some()).then_some(record) })
}

/// The samples that are not left out, by x, so that the order of the file changes no digit.
fn used(all: &[Sample], order: &Order<'_>) -> Vec<Sample> {
    let mut used: Vec<Sample> = all.iter().filter(|s| !order.without.contains(&s.line)).cloned().collect();
    let key = |s: &Sample| (s.columns.x, s.columns.y);
    used.sort_by(|p, q| key(p).0.total_cmp(&key(q).0).then(key(p).1.total_cmp(&key(q).1)));
    used
}

fn nominal(order: &Order<'_>) -> Option<[f64; 2]> {
    order.has_nominal.then(|| [order.element.a(), order.element.b()].map(f64::from))
}

/// Points into samples, or the point that cannot be one.
fn samples(points: &Points, order: &Order<'_>) -> Result<Vec<Sample>, Problem> {
    let setup = Setup { element: &order.element, fluid: order.fluid };
    let sample = |point: &Point| {
        if point.pressure_drop == 0.0 {
            let message = "pressure_drop is 0 beside a flow: a point needs a pressure drop";
            return Err(Problem::new(&points.file, message).at_line(point.line));
        }
        let sample = Sample::new(&setup, point).map_err(|refusal| refused(points, point, order.fluid, refusal))?;
        match senseless(&sample) {
            Some(message) => Err(Problem::new(&points.file, message).at_line(point.line)),
            None => Ok(sample),
        }
    };
    points.points.iter().map(sample).collect()
}

/// x = mdot/mu beyond which a point is no flow of any element, m.
const LARGEST_X: f64 = 1e8;

/// Says why the numbers of a point cannot be meant, where they cannot.
fn senseless(sample: &Sample) -> Option<String> {
    let x = sample.columns.x;
    if !(x > 1.0 / LARGEST_X && x < LARGEST_X && sample.columns.y.is_finite()) {
        let (flow, drop) = (sample.mass_flow, sample.pressure_drop);
        return Some(format!("a mass flow of {flow:e} kg/s at a pressure drop of {drop:e} Pa is that of no element"));
    }
    let too_large = |(source, parts, _): &(Source, Parts, Slope)| {
        let u = parts.independent.unwrap_or(0.0).max(parts.common.unwrap_or(0.0));
        let (name, value, unit) = match source {
            Source::PressureDrop => ("pressure drop", sample.pressure_drop.abs(), " Pa"),
            Source::LinePressure => ("line pressure", sample.line_pressure, " Pa"),
            Source::Temperature | Source::ReferenceTemperature => ("temperature", LARGEST_U_TEMPERATURE, " K"),
            Source::ReferenceFlow => ("reference flow", sample.reference_flow.abs(), " in SI"),
            Source::ReferencePressure => ("reference pressure", sample.line_pressure, " Pa"),
            Source::RelativeHumidity => ("relative humidity", 1.0, ""),
        };
        let limit =
            format!("the standard uncertainty of the {name} is {u:e}{unit}, beyond what can be meant, {value:e}");
        (u > value).then_some(limit)
    };
    sample.sources.iter().find_map(too_large)
}

/// Kelvin beyond which a standard uncertainty of temperature is a slip.
const LARGEST_U_TEMPERATURE: f64 = 30.0;

/// Why the fluid cannot serve a point, with values and limits.
fn refused(points: &Points, point: &Point, fluid: &StoredFluid, refusal: Refusal) -> Problem {
    if let (Some(humidity), Refusal::HUMIDITY_INVALID) = (point.relative_humidity, refusal) {
        let message = format!(
            "{refusal}: a relative humidity of {:.1} pct beside {}; it belongs to air and lies within 0 to 100 pct, so \
             leave the cell empty for other fluids",
            100.0 * humidity,
            fluid.name()
        );
        return Problem::new(&points.file, message).at_line(point.line);
    }
    let [t_low, t_high] = fluid.temperature_range().map(Temperature::as_celsius);
    let [p_low, p_high] = fluid.pressure_range().map(|p| p.as_kilopascals());
    let message = format!(
        "{refusal}: temperature {:.2} C, line pressure {:.3} kPa, pressure drop {:.1} Pa; {} is stored for \
         {t_low:.2} to {t_high:.2} C and {p_low} to {p_high} kPa",
        point.temperature - 273.15,
        point.line_pressure / 1e3,
        point.pressure_drop,
        fluid.name(),
    );
    Problem::new(&points.file, message).at_line(point.line)
}

/// Span of x below which a run is at one flow.
const LEAST_SPAN: f64 = 1.2;

fn check_spread(points: &Points, used: &[Sample]) -> Result<(), Problem> {
    let problem = |message: String| Err(Problem::new(&points.file, message));
    if used.len() < 3 {
        let n = used.len();
        let are = if n == 1 { "point is" } else { "points are" };
        return problem(format!("{n} {are} used: at least 3 are needed to fit, 8 or more to judge a run"));
    }
    let (low, high) = span(used);
    if high < LEAST_SPAN * low {
        return problem(format!(
            "all points lie at one flow (largest {:.3} times the smallest): a calibration needs a span of at least \
             {LEAST_SPAN}, better 10",
            high / low
        ));
    }
    if let Some(line) = fit::unstated_line(used) {
        let message = "no independent uncertainty is stated for this point although other points state theirs; an \
                       uncertainty of 0 is none";
        return Err(Problem::new(&points.file, message).at_line(line));
    }
    Ok(())
}

fn span(samples: &[Sample]) -> (f64, f64) {
    let x = samples.iter().map(|s| s.columns.x);
    x.fold((f64::INFINITY, 0.0), |(low, high), x| (low.min(x), high.max(x)))
}

/// The fit, with B held by geometry (or at zero, where there is none) when the data do not fix it.
///
/// `nominal`: A and B of the drawing; `u_viscosity`: relative, common to all points.
///
/// # Errors
/// Points that cannot fix the coefficients.
pub fn best_fit(used: &[Sample], nominal: Option<[f64; 2]>, u_viscosity: f64) -> crate::statistics::Result<Solution> {
    let free = fit::fit(used, u_viscosity, None)?;
    let [_, u_b] = free.covariance.standard_uncertainties();
    let prior = match nominal {
        Some([_, b]) if free.b <= 0.0 || u_b > UNFIXED_B * b => Prior { value: b, u: fit::PRIOR_B * b },
        None if free.b < 0.0 => Prior { value: 0.0, u: 0.01 * free.b.abs() },
        _ => return Ok(free.widened_by_scatter()),
    };
    Ok(fit::fit(used, u_viscosity, Some(prior))?.widened_by_scatter())
}

/// Names the fluids of the same phase with which A and B would agree with the drawing.
fn name_other_fluids(findings: &mut [Finding], points: &Points, order: &Order<'_>) {
    let Some(finding) = findings.iter_mut().find(|finding| finding.kind == "fluid-mismatch") else { return };
    let others = order.alternatives.iter().filter(|fluid| fluid.name() != order.fluid.name());
    let mut names: Vec<(f64, &str)> =
        others.filter_map(|fluid| Some((distance_from_drawing(points, order, fluid)?, fluid.name()))).collect();
    names.sort_by(|p, q| p.0.total_cmp(&q.0));
    if !names.is_empty() {
        let names: Vec<&str> = names.into_iter().map(|(_, name)| name).take(MOST_NAMES).collect();
        finding.message += &format!("; fluids that would agree with it, the nearest first: {}", names.join(", "));
    }
}

/// How far A is from the drawing were the run made on `fluid`; nothing where A or B is beyond the limits.
fn distance_from_drawing(points: &Points, order: &Order<'_>, fluid: &StoredFluid) -> Option<f64> {
    let [a0, b0] = nominal(order)?;
    let setup = Setup { element: &order.element, fluid };
    let samples: Result<Vec<Sample>, Refusal> = points.points.iter().map(|p| Sample::new(&setup, p)).collect();
    let fitted = fit::fit(&used(&samples.ok()?, order), 0.0, None).ok()?;
    let [limit_a, limit_b] = findings::GEOMETRY_LIMITS;
    let [_, u_b] = fitted.total().standard_uncertainties();
    let (off_a, off_b) = ((fitted.a / a0 - 1.0).abs(), (fitted.b / b0 - 1.0).abs());
    (off_a < limit_a && off_b < limit_b + 2.0 * u_b / b0).then_some(off_a)
}

/// Fluids named at most when the declared one does not fit.
const MOST_NAMES: usize = 3;

/// What a fit says of the element beyond A and B.
pub fn quality(solution: &Solution, used: &[Sample]) -> Quality {
    let (x_min, x_max) = span(used);
    let [u_a, u_b] = solution.covariance.standard_uncertainties();
    let dof = solution.type_a_degrees_of_freedom();
    let part = |shift: &fit::CommonShift| CommonPart {
        cause: shift.cause,
        effect_a: (shift.shift[0] / solution.a) as f32,
        effect_b_m: (shift.shift[1] / solution.a) as f32,
    };
    Quality {
        u_a: (u_a / solution.a) as f32,
        u_b_m: (u_b / solution.a) as f32,
        correlation: solution.covariance.correlation() as f32,
        degrees_of_freedom: if dof.is_finite() { dof as f32 } else { 0.0 },
        common: solution.common.iter().map(part).collect(),
        x_min_m: x_min as f32,
        x_max_m: x_max as f32,
        temperature_k: Temperature::from_kelvin(mean(used, |s| s.temperature) as f32),
    }
}

/// The record of a fit.
fn record(order: &Order<'_>, solution: &Solution, used: &[Sample]) -> Result<Record, evenbore::error::Error> {
    let quality = quality(solution, used);
    let element = order.element.with_coefficients(solution.a as f32, solution.b.max(0.0) as f32)?;
    let (year, month, day) = order.date;
    let date = year as u32 * 10_000 + month as u32 * 100 + day as u32;
    let mut record = Record::new(order.serial, date, element, *order.fluid, quality)?;
    record.sensors = order.sensors;
    record.reference = order.reference;
    record.check()?;
    Ok(record)
}

/// Mean over the used points.
fn mean(used: &[Sample], of: impl Fn(&Sample) -> f64) -> f64 {
    used.iter().map(of).sum::<f64>() / used.len() as f64
}

/// The state at which uncertainties are stated.
fn mean_state(used: &[Sample]) -> MeanState {
    let humid: Vec<f64> = used.iter().filter_map(|s| s.relative_humidity).collect();
    MeanState {
        temperature: mean(used, |s| s.temperature),
        line_pressure: mean(used, |s| s.line_pressure),
        relative_humidity: (!humid.is_empty()).then(|| humid.iter().sum::<f64>() / humid.len() as f64),
    }
}

/// Puts together all that was found.
fn outcome(
    points: &Points,
    order: &Order<'_>,
    run: &Run<'_>,
    all: &[Sample],
    findings: Vec<Finding>,
    record: &Record,
) -> Calibration {
    let solution = run.solution;
    let total = solution.total();
    let ([u_a, u_b], [u_a_fit, u_b_fit]) =
        (total.standard_uncertainties(), solution.covariance.standard_uncertainties());
    let accepted = !findings.iter().any(|finding| finding.refuses);
    let (x_min, x_max) = span(run.samples);
    let per_x = run.reynolds_per_x;
    let largest_drop = run.samples.iter().map(|s| s.pressure_drop.abs()).fold(0.0, f64::max);
    let (year, month, day) = order.date;
    let state = mean_state(run.samples);
    let dof = solution.type_a_degrees_of_freedom();
    Calibration {
        serial: order.serial.into(),
        fluid: order.fluid.name().into(),
        points_file: points.file.clone(),
        date: format!("{year:04}-{month:02}-{day:02}"),
        points: points.points.len(),
        points_used: run.samples.len(),
        a: solution.a,
        b: solution.b,
        u_a,
        u_b,
        correlation_ab: total.correlation(),
        u_a_fit,
        u_b_fit,
        correlation_ab_fit: solution.covariance.correlation(),
        common: solution.common.iter().chain(&solution.zero).map(effect).collect(),
        b_from_prior: solution.prior.is_some(),
        chi_squared: solution.chi_squared,
        degrees_of_freedom: solution.degrees_of_freedom as f64,
        p_value: solution.p_value(),
        uncertainty_basis: match solution.basis {
            fit::Basis::Stated => "stated".into(),
            fit::Basis::Residuals => "residuals".into(),
        },
        accepted,
        accepted_anyway: if accepted { None } else { order.accept_anyway.clone() },
        findings,
        geometry: GeometryRatio {
            a_ratio: run.nominal.map(|[a, _]| solution.a / a),
            b_ratio: run.nominal.map(|[_, b]| solution.b / b),
        },
        range: Range {
            x_min,
            x_max,
            reynolds_max: (per_x > 0.0).then_some(x_max * per_x),
            pressure_drop_max: largest_drop,
        },
        state,
        uncertainty: uncertainty_rows(record, &state, largest_drop, dof),
        residuals: residuals(points, order, run, all),
        budget: budget(record, &state, largest_drop, &solution.common, dof),
    }
}

/// A row per point; those left out are judged as if they came afterwards.
fn residuals(points: &Points, order: &Order<'_>, run: &Run<'_>, all: &[Sample]) -> Vec<ResidualRow> {
    let setup = Setup { element: &order.element, fluid: order.fluid };
    let solution = run.solution;
    let row = |(point, sample): (&Point, &Sample)| {
        let c = &sample.columns;
        let used = run.samples.iter().position(|s| s.line == sample.line);
        let off = c.y - solution.a * c.u - solution.b * c.v;
        let sigma = used.map_or_else(|| fit::sigma_of(sample, solution), |i| solution.sigmas[i]);
        let inlet = setup.conditions(point).map_or(f64::NAN, |conditions| conditions.line_density());
        // A flow error shows in Y through A u + 2 B v, see samples.rs.
        let per_flow = solution.a * c.u + 2.0 * solution.b * c.v;
        ResidualRow {
            line: sample.line,
            pressure_drop: point.pressure_drop,
            temperature: point.temperature,
            line_pressure: point.line_pressure,
            reference_flow: sample.mass_flow / inlet,
            reynolds: (run.reynolds_per_x > 0.0).then_some(c.x * run.reynolds_per_x),
            x: c.x,
            y: c.y / c.u,
            u_y: sigma / c.u,
            y_fit: solution.a + solution.b * c.v / c.u,
            residual_rel: off / per_flow,
            residual_u: off / sigma,
            leave_one_out: used.map_or(off / sigma, |i| {
                Some(solution.leave_one_out[i]).filter(|z| z.is_finite()).unwrap_or(solution.standardised[i])
            }),
            used: used.is_some(),
        }
    };
    points.points.iter().zip(all).map(row).collect()
}
