//! A line of text from words and whole numbers; `core::fmt` would be larger than what is measured here.

use crate::machine;

/// A line in the making; what exceeds its room is cut.
pub struct Line {
    bytes: [u8; 160],
    length: usize,
}

impl Line {
    /// A line that starts with a word.
    pub fn new(word: &str) -> Self {
        Self { bytes: [0; 160], length: 0 }.text(word)
    }

    /// Adds text as it is.
    pub fn text(mut self, text: &str) -> Self {
        for byte in text.bytes() {
            self.put(byte);
        }
        self
    }

    /// Adds a space and a decimal number.
    pub fn number(mut self, number: u32) -> Self {
        self.put(b' ');
        let mut divisor = 1_000_000_000;
        while divisor > 0 {
            if number >= divisor || divisor == 1 {
                self.put(b'0' + (number / divisor % 10) as u8);
            }
            divisor /= 10;
        }
        self
    }

    /// Adds a space and a bit pattern of some hexadecimal digits.
    pub fn bits(mut self, bits: u64, digits: u32) -> Self {
        self.put(b' ');
        for place in (0..digits).rev() {
            let digit = (bits >> (4 * (place & 15)) & 15) as u8;
            self.put(if digit < 10 { b'0' + digit } else { b'a' + digit - 10 });
        }
        self
    }

    /// Prints the line.
    pub fn print(mut self) {
        self.put(b'\n');
        machine::print(self.bytes.get(..self.length).unwrap_or(&[]));
    }

    fn put(&mut self, byte: u8) {
        if let Some(place) = self.bytes.get_mut(self.length) {
            *place = byte;
            self.length += 1;
        }
    }
}
