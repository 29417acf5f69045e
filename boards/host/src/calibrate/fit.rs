//! A and B from the samples: effective variance, prior from geometry, parts common to all points.
//!
//! Weights `1/sigma_i^2` with `sigma_i^2 = sum_k (dr_i/dk)^2 u_k^2` over the independent parts of all sources k
//! (effective variance, Clutton-Brock 1967), reweighted three times. A common zero of the pressure drop enters the
//! covariance of the residuals, since it is not in the column space; every other common part is carried through the
//! fit as a rank-1 term, since it is (MODEL: it would be averaged away inside the weights).

use crate::calibrate::samples::{Sample, Source};
use crate::statistics::distributions::chi_squared_upper;
use crate::statistics::least_squares::Fit;
use crate::statistics::rank_one::{PairCovariance, SharedError};
use crate::statistics::{Result, StatisticsError};
use evenbore::calibration::Cause;

/// Rounds of reweighting.
const ROUNDS: usize = 4;

/// Probability of a chi-squared below which the scatter of the points counts instead of what is stated.
pub const WIDENING_PROBABILITY: f64 = 0.05;
/// Standard uncertainty, over nominal B, above which the data are held not to fix B.
pub const UNFIXED_B: f64 = 0.20;
/// Relative standard uncertainty of B from geometry.
pub const PRIOR_B: f64 = 0.10;

/// Whether the scale of the errors was stated or is taken from the scatter.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Basis {
    /// The points state independent uncertainties.
    Stated,
    /// They state none: points weigh alike in relative terms, and the residuals tell their size.
    Residuals,
}

/// Pseudo-observation of B.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Prior {
    /// 1/m4.
    pub value: f64,
    /// Standard uncertainty, 1/m4.
    pub u: f64,
}

/// What one standard uncertainty of a common cause does to the coefficients.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CommonShift {
    /// The cause.
    pub cause: Cause,
    /// Largest standard uncertainty among the points: relative, kelvin for temperature.
    pub u: f64,
    /// Change of A and B.
    pub shift: [f64; 2],
}

/// A and B of a run.
#[derive(Debug, Clone)]
pub struct Solution {
    /// 1/m3.
    pub a: f64,
    /// 1/m4.
    pub b: f64,
    /// Covariance of the fit alone, at the weights of the scatter when that is the basis.
    pub covariance: PairCovariance,
    /// Parts common to all points, the zero of the pressure drop excepted (it is in `covariance`).
    pub common: Vec<CommonShift>,
    /// What one standard uncertainty of the common zero does; it is in `covariance` already.
    pub zero: Option<CommonShift>,
    /// Effective standard uncertainty of Y per point, 1/m3 (1/m3 of scatter when residuals are the basis).
    pub sigmas: Vec<f64>,
    /// Weighted sum of squared residuals, and its degrees of freedom.
    pub chi_squared: f64,
    /// Points, prior included, less two.
    pub degrees_of_freedom: usize,
    /// Residual Y - A u - B v over sigma.
    pub standardised: Vec<f64>,
    /// Leave-one-out residual over its standard uncertainty; NaN where the point alone fixes a coefficient.
    pub leave_one_out: Vec<f64>,
    /// Basis of the uncertainties.
    pub basis: Basis,
    /// Relative standard uncertainty of every Y when the residuals are the basis.
    pub scatter: f64,
    /// The prior used, if any.
    pub prior: Option<Prior>,
    /// Factor by which the covariance was widened because the points scatter more than is stated; 1 if it was not.
    pub widening: f64,
}

impl Solution {
    /// Effective degrees of freedom of the fit's uncertainty: infinite when it was stated beforehand.
    pub fn type_a_degrees_of_freedom(&self) -> f64 {
        if self.basis == Basis::Stated && self.widening == 1.0 { f64::INFINITY } else { self.degrees_of_freedom as f64 }
    }

    /// The same solution with its covariance multiplied by chi-squared per degree of freedom (Birge 1932) where a
    /// chi-squared that large comes by chance in less than one run of twenty. The scatter then being an estimate, the fit
    /// has finite degrees of freedom.
    ///
    /// Widening every run above one would overstate half of the good ones; a run just short of refusal left as it is
    /// would understate (`proof::coverage` shows both).
    pub fn widened_by_scatter(self) -> Self {
        if self.basis != Basis::Stated || self.p_value() >= WIDENING_PROBABILITY {
            return self;
        }
        let widening = (self.chi_squared / self.degrees_of_freedom as f64).max(1.0);
        Self { covariance: self.covariance.scaled(widening), widening, ..self }
    }

