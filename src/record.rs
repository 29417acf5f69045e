//! The calibration record: all that makes a meter out of an instrument, as bytes.
//!
//! A fixed little-endian layout (DEVELOPERS.md, "Record format") that starts with a mark, a version and its length and
//! ends with a CRC-32 (ISO 3309, IEEE 802.3) over all that precedes it. It carries the stored table of its fluid and
//! the constants of its law, so an instrument needs no file and a later version of this code computes the same flow.

mod layout; // how each part is written and read back

pub use layout::RECORD_LENGTH;

use crate::calibration::Quality;
use crate::element::{Element, Shape};
use crate::error::{Error, within};
use crate::flow::Meter;
use crate::flow_curve::Arithmetic;
use crate::fluid::{Phase, StoredFluid};
use crate::reading::{SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use crate::status::Status;
use heapless::String;
use layout::{Reader, Writer, choice, numbers_of};

/// Longest serial number.
pub const SERIAL_LENGTH: usize = 16;
/// Longest reason for using a refused run.
pub const REASON_LENGTH: usize = 64;

const MARK: [u8; 4] = *b"EVBR";
/// Newest version of a record's bytes that this code reads, and the one it writes.
pub const RECORD_VERSION: u16 = 1;

const CRC: crc::Crc<u32> = crc::Crc::<u32>::new(&crc::CRC_32_ISO_HDLC);

/// CRC-32 (ISO 3309, IEEE 802.3) of `bytes`, for all that the library stores.
pub(crate) fn checksum(bytes: &[u8]) -> u32 {
    CRC.checksum(bytes)
}

/// A calibration record.
///
/// ```
/// use evenbore::record::{RECORD_LENGTH, Record};
/// use evenbore::{Element, calibration::Quality, fluid::catalogue::NITROGEN, quantity::Length};
/// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
/// let quality = Quality::nominal(element.a(), element.b());
/// let record = Record::new("EB-0042", 20261201, element, *NITROGEN.fluid(), quality)?;
/// let mut bytes = [0; RECORD_LENGTH];
/// record.encode(&mut bytes);
/// assert_eq!(Record::decode(&bytes)?, record);
/// let _meter = record.meter()?;
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct Record {
    /// Serial number of the element: 1 to 16 printable ASCII characters.
    pub serial: String<SERIAL_LENGTH>,
    /// Date of the calibration as YYYYMMDD.
    pub date: u32,
    /// How often a calibration was written to this instrument.
    pub events: u32,
    /// The arithmetic that computes the flow.
    pub arithmetic: Arithmetic,
    /// Why a refused run is used all the same; empty when the run was accepted.
    pub reason: String<REASON_LENGTH>,
    /// Corrections of the instrument's sensors.
    pub trims: Trims,
    /// Standard uncertainties of the instrument's sensors.
    pub sensors: SensorUncertainty,
    /// Conditions at which standard flow is quoted.
    pub reference: ReferenceConditions,
    /// How well A and B are known.
    pub quality: Quality,
    /// The element with its calibrated A and B.
    pub element: Element,
    /// The fluid of the calibration.
    pub fluid: StoredFluid,
}

impl Record {
    /// A record with perfect trims, sensors of a good instrument and DIN 1343 reference conditions.
    ///
    /// # Errors
    /// Names the field that makes no sense.
    pub fn new(serial: &str, date: u32, element: Element, fluid: StoredFluid, quality: Quality) -> Result<Self, Error> {
        let record = Self {
            serial: String::try_from(serial).map_err(|_| Error::BadText { field: "serial", most: SERIAL_LENGTH })?,
            date,
            events: 0,
            arithmetic: Arithmetic::Single,
            reason: String::new(),
            trims: Trims::NONE,
            sensors: SensorUncertainty::COMMON,
            reference: ReferenceConditions::DIN_1343,
            quality,
            element,
            fluid,
        };
        record.check()?;
        Ok(record)
    }

    /// Accepts a record whose every field makes sense, whatever its origin.
    ///
    /// # Errors
    /// Names the field.
    pub fn check(&self) -> Result<(), Error> {
        let printable = |text: &str| text.bytes().all(|c| (b' '..=b'~').contains(&c));
        if self.serial.is_empty() || !printable(&self.serial) {
            return Err(Error::BadText { field: "serial", most: SERIAL_LENGTH });
        }
        if !printable(&self.reason) {
            return Err(Error::BadText { field: "reason", most: REASON_LENGTH });
        }
        let (year, month, day) = (self.date / 10_000, self.date / 100 % 100, self.date % 100);
        within("year of the date (YYYYMMDD)", year as f32, 1970.0, 9999.0)?;
        within("month of the date (YYYYMMDD)", month as f32, 1.0, 12.0)?;
        within("day of the date (YYYYMMDD)", day as f32, 1.0, 31.0)?;
        self.trims.check()?;
        self.sensors.check()?;
        ReferenceConditions::new(self.reference.temperature, self.reference.pressure)?;
        self.quality.check()?;
        self.element.check()?;
        self.fluid.name.check()?;
        self.fluid.check()
    }

    /// The meter this record describes.
    ///
    /// # Errors
    /// Names the field that makes no sense.
    pub fn meter(&self) -> Result<Meter<'_>, Error> {
        self.check()?;
        let standing = if self.reason.is_empty() { Status::empty() } else { Status::REFUSED_RUN };
        Ok(Meter::of_checked(self.element, &self.fluid, self.quality.clone(), true, standing)
            .with_sensors(self.trims, self.sensors)?
            .with_reference(self.reference)
            .with_arithmetic(self.arithmetic))
    }

    /// Writes the record's bytes.
    pub fn encode(&self, bytes: &mut [u8; RECORD_LENGTH]) {
        let mut w = Writer { bytes, at: 0 };
        w.put(&MARK);
        w.put(&RECORD_VERSION.to_le_bytes());
        w.put(&(RECORD_LENGTH as u16).to_le_bytes());
        w.text::<SERIAL_LENGTH>(&self.serial);
        w.put(&self.date.to_le_bytes());
        w.put(&self.events.to_le_bytes());
        w.put(&[self.arithmetic as u8, self.element.shape as u8, self.fluid.phase as u8, 0]);
        w.text::<REASON_LENGTH>(&self.reason);
        w.numbers(&numbers_of(&self.trims, &self.sensors, &self.reference));
        w.quality(&self.quality);
        w.element(&self.element);
        w.fluid(&self.fluid);
        let sum = checksum(w.written());
        w.put(&sum.to_le_bytes());
    }

    /// Reads a record's bytes.
    ///
    /// # Errors
    /// Not a record, another version, another length, damaged (any changed bit is found), or a field that makes no
    /// sense.
    pub fn decode(bytes: &[u8]) -> Result<Self, Error> {
        let mut r = Reader { bytes, at: 0 };
        let length = Error::WrongLength { found: bytes.len(), expected: RECORD_LENGTH };
        if r.take::<4>().ok_or(length)? != MARK {
            return Err(Error::NotARecord);
        }
        let version = u16::from_le_bytes(r.take().ok_or(length)?);
        if version == 0 || version > RECORD_VERSION {
            return Err(Error::UnknownVersion { found: version, newest: RECORD_VERSION });
        }
        let stated = usize::from(u16::from_le_bytes(r.take().ok_or(length)?));
        if stated != RECORD_LENGTH || bytes.len() != RECORD_LENGTH {
            return Err(length);
        }
        check_sum(bytes)?;
        // Checked where it stands, since a record is too large to be moved about on a small stack.
        let record = read(&mut r);
        match &record {
            Ok(sound) => sound.check().and(record),
            Err(_) => record,
        }
    }

    /// The checksum that stands at the end of the record's bytes.
    pub fn checksum(&self) -> u32 {
        let mut bytes = [0; RECORD_LENGTH];
        self.encode(&mut bytes);
        let [.., a, b, c, d] = bytes;
        u32::from_le_bytes([a, b, c, d])
    }
}

