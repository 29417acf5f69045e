//! What a sensor makes of a true value: lag, gain, zero and its drift, noise, range, steps.

use crate::random::Random;

/// A sensor of one quantity, in SI.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sensor {
    /// Time constant, s.
    pub lag: f64,
    /// Relative error of the slope.
    pub gain: f64,
    /// Error at zero.
    pub zero: f64,
    /// Change of the zero per second.
    pub drift: f64,
    /// Standard deviation of the noise.
    pub noise: f64,
    /// Noise in proportion to the value, relative.
    pub noise_rel: f64,
    /// Smallest step.
    pub resolution: f64,
    /// What it can read.
    pub range: [f64; 2],
}

impl Sensor {
    /// A sensor without error.
    pub const EXACT: Self = Self {
        lag: 0.0,
        gain: 0.0,
        zero: 0.0,
        drift: 0.0,
        noise: 0.0,
        noise_rel: 0.0,
        resolution: 0.0,
        range: [f64::NEG_INFINITY, f64::INFINITY],
    };

    /// The reading of a true value at a time (s); `followed` is what the lagging sensor has come to, and `step` the time
    /// since its last reading. `about` is the value at which gain changes nothing (0 for a temperature in C).
    pub fn read(
        &self,
        value: f64,
        about: f64,
        [time, step]: [f64; 2],
        followed: &mut Option<f64>,
        random: &mut Random,
    ) -> f64 {
        let before = followed.unwrap_or(value);
        let felt = if self.lag > 0.0 { value + (before - value) * (-step / self.lag).exp() } else { value };
        *followed = Some(felt);
        // One deviate for each reading whatever the noise, so that a change of one sensor leaves the others as they are.
        let deviate = random.normal();
        let off = felt - about;
        let noise = self.noise.hypot(self.noise_rel * off) * deviate;
        let read = (off * (1.0 + self.gain) + self.zero + self.drift * time + noise + about)
            .clamp(self.range[0], self.range[1]);
        if self.resolution > 0.0 { about + ((read - about) / self.resolution).round() * self.resolution } else { read }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_sensor_does_what_it_is_told() {
        let mut random = Random::new(1);
        let mut read = |sensor: Sensor, value: f64| sensor.read(value, 0.0, [3600.0, 1.0], &mut None, &mut random);
        assert_eq!(read(Sensor::EXACT, 12.5), 12.5);
        assert_eq!(read(Sensor { gain: 0.1, zero: 1.0, drift: 1.0 / 3600.0, ..Sensor::EXACT }, 10.0), 13.0);
        assert_eq!(read(Sensor { resolution: 0.5, ..Sensor::EXACT }, 10.3), 10.5);
        assert_eq!(read(Sensor { range: [0.0, 8.0], ..Sensor::EXACT }, 10.0), 8.0);
        let mut random = Random::new(1);
        let (slow, mut felt) = (Sensor { lag: 10.0, ..Sensor::EXACT }, Some(0.0));
        let after = slow.read(1.0, 0.0, [0.0, 10.0], &mut felt, &mut random);
        assert!((after - (1.0 - (-1.0_f64).exp())).abs() < 1e-12);
    }
}
