//! The totals as bytes, to survive a restart: little-endian, with a mark, a version, their length and a CRC-32.
//!
//! | offset | bytes | content |
//! |---|---|---|
//! | 0 | 4 | mark `EVTO` |
//! | 4 | 2 | version, 1 |
//! | 6 | 2 | length, 136 |
//! | 8 | 4 | missed steps |
//! | 12 | 120 | six counters of 20 bytes: volume, mass, reference volume, each forward then reverse |
//! | 132 | 4 | CRC-32 (ISO-HDLC) of the 132 bytes before |
//!
//! A counter is its rollovers (u32), its whole sub-units (u64) and its fraction in 2^-64 sub-units (u64).

use super::counter::{Counter, ROLLOVER};
use super::running::{Total, Totals};
use crate::error::Error;
use crate::record::checksum;

/// Bytes of stored totals.
pub const SNAPSHOT_LENGTH: usize = 136;

const MARK: [u8; 4] = *b"EVTO";
const VERSION: u16 = 1;
const BODY: usize = SNAPSHOT_LENGTH - 4;

impl Totals {
    /// The totals as bytes.
    ///
    /// ```
    /// use evenbore::total::Totals;
    /// let totals = Totals::default();
    /// assert_eq!(Totals::restore(&totals.snapshot())?, totals);
    /// # Ok::<(), evenbore::error::Error>(())
    /// ```
    pub fn snapshot(&self) -> [u8; SNAPSHOT_LENGTH] {
        let mut bytes = [0; SNAPSHOT_LENGTH];
        let head = MARK.into_iter().chain(VERSION.to_le_bytes()).chain((SNAPSHOT_LENGTH as u16).to_le_bytes());
        let body = head.chain(self.missed.to_le_bytes()).chain(self.counters().into_iter().flat_map(counter_bytes));
        fill(&mut bytes, body);
        let sum = checksum(bytes.get(..BODY).unwrap_or_default());
        fill(bytes.get_mut(BODY..).unwrap_or_default(), sum.to_le_bytes());
        bytes
    }

    /// Totals from their bytes.
    ///
    /// # Errors
    /// Not totals, another version, another length, damaged (any changed bit is found), or a count at or beyond the
    /// rollover.
    pub fn restore(bytes: &[u8]) -> Result<Self, Error> {
        let length = Error::WrongLength { found: bytes.len(), expected: SNAPSHOT_LENGTH };
        let mut rest = bytes;
        if take::<4>(&mut rest).ok_or(length)? != MARK {
            return Err(Error::NotTotals);
        }
        let version = u16::from_le_bytes(take(&mut rest).ok_or(length)?);
        if version == 0 || version > VERSION {
            return Err(Error::UnknownVersion { found: version, newest: VERSION });
        }
        let stated = usize::from(u16::from_le_bytes(take(&mut rest).ok_or(length)?));
        let (body, sum) = bytes.split_last_chunk().ok_or(length)?;
        if stated != SNAPSHOT_LENGTH || bytes.len() != SNAPSHOT_LENGTH {
            return Err(length);
        }
        let (computed, stored) = (checksum(body), u32::from_le_bytes(*sum));
        if computed != stored {
            return Err(Error::WrongChecksum { computed, stored });
        }
        let missed = u32::from_le_bytes(take(&mut rest).ok_or(length)?);
        let mut total = || Ok(Total { forward: counter(&mut rest, length)?, reverse: counter(&mut rest, length)? });
        Ok(Self { missed, volume: total()?, mass: total()?, reference: total()? })
    }

    fn counters(&self) -> [Counter; 6] {
        let [v, m, r] = [&self.volume, &self.mass, &self.reference];
        [v.forward, v.reverse, m.forward, m.reverse, r.forward, r.reverse]
    }
}

fn counter_bytes(counter: Counter) -> impl Iterator<Item = u8> {
    let whole = counter.rollovers.to_le_bytes().into_iter().chain(counter.units.to_le_bytes());
    whole.chain(counter.fraction.to_le_bytes())
}

fn counter(rest: &mut &[u8], length: Error) -> Result<Counter, Error> {
    let rollovers = u32::from_le_bytes(take(rest).ok_or(length)?);
    let units = u64::from_le_bytes(take(rest).ok_or(length)?);
    let fraction = u64::from_le_bytes(take(rest).ok_or(length)?);
    if units >= ROLLOVER {
        return Err(Error::OutOfRange { field: "count", value: units as f32, least: 0.0, most: ROLLOVER as f32 });
    }
    Ok(Counter { rollovers, units, fraction })
}

fn fill(bytes: &mut [u8], source: impl IntoIterator<Item = u8>) {
    bytes.iter_mut().zip(source).for_each(|(byte, value)| *byte = value);
}

fn take<const N: usize>(rest: &mut &[u8]) -> Option<[u8; N]> {
    let (head, tail) = rest.split_first_chunk()?;
    *rest = tail;
    Some(*head)
}
