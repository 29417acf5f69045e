//! Axes: where a value lies along a line, and which values are worth a label.

use super::numbers;

/// A labelled (or, with an empty label, a minor) tick.
#[derive(Debug, Clone, PartialEq)]
pub struct Tick {
    /// Value at the tick.
    pub value: f64,
    /// Text beside it, in units of ten to the axis' exponent.
    pub label: String,
}

/// A linear or logarithmic axis. Any pair of limits gives a usable axis: equal or reversed ones are pulled apart.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    low: f64,
    high: f64,
    logarithmic: bool,
    /// Ticks from low to high.
    pub ticks: Vec<Tick>,
    /// Power of ten taken out of the labels.
    pub exponent: i32,
}

impl Axis {
    /// A linear axis with about `target` labels.
    pub fn linear(low: f64, high: f64, target: usize) -> Self {
        let (low, high) = apart(low, high);
        let step = nice_step((high - low) / target.max(1) as f64);
        let exponent = label_exponent(low.abs().max(high.abs()));
        let ticks = linear_ticks(low, high, step, exponent);
        Self { low, high, logarithmic: false, ticks, exponent }
    }

    /// A logarithmic axis; limits that are not positive fall back to three decades below the upper one.
    pub fn logarithmic(low: f64, high: f64) -> Self {
        let high = if high.is_finite() && high > 1e-290 { high.min(1e290) } else { 1.0 };
        let low = if low.is_finite() && low > 0.0 { low.max(high * 1e-12).min(high) } else { high * 1e-3 };
        let (low, high) = if high / low < 1.02 { (low / 1.25, high * 1.25) } else { (low, high) };
        let ticks = logarithmic_ticks(low, high);
        Self { low, high, logarithmic: true, ticks, exponent: 0 }
    }

    /// A logarithmic axis when the limits are positive and more than a decade apart, else a linear one from zero.
    pub fn spanning(low: f64, high: f64, target: usize) -> Self {
        if low > 0.0 && high / low > 10.0 {
            Self::logarithmic(low / 1.2, high * 1.2)
        } else {
            let high = if high > 0.0 || low < 0.0 { high * 1.05 } else { 1.0 };
            Self::linear(low.min(0.0), high, target)
        }
    }

    /// Where `value` lies, 0 at the lower and 1 at the upper end; values outside land on the nearer end.
    pub fn fraction(&self, value: f64) -> f64 {
        let part = if self.logarithmic {
            (value.max(f64::MIN_POSITIVE) / self.low).ln() / (self.high / self.low).ln()
        } else {
            (value - self.low) / (self.high - self.low)
        };
        if part.is_nan() { 0.0 } else { part.clamp(0.0, 1.0) }
    }

    /// The value at a fraction of the way along, so that curves can be sampled evenly on paper.
    pub fn at(&self, fraction: f64) -> f64 {
        if self.logarithmic {
            self.low * (self.high / self.low).powf(fraction)
        } else {
            self.low + (self.high - self.low) * fraction
        }
    }

    /// Whether `value` lies between the limits.
    pub fn contains(&self, value: f64) -> bool {
        (self.low..=self.high).contains(&value)
    }
}

/// Limits made finite, ordered and distinct.
fn apart(low: f64, high: f64) -> (f64, f64) {
    let bounded = |v: f64| if v.is_finite() { v.clamp(-1e290, 1e290) } else { 0.0 };
    let (low, high) = (bounded(low.min(high)), bounded(high.max(low)));
    let least = (low.abs().max(high.abs()) * 1e-9).max(1e-290);
    if high - low > least {
        return (low, high);
    }
    let room = if low == 0.0 && high == 0.0 { 1.0 } else { low.abs().max(high.abs()) * 0.01 };
    (low - room, high + room)
}

