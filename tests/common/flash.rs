//! A NOR flash that misbehaves like a real one: bits only fall, a word is programmed once per erase, power fails in the
//! middle of a word or of an erase, pages wear out, torn words may be unreadable (error correction).

#![allow(dead_code)] // every test file uses its own part

use embedded_storage::nor_flash::{ErrorType, NorFlash, NorFlashError, NorFlashErrorKind, ReadNorFlash};

/// Why the flash refused.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum MockError {
    /// There is no power until `restart`.
    PowerCut,
    /// The page no longer erases or programs.
    Worn,
    /// A torn word that error correction cannot read.
    Uncorrectable,
    /// Address or length is not what the flash can do.
    Request,
}

impl NorFlashError for MockError {
    fn kind(&self) -> NorFlashErrorKind {
        NorFlashErrorKind::Other
    }
}

/// What a worn page does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Wear {
    /// Erasing returns an error and changes nothing.
    EraseFails,
    /// Programming returns an error and changes nothing.
    WriteFails,
    /// Programming says it worked, and one bit stays as it was.
    BitSticks,
}

/// What the interrupted step leaves behind.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Torn {
    /// Nothing: the cut falls between two steps.
    Whole,
    /// Some of the bits that were to fall; some of the bits that were to rise, or noise, in an erased page.
    Partial,
    /// As `Partial`, and the torn word cannot be read at all until its page is erased.
    Unreadable,
}

/// A small generator with a fixed seed (SplitMix64).
#[derive(Debug, Clone)]
pub struct Dice(pub u64);

impl Dice {
    pub fn roll(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let z = (self.0 ^ (self.0 >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        let z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }
    pub fn below(&mut self, n: u64) -> u64 {
        self.roll() % n
    }
}

/// `WORD` bytes are programmed at once, `PAGE` bytes erased at once.
#[derive(Debug, Clone)]
pub struct MockFlash<const WORD: usize, const PAGE: usize> {
    pub bytes: Vec<u8>,
    unreadable: Vec<bool>,
    /// Steps (a word programmed or a page erased) left before the power fails.
    pub power: Option<u64>,
    pub torn: Torn,
    pub dice: Dice,
    pub worn: Vec<Option<Wear>>,
    pub erases: Vec<u32>,
    /// Steps done since the flash was made.
    pub steps: u64,
    dead: bool,
}

impl<const WORD: usize, const PAGE: usize> MockFlash<WORD, PAGE> {
    pub fn new(pages: usize) -> Self {
        Self {
            bytes: vec![0xFF; pages * PAGE],
            unreadable: vec![false; pages * PAGE / WORD],
            power: None,
            torn: Torn::Partial,
            dice: Dice(1),
            worn: vec![None; pages],
            erases: vec![0; pages],
            steps: 0,
            dead: false,
        }
    }

    /// Power comes back and stays.
    pub fn restart(&mut self) {
        self.power = None;
        self.dead = false;
    }

    /// Whether the power has failed.
    pub fn is_dead(&self) -> bool {
        self.dead
    }

    /// Takes one step of power; true when it fails during this step.
    fn fails_now(&mut self) -> bool {
        self.steps += 1;
        match &mut self.power {
            Some(0) => {
                self.dead = true;
                true
            }
            Some(left) => {
                *left -= 1;
                false
            }
            None => false,
        }
    }

    fn program(&mut self, at: usize, word: &[u8]) -> Result<(), MockError> {
        let place = at..at + WORD;
        assert!(self.bytes[place.clone()].iter().all(|&b| b == 0xFF), "word at {at:#x} programmed twice");
        if self.fails_now() {
            if self.torn != Torn::Whole {
                for (byte, wanted) in self.bytes[place].iter_mut().zip(word) {
                    *byte &= wanted | self.dice.roll() as u8;
                }
                self.unreadable[at / WORD] = self.torn == Torn::Unreadable;
            }
            return Err(MockError::PowerCut);
        }
        match self.worn[at / PAGE] {
            Some(Wear::WriteFails) => return Err(MockError::Worn),
            wear => {
                self.bytes[place].copy_from_slice(word);
                if wear == Some(Wear::BitSticks) {
                    self.bytes[at] |= 1 << (at / WORD % 8);
                }
            }
        }
        Ok(())
    }

    fn erase_page(&mut self, page: usize) -> Result<(), MockError> {
        let place = page * PAGE..(page + 1) * PAGE;
        let words = page * PAGE / WORD..(page + 1) * PAGE / WORD;
        if self.fails_now() {
            if self.torn != Torn::Whole {
                let kind = self.dice.below(3);
                for byte in &mut self.bytes[place] {
                    match kind {
                        0 => *byte = self.dice.roll() as u8,
                        1 => *byte |= self.dice.roll() as u8,
                        _ => *byte |= if self.dice.below(32) == 0 { self.dice.roll() as u8 } else { 0 },
                    }
                }
                for word in &mut self.unreadable[words] {
                    *word |= self.torn == Torn::Unreadable && self.dice.below(4) == 0;
                }
            }
            return Err(MockError::PowerCut);
        }
        if self.worn[page] == Some(Wear::EraseFails) {
            return Err(MockError::Worn);
        }
        self.erases[page] += 1;
        self.bytes[place].fill(0xFF);
        self.unreadable[words].fill(false);
        Ok(())
    }
}

impl<const WORD: usize, const PAGE: usize> ErrorType for MockFlash<WORD, PAGE> {
    type Error = MockError;
}

impl<const WORD: usize, const PAGE: usize> ReadNorFlash for MockFlash<WORD, PAGE> {
    const READ_SIZE: usize = WORD;

    fn read(&mut self, offset: u32, bytes: &mut [u8]) -> Result<(), MockError> {
        let (at, length) = (offset as usize, bytes.len());
        if self.dead {
            return Err(MockError::PowerCut);
        }
        if !at.is_multiple_of(WORD) || !length.is_multiple_of(WORD) || at + length > self.bytes.len() {
            return Err(MockError::Request);
        }
        if self.unreadable[at / WORD..(at + length) / WORD].contains(&true) {
            return Err(MockError::Uncorrectable);
        }
        bytes.copy_from_slice(&self.bytes[at..at + length]);
        Ok(())
    }

    fn capacity(&self) -> usize {
        self.bytes.len()
    }
}

impl<const WORD: usize, const PAGE: usize> NorFlash for MockFlash<WORD, PAGE> {
    const WRITE_SIZE: usize = WORD;
    const ERASE_SIZE: usize = PAGE;

    fn erase(&mut self, from: u32, to: u32) -> Result<(), MockError> {
        if self.dead {
            return Err(MockError::PowerCut);
        }
        let (from, to) = (from as usize, to as usize);
        if !from.is_multiple_of(PAGE) || !to.is_multiple_of(PAGE) || from > to || to > self.bytes.len() {
            return Err(MockError::Request);
        }
        (from / PAGE..to / PAGE).try_for_each(|page| self.erase_page(page))
    }

    fn write(&mut self, offset: u32, bytes: &[u8]) -> Result<(), MockError> {
        if self.dead {
            return Err(MockError::PowerCut);
        }
        let at = offset as usize;
        if !at.is_multiple_of(WORD) || !bytes.len().is_multiple_of(WORD) || at + bytes.len() > self.bytes.len() {
            return Err(MockError::Request);
        }
        bytes.chunks(WORD).enumerate().try_for_each(|(i, word)| self.program(at + i * WORD, word))
    }
}
