//! Quantiles and tail probabilities, with the numerical limits of their implementations fenced off.

use statrs::distribution::{ChiSquared, ContinuousCDF, Normal, StudentsT};
use statrs::function::beta::checked_beta_reg;

use super::{Result, StatisticsError, require};

/// Two-sided coverage probability that makes the normal coverage factor two.
pub const COVERAGE: f64 = 0.9545;

/// Degrees of freedom above which the quantile is expanded about the normal one: the inverse incomplete beta function
/// loses digits there and stops returning near 2e7.
const EXPANSION_DOF: f64 = 1e4;

/// Smallest tail, 1e-6 with room for the rounding of 1 − p: at 1e-9 the inverse incomplete beta function is wrong.
const SMALLEST_TAIL: f64 = 0.999e-6;

/// Most degrees of freedom for tail probabilities: at 1e6 the variance ratio one comes out 1e-3 off its true 0.5.
const LARGEST_DOF: f64 = 1e5;

/// Probability that a standard normal variable stays below `z`.
///
/// Φ(z) = ½ erfc(−z/√2) (Abramowitz and Stegun 1964, 26.2.29).
///
/// # Arguments
/// `z`: deviation in standard deviations; infinities are allowed.
///
/// # Errors
/// `z` is not a number.
///
/// ```
/// let p = evenbore_bench::statistics::distributions::normal_cdf(1.96)?;
/// assert!((p - 0.975002).abs() < 1e-6);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn normal_cdf(z: f64) -> Result<f64> {
    require(!z.is_nan(), "normal deviate", z, "a number")?;
    Ok(Normal::standard().cdf(z))
}

/// Value that a Student variable stays below with probability `p`.
///
/// I_x(ν/2, ½) = 2 min(p, 1−p) with x = ν/(ν+t²) (Student 1908); beyond ν = 10⁴ the expansion
/// t = z + (z³+z)/4ν + (5z⁵+16z³+3z)/96ν² about the normal quantile z (Fisher 1926), which ends in z at infinity.
///
/// # Arguments
/// `p`: one-sided probability, 1e-6 to 1 − 1e-6; `dof`: degrees of freedom ν, at least one, may be infinite.
///
/// # Errors
/// `p` or `dof` outside these limits.
///
/// ```
/// let t = evenbore_bench::statistics::distributions::student_t_quantile(0.975, 10.0)?;
/// assert!((t - 2.228139).abs() < 1e-6);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn student_t_quantile(p: f64, dof: f64) -> Result<f64> {
    let upper = 1.0 - p;
    require(p.min(upper) >= SMALLEST_TAIL, "probability", p, "between 1e-6 and 1 - 1e-6")?;
    require(dof >= 1.0, "degrees of freedom", dof, "at least 1")?;
    let t = if dof > EXPANSION_DOF { expanded(p.min(upper), dof) } else { inverted(p.min(upper), dof)? };
    Ok(if p < 0.5 { -t } else { t })
}

/// Quantile of the upper tail `q` from the normal quantile, for many degrees of freedom.
fn expanded(q: f64, dof: f64) -> f64 {
    let z = -Normal::standard().inverse_cdf(q);
    let z2 = z * z;
    z + z * (z2 + 1.0) / (4.0 * dof) + z * (5.0 * z2 * z2 + 16.0 * z2 + 3.0) / (96.0 * dof * dof)
}

/// Quantile of the upper tail `q` from the incomplete beta function, polished by one Newton step.
fn inverted(q: f64, dof: f64) -> Result<f64> {
    let law = StudentsT::new(0.0, 1.0, dof).map_err(|_| undefined_dof(dof))?;
    let t = law.inverse_cdf(1.0 - q);
    let density = statrs::distribution::Continuous::pdf(&law, t);
    Ok(t + (law.sf(t) - q) / density)
}

/// Factor by which a standard uncertainty is multiplied to cover 95.45 %, both sides together.
///
/// k = t_p(ν) with p = (1 + 0.9545)/2 (JCGM 100:2008, G.3.2).
///
/// # Arguments
/// `dof`: effective degrees of freedom, at least one, may be infinite.
///
/// # Errors
/// `dof` below one or not a number.
///
/// ```
/// use evenbore_bench::statistics::distributions::coverage_factor;
/// assert!((coverage_factor(f64::INFINITY)? - 2.0).abs() < 3e-6);
/// assert!((coverage_factor(10.0)? - 2.283682).abs() < 1e-6);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn coverage_factor(dof: f64) -> Result<f64> {
    student_t_quantile(0.5 + 0.5 * COVERAGE, dof)
}