    /// Probability of a chi-squared at least as large by chance; 1 when the residuals are the basis, since the scale
    /// then says nothing about the fit.
    pub fn p_value(&self) -> f64 {
        match self.basis {
            Basis::Stated if self.degrees_of_freedom > 0 => {
                chi_squared_upper(self.chi_squared, self.degrees_of_freedom as f64).unwrap_or(0.0)
            }
            _ => 1.0,
        }
    }

    /// The fit and all common parts together.
    pub fn total(&self) -> PairCovariance {
        self.common.iter().fold(self.covariance, |v, part| v.with_common(part.shift))
    }
}

/// Whether a sample states an independent uncertainty; one of zero states nothing, since nothing is exact.
fn states(sample: &Sample) -> bool {
    sample.sources.iter().any(|(_, parts, _)| parts.independent.is_some_and(|u| u > 0.0))
}

/// Basis that a set of samples offers.
pub fn basis_of(samples: &[Sample]) -> Basis {
    if samples.iter().any(states) { Basis::Stated } else { Basis::Residuals }
}

/// Effective standard uncertainty of Y at a sample, from the independent parts of its sources.
fn effective(sample: &Sample, a: f64, b: f64) -> f64 {
    let part = |u: Option<f64>, slope: f64| (u.unwrap_or(0.0) * slope).powi(2);
    sample.sources.iter().map(|(_, parts, slope)| part(parts.independent, slope.of_residual(a, b))).sum::<f64>().sqrt()
}

/// Standard uncertainty of Y at a sample that the fit did not use.
pub fn sigma_of(sample: &Sample, solution: &Solution) -> f64 {
    match solution.basis {
        Basis::Stated => effective(sample, solution.a, solution.b),
        Basis::Residuals => solution.scatter * sample.columns.y.abs(),
    }
}

/// A sample that states no independent uncertainty although others do: its line in the points file.
pub fn unstated_line(samples: &[Sample]) -> Option<u64> {
    let silent = samples.iter().filter(|sample| !states(sample)).map(|sample| sample.line).min();
    silent.filter(|_| basis_of(samples) == Basis::Stated)
}

/// Effect on every residual of one standard uncertainty of what `cause` shares among the points.
fn common_effects(samples: &[Sample], cause: Cause, u_viscosity: f64, a: f64, b: f64) -> Vec<f64> {
    let of_sources = |sample: &Sample, wanted: &[Source]| {
        let parts = sample.sources.iter().filter(|(source, _, _)| wanted.contains(source));
        let effects = parts.map(|(source, parts, slope)| {
            let turned = if is_gain(*source, cause) { sample.pressure_drop.signum() } else { 1.0 };
            parts.common.unwrap_or(0.0) * slope.of_residual(a, b) * turned
        });
        // Sources of one cause that act alike add in squares and keep the sign of the first.
        let (first, squares) =
            effects.fold((0.0, 0.0), |(first, sum), e| (if first == 0.0 { e } else { first }, sum + e * e));
        f64::sqrt(squares).copysign(first)
    };
    let effect = |sample: &Sample| match cause {
        Cause::Viscosity => u_viscosity * sample.viscosity_slope(a),
        Cause::Moisture => sample.u_viscosity_of_water * sample.viscosity_slope(a),
        Cause::ReferenceFlow => {
            of_sources(sample, &[Source::ReferenceFlow, Source::ReferenceTemperature, Source::ReferencePressure])
        }
        Cause::Density => of_sources(sample, &[Source::LinePressure, Source::RelativeHumidity]),
        Cause::Temperature => of_sources(sample, &[Source::Temperature]),
        Cause::PressureDrop | Cause::PressureDropZero => of_sources(sample, &[Source::PressureDrop]),
        Cause::Geometry => 0.0,
    };
    samples.iter().map(effect).collect()
}

/// Whether a common part follows the size of its value, so that it turns round with the flow.
fn is_gain(source: Source, cause: Cause) -> bool {
    source == Source::ReferenceFlow || (source == Source::PressureDrop && cause == Cause::PressureDrop)
}

/// Whether the common part of the pressure drop is a zero (one pascal value) rather than a gain (one relative value).
fn zero_like(samples: &[Sample]) -> bool {
    let values: Vec<(f64, f64)> = samples
        .iter()
        .filter_map(|s| {
            let (_, parts, _) = s.sources.iter().find(|(source, _, _)| *source == Source::PressureDrop)?;
            parts.common.filter(|&u| u > 0.0).map(|u| (u, u / s.pressure_drop.abs()))
        })
        .collect();
    let spread = |of: fn(&(f64, f64)) -> f64| {
        let values = values.iter().map(of);
        let (low, high) = values.fold((f64::INFINITY, 0.0_f64), |(low, high), v| (low.min(v), high.max(v)));
        high / low
    };
    !values.is_empty() && spread(|v| v.0) < spread(|v| v.1)
}

