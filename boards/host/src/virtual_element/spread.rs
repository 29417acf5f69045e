//! Unequal bores in a bundle: a normal distribution replaced by a few classes.

use super::refused::{Refused, within};

/// Gauss-Hermite points for a standard normal variable and their probabilities (Abramowitz & Stegun 1964, table 25.10,
/// five points): exact for polynomials to the ninth power, so for the fourth power of Poiseuille.
const CLASSES: [(f64, f64); 5] = [
    (-2.856_970_013_872_805_6, 0.011_257_411_327_720_7),
    (-1.355_626_179_974_266, 0.222_075_922_005_612_6),
    (0.0, 0.533_333_333_333_333_3),
    (1.355_626_179_974_266, 0.222_075_922_005_612_6),
    (2.856_970_013_872_805_6, 0.011_257_411_327_720_7),
];

/// Relative standard deviation of the bore (or gap) from channel to channel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Spread {
    relative: f64,
}

impl Spread {
    /// All channels alike.
    pub const fn none() -> Self {
        Self { relative: 0.0 }
    }

    /// Bores spread normally by a relative standard deviation.
    ///
    /// # Errors
    /// The deviation is outside 0..0.2.
    pub fn normal(relative: f64) -> Result<Self, Refused> {
        Ok(Self { relative: within("relative spread of the bore", relative, 0.0, 0.2)? })
    }

    /// The relative standard deviation.
    pub fn relative(&self) -> f64 {
        self.relative
    }

    /// Classes, smallest first: factor of the bore, share of the channels.
    pub(crate) fn classes(&self) -> Vec<(f64, f64)> {
        if self.relative == 0.0 {
            return vec![(1.0, 1.0)];
        }
        CLASSES.iter().map(|(deviation, share)| (1.0 + self.relative * deviation, *share)).collect()
    }

    /// Factor of the largest class.
    pub(crate) fn largest(&self) -> f64 {
        1.0 + self.relative * if self.relative == 0.0 { 0.0 } else { CLASSES[4].0 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn classes_carry_the_moments_of_the_normal_distribution() {
        let moment = |n: i32| CLASSES.iter().map(|(z, share)| share * z.powi(n)).sum::<f64>();
        for (n, expected) in [(0, 1.0), (1, 0.0), (2, 1.0), (4, 3.0), (6, 15.0), (8, 105.0)] {
            assert!((moment(n) - expected).abs() < 1e-10, "{n}: {}", moment(n));
        }
    }
}
