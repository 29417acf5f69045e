//! The link: messages in the syntax of IEEE 488.2 and SCPI-99, over anything that carries bytes.
//!
//! An instrument brings a table of [`Command`]s and a [`Device`]; a [`Port`] takes bytes and returns answers. The
//! common commands, the error queue and the status structure are built in. Nothing is allocated, no float passes
//! through `core`'s formatting or parsing, and no input panics: garbage, half a line for ever and lines beyond all
//! bounds end in the standard's error with the instrument unchanged. Where a rule of the standards is quoted it is
//! quoted from memory.
//!
//! One message is carried out at a time and answered whole, so a query is never interrupted (-410) nor unterminated
//! (-420) on the instrument's side; what these mean on a bus with addressing does not arise on a serial line.
//! `examples/link_demo.rs` is an instrument on standard input and output.

mod error; // numbers and texts

mod error_queue; // first in, first out

mod status_registers; // what is latched, what counts

mod binary; // powers of ten

pub mod number; // numbers to text

mod lexer; // units, headers, parameters as bytes

mod decimal; // text to numbers

mod line; // bytes to messages

pub mod header; // patterns and paths

pub mod unit; // to SI

mod parameter; // what a command is given

mod reply; // what a query returns

pub mod unlock; // the lock before calibration writes

pub mod tree; // the table of commands

mod session; // what a port remembers

mod built_in; // commands every instrument has

mod interpreter; // carries out a message

mod port; // bytes in, answers out

pub use decimal::Decimal;
pub use error::LinkError;
pub use error_queue::{ErrorQueue, QUEUE_LENGTH};
pub use interpreter::Interpreter;
pub use line::Line;
pub use parameter::{Arguments, Numeric};
pub use port::Port;
pub use reply::Reply;
pub use session::Session;
pub use status_registers::{EventRegister, StandardEvent, StatusByte, StatusRegisters};
pub use tree::{Command, Device, Identification};
pub use unlock::Lock;
