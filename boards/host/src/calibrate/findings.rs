//! What is wrong with a run, and which points say so.
//!
//! Order of diagnosis when the fit lacks: one outlier (unless it belongs to a rising tail), a zero offset of the pressure
//! drop, not laminar (points above the lowest half rise off its line), else missing physics. Geometry is asked in any case: it alone sees a wrong gas,
//! whose fit looks perfect.

use crate::calibrate::fit::{Basis, Prior, Solution, WIDENING_PROBABILITY, fit, sigma_of};
use crate::calibrate::outcome::Finding;
use crate::calibrate::samples::Sample;
use crate::statistics::Result;
use crate::statistics::distributions::{chi_squared_upper, f_upper, student_t_quantile};
use crate::statistics::least_squares::LeastSquares;

/// Probability below which a fit is held to lack.
pub const REFUSING_PROBABILITY: f64 = 0.01;
/// Leave-one-out residual, in standard uncertainties, above which a point stands out.
const OUTLYING: f64 = 3.5;
/// The same above which a point is held to rise off the laminar law together with one that clearly does.
const RISING: f64 = 1.0;
/// chi-squared over its degrees of freedom below which stated uncertainties hold a common part.
const SUSPICIOUSLY_SMALL: f64 = 0.4;
/// Probability of a chi-squared that small by chance, below which it is said.
const SMALL_PROBABILITY: f64 = 0.05;
/// Fewest points for a run to stand, and for it to pass without remark.
const FEWEST: [usize; 2] = [5, 8];
/// Share by which A and B may differ from nominal geometry; two standard uncertainties of B come on top.
pub const GEOMETRY_LIMITS: [f64; 2] = [0.10, 0.30];

/// Everything the diagnosis looks at.
#[derive(Debug, Clone, Copy)]
pub struct Run<'a> {
    /// Samples used, by x.
    pub samples: &'a [Sample],
    /// Their fit.
    pub solution: &'a Solution,
    /// Relative standard uncertainty of the fluid's viscosity.
    pub u_viscosity: f64,
    /// Nominal A and B, when geometry gives them.
    pub nominal: Option<[f64; 2]>,
    /// Reynolds number per unit of x, 1/m; 0 when the channels are unknown.
    pub reynolds_per_x: f64,
}

/// A finding about some points.
pub fn finding(kind: &str, points: Vec<u64>, refuses: bool, message: String) -> Finding {
    Finding { kind: kind.into(), points, message, refuses }
}

/// All findings, those that refuse the run first.
///
/// # Errors
/// A statistic that cannot be computed.
pub fn diagnose(run: &Run<'_>) -> Result<Vec<Finding>> {
    let mut findings = Vec::new();
    findings.extend(too_few(run));
    findings.extend(lack(run)?);
    let explained = findings.iter().any(|found| ["not-laminar", "outlier", "zero-offset"].contains(&&*found.kind));
    findings.extend(geometry(run, explained));
    findings.extend(prior_used(run));
    findings.extend(suspiciously_good(run)?);
    if !findings.iter().any(|found| found.refuses) {
        findings.extend(widened(run));
    }
    findings.sort_by_key(|finding| !finding.refuses);
    Ok(findings)
}

fn too_few(run: &Run<'_>) -> Option<Finding> {
    let n = run.samples.len();
    let [least, plenty] = FEWEST;
    (n < plenty).then(|| {
        let message = format!(
            "The run has {n} points: {least} are the least for a calibration, {plenty} or more let errors show"
        );
        finding("too-few-points", Vec::new(), n < least, message)
    })
}

/// Lack of fit and its first cause.
fn lack(run: &Run<'_>) -> Result<Vec<Finding>> {
    let beyond = beyond_laminar(run);
    let outlier = outlier(run)?;
    let curved = curvature(run)?;
    let lacks = match run.solution.basis {
        Basis::Stated => run.solution.p_value() < REFUSING_PROBABILITY,
        Basis::Residuals => curved < REFUSING_PROBABILITY,
    };
    if !lacks {
        return Ok(outlier.into_iter().chain(beyond.map(|lines| laminar_limit(lines, false))).collect());
    }
    // What explains every point goes before what sets some aside; a zero bends the bottom of a run, a transition its top.
    if let Some(found) = outlier_that_heals(run)? {
        let lines = transition(run)?;
        return Ok(vec![lines.map_or(found, |lines| laminar_limit(lines, true))]);
    }
    if let Some(found) = zero_offset(run)? {
        return Ok(vec![found]);
    }
    let lines = transition(run)?;
    Ok(vec![lines.map_or_else(|| missing_physics(run, curved), |lines| laminar_limit(lines, true))])
}

