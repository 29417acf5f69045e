//! What a port remembers between messages: its errors, its status, its number.

use super::error::LinkError;
use super::error_queue::ErrorQueue;
use super::status_registers::{StandardEvent, StatusByte, StatusRegisters};

/// The memory of one port.
///
/// ```
/// use evenbore::link::{LinkError, Session, StatusByte};
/// let mut session = Session::new(0);
/// session.report(LinkError::CalibrationLost);
/// assert_eq!(session.status_byte(false), StatusByte::ERRORS);
/// ```
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Session {
    /// Errors not yet read.
    pub errors: ErrorQueue,
    /// Status registers; set their conditions from the main loop.
    pub status: StatusRegisters,
    port: u8,
}

impl Session {
    /// As after power-on, for the port of this number.
    pub const fn new(port: u8) -> Self {
        Self { errors: ErrorQueue::new(), status: StatusRegisters::new(), port }
    }

    /// The number of the port.
    pub const fn port(&self) -> u8 {
        self.port
    }

    /// Queues an error and latches its standard event; an overflow of the queue is a device error besides.
    pub fn report(&mut self, error: LinkError) {
        self.status.raise(StandardEvent::of(error));
        if !self.errors.push(error) {
            self.status.raise(StandardEvent::of(LinkError::QueueOverflow));
        }
    }

    /// `*CLS`: forgets errors and events.
    pub fn clear(&mut self) {
        self.errors.clear();
        self.status.clear();
    }

    /// The status byte, given whether part of an answer waits.
    pub fn status_byte(&self, message: bool) -> StatusByte {
        self.status.status_byte(!self.errors.is_empty(), message)
    }
}
