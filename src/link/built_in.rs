//! The commands every instrument has: the thirteen of IEEE 488.2 (10.1), `SYSTem:ERRor`, `SYSTem:VERSion?` and
//! `STATus` of SCPI-99.
//!
//! Commands are carried out one after the other and to their end, so `*OPC` is true at once and `*WAI` never waits.

use super::error::LinkError;
use super::header::{Suffixes, matched};
use super::parameter::Arguments;
use super::reply::Reply;
use super::session::Session;
use super::status_registers::{EventRegister, StandardEvent, StatusRegisters};
use super::tree::Device;

/// The standard obeyed, `SYSTem:VERSion?`.
const SCPI_YEAR: &str = "1999.0";
/// Largest value of a 16-bit register parameter.
const MOST_REGISTER: i32 = 65_535;

/// A built-in command.
#[derive(Clone, Copy)]
pub(crate) enum BuiltIn {
    Clear,
    EventEnable,
    Event,
    Identification,
    OperationComplete,
    Reset,
    ServiceEnable,
    StatusByte,
    SelfTest,
    Wait,
    NextError,
    ErrorCount,
    Version,
    Preset,
    Register(Which, Part),
}

/// A SCPI register.
#[derive(Clone, Copy)]
pub(crate) enum Which {
    Operation,
    Questionable,
}

/// A part of a SCPI register.
#[derive(Clone, Copy)]
pub(crate) enum Part {
    Event,
    Condition,
    Enable,
    Rising,
    Falling,
}

const BUILT_IN: &[(&str, BuiltIn)] = &[
    ("*CLS", BuiltIn::Clear),
    ("*ESE", BuiltIn::EventEnable),
    ("*ESR", BuiltIn::Event),
    ("*IDN", BuiltIn::Identification),
    ("*OPC", BuiltIn::OperationComplete),
    ("*RST", BuiltIn::Reset),
    ("*SRE", BuiltIn::ServiceEnable),
    ("*STB", BuiltIn::StatusByte),
    ("*TST", BuiltIn::SelfTest),
    ("*WAI", BuiltIn::Wait),
    ("SYSTem:ERRor[:NEXT]", BuiltIn::NextError),
    ("SYSTem:ERRor:COUNt", BuiltIn::ErrorCount),
    ("SYSTem:VERSion", BuiltIn::Version),
    ("STATus:PRESet", BuiltIn::Preset),
    ("STATus:OPERation[:EVENt]", BuiltIn::Register(Which::Operation, Part::Event)),
    ("STATus:OPERation:CONDition", BuiltIn::Register(Which::Operation, Part::Condition)),
    ("STATus:OPERation:ENABle", BuiltIn::Register(Which::Operation, Part::Enable)),
    ("STATus:OPERation:PTRansition", BuiltIn::Register(Which::Operation, Part::Rising)),
    ("STATus:OPERation:NTRansition", BuiltIn::Register(Which::Operation, Part::Falling)),
    ("STATus:QUEStionable[:EVENt]", BuiltIn::Register(Which::Questionable, Part::Event)),
    ("STATus:QUEStionable:CONDition", BuiltIn::Register(Which::Questionable, Part::Condition)),
    ("STATus:QUEStionable:ENABle", BuiltIn::Register(Which::Questionable, Part::Enable)),
    ("STATus:QUEStionable:PTRansition", BuiltIn::Register(Which::Questionable, Part::Rising)),
    ("STATus:QUEStionable:NTRansition", BuiltIn::Register(Which::Questionable, Part::Falling)),
];

/// The built-in command of a header, if it is one.
pub(crate) fn found(header: &[&[u8]]) -> Option<BuiltIn> {
    let is = |pattern: &str| matched(pattern, header).as_ref().is_some_and(Suffixes::is_empty);
    BUILT_IN.iter().find(|row| is(row.0)).map(|row| row.1)
}

impl BuiltIn {
    /// Most parameters of the command or of the query.
    pub(crate) const fn parameters(self, query: bool) -> u8 {
        match self {
            Self::EventEnable | Self::ServiceEnable | Self::Register(..) if !query => 1,
            _ => 0,
        }
    }

    /// Carries out the command.
    pub(crate) fn set<C: Device>(
        self,
        session: &mut Session,
        device: &mut C,
        arguments: &mut Arguments<'_>,
    ) -> Result<(), LinkError> {
        match self {
            Self::Clear => session.clear(),
            Self::EventEnable => session.status.event_enable = arguments.integer(0..=255)? as u8,
            Self::ServiceEnable => session.status.set_service_enable(arguments.integer(0..=255)? as u8),
            Self::OperationComplete => session.status.raise(StandardEvent::OPERATION_COMPLETE),
            Self::Reset => device.reset(),
            Self::Wait => {}
            Self::Preset => session.status.preset(),
            Self::Register(which, part) => set_part(register(&mut session.status, which), part, arguments)?,
            _ => return Err(LinkError::UndefinedHeader),
        }
        Ok(())
    }

    /// Answers the query.
    pub(crate) fn query<C: Device>(
        self,
        session: &mut Session,
        device: &mut C,
        reply: &mut Reply<'_>,
    ) -> Result<(), LinkError> {
        match self {
            Self::EventEnable => reply.integer(i32::from(session.status.event_enable)),
            Self::Event => reply.integer(i32::from(session.status.take_standard_event().bits())),
            Self::Identification => identify(device, reply),
            Self::OperationComplete => reply.boolean(true),
            Self::ServiceEnable => reply.integer(i32::from(session.status.service_enable())),
            Self::StatusByte => reply.integer(i32::from(session.status_byte(reply.has_earlier()).bits())),
            Self::SelfTest => reply.integer(i32::from(device.self_test())),
            Self::NextError => next_error(session, reply),
            Self::ErrorCount => reply.integer(session.errors.len() as i32),
            Self::Version => reply.word(SCPI_YEAR),
            Self::Register(which, part) => {
                reply.integer(i32::from(part_of(register(&mut session.status, which), part)));
            }
            Self::Clear | Self::Reset | Self::Wait | Self::Preset => return Err(LinkError::UndefinedHeader),
        }
        Ok(())
    }
}

fn identify<C: Device>(device: &C, reply: &mut Reply<'_>) {
    let who = device.identification();
    reply.indefinite(&[who.manufacturer, who.model, who.serial, who.version]);
}

fn next_error(session: &mut Session, reply: &mut Reply<'_>) {
    let (number, text) = session.errors.pop().map_or((0, "No error"), |error| (error.number(), error.text()));
    reply.integer(i32::from(number));
    reply.string(text);
}

fn register(status: &mut StatusRegisters, which: Which) -> &mut EventRegister {
    match which {
        Which::Operation => &mut status.operation,
        Which::Questionable => &mut status.questionable,
    }
}

fn part_of(register: &mut EventRegister, part: Part) -> u16 {
    match part {
        Part::Event => register.take_event(),
        Part::Condition => register.condition(),
        Part::Enable => register.enable,
        Part::Rising => register.rising,
        Part::Falling => register.falling,
    }
}

fn set_part(register: &mut EventRegister, part: Part, arguments: &mut Arguments<'_>) -> Result<(), LinkError> {
    let place = match part {
        Part::Enable => &mut register.enable,
        Part::Rising => &mut register.rising,
        Part::Falling => &mut register.falling,
        Part::Event | Part::Condition => return Err(LinkError::UndefinedHeader),
    };
    // The sixteenth bit is accepted and always reads as zero.
    *place = arguments.integer(0..=MOST_REGISTER)? as u16 & 0x7FFF;
    Ok(())
}
