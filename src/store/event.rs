//! One line of the event log.

/// Bytes of an event.
pub(super) const EVENT_LENGTH: usize = 20;
/// Version of an event's bytes.
pub(super) const EVENT_VERSION: u16 = 1;
/// Set when the event counted as a calibration.
const CALIBRATION: u16 = 1;

/// Something that happened to the instrument: when, what, and a value before and after.
///
/// ```
/// use evenbore::store::Event;
/// let zero = Event::of_numbers(1_796_083_200, 17, -0.2, 0.05);
/// assert_eq!(zero.numbers(), [-0.2, 0.05]);
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Event {
    /// Number of the event in the log; given by the store, larger for each later event.
    pub number: u32,
    /// When: seconds of the caller's clock.
    pub time: u64,
    /// What: a code of the caller's.
    pub kind: u16,
    /// Whether it counted as a calibration; given by the store.
    pub calibration: bool,
    /// The calibration counter after the event; given by the store.
    pub counter: u32,
    /// The value before: a number's bits, or a checksum.
    pub old: u32,
    /// The value after.
    pub new: u32,
}

impl Event {
    /// An event with values that are whole numbers, bits or checksums.
    pub const fn new(time: u64, kind: u16, old: u32, new: u32) -> Self {
        Self { number: 0, time, kind, calibration: false, counter: 0, old, new }
    }

    /// An event with values that are single-precision numbers.
    pub const fn of_numbers(time: u64, kind: u16, old: f32, new: f32) -> Self {
        Self::new(time, kind, old.to_bits(), new.to_bits())
    }

    /// The values before and after as single-precision numbers.
    pub const fn numbers(&self) -> [f32; 2] {
        [f32::from_bits(self.old), f32::from_bits(self.new)]
    }

    /// Time, kind, flags, old, new.
    pub(super) fn encode(&self) -> [u8; EVENT_LENGTH] {
        let mut bytes = [0; EVENT_LENGTH];
        let flags = if self.calibration { CALIBRATION } else { 0 };
        let parts = self.time.to_le_bytes().into_iter().chain(self.kind.to_le_bytes()).chain(flags.to_le_bytes());
        let parts = parts.chain(self.old.to_le_bytes()).chain(self.new.to_le_bytes());
        bytes.iter_mut().zip(parts).for_each(|(to, from)| *to = from);
        bytes
    }

    pub(super) fn decode(number: u32, counter: u32, bytes: &[u8; EVENT_LENGTH]) -> Self {
        let [time @ .., k0, k1, f0, f1, o0, o1, o2, o3, n0, n1, n2, n3] = *bytes;
        Self {
            number,
            time: u64::from_le_bytes(time),
            kind: u16::from_le_bytes([k0, k1]),
            calibration: u16::from_le_bytes([f0, f1]) & CALIBRATION != 0,
            counter,
            old: u32::from_le_bytes([o0, o1, o2, o3]),
            new: u32::from_le_bytes([n0, n1, n2, n3]),
        }
    }
}
