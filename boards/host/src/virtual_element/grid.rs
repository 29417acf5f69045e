//! Points across the channel and the operators on them.
//!
//! The coordinate s is the share of the open area between the centre (0) and a point: `(r/R)^2` in a tube, `y/h` between
//! plates. Points are the Gauss-Lobatto points of a Legendre polynomial in xi, with
//! `s = 1 - (1 - w)(1 - xi)^3 - w (1 - xi)`: denser towards the wall, and a parabola in r or y stays a polynomial.

use nalgebra::{DMatrix, DVector};

/// ds/dxi at the wall, w above.
const WALL_SLOPE: f64 = 0.002;

/// Points, weights and operators; the last point is the wall.
#[derive(Debug, Clone)]
pub(crate) struct Grid {
    /// s of each point.
    pub share: DVector<f64>,
    /// ds/dxi.
    pub slope: DVector<f64>,
    /// Weights of the integral over the section, `w_i ds/dxi`; they add up to 1.
    pub weight: DVector<f64>,
    /// d/dxi at the points.
    pub derivative: DMatrix<f64>,
    /// Transposed derivative times weights in xi: applied to a flux it gives its weak divergence, negative.
    pub weak: DMatrix<f64>,
    /// Integral over s from the centre to each point.
    pub integral: DMatrix<f64>,
}

impl Grid {
    /// A grid of `degree + 1` points.
    pub fn new(degree: usize) -> Self {
        let points = lobatto(degree);
        let n = points.len();
        let top = |i: usize| legendre(degree, points[i])[degree];
        let weights = DVector::from_fn(n, |i, _| 1.0 / ((degree * n) as f64 * top(i) * top(i)));
        let zeta = DVector::from_fn(n, |i, _| 0.5 * (1.0 - points[i]));
        let slope = zeta.map(|z| WALL_SLOPE + 3.0 * (1.0 - WALL_SLOPE) * z * z);
        let share = zeta.map(|z| 1.0 - z * (WALL_SLOPE + (1.0 - WALL_SLOPE) * z * z));
        let derivative = differentiation(&points);
        let weak = derivative.transpose() * DMatrix::from_diagonal(&weights);
        let integral = integration(degree, &points, &weights) * DMatrix::from_diagonal(&slope);
        let weight = weights.component_mul(&slope);
        Self { share, slope, weight, derivative, weak, integral }
    }

    /// Number of points.
    pub fn len(&self) -> usize {
        self.share.len()
    }
}

/// P_0..P_degree at x, and one beyond (Bonnet's recursion).
fn legendre(degree: usize, x: f64) -> Vec<f64> {
    let mut p = vec![1.0, x];
    for n in 1..=degree {
        let k = n as f64;
        p.push(((2.0 * k + 1.0) * x * p[n] - k * p[n - 1]) / (k + 1.0));
    }
    p
}

/// Zeros of `(1 - x^2) P'_degree`, ascending, by Newton's method from Chebyshev's points.
fn lobatto(degree: usize) -> Vec<f64> {
    let n = degree as f64;
    let polish = |i: usize| {
        let mut x = -(std::f64::consts::PI * i as f64 / n).cos();
        for _ in 0..50 {
            let p = legendre(degree, x);
            x -= (x * p[degree] - p[degree - 1]) / ((n + 1.0) * p[degree]);
        }
        x
    };
    (0..=degree).map(polish).collect()
}

/// d/dxi of the polynomial through the points, by barycentric weights; rows add up to zero.
fn differentiation(points: &[f64]) -> DMatrix<f64> {
    let n = points.len();
    let weight = |j: usize| -> f64 {
        points.iter().enumerate().filter(|(k, _)| *k != j).map(|(_, x)| 0.5 / (points[j] - x)).product()
    };
    let weights: Vec<f64> = (0..n).map(weight).collect();
    // d/dxi = 2 d/dx: xi runs over half the length of x.
    let entry = |i: usize, j: usize| {
        if i == j { 0.0 } else { 2.0 * weights[j] / weights[i] / (points[i] - points[j]) }
    };
    let mut matrix = DMatrix::from_fn(n, n, entry);
    for i in 0..n {
        matrix[(i, i)] = -matrix.row(i).sum();
    }
    matrix
}

/// Integral over xi from the first point of the polynomial through the points, by its Legendre series.
fn integration(degree: usize, points: &[f64], weights: &DVector<f64>) -> DMatrix<f64> {
    let table: Vec<Vec<f64>> = points.iter().map(|&x| legendre(degree, x)).collect();
    let term = |n: usize, k: usize| match n {
        0 => points[k] + 1.0,
        _ => (table[k][n + 1] - table[k][n - 1]) / (2 * n + 1) as f64,
    };
    // The weights of the integral over x are twice those over xi; the integral itself is halved back.
    let norm = |n: usize| if n == degree { 2.0 / degree as f64 } else { 2.0 / (2 * n + 1) as f64 };
    let entry =
        |k: usize, l: usize| -> f64 { (0..=degree).map(|n| weights[l] * table[l][n] / norm(n) * term(n, k)).sum() };
    DMatrix::from_fn(points.len(), points.len(), entry)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn operators_are_exact_for_polynomials() {
        let grid = Grid::new(12);
        let xi = DVector::from_iterator(13, lobatto(12).iter().map(|x| 0.5 * (1.0 + x)));
        let slope = &grid.derivative * xi.map(|x| x.powi(5));
        assert!((slope - xi.map(|x| 5.0 * x.powi(4))).amax() < 1e-11);
        let volume = &grid.integral * grid.share.map(|s| s * s);
        assert!((volume - grid.share.map(|s| s.powi(3) / 3.0)).amax() < 1e-14);
        assert!((grid.weight.sum() - 1.0).abs() < 1e-14);
        assert!((grid.weight.dot(&grid.share) - 0.5).abs() < 1e-14);
    }
}
