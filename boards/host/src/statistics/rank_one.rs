//! Errors common to every point: added to the covariance of a fit, or carried through it.

use super::least_squares::{Fit, LeastSquares};
use super::{Result, require_finite, require_length, require_uncertainties};

/// Covariance of two parameters.
///
/// V = V_fit + Σ cₖcₖᵀ (JCGM 102:2011, 6.2.1): a common error that moves the parameters by ±cₖ adds cₖcₖᵀ.
///
/// ```
/// use evenbore_bench::statistics::rank_one::PairCovariance;
/// let fit = PairCovariance([[4.0, -1.0], [-1.0, 1.0]]);
/// let whole = fit.with_common([3.0, 2.0]);
/// assert_eq!(whole.0, [[13.0, 5.0], [5.0, 5.0]]);
/// assert_eq!(whole.variance_along([1.0, 1.0]), 28.0);
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PairCovariance(pub [[f64; 2]; 2]);

impl PairCovariance {
    /// Takes the covariance of a fit that has exactly two parameters.
    ///
    /// # Errors
    /// The fit has another number of parameters.
    pub fn from_fit(fit: &Fit) -> Result<Self> {
        require_length("parameters of the fit", fit.solution.len(), 2)?;
        let v = &fit.covariance;
        Ok(Self([[v[(0, 0)], v[(0, 1)]], [v[(1, 0)], v[(1, 1)]]]))
    }

    /// Adds c cᵀ for a common error that moves the parameters together by `shift`.
    pub fn with_common(self, shift: [f64; 2]) -> Self {
        let [[aa, ab], [ba, bb]] = self.0;
        let [a, b] = shift;
        Self([[aa + a * a, ab + a * b], [ba + a * b, bb + b * b]])
    }

    /// Multiplies every element, for instance by s² when the scatter tells the uncertainty.
    pub fn scaled(self, factor: f64) -> Self {
        Self(self.0.map(|row| row.map(|element| element * factor)))
    }

    /// Standard uncertainties of the two parameters.
    pub fn standard_uncertainties(&self) -> [f64; 2] {
        [self.0[0][0].sqrt(), self.0[1][1].sqrt()]
    }

    /// Correlation of the two parameters, zero when one of them is exactly known.
    pub fn correlation(&self) -> f64 {
        let [a, b] = self.standard_uncertainties();
        if a * b > 0.0 { self.0[0][1] / (a * b) } else { 0.0 }
    }

    /// gᵀVg, the variance of g₀a + g₁b (JCGM 100:2008, equation 13).
    pub fn variance_along(&self, gradient: [f64; 2]) -> f64 {
        let [[aa, ab], [ba, bb]] = self.0;
        let [a, b] = gradient;
        a * a * aa + a * b * (ab + ba) + b * b * bb
    }
}

/// Observations that share one error on top of their independent ones.
///
/// V = diag(uᵢ²) + c cᵀ (Aitken 1935), where cᵢ is what one standard uncertainty of the shared error does to point i.
///
/// ```
/// use evenbore_bench::statistics::rank_one::SharedError;
/// let shared = SharedError {
///     observations: &[1.0, 2.1, 2.9],
///     columns: [&[1.0, 1.0, 1.0], &[0.0, 1.0, 2.0]],
///     uncertainties: &[0.1, 0.1, 0.1],
///     common: &[0.3, 0.1, 0.05],
/// };
/// assert_eq!(shared.solve()?.degrees_of_freedom, 1);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SharedError<'a> {
    /// Observed values y.
    pub observations: &'a [f64],
    /// The two columns of the design.
    pub columns: [&'a [f64]; 2],
    /// Independent standard uncertainties u, all positive.
    pub uncertainties: &'a [f64],
    /// Shared contribution c, signed.
    pub common: &'a [f64],
}

