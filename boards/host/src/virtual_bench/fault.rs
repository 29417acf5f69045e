//! What goes wrong on a bench, and when.
//!
//! Faults of the flow change the truth and what follows from it; faults of a sensor change its reading alone.

/// A quantity that is read.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Channel {
    /// Pressure drop, Pa.
    PressureDrop,
    /// Temperature, C outside, K inside.
    Temperature,
    /// Line pressure, Pa.
    LinePressure,
    /// Relative humidity, 0 to 1.
    RelativeHumidity,
    /// Reference flow, m3/s at the element's inlet.
    ReferenceFlow,
}

impl Channel {
    /// All, in the order of the file's columns.
    pub const ALL: [Self; 5] =
        [Self::PressureDrop, Self::Temperature, Self::LinePressure, Self::RelativeHumidity, Self::ReferenceFlow];
    /// Names in a scenario.
    pub const NAMES: [&'static str; 5] =
        ["pressure_drop", "temperature", "line_pressure", "relative_humidity", "reference_flow"];
    /// Units of their settings in a scenario.
    pub const UNITS: [&'static str; 5] = ["Pa", "K", "kPa", "pct", "L_min"];
    /// The same units in SI.
    pub const FACTORS: [f64; 5] = [1.0, 1.0, 1e3, 0.01, 1.0 / 60e3];
}

/// What goes wrong.
#[derive(Debug, Clone, PartialEq)]
pub enum Kind {
    /// Additional noise of a sensor, standard deviation.
    Noise(f64),
    /// Coarse steps of a sensor.
    Quantisation(f64),
    /// Relative error of a sensor's slope.
    Gain(f64),
    /// Error of a sensor's zero.
    Zero(f64),
    /// Error of a sensor's zero that grows from the start of the fault, per second.
    Drift(f64),
    /// A sensor that follows slowly, time constant in s.
    Lag(f64),
    /// A sensor that reads no more than this.
    Saturation(f64),
    /// A sensor that repeats the reading before the fault.
    Stuck,
    /// A sensor without a reading.
    Open,
    /// Readings off by this much, either way, in a share of all.
    Spikes(f64, f64),
    /// No reading in a share of all.
    Dropouts(f64),
    /// The two ports of the element exchanged: the pressure drop changes its sign, the line pressure is that behind.
    SwappedPorts,
    /// Flow (m3/s at the inlet) that passes the element but not the reference.
    Leak(f64),
    /// Pressure drop that oscillates faster than it is read: root mean square over mean.
    Pulsation(f64),
    /// Another fluid than the declared one.
    WrongGas(String),
    /// Above a Reynolds number the pressure drop rises: by this share for each 1000 of Reynolds number.
    Transition {
        /// Reynolds number at which it begins.
        from: f64,
        /// Relative rise for each 1000.
        rise: f64,
    },
}

/// Names of the kinds in a scenario.
pub const KINDS: [&str; 16] = [
    "noise",
    "quantisation",
    "gain",
    "zero",
    "drift",
    "lag",
    "saturation",
    "stuck",
    "open",
    "spikes",
    "dropouts",
    "swapped-ports",
    "leak",
    "pulsation",
    "wrong-gas",
    "transition",
];

/// A fault and its time.
#[derive(Debug, Clone, PartialEq)]
pub struct Fault {
    /// Name of its kind.
    pub name: &'static str,
    /// What goes wrong.
    pub kind: Kind,
    /// Of which sensor; none for a fault of the flow.
    pub channel: Option<Channel>,
    /// From when until when, s.
    pub during: [f64; 2],
}

impl Fault {
    /// Whether it acts at a time.
    pub fn acts(&self, time: f64) -> bool {
        time >= self.during[0] && time <= self.during[1]
    }
}
