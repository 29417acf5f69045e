//! Every cause of doubt as a flag, and what raises it.

use crate::conditioning::freshness::Lateness;
use crate::sensor::Fault;
use crate::status::{Refusal, Status, write_names};
use bitflags::bitflags;
use core::fmt;

bitflags! {
    /// What is wrong; none set means nothing is.
    #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
    pub struct Causes: u32 {
        /// A wire or a sensor is broken.
        const OPEN = 1 << 0;
        /// A wire or a sensor is short-circuited.
        const SHORT = 1 << 1;
        /// A signal is at an end of what its sensor measures.
        const SATURATION = 1 << 2;
        /// A sensor does not answer.
        const SILENT = 1 << 3;
        /// A sensor reports a fault of its own.
        const REPORTED = 1 << 4;
        /// A number is not finite, or is no state a fluid can have.
        const INVALID = 1 << 5;
        /// A sample is too old.
        const STALE = 1 << 6;
        /// The samples of one reading were taken too far apart.
        const SKEWED = 1 << 7;
        /// A sensor's raw counts repeat bit by bit: a converter or link that stands still.
        const FROZEN = 1 << 8;
        /// A quantity has not moved by its resolution for long: a blocked port or line.
        const STUCK = 1 << 9;
        /// A quantity scatters more than it should.
        const NOISY = 1 << 10;
        /// Temperature or pressure lie outside the fluid's table.
        const TABLE_EXCEEDED = 1 << 11;
        /// The flow lies beyond the calibrated range, or expansion or slip beyond what was checked.
        const OUT_OF_RANGE = 1 << 12;
        /// The flow is not laminar.
        const NOT_LAMINAR = 1 << 13;
        /// The zero has drifted as far as it may.
        const ZERO_DRIFTED = 1 << 14;
        /// The calibration is due.
        const CALIBRATION_DUE = 1 << 15;
        /// The element's constants come from nominal geometry.
        const UNCALIBRATED = 1 << 16;
        /// The record was written although the calibration run had been refused.
        const REFUSED_RUN = 1 << 17;
        /// There is no readable calibration record.
        const RECORD_MISSING = 1 << 18;
        /// An input or an output is simulated.
        const SIMULATION = 1 << 19;
    }
}

impl Causes {
    /// Causes with which there can be no number worth showing; no mapping moves them out of the category failure.
    pub const NO_NUMBER: Self = Self::OPEN
        .union(Self::SHORT)
        .union(Self::SATURATION)
        .union(Self::SILENT)
        .union(Self::INVALID)
        .union(Self::TABLE_EXCEEDED);
}

impl From<Fault> for Causes {
    fn from(fault: Fault) -> Self {
        match fault {
            Fault::Open => Self::OPEN,
            Fault::Short => Self::SHORT,
            Fault::SaturatedLow | Fault::SaturatedHigh => Self::SATURATION,
            Fault::Stale => Self::STALE,
            Fault::Reported => Self::REPORTED,
            Fault::Invalid => Self::INVALID,
            Fault::Silent => Self::SILENT,
        }
    }
}

impl From<Lateness> for Causes {
    fn from(lateness: Lateness) -> Self {
        match lateness {
            Lateness::Stale => Self::STALE,
            Lateness::Skewed => Self::SKEWED,
        }
    }
}

impl From<Refusal> for Causes {
    /// A refusal is never without a cause: one that no line here names counts as invalid.
    fn from(refusal: Refusal) -> Self {
        let table = Refusal::TEMPERATURE_OUTSIDE_TABLE | Refusal::PRESSURE_OUTSIDE_TABLE;
        let mut causes = Self::empty();
        causes.set(Self::TABLE_EXCEEDED, refusal.intersects(table));
        causes.set(Self::INVALID, !table.contains(refusal) || refusal.is_empty());
        causes
    }
}

impl From<Status> for Causes {
    fn from(status: Status) -> Self {
        let range = Status::BEYOND_CALIBRATION | Status::STRONG_EXPANSION | Status::STRONG_SLIP;
        let mut causes = Self::empty();
        causes.set(Self::UNCALIBRATED, status.contains(Status::UNCALIBRATED));
        causes.set(Self::REFUSED_RUN, status.contains(Status::REFUSED_RUN));
        causes.set(Self::NOT_LAMINAR, status.contains(Status::NOT_LAMINAR));
        causes.set(Self::OUT_OF_RANGE, status.intersects(range));
        causes
    }
}

impl fmt::Display for Causes {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write_names(f, self.iter_names().map(|(name, _)| name), "none")
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Causes {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Causes({=u32:b})", self.bits());
    }
}