impl SharedError<'_> {
    /// Generalised least squares for the two parameters.
    ///
    /// The rows are whitened by V^(−½) = (I − γ c̃c̃ᵀ) diag(1/u) with c̃ = c/u, q² = 1 + c̃ᵀc̃ and γ = 1/(q(q+1)) (root of
    /// the inverse by Sherman and Morrison 1950); residuals and leverages of the result belong to the whitened rows.
    ///
    /// # Errors
    /// Lists of unequal length, entries that are not finite, uncertainties that are not positive, or dependent columns.
    pub fn solve(&self) -> Result<Fit> {
        self.check()?;
        let white = self.whitener();
        LeastSquares::new(&white(self.observations))
            .column("first", &white(self.columns[0]))
            .column("second", &white(self.columns[1]))
            .solve()
    }

    fn check(&self) -> Result<()> {
        let n = self.observations.len();
        require_length("uncertainties", self.uncertainties.len(), n)?;
        require_length("common", self.common.len(), n)?;
        require_length("first", self.columns[0].len(), n)?;
        require_length("second", self.columns[1].len(), n)?;
        require_uncertainties("uncertainties", self.uncertainties)?;
        require_finite("common", self.common)
    }

    fn whitener(&self) -> impl Fn(&[f64]) -> Vec<f64> {
        let uncertainties = self.uncertainties.to_vec();
        let c: Vec<f64> = self.common.iter().zip(&uncertainties).map(|(c, u)| c / u).collect();
        let q = (1.0 + c.iter().map(|c| c * c).sum::<f64>()).sqrt();
        let gamma = 1.0 / (q * (q + 1.0));
        move |values| {
            let rows: Vec<f64> = values.iter().zip(&uncertainties).map(|(value, u)| value / u).collect();
            let along = gamma * rows.iter().zip(&c).map(|(row, c)| row * c).sum::<f64>();
            rows.iter().zip(&c).map(|(row, c)| row - along * c).collect()
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const X: [f64; 6] = [0.3, 0.7, 1.2, 2.5, 5.1, 10.0];
    const Y: [f64; 6] = [1.09, 1.22, 1.37, 1.74, 2.55, 3.99];
    const U: [f64; 6] = [0.02, 0.015, 0.03, 0.02, 0.05, 0.04];
    const ONE: [f64; 6] = [1.0; 6];

    fn shared(common: &[f64]) -> Fit {
        SharedError { observations: &Y, columns: [&ONE, &X], uncertainties: &U, common }.solve().unwrap()
    }

    fn weighted() -> LeastSquares {
        LeastSquares::new(&Y).column("first", &ONE).column("second", &X).uncertainties(&U)
    }

    fn assert_pair(got: PairCovariance, expected: PairCovariance, relative: f64) {
        for (got, expected) in got.0.iter().flatten().zip(expected.0.iter().flatten()) {
            assert!((got / expected - 1.0).abs() < relative, "{got} instead of {expected}");
        }
    }

    /// A common error that looks like a change of the parameters leaves the estimate and adds its square.
    #[test]
    fn common_error_in_the_column_space_adds_afterwards() {
        let shift = [0.4, -0.13];
        let common = X.map(|x| shift[0] + shift[1] * x);
        let (general, plain) = (shared(&common), weighted().solve().unwrap());
        for (got, expected) in general.solution.iter().zip(&plain.solution) {
            assert!((got / expected - 1.0).abs() < 1e-12, "{got} instead of {expected}");
        }
        let added = PairCovariance::from_fit(&plain).unwrap().with_common(shift);
        assert_pair(PairCovariance::from_fit(&general).unwrap(), added, 1e-10);
        assert!((general.chi_squared / plain.chi_squared - 1.0).abs() < 1e-10);
    }

    /// One that falls off along the points does not: it changes the estimate, as the zero of a gauge does.
    #[test]
    fn common_error_outside_the_column_space_changes_the_estimate() {
        let common = X.map(|x| 0.1 / x);
        let (general, plain) = (shared(&common), weighted().solve().unwrap());
        assert!((general.solution[0] / plain.solution[0] - 1.0).abs() > 1e-3);
    }

    /// Whitening agrees with the shared error as a third parameter known beforehand to be 0 ± 1.
    #[test]
    fn shared_error_is_a_parameter_with_a_prior() {
        let common = X.map(|x| 0.1 / x);
        let (general, augmented) =
            (shared(&common), weighted().column("zero", &common).prior("zero", 0.0, 1.0).solve().unwrap());
        assert!((general.chi_squared / augmented.chi_squared - 1.0).abs() < 1e-12);
        assert_eq!(general.degrees_of_freedom, augmented.degrees_of_freedom);
        let v = &augmented.covariance;
        let expected = PairCovariance([[v[(0, 0)], v[(0, 1)]], [v[(1, 0)], v[(1, 1)]]]);
        assert_pair(PairCovariance::from_fit(&general).unwrap(), expected, 1e-12);
    }

    /// A fully common error correlates the parameters completely.
    #[test]
    fn correlation_of_a_common_error_alone() {
        let nothing = PairCovariance([[0.0; 2]; 2]);
        assert_eq!(nothing.correlation(), 0.0);
        assert!((nothing.with_common([0.3, -2.0]).correlation() + 1.0).abs() < 1e-15);
    }
}
