//! Effective degrees of freedom of a combined standard uncertainty.

use super::{Result, StatisticsError, require};

/// Uncertainty component: its contribution to the result and how well that contribution is known.
///
/// |cᵢ|u(xᵢ) with νᵢ degrees of freedom (JCGM 100:2008, 5.1.3 and G.4.1).
///
/// ```
/// let reference = evenbore_bench::statistics::welch::Component { uncertainty: 0.05, dof: f64::INFINITY };
/// assert!(reference.dof.is_infinite());
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Component {
    /// Contribution to the standard uncertainty of the result, in the units of the result.
    pub uncertainty: f64,
    /// Degrees of freedom, at least one; infinite for a component taken as exactly known.
    pub dof: f64,
}

/// Degrees of freedom of the root sum of squares of independent components.
///
/// ν = u⁴ / Σ (uᵢ⁴/νᵢ) with u² = Σ uᵢ² (Welch 1947, Satterthwaite 1946; JCGM 100:2008, equation G.2b); infinite when
/// every component that contributes is.
///
/// # Arguments
/// `components`: independent contributions, at least one of them positive.
///
/// # Errors
/// A negative or non-finite uncertainty, degrees of freedom below one, or nothing that contributes.
///
/// ```
/// use evenbore_bench::statistics::welch::{Component, effective_dof};
/// let repeatability = Component { uncertainty: 3.0, dof: 9.0 };
/// let certificate = Component { uncertainty: 4.0, dof: f64::INFINITY };
/// assert!((effective_dof(&[repeatability, certificate])? - 625.0 / 9.0).abs() < 1e-12);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
pub fn effective_dof(components: &[Component]) -> Result<f64> {
    for (index, component) in components.iter().enumerate() {
        check(index, component)?;
    }
    let largest = components.iter().map(|c| c.uncertainty).fold(0.0, f64::max);
    require(largest > 0.0, "largest component", largest, "positive")?;
    let relative = |c: &Component| (c.uncertainty / largest).powi(2);
    let variance: f64 = components.iter().map(relative).sum();
    let spread: f64 = components.iter().map(|c| relative(c).powi(2) / c.dof).sum();
    Ok(variance * variance / spread)
}

/// Names the first component that is out of its domain.
fn check(index: usize, component: &Component) -> Result<()> {
    let entry = |name: &str, value, limit| StatisticsError::Entry { name: name.into(), index, value, limit };
    let Component { uncertainty, dof } = *component;
    if !(uncertainty >= 0.0 && uncertainty.is_finite()) {
        return Err(entry("uncertainty components", uncertainty, "zero or more and finite"));
    }
    if dof.is_nan() || dof < 1.0 {
        return Err(entry("degrees of freedom", dof, "at least 1"));
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Certificates alone are known exactly: infinitely many degrees of freedom, not a division by zero.
    #[test]
    fn only_exact_components_give_infinity() {
        let exact = Component { uncertainty: 0.1, dof: f64::INFINITY };
        assert_eq!(effective_dof(&[exact, exact]), Ok(f64::INFINITY));
    }

    /// Two equal components of equal standing double the degrees of freedom.
    #[test]
    fn equal_components_add_up() {
        let one = Component { uncertainty: 1e-200, dof: 7.0 };
        assert!((effective_dof(&[one, one]).unwrap() - 14.0).abs() < 1e-12);
    }

    /// The offending entry is named.
    #[test]
    fn refuses_what_is_not_an_uncertainty() {
        let negative = Component { uncertainty: -1.0, dof: 7.0 };
        assert!(matches!(effective_dof(&[negative]), Err(StatisticsError::Entry { index: 0, .. })));
        assert!(matches!(effective_dof(&[]), Err(StatisticsError::OutOfRange { .. })));
    }
}
