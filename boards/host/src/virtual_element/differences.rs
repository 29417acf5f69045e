//! Differences along the channel on uneven steps, from the polynomial through the newest positions.

/// Weights of the derivative at `z` of the polynomial through values at `z` (first weight) and at `past` (newest first).
///
/// `c_j = l_j'(z)` (Lagrange); with one past position this is the backward Euler step, with more the backward
/// differentiation formulae (Curtiss & Hirschfelder 1952) on uneven steps.
pub(crate) fn derivative(z: f64, past: &[f64]) -> Vec<f64> {
    let first = past.iter().map(|x| 1.0 / (z - x)).sum();
    let others = (0..past.len()).map(|j| {
        let numerator: f64 = but(past, j).map(|x| z - x).product();
        let denominator: f64 = but(past, j).map(|x| past[j] - x).product();
        numerator / (denominator * (past[j] - z))
    });
    std::iter::once(first).chain(others).collect()
}

/// Weights that carry the polynomial through values at `past` on to `z`.
pub(crate) fn extrapolation(z: f64, past: &[f64]) -> Vec<f64> {
    let weight = |j: usize| but(past, j).map(|x| (z - x) / (past[j] - x)).product();
    (0..past.len()).map(weight).collect()
}

/// All of a list but its entry `j`.
fn but(list: &[f64], j: usize) -> impl Iterator<Item = &f64> {
    list.iter().enumerate().filter(move |(k, _)| *k != j).map(|(_, x)| x)
}

/// Length before the outlet over which steps shorten, and their shortest, as shares of the length and the longest step:
/// a gas accelerates towards the outlet.
const APPROACH: f64 = 0.5;
const SHORTEST: f64 = 0.1;

/// Positions from the inlet to `length`: the first step `first`, each next `growth` times longer, none above `longest`,
/// shorter again towards the outlet.
pub(crate) fn positions(length: f64, first: f64, growth: f64, longest: f64) -> Vec<f64> {
    let mut list = vec![0.0];
    let (mut z, mut step) = (0.0, first.min(length));
    while z + 1.5 * step < length {
        z += step;
        list.push(z);
        let near = ((1.0 - z / length) / APPROACH).clamp(SHORTEST, 1.0);
        step = (step * growth).min(longest * near);
    }
    list.push(length);
    list
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn weights_are_exact_for_cubics() {
        let (z, past) = (1.0, [0.7, 0.5, 0.1]);
        let cubic = |x: f64| 2.0 + x * (1.0 - x * (3.0 - x));
        let weights = derivative(z, &past);
        let slope: f64 = weights.iter().zip([z].iter().chain(&past)).map(|(c, x)| c * cubic(*x)).sum();
        assert!((slope - (1.0 - 6.0 + 3.0)).abs() < 1e-12, "{slope}");
        let square: f64 = extrapolation(z, &past).iter().zip(&past).map(|(e, x)| e * x * x).sum();
        assert!((square - 1.0).abs() < 1e-12);
    }

    #[test]
    fn positions_end_at_the_outlet() {
        let list = positions(1.0, 1e-6, 1.2, 0.05);
        assert_eq!((list[0], list[list.len() - 1]), (0.0, 1.0));
        assert!(list.windows(2).all(|pair| pair[1] > pair[0]));
    }
}
