//! The calibration record: all that makes a meter out of an instrument, as bytes.
//!
//! A fixed little-endian layout (DEVELOPERS.md, "Record format") that starts with a mark, a version and its length and
//! ends with a CRC-32 (ISO 3309, IEEE 802.3) over all that precedes it. It carries the stored table of its fluid and
//! the constants of its law, so an instrument needs no file and a later version of this code computes the same flow.

mod layout; // the bytes

pub use layout::{RECORD_LENGTH, RECORD_VERSION};

use crate::calibration::Quality;
use crate::element::Element;
use crate::error::{Error, within};
use crate::flow::Meter;
use crate::fluid::StoredFluid;
use crate::fluid::stored::Name;
use crate::reading::{SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use crate::status::Status;
use heapless::String;

/// Longest serial number.
pub const SERIAL_LENGTH: usize = 16;
/// Longest reason for using a refused run.
pub const REASON_LENGTH: usize = 64;

/// Which arithmetic computes the flow; named in the record so that certificate and instrument agree to the bit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Arithmetic {
    /// IEEE 754 single precision, as written in this crate.
    Single,
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
        within("date (YYYYMMDD)", self.date as f32, 19_700_101.0, 99_991_231.0)?;
        self.trims.check()?;
        self.sensors.check()?;
        ReferenceConditions::new(self.reference.temperature, self.reference.pressure)?;
        self.quality.check()?;
        self.element.check()?;
        Name::checked(self.fluid.name())?;
        self.fluid.check()
    }

    /// The meter this record describes.
    ///
    /// # Errors
    /// Names the field that makes no sense.
    pub fn meter(&self) -> Result<Meter<'_>, Error> {
        self.check()?;
        let standing = if self.reason.is_empty() { Status::empty() } else { Status::REFUSED_RUN };
        Ok(Meter::calibrated(self.element, &self.fluid, self.quality.clone())?
            .with_sensors(self.trims, self.sensors)?
            .with_reference(self.reference)
            .with_standing(standing))
    }
}
