//! Straight line through points that are uncertain in both coordinates.

use super::rank_one::PairCovariance;
use super::{Result, StatisticsError, require, require_at_least, require_each, require_finite, require_length};

/// Largest step of the slope that counts as settled, relative to the slope its sum would give if no terms cancelled.
const STEP_LIMIT: f64 = 1e-15;

/// Iterations before giving up.
const ITERATION_LIMIT: usize = 1000;

/// Points with standard uncertainties in both coordinates and the correlation of the two errors of each point.
///
/// xᵢ ± u(xᵢ), yᵢ ± u(yᵢ), rᵢ (York, Evensen, Martínez and De Basabe Delgado, Am. J. Phys. 72 (2004) 367).
///
/// ```
/// use evenbore_bench::statistics::both_axes::Points;
/// let line = Points {
///     x: &[0.0, 1.0, 2.0],
///     y: &[1.0, 3.0, 5.0],
///     x_uncertainty: &[0.1, 0.1, 0.1],
///     y_uncertainty: &[0.2, 0.2, 0.2],
///     correlation: &[0.0, 0.5, -0.5],
/// }
/// .line()?;
/// assert!((line.slope - 2.0).abs() < 1e-12 && (line.intercept - 1.0).abs() < 1e-12);
/// # Ok::<(), evenbore_bench::statistics::StatisticsError>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Points<'a> {
    /// Abscissae.
    pub x: &'a [f64],
    /// Ordinates.
    pub y: &'a [f64],
    /// Standard uncertainties of the abscissae, zero allowed.
    pub x_uncertainty: &'a [f64],
    /// Standard uncertainties of the ordinates, zero allowed where the abscissa is uncertain.
    pub y_uncertainty: &'a [f64],
    /// Correlation of the two errors of each point, −1 to 1.
    pub correlation: &'a [f64],
}

/// Line fitted to [`Points`].
///
/// y = a + bx, with the covariance of (a, b) taken at the adjusted points (York et al. 2004).
///
/// ```
/// let covariance = evenbore_bench::statistics::rank_one::PairCovariance([[0.04, -0.01], [-0.01, 0.01]]);
/// let line = evenbore_bench::statistics::both_axes::Line {
///     intercept: 1.0, slope: 2.0, covariance, chi_squared: 3.1, degrees_of_freedom: 4, iterations: 7,
/// };
/// assert_eq!(line.covariance.standard_uncertainties(), [0.2, 0.1]);
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// a.
    pub intercept: f64,
    /// b.
    pub slope: f64,
    /// Covariance of (a, b) for the stated uncertainties.
    pub covariance: PairCovariance,
    /// Σ Wᵢ(yᵢ − a − bxᵢ)².
    pub chi_squared: f64,
    /// Points less two.
    pub degrees_of_freedom: usize,
    /// Iterations spent.
    pub iterations: usize,
}

impl Points<'_> {
    /// Line of least squares in both coordinates.
    ///
    /// b = ΣWβV / ΣWβU with Wᵢ = 1/(u_y² + b²u_x² − 2b r u_x u_y), U and V the distances from the weighted means and
    /// β = W(U u_y² + bV u_x² − (bU + V) r u_x u_y), repeated until b rests (York et al. 2004).
    ///
    /// # Errors
    /// Lists of unequal length, fewer than two points, entries outside their domain, points that lie above each other,
    /// a point without any uncertainty across the line, or a slope that does not settle.
    pub fn line(&self) -> Result<Line> {
        self.check()?;
        let mut state = self.weigh(self.unweighted_slope()?)?;
        let mut step = f64::NAN;
        for iterations in 1..=ITERATION_LIMIT {
            let (slope, gross) = state.next_slope()?;
            step = (slope - state.slope).abs() / gross;
            state = self.weigh(slope)?;
            if step <= STEP_LIMIT {
                return Ok(state.line(iterations));
            }
        }
        Err(StatisticsError::NoConvergence { iterations: ITERATION_LIMIT, step, limit: STEP_LIMIT })
    }

    fn check(&self) -> Result<()> {
        require_at_least("points", self.x.len(), 2)?;
        let not_negative = |u: f64| u >= 0.0 && u.is_finite();
        for (name, list) in [("y", self.y), ("x_uncertainty", self.x_uncertainty)] {
            require_length(name, list.len(), self.x.len())?;
        }
        for (name, list) in [("y_uncertainty", self.y_uncertainty), ("correlation", self.correlation)] {
            require_length(name, list.len(), self.x.len())?;
        }
        require_finite("x", self.x)?;
        require_finite("y", self.y)?;
        require_each("x_uncertainty", self.x_uncertainty, "zero or more and finite", not_negative)?;
        require_each("y_uncertainty", self.y_uncertainty, "zero or more and finite", not_negative)?;
        require_each("correlation", self.correlation, "between -1 and 1", |r| r.abs() <= 1.0)
    }

    /// Slope to start from.
    fn unweighted_slope(&self) -> Result<f64> {
        let n = self.x.len() as f64;
        let (x_mean, y_mean) = (self.x.iter().sum::<f64>() / n, self.y.iter().sum::<f64>() / n);
        let spread: f64 = self.x.iter().map(|x| (x - x_mean).powi(2)).sum();
        require(spread > 0.0, "spread of x", spread, "positive")?;
        Ok(self.x.iter().zip(self.y).map(|(x, y)| (x - x_mean) * (y - y_mean)).sum::<f64>() / spread)
    }

    /// Variances and covariance of point `i`.
    fn spread(&self, i: usize) -> [f64; 3] {
        let (ux, uy) = (self.x_uncertainty[i], self.y_uncertainty[i]);
        [ux * ux, uy * uy, self.correlation[i] * ux * uy]
    }

    /// Weights and weighted means for a slope.
    fn weigh(&self, slope: f64) -> Result<State<'_>> {
        let across = |i| {
            let [xx, yy, xy] = self.spread(i);
            yy + slope * (slope * xx - 2.0 * xy)
        };
        let variances: Vec<f64> = (0..self.x.len()).map(across).collect();
        require_each("variance across the line", &variances, "positive", |v| v > 0.0 && v.is_finite())?;
        let weights: Vec<f64> = variances.iter().map(|v| 1.0 / v).collect();
        let total: f64 = weights.iter().sum();
        let mean = |list: &[f64]| weights.iter().zip(list).map(|(w, z)| w * (z - list[0])).sum::<f64>() / total;
        Ok(State { x_mean: mean(self.x), y_mean: mean(self.y), points: self, slope, weights, total })
    }
}