/// Probability that chance alone gives a chi-squared at least as large: the p-value of a lack of fit.
///
/// p = Q(ν/2, χ²/2), the regularised upper incomplete gamma function (Pearson 1900).
///
/// # Arguments
/// `chi_squared`: weighted sum of squares, not negative; `dof`: degrees of freedom, positive, at most 1e5.
///
/// # Errors
/// Either argument outside its domain.
///
/// ```
/// let p = evenbore_bench::statistics::distributions::chi_squared_upper(9.487729, 4.0)?;
/// assert!((p - 0.05).abs() < 1e-7);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn chi_squared_upper(chi_squared: f64, dof: f64) -> Result<f64> {
    require(chi_squared >= 0.0, "chi-squared", chi_squared, "zero or more")?;
    require_finite_dof(dof)?;
    Ok(ChiSquared::new(dof).map_err(|_| undefined_dof(dof))?.sf(chi_squared))
}

/// Probability that chance alone gives a variance ratio at least as large.
///
/// p = I_x(d₂/2, d₁/2) with x = d₂/(d₂ + d₁F) (Snedecor 1934), written so that no digits cancel in the far tail.
///
/// # Arguments
/// `ratio`: F, not negative; `numerator_dof`, `denominator_dof`: d₁ and d₂, positive, at most 1e5.
///
/// # Errors
/// Any argument outside its domain.
///
/// ```
/// let p = evenbore_bench::statistics::distributions::f_upper(3.708265, 3.0, 10.0)?;
/// assert!((p - 0.05).abs() < 1e-7);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn f_upper(ratio: f64, numerator_dof: f64, denominator_dof: f64) -> Result<f64> {
    require(ratio >= 0.0, "variance ratio", ratio, "zero or more")?;
    let (d1, d2) = (require_finite_dof(numerator_dof)?, require_finite_dof(denominator_dof)?);
    checked_beta_reg(0.5 * d2, 0.5 * d1, d2 / (d2 + d1 * ratio)).map_err(|_| undefined_dof(d1))
}

/// Accepts degrees of freedom that a tail probability can be computed for.
fn require_finite_dof(dof: f64) -> Result<f64> {
    require(dof > 0.0 && dof <= LARGEST_DOF, "degrees of freedom", dof, "positive and at most 1e5")
}

/// Error for degrees of freedom the distribution does not know.
fn undefined_dof(value: f64) -> StatisticsError {
    StatisticsError::OutOfRange { name: "degrees of freedom", value, limit: "positive and at most 1e5" }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The expansion takes over where the inverse leaves off.
    #[test]
    fn quantile_has_no_step_at_the_seam() {
        for p in [0.6, 0.97725, 0.999, 0.999999] {
            let (below, above) = (student_t_quantile(p, 1e4).unwrap(), student_t_quantile(p, 1.0000001e4).unwrap());
            assert!((above / below - 1.0).abs() < 1e-9, "{below} then {above} at {p}");
        }
    }

    /// A quantile leads back to its probability; without the Newton step 1.3e-10 are missing.
    #[test]
    fn quantile_inverts_the_distribution() {
        for dof in (0..=400).map(|step| 10f64.powf(f64::from(step) / 100.0)) {
            let law = StudentsT::new(0.0, 1.0, dof).unwrap();
            for q in [0.001, 0.02275, 0.15, 0.4] {
                let back = law.sf(student_t_quantile(1.0 - q, dof).unwrap());
                assert!((back / q - 1.0).abs() < 5e-12, "{back} instead of {q} with {dof}");
            }
        }
    }

    /// Arguments that make the underlying functions hang, lie or panic are refused or answered.
    #[test]
    fn fences() {
        assert_eq!(student_t_quantile(0.5, 3.0), Ok(0.0));
        assert!(student_t_quantile(0.975, 1e9).unwrap() < 1.96);
        assert_eq!(f_upper(f64::INFINITY, 3.0, 10.0), Ok(0.0));
        for (p, dof) in [(0.975, 0.5), (0.975, f64::NAN), (f64::NAN, 3.0), (0.0, 3.0), (1e-9, 1.0), (1.5, 3.0)] {
            assert!(student_t_quantile(p, dof).is_err(), "{p}, {dof}");
        }
        assert!(f_upper(1.0, 1e6, 1e6).is_err());
        assert!(chi_squared_upper(f64::NAN, 3.0).is_err());
    }
}
