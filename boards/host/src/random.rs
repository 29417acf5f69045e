//! Seeded random numbers that are the same on every machine and never change with a dependency.

/// SplitMix64 (Steele, Lea & Flood 2014).
#[derive(Debug, Clone)]
pub struct Random(u64);

impl Random {
    /// The sequence of a seed.
    ///
    /// ```
    /// use evenbore_bench::random::Random;
    /// assert_eq!(Random::new(1).unit(), Random::new(1).unit());
    /// assert_ne!(Random::new(1).unit(), Random::new(2).unit());
    /// ```
    pub const fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// A sequence of its own for member `index` of a family.
    pub fn member(seed: u64, index: u64) -> Self {
        let mut first = Self(seed ^ index.wrapping_mul(0xD134_2543_DE82_EF95));
        Self(first.next())
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// Uniform from 0 up to 1.
    pub fn unit(&mut self) -> f64 {
        (self.next() >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Normal, mean 0, standard deviation 1 (Box & Muller 1958).
    pub fn normal(&mut self) -> f64 {
        (-2.0 * (1.0 - self.unit()).ln()).sqrt() * (std::f64::consts::TAU * self.unit()).cos()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn normal_deviates_have_their_moments() {
        let mut random = Random::new(1);
        let draws: Vec<f64> = (0..200_000).map(|_| random.normal()).collect();
        let moment = |n: i32| draws.iter().map(|z| z.powi(n)).sum::<f64>() / draws.len() as f64;
        assert!(moment(1).abs() < 0.01 && (moment(2) - 1.0).abs() < 0.01 && (moment(4) - 3.0).abs() < 0.06);
    }
}
