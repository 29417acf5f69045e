//! The error queue: first in, first out, and the last place tells of what was lost (SCPI-99 volume 2, 21.8.1).

use super::error::LinkError;

/// Errors the queue holds.
pub const QUEUE_LENGTH: usize = 16;

/// Errors not yet read, oldest first. Cleared by `*CLS`, not by `*RST`.
///
/// ```
/// use evenbore::link::{ErrorQueue, LinkError};
/// let mut queue = ErrorQueue::new();
/// queue.push(LinkError::UndefinedHeader);
/// queue.push(LinkError::DataOutOfRange);
/// assert_eq!(queue.pop(), Some(LinkError::UndefinedHeader));
/// assert_eq!(queue.len(), 1);
/// ```
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ErrorQueue {
    ring: [LinkError; QUEUE_LENGTH],
    first: usize,
    count: usize,
}

impl ErrorQueue {
    /// An empty queue.
    pub const fn new() -> Self {
        Self { ring: [LinkError::DeviceSpecific; QUEUE_LENGTH], first: 0, count: 0 }
    }

    /// Puts an error last. When the queue is full the last entry becomes -350 and the new error is lost.
    ///
    /// Returns whether the error found a place.
    pub fn push(&mut self, error: LinkError) -> bool {
        let fits = self.count < QUEUE_LENGTH;
        self.count += usize::from(fits);
        let last = (self.first + self.count.saturating_sub(1)) % QUEUE_LENGTH;
        if let Some(place) = self.ring.get_mut(last) {
            *place = if fits { error } else { LinkError::QueueOverflow };
        }
        fits
    }

    /// Takes the oldest error.
    pub fn pop(&mut self) -> Option<LinkError> {
        if self.count == 0 {
            return None;
        }
        let oldest = self.ring.get(self.first).copied();
        self.first = (self.first + 1) % QUEUE_LENGTH;
        self.count -= 1;
        oldest
    }

    /// Forgets all errors.
    pub fn clear(&mut self) {
        self.count = 0;
    }

    /// Number of errors not yet read.
    pub const fn len(&self) -> usize {
        self.count
    }

    /// Whether there is no error to read.
    pub const fn is_empty(&self) -> bool {
        self.count == 0
    }
}

impl Default for ErrorQueue {
    fn default() -> Self {
        Self::new()
    }
}
