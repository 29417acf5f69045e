//! Zero: the pressure drop that is read when there is none.

use super::damping::Lag;
use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::PressureDrop;
use crate::reading::{SensorUncertainty, Trims};
use core::fmt;

/// How it is known that nothing flows. A zero can only be taken or followed by whoever states one of these; that the
/// reading is small proves nothing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum NoFlow {
    /// Valves on both sides of the element are shut.
    ShutOff,
    /// The two pressure ports of the sensor are joined and shut off from the element.
    PortsJoined,
    /// The element is out of the line and still air surrounds both ports.
    OutOfLine,
}

/// What a zero may be.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ZeroLimits {
    readings: u16,
    offset_pa: f32,
    scatter_pa: f32,
    resolution_pa: f32,
}

impl ZeroLimits {
    /// A zero of `readings` readings, of at most `offset` either way, whose readings scatter by at most `scatter`
    /// (standard deviation) and resolve `resolution`.
    ///
    /// # Errors
    /// Names a number of readings outside 2..10 000 or a pressure outside 0..100 kPa (the trim's own limit).
    pub fn new(
        readings: u16,
        offset: PressureDrop,
        scatter: PressureDrop,
        resolution: PressureDrop,
    ) -> Result<Self, Error> {
        within("readings of a zero", f32::from(readings), 2.0, 1e4)?;
        Ok(Self {
            readings,
            offset_pa: within("largest zero (Pa)", offset.as_pascals(), 0.0, 1e5)?,
            scatter_pa: within("largest scatter of a zero (Pa)", scatter.as_pascals(), 0.0, 1e5)?,
            resolution_pa: within("resolution of a zero (Pa)", resolution.as_pascals(), 0.0, 1e5)?,
        })
    }
}

/// Why a zero was not taken. The zero in use stays.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum ZeroRefusal {
    /// The mean exceeds the largest zero.
    TooLarge(PressureDrop),
    /// The readings scatter too much for nothing to flow; their standard deviation.
    Unsteady(PressureDrop),
    /// A reading was not finite.
    NotFinite,
}

impl fmt::Display for ZeroRefusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::TooLarge(_) => "the zero is too large",
            Self::Unsteady(_) => "the readings are unsteady",
            Self::NotFinite => "a reading is not finite",
        })
    }
}

impl core::error::Error for ZeroRefusal {}

/// A zero and its standard uncertainty.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Zero {
    /// The pressure drop that is read at no flow.
    pub offset: PressureDrop,
    /// Its standard uncertainty, `u^2 = s^2/n + r^2/12` (JCGM 100:2008, 4.2.3 and F.2.2.1) with `s` the standard
    /// deviation of `n` independent readings and `r` their resolution.
    pub uncertainty: PressureDrop,
}

impl Zero {
    /// The trims with this zero in the place of theirs. The readings that made the zero must have been untrimmed.
    pub fn trims(&self, trims: Trims) -> Trims {
        Trims { pressure_drop_zero_pa: self.offset.as_pascals(), ..trims }
    }

    /// The sensors' uncertainties with this zero's in the absolute part of the pressure drop, added in squares.
    pub fn sensors(&self, sensors: SensorUncertainty) -> SensorUncertainty {
        let (u, zero) = (sensors.pressure_drop_pa, self.uncertainty.as_pascals());
        SensorUncertainty { pressure_drop_pa: (u * u + zero * zero).root(), ..sensors }
    }
}

/// Takes a zero: the mean of the readings at a proven absence of flow, or a reason why not.
///
/// ```
/// use evenbore::conditioning::zero::{NoFlow, ZeroCapture, ZeroLimits};
/// use evenbore::quantity::PressureDrop;
/// let pa = PressureDrop::from_pascals;
/// let mut capture = ZeroCapture::new(ZeroLimits::new(4, pa(5.0), pa(0.5), pa(0.1))?, NoFlow::ShutOff);
/// for reading in [1.1, 0.9, 1.2] {
///     assert_eq!(capture.add(pa(reading))?, None);
/// }
/// let zero = capture.add(pa(0.8))?.ok_or("four readings")?;
/// assert!((zero.offset.as_pascals() - 1.0).abs() < 1e-6);
/// assert!((zero.uncertainty.as_pascals() - 0.0957).abs() < 1e-4);
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ZeroCapture {
    limits: ZeroLimits,
    proof: NoFlow,
    taken: u16,
    mean: f32,
    squares: f32,
}

