//! What can go wrong in the store: which part, in which step, and what the flash said.

use crate::error::Error;
use core::fmt;

/// A part of the store, each with pages of its own.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Part {
    /// The calibration record, in two copies.
    Record,
    /// The instrument's settings, in two copies.
    Settings,
    /// Snapshots of the totals, in a ring.
    Totals,
    /// The event log, in a ring.
    Events,
}

/// What the flash was asked to do.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Step {
    /// Read bytes.
    Read,
    /// Erase pages.
    Erase,
    /// Program words.
    Write,
}

/// What is wrong with a layout.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum LayoutFault {
    /// The flash programs words of another size than 4, 8, 16 or 32 bytes.
    WordSize(usize),
    /// The flash erases pages, or reads units, that are no whole number of words or no whole part of one.
    PageSize(usize),
    /// The region does not begin and end on a page.
    NotOnPages,
    /// The region ends beyond the flash.
    BeyondFlash,
    /// The region has fewer bytes, or a page of it, than these.
    TooSmall(u32),
    /// The region shares bytes with another one, of this part.
    Overlap(Part),
}

/// Why the store could not do what was asked.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum StoreError<E> {
    /// The layout does not fit the flash; found when the store is opened.
    Layout {
        /// The part whose region is wrong.
        part: Part,
        /// What is wrong with it.
        fault: LayoutFault,
    },
    /// The flash refused.
    Flash {
        /// The part that was worked on.
        part: Part,
        /// What the flash was asked to do.
        step: Step,
        /// What the flash said.
        error: E,
    },
    /// What was written does not read back: the page is worn. What was stored before is still there.
    ReadBack {
        /// The part that was worked on.
        part: Part,
    },
    /// What is stored has a newer version than this code knows; it is left as it is.
    Newer {
        /// The part.
        part: Part,
        /// The version found.
        found: u16,
        /// The newest version that was to be read or written.
        newest: u16,
    },
    /// More bytes than there is room for, in the store or in the buffer given.
    TooLong {
        /// The part.
        part: Part,
        /// Bytes to be stored or read.
        length: usize,
        /// Room there is.
        room: usize,
    },
    /// The sequence numbers of the part are used up (after 4e9 writes).
    UsedUp {
        /// The part.
        part: Part,
    },
    /// The record makes no sense.
    Record(Error),
}

impl Part {
    const fn name(self) -> &'static str {
        match self {
            Self::Record => "record",
            Self::Settings => "settings",
            Self::Totals => "totals",
            Self::Events => "event log",
        }
    }
}

impl fmt::Display for Part {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

impl fmt::Display for Step {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Read => "reading",
            Self::Erase => "erasing",
            Self::Write => "writing",
        })
    }
}

impl fmt::Display for LayoutFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::WordSize(found) => write!(f, "words of {found} bytes; accepted: 4, 8, 16 or 32"),
            Self::PageSize(found) => write!(f, "pages or reads of {found} bytes do not go with the words"),
            Self::NotOnPages => f.write_str("region does not begin and end on a page"),
            Self::BeyondFlash => f.write_str("region ends beyond the flash"),
            Self::TooSmall(least) => write!(f, "region or page has fewer than {least} bytes"),
            Self::Overlap(other) => write!(f, "region overlaps that of the {other}"),
        }
    }
}

impl<E: fmt::Debug> fmt::Display for StoreError<E> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Layout { part, fault } => write!(f, "layout of the {part}: {fault}"),
            Self::Flash { part, step, error } => write!(f, "{step} the {part}: {error:?}"),
            Self::ReadBack { part } => write!(f, "{part} does not read back as written: worn page"),
            Self::Newer { part, found, newest } => {
                write!(f, "stored {part} has version {found}, newer than {newest}; left as it is")
            }
            Self::TooLong { part, length, room } => write!(f, "{part}: {length} bytes, room for {room}"),
            Self::UsedUp { part } => write!(f, "{part}: sequence numbers used up"),
            Self::Record(error) => write!(f, "record: {error}"),
        }
    }
}

impl<E: fmt::Debug> core::error::Error for StoreError<E> {}
