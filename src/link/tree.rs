//! The commands of an instrument as a table, and what it must be able to do for the commands every instrument has.

use super::error::LinkError;
use super::parameter::Arguments;
use super::reply::Reply;

/// Carries out a command.
pub type Set<C> = fn(&mut C, &mut Arguments<'_>) -> Result<(), LinkError>;
/// Answers a query.
pub type Query<C> = fn(&mut C, &mut Arguments<'_>, &mut Reply<'_>) -> Result<(), LinkError>;

/// One row of the table: a pattern (see [`super::header`]) with what it sets and what it answers.
///
/// ```
/// use evenbore::link::{Arguments, Command, LinkError, Numeric, Reply, unit};
/// struct Instrument {
///     damping: f32,
/// }
/// const DAMPING: Numeric = Numeric { units: unit::TIME, least: 0.0, most: 60.0, default: 1.0 };
/// fn set(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Result<(), LinkError> {
///     i.damping = arguments.number(&DAMPING)?;
///     Ok(())
/// }
/// fn get(i: &mut Instrument, arguments: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Result<(), LinkError> {
///     reply.number(arguments.limit(&DAMPING)?.unwrap_or(i.damping));
///     Ok(())
/// }
/// const TABLE: &[Command<Instrument>] = &[Command::new("[SENSe:]DAMPing").set(1, set).query(1, get)];
/// ```
pub struct Command<C> {
    pub(crate) pattern: &'static str,
    pub(crate) set: Option<Set<C>>,
    pub(crate) query: Option<Query<C>>,
    pub(crate) set_parameters: u8,
    pub(crate) query_parameters: u8,
    pub(crate) protected: bool,
}

impl<C> Command<C> {
    /// A command that neither sets nor answers yet.
    pub const fn new(pattern: &'static str) -> Self {
        Self { pattern, set: None, query: None, set_parameters: 0, query_parameters: 0, protected: false }
    }

    /// Sets by `set`, with at most `parameters` parameters; more are refused before it runs.
    pub const fn set(self, parameters: u8, set: Set<C>) -> Self {
        Self { set: Some(set), set_parameters: parameters, ..self }
    }

    /// Answers by `query`, with at most `parameters` parameters; more are refused before it runs.
    pub const fn query(self, parameters: u8, query: Query<C>) -> Self {
        Self { query: Some(query), query_parameters: parameters, ..self }
    }

    /// Sets only where [`Device::may_write`] allows it.
    pub const fn protected(self) -> Self {
        Self { protected: true, ..self }
    }

    /// The pattern.
    pub const fn pattern(&self) -> &'static str {
        self.pattern
    }

    /// Whether the row serves a query, or a command.
    pub(crate) const fn serves(&self, query: bool) -> bool {
        if query { self.query.is_some() } else { self.set.is_some() }
    }
}

impl<C> core::fmt::Debug for Command<C> {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        f.write_str(self.pattern)
    }
}

#[cfg(feature = "defmt")]
impl<C> defmt::Format for Command<C> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "{=str}", self.pattern);
    }
}

/// Who the instrument is, `*IDN?`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Identification<'a> {
    /// The maker.
    pub manufacturer: &'a str,
    /// The model.
    pub model: &'a str,
    /// The serial number.
    pub serial: &'a str,
    /// The version of the software, and its checksum where there is one.
    pub version: &'a str,
}

/// What an instrument does for the commands that every instrument has.
pub trait Device {
    /// Who it is, `*IDN?`.
    fn identification(&self) -> Identification<'_>;

    /// Brings the settings to a known state, `*RST`; calibration, totals and the lock stay.
    fn reset(&mut self);

    /// Tests itself, `*TST?`: 0 when all is well, else a number that says what is not.
    fn self_test(&mut self) -> u16 {
        0
    }

    /// Whether protected settings may be written from `port` now; usually [`super::unlock::Lock::is_open`].
    fn may_write(&self, port: u8) -> bool;

    /// A protected command was carried out: the place to count the event that nobody can undo.
    fn written(&mut self, command: &'static str, port: u8) {
        let _ = (command, port);
    }
}