impl ZeroCapture {
    /// Begins to take a zero.
    pub const fn new(limits: ZeroLimits, proof: NoFlow) -> Self {
        Self { limits, proof, taken: 0, mean: 0.0, squares: 0.0 }
    }

    /// How it is known that nothing flows, for the event log.
    pub const fn proof(&self) -> NoFlow {
        self.proof
    }

    /// Readings still wanted.
    pub const fn missing(&self) -> u16 {
        self.limits.readings.saturating_sub(self.taken)
    }

    /// Takes a reading; gives the zero with the last one wanted, and then begins anew.
    ///
    /// Mean and sum of squares by the updating formula of Welford (1962).
    ///
    /// # Errors
    /// Why there is no zero; the capture begins anew.
    pub fn add(&mut self, reading: PressureDrop) -> Result<Option<Zero>, ZeroRefusal> {
        let x = reading.as_pascals();
        if !x.is_finite() {
            *self = Self::new(self.limits, self.proof);
            return Err(ZeroRefusal::NotFinite);
        }
        self.taken = self.taken.saturating_add(1);
        let away = x - self.mean;
        self.mean += away / f32::from(self.taken);
        self.squares += away * (x - self.mean);
        if self.missing() > 0 {
            return Ok(None);
        }
        let whole = *self;
        *self = Self::new(self.limits, self.proof);
        whole.judge().map(Some)
    }

    fn judge(&self) -> Result<Zero, ZeroRefusal> {
        let (n, resolution) = (f32::from(self.taken), self.limits.resolution_pa);
        let variance = self.squares / (n - 1.0);
        if !(variance.is_finite() && self.mean.is_finite()) {
            return Err(ZeroRefusal::NotFinite);
        }
        let offset = PressureDrop::from_pascals(self.mean);
        let scatter = variance.at_least(0.0).root();
        if scatter > self.limits.scatter_pa {
            return Err(ZeroRefusal::Unsteady(PressureDrop::from_pascals(scatter)));
        }
        if self.mean.magnitude() > self.limits.offset_pa {
            return Err(ZeroRefusal::TooLarge(offset));
        }
        let u = (variance.at_least(0.0) / n + resolution * resolution / 12.0).root();
        Ok(Zero { offset, uncertainty: PressureDrop::from_pascals(u) })
    }
}

/// Follows a zero as it drifts, only while nothing is proven to flow and never further than allowed.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ZeroTracking {
    captured: Zero,
    lag: Lag,
    drift_pa: f32,
    drifted: bool,
}

impl ZeroTracking {
    /// Follows from a captured zero with a time constant of `seconds`, up to `drift` away from it either way.
    ///
    /// # Errors
    /// Names a time constant outside 1..10 000 s or a drift outside 0..100 kPa.
    pub fn new(captured: Zero, seconds: f32, drift: PressureDrop) -> Result<Self, Error> {
        within("time constant of zero tracking (s)", seconds, 1.0, 1e4)?;
        within("captured zero (Pa)", captured.offset.as_pascals(), -1e5, 1e5)?;
        let drift_pa = within("largest zero drift (Pa)", drift.as_pascals(), 0.0, 1e5)?;
        let lag = Lag::new(seconds)?.starting_at(captured.offset.as_pascals());
        Ok(Self { captured, lag, drift_pa, drifted: false })
    }

    /// Takes an untrimmed reading. Without proof that nothing flows nothing changes.
    pub fn update(&mut self, reading: PressureDrop, elapsed_ms: u32, proof: Option<NoFlow>) {
        if proof.is_none() {
            return;
        }
        let mut next = self.lag;
        next.update(reading.as_pascals(), elapsed_ms);
        let away = next.value().unwrap_or(0.0) - self.captured.offset.as_pascals();
        self.drifted = away.magnitude() > self.drift_pa;
        if !self.drifted {
            self.lag = next;
        }
    }

    /// The zero now, with the uncertainty of the captured one.
    pub fn zero(&self) -> Zero {
        Zero { offset: self.lag.value().map_or(self.captured.offset, PressureDrop::from_pascals), ..self.captured }
    }

    /// Whether the zero has gone as far as allowed and wants a new capture.
    pub const fn drifted(&self) -> bool {
        self.drifted
    }
}
