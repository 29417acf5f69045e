//! The answer to one message, in bounded memory: `;` between the answers of its queries, `,` between the parts of one
//! answer, LF at the end (IEEE 488.2, chapter 8).
//!
//! An answer that does not fit would stand still with the client waiting to send: `QueryDeadlocked` (-430), and the
//! whole answer is dropped, as the standard does when input and output block each other. Nothing may follow an answer
//! of indefinite length in the same message (`*IDN?`): `QueryAfterIndefinite` (-440).

use super::error::LinkError;
use super::number::{self, EXACT_DIGITS, NumberText};
use heapless::VecView;

/// Significant digits of [`Reply::number`].
const USUAL_DIGITS: u8 = 7;

/// Where a handler writes its answer.
///
/// ```
/// use evenbore::link::Reply;
/// let mut buffer = heapless::Vec::<u8, 64>::new();
/// let mut reply = Reply::new(buffer.as_mut_view());
/// reply.query()?;
/// reply.number(1.5e-4);
/// reply.string("a \"b\"");
/// reply.query()?;
/// reply.boolean(true);
/// reply.finish()?;
/// assert_eq!(buffer, *b"1.500000E-04,\"a \"\"b\"\"\";1\n");
/// # Ok::<(), evenbore::link::LinkError>(())
/// ```
#[derive(Debug)]
pub struct Reply<'b> {
    out: &'b mut VecView<u8>,
    start: usize,
    empty: bool,
    indefinite: bool,
    overflow: bool,
}

impl<'b> Reply<'b> {
    /// An answer into `out`, which is emptied.
    pub fn new(out: &'b mut VecView<u8>) -> Self {
        out.clear();
        Self { out, start: 0, empty: true, indefinite: false, overflow: false }
    }

    /// Begins the answer to one more query.
    ///
    /// # Errors
    /// `QueryAfterIndefinite` when the answer before it was of indefinite length.
    pub fn query(&mut self) -> Result<(), LinkError> {
        if self.indefinite {
            return Err(LinkError::QueryAfterIndefinite);
        }
        self.start = self.out.len();
        self.empty = true;
        Ok(())
    }

    /// Takes back what the query begun last has written.
    pub fn take_back(&mut self) {
        self.out.truncate(self.start);
        self.empty = true;
    }

    /// Whether the query begun last has written nothing.
    pub const fn is_empty(&self) -> bool {
        self.empty
    }

    /// Whether an earlier query of the message has been answered.
    pub const fn has_earlier(&self) -> bool {
        self.start > 0
    }

    /// Ends the message with LF if anything was answered.
    ///
    /// # Errors
    /// `QueryDeadlocked` when the answer did not fit; nothing is left of it.
    pub fn finish(self) -> Result<(), LinkError> {
        let fits = !self.overflow && (self.out.is_empty() || self.out.push(b'\n').is_ok());
        if !fits {
            self.out.clear();
            return Err(LinkError::QueryDeadlocked);
        }
        Ok(())
    }

    /// A number with seven significant digits.
    pub fn number(&mut self, value: f32) {
        self.written(&number::scientific(value, USUAL_DIGITS));
    }

    /// A number with nine significant digits, which comes back as the same f32.
    pub fn exact(&mut self, value: f32) {
        self.written(&number::scientific(value, EXACT_DIGITS));
    }

    /// A number with a fixed number of decimals.
    pub fn fixed(&mut self, value: f32, decimals: u8) {
        self.written(&number::fixed(value, decimals));
    }

    /// An integer.
    pub fn integer(&mut self, value: i32) {
        self.written(&number::integer(value));
    }

    /// 1 or 0.
    pub fn boolean(&mut self, value: bool) {
        self.integer(i32::from(value));
    }

    /// A mnemonic.
    pub fn word(&mut self, word: &str) {
        self.part();
        self.put(word.as_bytes());
    }

    /// A text in quotes; quotes in it are doubled, what is not printable ASCII becomes a question mark.
    pub fn string(&mut self, text: &str) {
        self.part();
        self.put(b"\"");
        for byte in text.bytes() {
            match byte {
                b'"' => self.put(b"\"\""),
                b' '..=b'~' => self.put(&[byte]),
                _ => self.put(b"?"),
            }
        }
        self.put(b"\"");
    }

    /// Bytes as a block of definite length.
    pub fn block(&mut self, bytes: &[u8]) {
        let length = number::integer(i32::try_from(bytes.len()).unwrap_or(0));
        self.part();
        self.put(b"#");
        self.put(&[b'0' + length.len() as u8]);
        self.put(length.as_bytes());
        self.put(bytes);
    }

    /// A text of indefinite length, after which nothing may follow in the message; its parts may hold anything
    /// printable but `,` and `;`, which become `_`, and an empty one is sent as 0.
    pub fn indefinite(&mut self, parts: &[&str]) {
        for part in parts {
            self.part();
            for byte in if part.is_empty() { "0" } else { part }.bytes() {
                let plain = (b' '..=b'~').contains(&byte) && byte != b',' && byte != b';';
                self.put(&[if plain { byte } else { b'_' }]);
            }
        }
        self.indefinite = true;
    }

    fn written(&mut self, text: &NumberText) {
        self.word(text);
    }

    fn part(&mut self) {
        if !self.empty {
            self.put(b",");
        } else if self.has_earlier() {
            self.put(b";");
        }
        self.empty = false;
    }

    fn put(&mut self, bytes: &[u8]) {
        self.overflow |= self.out.extend_from_slice(bytes).is_err();
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Reply<'_> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Reply({=[u8]:a})", self.out.as_slice());
    }
}
