//! What a flow is worth: flags on a number that is given, and the reasons for which none is given.

use bitflags::bitflags;
use core::fmt;

bitflags! {
    /// Flags beside a flow; none set means good.
    #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
    pub struct Status: u16 {
        /// The element's constants come from nominal geometry, not from a calibration.
        const UNCALIBRATED = 1 << 0;
        /// The record was written although the calibration run had been refused.
        const REFUSED_RUN = 1 << 1;
        /// The Reynolds number exceeds the laminar limit; the law does not hold.
        const NOT_LAMINAR = 1 << 2;
        /// The flow lies more than a fifth beyond the largest calibrated one (in `x = mdot/mu`).
        const BEYOND_CALIBRATION = 1 << 3;
        /// The pressure falls by more than half along the element; the expansion term is past its checked range.
        const STRONG_EXPANSION = 1 << 4;
        /// The gas is so thin that slip of second order, which the law neglects, can be seen.
        const STRONG_SLIP = 1 << 5;
    }
}

bitflags! {
    /// Reasons for which a reading gives no flow at all.
    #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
    pub struct Refusal: u16 {
        /// An input is NaN or infinite.
        const NOT_FINITE = 1 << 0;
        /// A temperature or absolute pressure is zero or negative.
        const NOT_ABSOLUTE = 1 << 1;
        /// The temperature lies outside the fluid's stored table.
        const TEMPERATURE_OUTSIDE_TABLE = 1 << 2;
        /// A pressure at either end of the element lies outside the fluid's stored table.
        const PRESSURE_OUTSIDE_TABLE = 1 << 3;
        /// The pressure drop is as large as the pressure it falls from.
        const OUTLET_VACUUM = 1 << 4;
        /// The relative humidity is outside 0 to 1, or is given for a fluid that is not air.
        const HUMIDITY_INVALID = 1 << 5;
    }
}

/// Writes the names of the set flags, lower case, joined by `+`; `good` or `none` when none is set.
pub(crate) fn write_names<'a>(
    f: &mut fmt::Formatter<'_>,
    names: impl Iterator<Item = &'a str>,
    when_empty: &str,
) -> fmt::Result {
    let mut empty = true;
    for name in names {
        if !empty {
            f.write_str("+")?;
        }
        for c in name.chars() {
            fmt::Write::write_char(f, if c == '_' { '-' } else { c.to_ascii_lowercase() })?;
        }
        empty = false;
    }
    if empty { f.write_str(when_empty) } else { Ok(()) }
}

impl fmt::Display for Status {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write_names(f, self.iter_names().map(|(name, _)| name), "good")
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write_names(f, self.iter_names().map(|(name, _)| name), "none")
    }
}

impl core::error::Error for Refusal {}

#[cfg(feature = "defmt")]
impl defmt::Format for Status {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Status({=u16:b})", self.bits());
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Refusal {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Refusal({=u16:b})", self.bits());
    }
}