/// Points above the laminar limit, by Reynolds number.
fn beyond_laminar(run: &Run<'_>) -> Option<Vec<u64>> {
    let limit = f64::from(evenbore::regime::LAMINAR_LIMIT);
    let beyond = run.samples.iter().filter(|s| s.columns.x * run.reynolds_per_x > limit);
    let lines: Vec<u64> = beyond.map(|s| s.line).collect();
    (!lines.is_empty()).then_some(lines)
}

fn laminar_limit(lines: Vec<u64>, refuses: bool) -> Finding {
    let message = if refuses {
        "The pressure drop rises off the laminar law at these points: the flow is no longer laminar there, or \
         something grows with flow that the law does not know (the lowest is named for standing next to them)"
    } else {
        "These points lie above Re 1800, where the law is not held to be laminar, although they fit"
    };
    finding("not-laminar", lines, refuses, message.into())
}

/// Fits the lowest half of the run, adds points upward while they agree, and returns the lines from the first that
/// rises off the fit, provided that what remains below fits.
fn transition(run: &Run<'_>) -> Result<Option<Vec<u64>>> {
    let sorted = run.samples;
    let mut below = (sorted.len() / 2).max(4);
    while below < sorted.len() {
        let line = fit(&sorted[..below], run.u_viscosity, run.solution.prior)?;
        let z = prediction_error(&line, &sorted[below]);
        if z > OUTLYING {
            return rising_tail(run, below);
        }
        if z < -OUTLYING {
            return Ok(None);
        }
        below += 1;
    }
    Ok(None)
}

/// The lines from `from` upward and the one below, when all from there rise off a fit to the rest that agrees; a top
/// point alone, the one below it not rising with it, is an outlier instead.
///
/// The one below goes too because a transition does not begin at once; which it is does not depend on its own error, so
/// that leaving it out does not bend the fit.
fn rising_tail(run: &Run<'_>, from: usize) -> Result<Option<Vec<u64>>> {
    let sorted = run.samples;
    let below = |from: usize| fit(&sorted[..from], run.u_viscosity, run.solution.prior);
    let half = (sorted.len() / 2).max(4);
    let alone = from + 1 == sorted.len();
    let suspect = from > half && (!alone || prediction_error(&below(from - 1)?, &sorted[from - 1]) > RISING);
    let first = if suspect { from - 1 } else { from };
    let line = below(first)?;
    let all_above = sorted[from..].iter().all(|s| prediction_error(&line, s) > RISING);
    let agrees = line.p_value() >= REFUSING_PROBABILITY;
    let mut lines: Vec<u64> = sorted[first..].iter().map(|s| s.line).collect();
    lines.sort_unstable();
    Ok((agrees && all_above && lines.len() > 1).then_some(lines))
}

/// Y of a sample against what a fit to others predicts, in standard uncertainties of the difference.
fn prediction_error(line: &Solution, sample: &Sample) -> f64 {
    let (u, v) = (sample.columns.u, sample.columns.v);
    let own = sigma_of(sample, line);
    let variance = line.covariance.variance_along([u, v]) + own * own;
    (sample.columns.y - line.a * u - line.b * v) / variance.sqrt()
}

/// Limit of a leave-one-out residual: 3.5 for stated errors, Student's t at 1 % among all points otherwise.
fn outlying_limit(run: &Run<'_>) -> Result<f64> {
    let n = run.samples.len() as f64;
    match run.solution.basis {
        Basis::Stated => Ok(OUTLYING),
        Basis::Residuals if n > 4.0 => student_t_quantile(1.0 - REFUSING_PROBABILITY / (2.0 * n), n - 3.0),
        Basis::Residuals => Ok(f64::INFINITY),
    }
}

/// The point that stands out furthest.
fn furthest(run: &Run<'_>) -> Option<(usize, f64)> {
    let sizes = run.solution.leave_one_out.iter().enumerate().filter(|(_, z)| z.is_finite());
    sizes.map(|(i, z)| (i, *z)).max_by(|p, q| p.1.abs().total_cmp(&q.1.abs()))
}