struct Problem<'a> {
    samples: &'a [Sample],
    prior: Option<Prior>,
    zero: bool,
    /// Relative standard uncertainty of every point when none is stated; 1 while the scatter is not known.
    scatter: f64,
}

impl Problem<'_> {
    fn column(&self, of: impl Fn(&Sample) -> f64, of_prior: f64) -> Vec<f64> {
        self.samples.iter().map(of).chain(self.prior.map(|_| of_prior)).collect()
    }

    /// Solves for two coefficients of `observations` (their prior row last) at weights `sigmas`.
    fn solve(&self, observations: &[f64], sigmas: &[f64], zero: &[f64]) -> Result<Fit> {
        SharedError {
            observations,
            columns: [&self.column(|s| s.columns.u, 0.0), &self.column(|s| s.columns.v, 1.0)],
            uncertainties: sigmas,
            common: zero,
        }
        .solve()
    }

    fn sigmas(&self, basis: Basis, a: f64, b: f64) -> Vec<f64> {
        let u = |s: &Sample| if basis == Basis::Stated { effective(s, a, b) } else { self.scatter * s.columns.y.abs() };
        self.column(u, self.prior.map_or(1.0, |prior| prior.u))
    }

    fn zero_effects(&self, a: f64, b: f64) -> Vec<f64> {
        let mut effects = if self.zero {
            common_effects(self.samples, Cause::PressureDropZero, 0.0, a, b)
        } else {
            vec![0.0; self.samples.len()]
        };
        effects.extend(self.prior.map(|_| 0.0));
        effects
    }
}

/// Fits A and B.
///
/// `samples`: at least three; `u_viscosity`: relative standard uncertainty of the fluid's viscosity data, common to
/// all points; `prior`: of B, when geometry has to give it.
///
/// # Errors
/// Points that cannot fix the coefficients, all at one flow for instance.
pub fn fit(samples: &[Sample], u_viscosity: f64, prior: Option<Prior>) -> Result<Solution> {
    let basis = basis_of(samples);
    let known_scatter = match (basis, prior) {
        // A prior needs errors of known size beside it: those of the fit without it.
        (Basis::Residuals, Some(_)) => Some(fit(samples, u_viscosity, None)?.scatter.max(f64::EPSILON)),
        _ => None,
    };
    let mut problem = Problem { samples, prior, zero: zero_like(samples), scatter: known_scatter.unwrap_or(1.0) };
    let scatter_unknown = basis == Basis::Residuals && known_scatter.is_none();
    let y = problem.column(|s| s.columns.y, prior.map_or(0.0, |prior| prior.value));
    let (mut a, mut b) = (mean_y(samples)?, 0.0);
    let mut sigmas = problem.sigmas(basis, a, b);
    let mut fit = problem.solve(&y, &sigmas, &problem.zero_effects(a, b))?;
    for _ in 0..ROUNDS {
        (a, b) = (fit.solution[0], fit.solution[1]);
        if scatter_unknown {
            // The scatter becomes the weights' own, so that a zero stands beside it in its true size.
            let unit = fit.residual_variance().unwrap_or(1.0).sqrt();
            problem.scatter = (problem.scatter * unit).max(f64::EPSILON);
        }
        sigmas = problem.sigmas(basis, a, b);
        fit = problem.solve(&y, &sigmas, &problem.zero_effects(a, b))?;
    }
    (a, b) = (fit.solution[0], fit.solution[1]);
    let common = shifts(&problem, u_viscosity, &sigmas, a, b)?;
    let zero = zero_shift(&problem, &sigmas, a, b)?;
    let n = samples.len();
    Ok(Solution {
        a,
        b,
        covariance: PairCovariance::from_fit(&fit)?,
        common,
        zero,
        chi_squared: fit.chi_squared,
        degrees_of_freedom: fit.degrees_of_freedom - if known_scatter.is_some() { 1 } else { 0 },
        standardised: fit.standardised.iter().take(n).copied().collect(),
        leave_one_out: leave_one_out(&fit, basis, n),
        sigmas: sigmas.iter().take(n).copied().collect(),
        basis,
        scatter: problem.scatter,
        prior,
        widening: 1.0,
    })
}

fn leave_one_out(fit: &Fit, basis: Basis, n: usize) -> Vec<f64> {
    let values = if basis == Basis::Stated { fit.leave_one_out() } else { fit.studentised() };
    values.into_iter().take(n).map(|z| z.unwrap_or(f64::NAN)).collect()
}

