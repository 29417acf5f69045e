//! Carries out one message: each unit in turn, against the built-in commands and the instrument's table.
//!
//! A command error ends the message, because what follows may mean something else; after any other error the next unit
//! is carried out. Answers given before an error are sent.

use super::built_in::{self, BuiltIn};
use super::error::LinkError;
use super::header::{Path, matched};
use super::lexer::{Nodes, cut, header, trim_start};
use super::parameter::Arguments;
use super::reply::Reply;
use super::session::Session;
use super::tree::{Command, Device};

/// One port of an instrument: its table of commands and what the port remembers.
#[derive(Debug, Clone)]
pub struct Interpreter<'t, C> {
    table: &'t [Command<C>],
    /// Errors and status of this port.
    pub session: Session,
}

impl<'t, C: Device> Interpreter<'t, C> {
    /// An interpreter for the port of this number, as after power-on.
    pub const fn new(table: &'t [Command<C>], port: u8) -> Self {
        Self { table, session: Session::new(port) }
    }

    /// Carries out a message, which may be any bytes, and writes its answer.
    ///
    /// What goes wrong is queued, never returned: the client asks for it.
    pub fn run(&mut self, message: &[u8], device: &mut C, mut reply: Reply<'_>) {
        let (mut rest, mut path) = (Some(message), Path::default());
        while let Some(units) = rest {
            let outcome = cut(units, b';').and_then(|(unit, after)| {
                rest = after;
                self.unit(trim_start(unit), &mut path, device, &mut reply)
            });
            if let Err(error) = outcome {
                self.session.report(error);
                if error.is_command_error() {
                    break;
                }
            }
        }
        if let Err(error) = reply.finish() {
            self.session.report(error);
        }
    }

    fn unit<'a>(
        &mut self,
        unit: &'a [u8],
        path: &mut Path<'a>,
        device: &mut C,
        reply: &mut Reply<'_>,
    ) -> Result<(), LinkError> {
        if unit.is_empty() {
            return Ok(());
        }
        let (header, text) = header(unit)?;
        let query = header.query;
        let nodes = path.resolve(header)?;
        let arguments = Arguments::new(text);
        if !query {
            return self.set(&nodes, arguments, device);
        }
        reply.query()?;
        let answered = self.query(&nodes, arguments, device, reply);
        if answered.is_err() {
            reply.take_back();
            return answered;
        }
        if reply.is_empty() { Err(LinkError::DeviceSpecific) } else { Ok(()) }
    }

    fn set(&mut self, nodes: &Nodes<'_>, arguments: Arguments<'_>, device: &mut C) -> Result<(), LinkError> {
        if let Some(built_in) = built_in::found(nodes) {
            let mut arguments = self.admitted(built_in, false, arguments)?;
            return built_in.set(&mut self.session, device, &mut arguments);
        }
        let (command, mut arguments) = self.command(nodes, false, arguments)?;
        let port = self.session.port();
        if command.protected && !device.may_write(port) {
            return Err(LinkError::CommandProtected);
        }
        command.set.ok_or(LinkError::UndefinedHeader)?(device, &mut arguments)?;
        if command.protected {
            device.written(command.pattern, port);
        }
        Ok(())
    }

    fn query(
        &mut self,
        nodes: &Nodes<'_>,
        arguments: Arguments<'_>,
        device: &mut C,
        reply: &mut Reply<'_>,
    ) -> Result<(), LinkError> {
        if let Some(built_in) = built_in::found(nodes) {
            self.admitted(built_in, true, arguments)?;
            return built_in.query(&mut self.session, device, reply);
        }
        let (command, mut arguments) = self.command(nodes, true, arguments)?;
        command.query.ok_or(LinkError::UndefinedHeader)?(device, &mut arguments, reply)
    }

    /// The row of the table that serves a header, with its parameters counted.
    fn command<'a>(
        &self,
        nodes: &Nodes<'_>,
        query: bool,
        arguments: Arguments<'a>,
    ) -> Result<(&'t Command<C>, Arguments<'a>), LinkError> {
        let mut rows = self.table.iter().filter(|row| row.serves(query));
        let found = rows.find_map(|row| Some((row, matched(row.pattern, nodes)?)));
        let (command, suffixes) = found.ok_or(LinkError::UndefinedHeader)?;
        counted(&arguments, if query { command.query_parameters } else { command.set_parameters })?;
        Ok((command, arguments.of(suffixes, self.session.port())))
    }

    fn admitted<'a>(&self, what: BuiltIn, query: bool, arguments: Arguments<'a>) -> Result<Arguments<'a>, LinkError> {
        counted(&arguments, what.parameters(query))?;
        Ok(arguments)
    }
}

fn counted(arguments: &Arguments<'_>, most: u8) -> Result<(), LinkError> {
    if arguments.count()? > usize::from(most) { Err(LinkError::ParameterNotAllowed) } else { Ok(()) }
}

#[cfg(feature = "defmt")]
impl<C> defmt::Format for Interpreter<'_, C> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Interpreter({=usize} commands, {})", self.table.len(), self.session);
    }
}