fn check_sum(bytes: &[u8]) -> Result<(), Error> {
    let Some((body, stored)) = bytes.split_last_chunk::<4>() else {
        return Err(Error::WrongLength { found: bytes.len(), expected: RECORD_LENGTH });
    };
    let (computed, stored) = (checksum(body), u32::from_le_bytes(*stored));
    if computed == stored { Ok(()) } else { Err(Error::WrongChecksum { computed, stored }) }
}

/// The fields in the order of the layout, unchecked.
fn read(r: &mut Reader<'_>) -> Result<Record, Error> {
    let serial = r.text("serial")?;
    let (date, events) = (u32::from_le_bytes(r.bytes()), u32::from_le_bytes(r.bytes()));
    let [arithmetic, shape, phase, _] = r.bytes();
    let arithmetic = choice("arithmetic", &[Arithmetic::Single, Arithmetic::Curve], arithmetic)?;
    let shape = choice("shape", &[Shape::RoundTubes, Shape::ParallelPlates, Shape::Other], shape)?;
    let phase = choice("phase", &[Phase::Gas, Phase::Liquid], phase)?;
    let reason = r.text("reason")?;
    let (trims, sensors, reference) = r.settings();
    Ok(Record {
        serial,
        date,
        events,
        arithmetic,
        reason,
        trims,
        sensors,
        reference,
        quality: r.quality()?,
        element: r.element(shape),
        fluid: r.fluid(phase),
    })
}
