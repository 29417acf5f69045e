//! The status structure of IEEE 488.2 (chapter 11) and the two SCPI-99 registers that feed it (volume 2, chapter 20).

use super::error::LinkError;
use bitflags::bitflags;

bitflags! {
    /// Bits of the standard event status register, `*ESR?`.
    #[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
    pub struct StandardEvent: u8 {
        /// All pending operations are complete.
        const OPERATION_COMPLETE = 1 << 0;
        /// A query error, -400 to -499.
        const QUERY_ERROR = 1 << 2;
        /// A device-specific error, -300 to -399.
        const DEVICE_ERROR = 1 << 3;
        /// An execution error, -200 to -299.
        const EXECUTION_ERROR = 1 << 4;
        /// A command error, -100 to -199.
        const COMMAND_ERROR = 1 << 5;
        /// The instrument was switched on.
        const POWER_ON = 1 << 7;
    }
}

bitflags! {
    /// Bits of the status byte, `*STB?`.
    #[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
    pub struct StatusByte: u8 {
        /// The error queue holds something.
        const ERRORS = 1 << 2;
        /// Summary of the questionable register.
        const QUESTIONABLE = 1 << 3;
        /// Part of an answer waits in the output.
        const MESSAGE_AVAILABLE = 1 << 4;
        /// Summary of the standard event register.
        const STANDARD_EVENT = 1 << 5;
        /// An enabled bit of this byte is set.
        const MASTER_SUMMARY = 1 << 6;
        /// Summary of the operation register.
        const OPERATION = 1 << 7;
    }
}

impl StandardEvent {
    /// The bit that stands for the group of an error.
    pub fn of(error: LinkError) -> Self {
        match error.number() {
            -199..=-100 => Self::COMMAND_ERROR,
            -299..=-200 => Self::EXECUTION_ERROR,
            -499..=-400 => Self::QUERY_ERROR,
            _ => Self::DEVICE_ERROR,
        }
    }
}

/// Bits a SCPI register uses; the sixteenth is always zero.
const FIFTEEN_BITS: u16 = 0x7FFF;

/// A condition, the transitions that latch, the events latched, and which of them count.
///
/// ```
/// use evenbore::link::EventRegister;
/// let mut register = EventRegister::new();
/// register.enable = 0b10;
/// register.set_condition(0b10);
/// register.set_condition(0);
/// assert!(register.summary()); // the event stays although the condition went
/// assert_eq!(register.take_event(), 0b10);
/// assert!(!register.summary());
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct EventRegister {
    condition: u16,
    event: u16,
    /// Events that count in the summary.
    pub enable: u16,
    /// Conditions whose rise is an event.
    pub rising: u16,
    /// Conditions whose fall is an event.
    pub falling: u16,
}

impl EventRegister {
    /// As after `STATus:PRESet`: every rise is an event, none counts.
    pub const fn new() -> Self {
        Self { condition: 0, event: 0, enable: 0, rising: FIFTEEN_BITS, falling: 0 }
    }

    /// The conditions now; latches what changed.
    pub fn set_condition(&mut self, condition: u16) {
        let (old, new) = (self.condition, condition & FIFTEEN_BITS);
        self.event |= (new & !old & self.rising) | (old & !new & self.falling);
        self.condition = new;
    }

    /// The conditions now.
    pub const fn condition(&self) -> u16 {
        self.condition
    }

    /// The events latched since the last reading, which clears them.
    pub fn take_event(&mut self) -> u16 {
        core::mem::take(&mut self.event)
    }

    /// Whether an event that counts is latched.
    pub const fn summary(&self) -> bool {
        self.event & self.enable != 0
    }

    fn preset(&mut self) {
        *self = Self { condition: self.condition, event: self.event, ..Self::new() };
    }
}

impl Default for EventRegister {
    fn default() -> Self {
        Self::new()
    }
}

/// All status registers of one port.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct StatusRegisters {
    event: StandardEvent,
    /// Standard events that count, `*ESE`.
    pub event_enable: u8,
    service_enable: u8,
    /// What the instrument is doing, `STATus:OPERation`.
    pub operation: EventRegister,
    /// What makes its values doubtful, `STATus:QUEStionable`.
    pub questionable: EventRegister,
}

impl StatusRegisters {
    /// As after power-on: the power-on event is latched, nothing counts.
    pub const fn new() -> Self {
        Self {
            event: StandardEvent::POWER_ON,
            event_enable: 0,
            service_enable: 0,
            operation: EventRegister::new(),
            questionable: EventRegister::new(),
        }
    }

    /// Latches standard events.
    pub fn raise(&mut self, event: StandardEvent) {
        self.event |= event;
    }

    /// The standard events since the last reading, which clears them.
    pub fn take_standard_event(&mut self) -> StandardEvent {
        core::mem::take(&mut self.event)
    }

    /// Bits of the status byte that count, `*SRE`.
    pub const fn service_enable(&self) -> u8 {
        self.service_enable
    }

    /// Chooses the bits of the status byte that count; the master summary cannot count itself.
    pub fn set_service_enable(&mut self, bits: u8) {
        self.service_enable = bits & !StatusByte::MASTER_SUMMARY.bits();
    }

    /// The status byte, given whether the error queue and the output hold something.
    pub fn status_byte(&self, errors: bool, message: bool) -> StatusByte {
        let mut byte = StatusByte::empty();
        byte.set(StatusByte::ERRORS, errors);
        byte.set(StatusByte::QUESTIONABLE, self.questionable.summary());
        byte.set(StatusByte::MESSAGE_AVAILABLE, message);
        byte.set(StatusByte::STANDARD_EVENT, self.event.bits() & self.event_enable != 0);
        byte.set(StatusByte::OPERATION, self.operation.summary());
        byte.set(StatusByte::MASTER_SUMMARY, byte.bits() & self.service_enable != 0);
        byte
    }

    /// `*CLS`: forgets all events; conditions and enables stay.
    pub fn clear(&mut self) {
        self.event = StandardEvent::empty();
        self.operation.take_event();
        self.questionable.take_event();
    }

    /// `STATus:PRESet`: enables and transition filters as after power-on; standard event and service enables stay.
    pub fn preset(&mut self) {
        self.operation.preset();
        self.questionable.preset();
    }
}

impl Default for StatusRegisters {
    fn default() -> Self {
        Self::new()
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for StandardEvent {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "StandardEvent({=u8:b})", self.bits());
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for StatusByte {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "StatusByte({=u8:b})", self.bits());
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for StatusRegisters {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(
            f,
            "StatusRegisters({}, {=u8:b}, {=u8:b}, {}, {})",
            self.event,
            self.event_enable,
            self.service_enable,
            self.operation,
            self.questionable
        );
    }
}
