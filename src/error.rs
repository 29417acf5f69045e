//! What can be wrong when something is built: one enum, each variant naming the field, the value and the limit.

use core::fmt;

/// Why an element, a fluid, a record or a setting could not be built.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum Error {
    /// A value lies outside its limits.
    OutOfRange {
        /// Name of the field, with its unit.
        field: &'static str,
        /// The value given.
        value: f32,
        /// Smallest accepted value.
        least: f32,
        /// Largest accepted value.
        most: f32,
    },
    /// A value is NaN or infinite.
    NotFinite {
        /// Name of the field.
        field: &'static str,
    },
    /// A text is longer than its place in the record, or not printable ASCII.
    BadText {
        /// Name of the field.
        field: &'static str,
        /// Most characters it may have.
        most: usize,
    },
    /// A count exceeds the room there is.
    TooMany {
        /// Name of the field.
        field: &'static str,
        /// Most entries it may have.
        most: usize,
    },
    /// The bytes are not a record: the mark at their start is another.
    NotARecord,
    /// The record is of a version this code does not read.
    UnknownVersion {
        /// The version found.
        found: u16,
        /// The newest version this code reads.
        newest: u16,
    },
    /// The record is shorter or longer than it says.
    WrongLength {
        /// Bytes present.
        found: usize,
        /// Bytes expected.
        expected: usize,
    },
    /// The record was damaged: its checksum does not fit its bytes.
    WrongChecksum {
        /// CRC-32 computed over the bytes.
        computed: u32,
        /// CRC-32 stored with them.
        stored: u32,
    },
    /// A coded choice has a value that means nothing.
    UnknownCode {
        /// Name of the field.
        field: &'static str,
        /// The code found.
        code: u8,
    },
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::OutOfRange { field, value, least, most } => {
                write!(f, "{field} is {value}; accepted: {least} to {most}")
            }
            Self::NotFinite { field } => write!(f, "{field} is not a finite number"),
            Self::BadText { field, most } => write!(f, "{field} must be 1 to {most} printable ASCII characters"),
            Self::TooMany { field, most } => write!(f, "{field}: at most {most} entries"),
            Self::NotARecord => write!(f, "not a calibration record"),
            Self::UnknownVersion { found, newest } => {
                write!(f, "record version {found}; this code reads versions 1 to {newest}")
            }
            Self::WrongLength { found, expected } => write!(f, "record has {found} bytes, expected {expected}"),
            Self::WrongChecksum { computed, stored } => {
                write!(f, "record is damaged: checksum {computed:08x} computed, {stored:08x} stored")
            }
            Self::UnknownCode { field, code } => write!(f, "{field} has the unknown code {code}"),
        }
    }
}

impl core::error::Error for Error {}

/// Accepts `value` when it is finite and lies within `least..=most`, else names `field`.
pub(crate) const fn within(field: &'static str, value: f32, least: f32, most: f32) -> Result<f32, Error> {
    if !value.is_finite() {
        return Err(Error::NotFinite { field });
    }
    if value < least || value > most {
        return Err(Error::OutOfRange { field, value, least, most });
    }
    Ok(value)
}

/// Name of a field, with its unit, and the smallest and largest accepted value.
pub(crate) type Limit = (&'static str, f32, f32);

/// Accepts values that all lie [`within`] the limits of the same place in the list, else names the first that does not.
pub(crate) fn all_within<const N: usize>(limits: &[Limit; N], values: [f32; N]) -> Result<(), Error> {
    each_within(limits, &values)
}

#[inline(never)] // one loop over tables takes a third of the flash of a comparison at every caller
fn each_within(limits: &[Limit], values: &[f32]) -> Result<(), Error> {
    for (&(field, least, most), &value) in limits.iter().zip(values) {
        within(field, value, least, most)?;
    }
    Ok(())
}
