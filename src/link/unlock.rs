//! The lock before calibration writes: a code, a count of wrong ones, and a wait that doubles with each.
//!
//! A protected command does not run while the lock is shut ([`super::tree::Command::protected`]); the client gets
//! `CommandProtected` (-203). The instrument owns its lock and answers [`super::tree::Device::may_write`] from it. The
//! clock is the caller's: milliseconds that only grow. Keep [`Lock::failures`] in memory that survives, or a power cut
//! shortens the wait.

use super::error::LinkError;
use heapless::String;

/// Longest code.
pub const CODE_LENGTH: usize = 16;
/// Wait after the first wrong code, ms; it doubles with each further one.
const FIRST_WAIT_MS: u64 = 1000;
/// Number of doublings after which the wait stays the same: 1024 s.
const MOST_DOUBLINGS: u16 = 10;

/// A lock with a code. Opened, it is open for one port, and shuts by itself after a time.
///
/// ```
/// use evenbore::link::{Lock, LinkError};
/// let mut lock = Lock::new("4711", 600_000)?;
/// assert_eq!(lock.open("1234", 0, 5_000), Err(LinkError::IllegalParameter));
/// assert_eq!(lock.open("4711", 0, 5_900), Err(LinkError::CommandProtected)); // within a second of a wrong one
/// lock.open("4711", 0, 6_000)?;
/// assert!(lock.is_open(0, 60_000) && !lock.is_open(1, 60_000) && !lock.is_open(0, 606_000));
/// # Ok::<(), LinkError>(())
/// ```
#[derive(Debug, Clone)]
pub struct Lock {
    code: String<CODE_LENGTH>,
    open_for_ms: u64,
    failures: u16,
    shut_until_ms: u64,
    holder: Option<Holder>,
}

/// Who opened the lock, and until when.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
struct Holder {
    port: u8,
    until_ms: u64,
}

impl Lock {
    /// A shut lock that stays open for `open_for_ms` after the right code.
    ///
    /// # Errors
    /// `IllegalParameter` for a code that is empty, longer than 16 bytes or not printable ASCII.
    pub fn new(code: &str, open_for_ms: u64) -> Result<Self, LinkError> {
        Ok(Self { code: checked(code)?, open_for_ms, failures: 0, shut_until_ms: 0, holder: None })
    }

    /// The same lock with the wrong codes counted before a restart, whose wait begins at `now_ms`.
    pub fn with_failures(self, failures: u16, now_ms: u64) -> Self {
        Self { failures, shut_until_ms: now_ms.saturating_add(wait_ms(failures)), ..self }
    }

    /// Opens the lock for `port`.
    ///
    /// # Errors
    /// `CommandProtected` during the wait after a wrong code, which is not even compared, and while another port holds
    /// the lock; `IllegalParameter` for a wrong code, which is counted.
    pub fn open(&mut self, code: &str, port: u8, now_ms: u64) -> Result<(), LinkError> {
        if now_ms < self.shut_until_ms || self.holder(now_ms).is_some_and(|holder| holder != port) {
            return Err(LinkError::CommandProtected);
        }
        if !same(self.code.as_bytes(), code.as_bytes()) {
            self.failures = self.failures.saturating_add(1);
            self.shut_until_ms = now_ms.saturating_add(wait_ms(self.failures));
            self.holder = None;
            return Err(LinkError::IllegalParameter);
        }
        self.failures = 0;
        self.holder = Some(Holder { port, until_ms: now_ms.saturating_add(self.open_for_ms) });
        Ok(())
    }

    /// Shuts the lock.
    pub fn shut(&mut self) {
        self.holder = None;
    }

    /// Whether `port` may write protected settings now.
    pub fn is_open(&self, port: u8, now_ms: u64) -> bool {
        self.holder(now_ms) == Some(port)
    }

    /// The port that may write, if any.
    pub fn holder(&self, now_ms: u64) -> Option<u8> {
        self.holder.filter(|holder| now_ms < holder.until_ms).map(|holder| holder.port)
    }

    /// Wrong codes since the last right one.
    pub const fn failures(&self) -> u16 {
        self.failures
    }

    /// Replaces the code.
    ///
    /// # Errors
    /// `CommandProtected` unless open for `port`, `IllegalParameter` as [`Lock::new`].
    pub fn set_code(&mut self, code: &str, port: u8, now_ms: u64) -> Result<(), LinkError> {
        if !self.is_open(port, now_ms) {
            return Err(LinkError::CommandProtected);
        }
        self.code = checked(code)?;
        Ok(())
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Lock {
    fn format(&self, f: defmt::Formatter<'_>) {
        // Never the code.
        defmt::write!(f, "Lock({}, failures {=u16})", self.holder, self.failures);
    }
}

fn checked(code: &str) -> Result<String<CODE_LENGTH>, LinkError> {
    if code.is_empty() || !code.bytes().all(|b| (b' '..=b'~').contains(&b)) {
        return Err(LinkError::IllegalParameter);
    }
    String::try_from(code).map_err(|_| LinkError::IllegalParameter)
}

const fn wait_ms(failures: u16) -> u64 {
    match failures {
        0 => 0,
        1..=MOST_DOUBLINGS => FIRST_WAIT_MS << (failures - 1),
        _ => FIRST_WAIT_MS << MOST_DOUBLINGS,
    }
}

/// Compares without telling by its time where the difference is.
fn same(code: &[u8], tried: &[u8]) -> bool {
    let differences = code.iter().zip(tried).fold(0, |sum, (a, b)| sum | (a ^ b));
    code.len() == tried.len() && differences == 0
}