/// The power of ten to take out of labels of this magnitude, a multiple of three.
fn label_exponent(magnitude: f64) -> i32 {
    match numbers::exponent_of(magnitude) {
        Some(exponent) if !(-3..5).contains(&exponent) => exponent.div_euclid(3) * 3,
        _ => 0,
    }
}

/// The 1, 2 or 5 times a power of ten about as large as `rough`.
fn nice_step(rough: f64) -> f64 {
    let power = 10f64.powf(rough.log10().floor());
    [1.0, 2.0, 5.0].into_iter().map(|m| m * power).find(|step| *step >= rough * 0.7).unwrap_or(10.0 * power)
}

fn linear_ticks(low: f64, high: f64, step: f64, exponent: i32) -> Vec<Tick> {
    let (first, last) = ((low / step - 1e-6).ceil(), (high / step + 1e-6).floor());
    if !(step > 0.0 && (last - first).abs() < 60.0) {
        return Vec::new();
    }
    let decimals = numbers::exponent_of(step).map_or(0, |e| (exponent - e).max(0));
    let scale = 10f64.powi(exponent);
    let count = (last - first) as usize;
    let values = (0..=count).map(|i| (first + i as f64) * step);
    values.map(|value| Tick { value, label: numbers::fixed(value / scale, decimals) }).collect()
}

fn logarithmic_ticks(low: f64, high: f64) -> Vec<Tick> {
    let decades = (high / low).log10();
    if decades < 0.7 {
        let step = nice_step((high - low) / 5.0);
        return linear_ticks(low, high, step, 0);
    }
    let labelled: &[u8] = if decades < 2.3 { &[1, 2, 5] } else { &[1] };
    let stride = (decades / 6.0).ceil().max(1.0) as i32;
    let minor = decades < 4.0;
    let (first, last) = (low.log10().floor() as i32, high.log10().ceil() as i32);
    let mut ticks = Vec::new();
    for power in first..=last {
        for mantissa in 1..=9u8 {
            let value = f64::from(mantissa) * 10f64.powi(power);
            let named = labelled.contains(&mantissa) && power.rem_euclid(stride) == 0;
            let inside = value >= low * (1.0 - 1e-9) && value <= high * (1.0 + 1e-9);
            if inside && (named || minor) {
                let label = if named { numbers::significant(value, 1) } else { String::new() };
                ticks.push(Tick { value, label });
            }
        }
    }
    ticks
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(axis: &Axis) -> Vec<&str> {
        axis.ticks.iter().map(|t| t.label.as_str()).filter(|l| !l.is_empty()).collect()
    }

    #[test]
    fn linear_labels_are_round() {
        assert_eq!(labels(&Axis::linear(-0.3, 1.02, 5)), ["−0.2", "0.0", "0.2", "0.4", "0.6", "0.8", "1.0"]);
        let large = Axis::linear(3.38e11, 3.64e11, 6);
        assert_eq!((large.exponent, labels(&large)), (9, vec!["340", "345", "350", "355", "360"]));
    }

    #[test]
    fn logarithmic_labels_are_one_two_five() {
        assert_eq!(labels(&Axis::logarithmic(0.3, 25.0)), ["0.5", "1", "2", "5", "10", "20"]);
        assert_eq!(labels(&Axis::logarithmic(1.0, 1000.0)), ["1", "10", "100", "1000"]);
    }

    #[test]
    fn any_limits_give_finite_fractions() {
        let odd = [0.0, -1.0, 1.0, 1e-300, 1e300, f64::NAN, f64::INFINITY, f64::NEG_INFINITY, 5e11];
        for low in odd {
            for high in odd {
                for axis in [Axis::linear(low, high, 5), Axis::logarithmic(low, high), Axis::spanning(low, high, 5)] {
                    assert!(axis.ticks.len() < 60, "{low} {high}");
                    for value in odd {
                        assert!((0.0..=1.0).contains(&axis.fraction(value)), "{low} {high} {value}");
                    }
                }
            }
        }
    }
}
