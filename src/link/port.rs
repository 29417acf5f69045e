//! A port: bytes in, answers out. The caller moves the bytes, from whatever serial line, socket or terminal it has.

use super::interpreter::Interpreter;
use super::line::Line;
use super::reply::Reply;
use super::tree::{Command, Device};
use heapless::Vec;

/// A port with a line of at most `LINE` bytes and an answer of at most `ANSWER` bytes.
///
/// ```
/// use evenbore::link::{Device, Identification, Port};
/// struct Instrument;
/// impl Device for Instrument {
///     fn identification(&self) -> Identification<'_> {
///         Identification { manufacturer: "Workshop", model: "EB1", serial: "0042", version: "0.1" }
///     }
///     fn reset(&mut self) {}
///     fn may_write(&self, _port: u8) -> bool {
///         false
///     }
/// }
/// let mut port = Port::<Instrument, 128, 128>::new(&[], 0);
/// let mut answers = std::vec::Vec::new();
/// for byte in *b"*IDN?\nNONSENSE\nSYST:ERR?;ERR?\n" {
///     answers.extend_from_slice(port.receive(byte, &mut Instrument));
/// }
/// assert_eq!(answers, b"Workshop,EB1,0042,0.1\n-113,\"Undefined header\";0,\"No error\"\n");
/// ```
#[derive(Debug, Clone)]
pub struct Port<'t, C, const LINE: usize, const ANSWER: usize> {
    line: Line<LINE>,
    answer: Vec<u8, ANSWER>,
    /// What carries out the messages, with the port's errors and status.
    pub interpreter: Interpreter<'t, C>,
}

impl<'t, C: Device, const LINE: usize, const ANSWER: usize> Port<'t, C, LINE, ANSWER> {
    /// A port of this number, as after power-on.
    pub const fn new(table: &'t [Command<C>], number: u8) -> Self {
        Self { line: Line::new(), answer: Vec::new(), interpreter: Interpreter::new(table, number) }
    }

    /// Takes one byte; when it ends a message, carries it out. Returns the bytes to send, none most of the time.
    pub fn receive(&mut self, byte: u8, device: &mut C) -> &[u8] {
        self.answer.clear();
        match self.line.push(byte) {
            None => {}
            Some(Err(error)) => self.interpreter.session.report(error),
            Some(Ok(())) => {
                self.interpreter.run(self.line.bytes(), device, Reply::new(self.answer.as_mut_view()));
            }
        }
        &self.answer
    }

    /// Forgets the half of a line that was received: a device clear, a break, a client gone.
    pub fn clear(&mut self) {
        self.line.clear();
    }
}

#[cfg(feature = "defmt")]
impl<C, const LINE: usize, const ANSWER: usize> defmt::Format for Port<'_, C, LINE, ANSWER> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Port({}, {})", self.line, self.interpreter);
    }
}