/// A point that lies too far from the fit to all others, although the run as a whole fits.
fn outlier(run: &Run<'_>) -> Result<Option<Finding>> {
    let limit = outlying_limit(run)?;
    Ok(furthest(run).filter(|(_, z)| z.abs() > limit).map(|(i, z)| standing_out(run, i, z)))
}

fn standing_out(run: &Run<'_>, i: usize, z: f64) -> Finding {
    let sample = &run.samples[i];
    let percent = 100.0 * run.solution.standardised[i] * run.solution.sigmas[i] / sample.columns.y;
    let message = format!(
        "This point lies {:.1} standard uncertainties off the fit to all others ({percent:+.2} % in pressure drop); \
         find its cause, then repeat it or leave it out with --without {}",
        z.abs(),
        sample.line
    );
    finding("outlier", vec![sample.line], true, message)
}

/// One point whose removal makes the rest fit.
fn outlier_that_heals(run: &Run<'_>) -> Result<Option<Finding>> {
    let limit = outlying_limit(run)?;
    let Some((i, z)) = furthest(run).filter(|(_, z)| z.abs() > limit) else { return Ok(None) };
    if run.samples.len() < 5 {
        return Ok(None);
    }
    let rest: Vec<Sample> = run.samples.iter().enumerate().filter(|&(j, _)| j != i).map(|(_, s)| s.clone()).collect();
    let healed = fit(&rest, run.u_viscosity, run.solution.prior)?;
    // What remains must not itself scatter too much: else leaving out the worst point hides an understated noise.
    let heals = healed.basis == Basis::Residuals || healed.p_value() >= WIDENING_PROBABILITY;
    Ok(heals.then(|| standing_out(run, i, z)))
}

/// A further column beside A and B: its coefficient, standard uncertainty, and the chi-squared that remains.
fn with_column(run: &Run<'_>, column: &[f64], prior: Option<Prior>) -> Result<(f64, f64, f64)> {
    let of = |f: fn(&Sample) -> f64| run.samples.iter().map(f).collect::<Vec<f64>>();
    let mut model = LeastSquares::new(&of(|s| s.columns.y))
        .column("A", &of(|s| s.columns.u))
        .column("B", &of(|s| s.columns.v))
        .column("further", column)
        .uncertainties(&run.solution.sigmas);
    if let Some(prior) = prior {
        model = model.prior("B", prior.value, prior.u);
    }
    let fit = model.solve()?;
    Ok((fit.solution[2], fit.standard_uncertainties()[2], fit.chi_squared))
}

/// A zero offset of the pressure drop that makes the run fit: Y/dP as a further column, B held by geometry.
fn zero_offset(run: &Run<'_>) -> Result<Option<Finding>> {
    if run.samples.len() < 5 {
        return Ok(None);
    }
    let column: Vec<f64> = run.samples.iter().map(|s| s.columns.y / s.pressure_drop).collect();
    let prior = run.nominal.map(|[_, b]| Prior { value: b, u: GEOMETRY_LIMITS[1] * b });
    let (zero, u, chi_squared) = with_column(run, &column, prior)?;
    let dof = (run.samples.len() + usize::from(prior.is_some()) - 3) as f64;
    let fits = run.solution.basis == Basis::Residuals || chi_squared_upper(chi_squared, dof)? >= REFUSING_PROBABILITY;
    Ok((fits && zero.abs() > OUTLYING * u).then(|| {
        let message = format!(
            "The pressure drop reads {zero:+.3} Pa (standard uncertainty {u:.3} Pa) at no flow: take its zero with the \
             gas at line pressure and repeat the run"
        );
        finding("zero-offset", Vec::new(), true, message)
    }))
}

/// Probability that a term in x squared improves the fit by chance (F test).
fn curvature(run: &Run<'_>) -> Result<f64> {
    let rows = run.samples.len() + usize::from(run.solution.prior.is_some());
    if rows < 5 {
        return Ok(1.0);
    }
    let column: Vec<f64> = run.samples.iter().map(|s| s.columns.v * s.columns.x).collect();
    let Ok((_, _, remains)) = with_column(run, &column, run.solution.prior) else { return Ok(1.0) };
    let gained = run.solution.chi_squared - remains;
    let dof = (rows - 3) as f64;
    if remains <= 0.0 { Ok(1.0) } else { f_upper((gained / (remains / dof)).max(0.0), 1.0, dof) }
}