/// One turn of the iteration: everything that follows from a slope.
struct State<'a> {
    points: &'a Points<'a>,
    slope: f64,
    weights: Vec<f64>,
    total: f64,
    /// Weighted means, counted from the first point so that a distant origin costs no digits.
    x_mean: f64,
    y_mean: f64,
}

impl State<'_> {
    /// U and V of point `i`.
    fn distances(&self, i: usize) -> (f64, f64) {
        let (x, y) = (self.points.x, self.points.y);
        (x[i] - x[0] - self.x_mean, y[i] - y[0] - self.y_mean)
    }

    /// β of point `i`, the adjusted distance of its abscissa from the mean.
    fn adjusted(&self, i: usize) -> f64 {
        let ([xx, yy, xy], (u, v)) = (self.points.spread(i), self.distances(i));
        self.weights[i] * (u * yy + self.slope * v * xx - (self.slope * u + v) * xy)
    }

    /// The next slope, and the size it would have if every term of its numerator had the same sign.
    fn next_slope(&self) -> Result<(f64, f64)> {
        let (mut above, mut gross, mut below) = (0.0, 0.0, 0.0);
        for (i, weight) in self.weights.iter().enumerate() {
            let (u, v) = self.distances(i);
            let beta = weight * self.adjusted(i);
            above += beta * v;
            gross += (beta * v).abs();
            below += beta * u;
        }
        require((above / below).is_finite(), "slope", above / below, "finite")?;
        Ok((above / below, (gross / below).abs().max(f64::MIN_POSITIVE)))
    }

    /// Weighted mean of the adjusted distances and the weighted sum of squares about it.
    fn adjusted_moments(&self) -> (f64, f64) {
        let each = || self.weights.iter().enumerate().map(|(i, weight)| (weight, self.adjusted(i)));
        let mean = each().map(|(weight, beta)| weight * beta).sum::<f64>() / self.total;
        (mean, each().map(|(weight, beta)| weight * (beta - mean).powi(2)).sum())
    }

    fn chi_squared(&self) -> f64 {
        let distance = |i| self.distances(i);
        let term = |(i, weight): (usize, &f64)| weight * (distance(i).1 - self.slope * distance(i).0).powi(2);
        self.weights.iter().enumerate().map(term).sum()
    }

    fn line(&self, iterations: usize) -> Line {
        let (mean, moment) = self.adjusted_moments();
        let (x, variance) = (self.points.x[0] + self.x_mean + mean, 1.0 / moment);
        Line {
            intercept: self.points.y[0] + self.y_mean - self.slope * (self.points.x[0] + self.x_mean),
            slope: self.slope,
            covariance: PairCovariance([
                [1.0 / self.total + x * x * variance, -x * variance],
                [-x * variance, variance],
            ]),
            chi_squared: self.chi_squared(),
            degrees_of_freedom: self.weights.len() - 2,
            iterations,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn fit(x: &[f64], y: &[f64], ux: &[f64], uy: &[f64], r: &[f64]) -> Result<Line> {
        Points { x, y, x_uncertainty: ux, y_uncertainty: uy, correlation: r }.line()
    }

    /// What cannot carry a line is refused by name.
    #[test]
    fn refusals() {
        let (x, y, u, r) = ([0.0, 1.0, 2.0], [0.0, 1.0, 3.0], [0.1; 3], [0.0; 3]);
        let refused = |result: Result<Line>, word: &str| assert!(result.unwrap_err().to_string().contains(word));
        refused(fit(&[1.0; 3], &y, &u, &u, &r), "spread of x");
        refused(fit(&x, &y, &[0.0; 3], &[0.1, 0.0, 0.1], &r), "variance across the line");
        refused(fit(&x, &y, &u, &u, &[0.0, 0.0, 1.5]), "entry 2 of correlation is 1.5");
        refused(fit(&x, &y[..2], &u, &u, &r), "y has 2 entries, 3");
        refused(fit(&x[..1], &y, &u, &u, &r), "points has 1 entries, 2");
        refused(fit(&x, &y, &[-0.1; 3], &u, &r), "entry 0 of x_uncertainty");
    }

    /// A level line and a distant origin settle as well as any other.
    #[test]
    fn level_and_distant_points_settle() {
        let (x, u) = ([1e6, 1e6 + 1.0, 1e6 + 2.0, 1e6 + 3.0], [0.1, 0.2, 0.1, 0.3]);
        assert!(fit(&x, &[5.0, 6.0, 6.0, 5.0], &u, &u, &[0.3; 4]).unwrap().iterations < 50);
        assert_eq!(fit(&x, &[7.0; 4], &u, &u, &[0.0; 4]).unwrap().slope, 0.0);
    }
}