fn mean_y(samples: &[Sample]) -> Result<f64> {
    if samples.len() < 3 {
        return Err(StatisticsError::Length { name: "points".into(), actual: samples.len(), needed: 3 });
    }
    Ok(samples.iter().map(|s| s.columns.y).sum::<f64>() / samples.len() as f64)
}

/// The common parts, each carried through the fit: the estimator is linear, so its answer to the effects of one
/// standard uncertainty is the shift of A and B.
fn shifts(problem: &Problem<'_>, u_viscosity: f64, sigmas: &[f64], a: f64, b: f64) -> Result<Vec<CommonShift>> {
    let causes = [
        Cause::ReferenceFlow,
        Cause::Viscosity,
        Cause::PressureDrop,
        Cause::Density,
        Cause::Temperature,
        Cause::Moisture,
    ];
    let zero = problem.zero_effects(a, b);
    let mut shifts = Vec::new();
    for cause in causes {
        if cause == Cause::PressureDrop && problem.zero {
            continue;
        }
        let mut effects = common_effects(problem.samples, cause, u_viscosity, a, b);
        if effects.iter().all(|&e| e == 0.0) {
            continue;
        }
        effects.extend(problem.prior.map(|_| 0.0));
        let answer = problem.solve(&effects, sigmas, &zero)?;
        let u = largest_u(problem.samples, cause, u_viscosity)
            .unwrap_or_else(|| as_relative(problem.samples, cause, &effects, a, b));
        let shift = [answer.solution[0], answer.solution[1]];
        // What rounding leaves of an exact zero is no effect.
        shifts.push(CommonShift { cause, u, shift: [settled(shift[0], a), settled(shift[1], b)] });
    }
    Ok(shifts)
}

/// What one standard uncertainty of the common zero does to A and B, if there is one.
fn zero_shift(problem: &Problem<'_>, sigmas: &[f64], a: f64, b: f64) -> Result<Option<CommonShift>> {
    let Some(u) = largest_u(problem.samples, Cause::PressureDropZero, 0.0).filter(|_| problem.zero) else {
        return Ok(None);
    };
    let effects = problem.zero_effects(a, b);
    let answer = problem.solve(&effects, sigmas, &effects)?;
    Ok(Some(CommonShift { cause: Cause::PressureDropZero, u, shift: [answer.solution[0], answer.solution[1]] }))
}

/// A shift, or zero where it is below the rounding of the coefficient it moves.
fn settled(shift: f64, coefficient: f64) -> f64 {
    if shift.abs() < 1e-12 * coefficient.abs() { 0.0 } else { shift }
}

/// Largest standard uncertainty of a common cause among the points as stated: relative, kelvin for temperature, pascal
/// for a zero; nothing where several sources make up the cause.
fn largest_u(samples: &[Sample], cause: Cause, u_viscosity: f64) -> Option<f64> {
    let of = |wanted: Source, relative_to: fn(&Sample) -> f64| {
        let u = |s: &Sample| {
            let (_, parts, _) = s.sources.iter().find(|(source, _, _)| *source == wanted)?;
            parts.common.map(|u| u / relative_to(s))
        };
        samples.iter().filter_map(u).reduce(f64::max)
    };
    let any = |sources: &[Source]| {
        let shared = |s: &Sample| s.sources.iter().any(|(of, parts, _)| sources.contains(of) && parts.common.is_some());
        samples.iter().any(shared)
    };
    match cause {
        Cause::Viscosity => Some(u_viscosity),
        Cause::ReferenceFlow if any(&[Source::ReferenceTemperature, Source::ReferencePressure]) => None,
        Cause::ReferenceFlow => of(Source::ReferenceFlow, |s| s.reference_flow.abs()),
        Cause::PressureDrop => of(Source::PressureDrop, |s| s.pressure_drop.abs()),
        Cause::Density if any(&[Source::RelativeHumidity]) => None,
        Cause::Density => of(Source::LinePressure, |s| s.line_pressure),
        Cause::Temperature => of(Source::Temperature, |_| 1.0),
        Cause::PressureDropZero => of(Source::PressureDrop, |_| 1.0),
        Cause::Moisture => samples.iter().map(|s| s.u_viscosity_of_water).reduce(f64::max),
        Cause::Geometry => None,
    }
}

/// The relative error of flow or density that would have the effects of a cause.
fn as_relative(samples: &[Sample], cause: Cause, effects: &[f64], a: f64, b: f64) -> f64 {
    let of_unity = |s: &Sample| match cause {
        Cause::ReferenceFlow => a * s.columns.u + 2.0 * b * s.columns.v,
        _ => s.columns.y,
    };
    samples.iter().zip(effects).map(|(s, effect)| (effect / of_unity(s)).abs()).fold(0.0, f64::max)
}