fn missing_physics(run: &Run<'_>, curved: f64) -> Finding {
    let hint = if curved < REFUSING_PROBABILITY {
        "; the residuals bend with flow, which points to a leak, a wrong line pressure or a channel that is not what \
         its drawing says"
    } else {
        "; the residuals show no trend, so the stated uncertainties are too small or the readings were not settled"
    };
    let message = format!(
        "The points scatter more than their stated uncertainties allow: chi-squared {:.1} for {} degrees of freedom, \
         by chance in {:.2} % of runs (limit 1 %){hint}",
        run.solution.chi_squared,
        run.solution.degrees_of_freedom,
        100.0 * run.solution.p_value()
    );
    finding("lack-of-fit", Vec::new(), true, message)
}

/// A and B against nominal geometry; B alone says nothing when points are `explained` to be wrong already.
fn geometry(run: &Run<'_>, explained: bool) -> Option<Finding> {
    let [a0, b0] = run.nominal?;
    let (a, b) = (run.solution.a / a0, run.solution.b / b0);
    let [_, u_b] = run.solution.total().standard_uncertainties();
    let [limit_a, limit_b] = [GEOMETRY_LIMITS[0], GEOMETRY_LIMITS[1] + 2.0 * u_b / b0];
    let (off_a, off_b) =
        ((a - 1.0).abs() > limit_a, !explained && run.solution.prior.is_none() && (b - 1.0).abs() > limit_b);
    (off_a || off_b).then(|| {
        let message = format!(
            "A is {a:.3} and B is {b:.3} of what the drawing gives (limits 1 +- {limit_a:.2} and 1 +- {limit_b:.2}): the \
             fluid is not the one declared, or sizes or number of channels are not those of the drawing"
        );
        finding("fluid-mismatch", Vec::new(), true, message)
    })
}

fn prior_used(run: &Run<'_>) -> Option<Finding> {
    let prior = run.solution.prior?;
    if prior.value == 0.0 {
        let message = "The run does not show a kinetic term and the drawing gives none; B is held at zero, and \
                       flows more than a fifth beyond the run are flagged";
        return Some(finding("b-from-prior", Vec::new(), false, message.into()));
    }
    Some({
        let percent = 100.0 * prior.u / prior.value;
        let message = format!(
            "The run does not reach flows large enough to fix B; it is held at its geometric value within {percent:.0} %, \
             and flows more than a fifth beyond the run are flagged"
        );
        finding("b-from-prior", Vec::new(), false, message)
    })
}

/// Uncertainty taken from the scatter, which is larger than stated.
fn widened(run: &Run<'_>) -> Option<Finding> {
    let solution = run.solution;
    (solution.widening > 1.0).then(|| {
        let message = format!(
            "Chi-squared is {:.2} per degree of freedom, by chance in {:.1} % of runs: the uncertainty of the fit is \
             taken from the scatter of the points, {:.2} times what follows from the stated uncertainties, with {} \
             degrees of freedom",
            solution.chi_squared / solution.degrees_of_freedom as f64,
            100.0 * solution.p_value(),
            solution.widening.sqrt(),
            solution.degrees_of_freedom
        );
        finding("uncertainty-widened", Vec::new(), false, message)
    })
}

fn suspiciously_good(run: &Run<'_>) -> Result<Option<Finding>> {
    let dof = run.solution.degrees_of_freedom as f64;
    let chi = run.solution.chi_squared;
    if run.solution.basis == Basis::Residuals || dof < 3.0 || chi / dof >= SUSPICIOUSLY_SMALL {
        return Ok(None);
    }
    let by_chance = 1.0 - chi_squared_upper(chi, dof)?;
    Ok((by_chance < SMALL_PROBABILITY).then(|| {
        let message = format!(
            "Chi-squared is only {:.2} per degree of freedom: the independent uncertainties stated are larger than \
             the scatter; if they hold a part that all points share, state it as u_..._common, or it is averaged away",
            chi / dof
        );
        finding("stated-uncertainty-too-large", Vec::new(), false, message)
    }))
}
