//! Where set-points may lie between the lowest flow and full scale.

use serde::Serialize;

/// A way to lay set-points, as shares of full-scale flow.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Spacing {
    /// Each flow the same multiple of the one before.
    Geometric,
    /// Equal steps of flow.
    Linear,
    /// Half the points in the lower decade (or in the lower half of the logarithm, when the range is shorter than two
    /// decades), geometric; the rest in equal steps above.
    HalfLow,
}

impl Spacing {
    /// All spacings.
    pub const ALL: [Self; 3] = [Self::Geometric, Self::Linear, Self::HalfLow];

    /// The spacing in words.
    pub const fn words(self) -> &'static str {
        match self {
            Self::Geometric => "geometric",
            Self::Linear => "in equal steps",
            Self::HalfLow => "half of them in the lower decade",
        }
    }

    /// `n` shares (2 or more) from `low` to `high`, ascending.
    ///
    /// ```
    /// use evenbore_bench::planning::spacing::Spacing;
    /// let shares = Spacing::Geometric.shares(3, [0.01, 1.0]);
    /// assert!((shares[1] - 0.1).abs() < 1e-12);
    /// let shares = Spacing::HalfLow.shares(8, [0.01, 1.0]);
    /// assert_eq!(shares.iter().filter(|share| **share <= 0.1001).count(), 4);
    /// ```
    pub fn shares(self, n: usize, [low, high]: [f64; 2]) -> Vec<f64> {
        match self {
            Self::Geometric => geometric(n, low, high),
            Self::Linear => linear(n, low, high),
            Self::HalfLow => {
                let middle = (10.0 * low).min((low * high).sqrt());
                let below = n.div_ceil(2).max(2);
                let above = linear(n.saturating_sub(below) + 1, middle, high);
                geometric(below, low, middle).into_iter().chain(above.into_iter().skip(1)).collect()
            }
        }
    }
}

fn part(i: usize, n: usize) -> f64 {
    i as f64 / n.saturating_sub(1).max(1) as f64
}

fn geometric(n: usize, low: f64, high: f64) -> Vec<f64> {
    (0..n).map(|i| low * (high / low).powf(part(i, n))).collect()
}

fn linear(n: usize, low: f64, high: f64) -> Vec<f64> {
    (0..n).map(|i| low + (high - low) * part(i, n)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_spacing_ascends_from_low_to_high() {
        for spacing in Spacing::ALL {
            for n in 3..=15 {
                for low in [0.01, 0.1, 0.5] {
                    let shares = spacing.shares(n, [low, 1.0]);
                    assert_eq!(shares.len(), n, "{spacing:?}");
                    assert!(shares.windows(2).all(|pair| pair[0] < pair[1]), "{spacing:?} {shares:?}");
                    assert!((shares[0] - low).abs() < 1e-12 && (shares[n - 1] - 1.0).abs() < 1e-12);
                }
            }
        }
    }
}
