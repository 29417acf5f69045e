//! Sizes of a linked image's sections, from the ELF file itself.

use std::fs;
use std::path::Path;

/// What an image takes of flash and of RAM, bytes.
#[derive(Clone, Copy)]
pub struct Sizes {
    /// `.text` and `.rodata`.
    pub flash: u32,
    /// `.data` and `.bss`.
    pub ram: u32,
}

/// Reads an ELF file of 32 bits, little-endian: the section headers start at the offset in byte 32, each of the size in
/// byte 46, as many as byte 48 says, their names in the section of the number in byte 50.
pub fn sizes(path: &Path) -> Sizes {
    let file = fs::read(path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    let half = |at: usize| u16::from_le_bytes([file[at], file[at + 1]]) as usize;
    let word = |at: usize| u32::from_le_bytes(file[at..at + 4].try_into().unwrap());
    assert_eq!(&file[..6], b"\x7fELF\x01\x01", "{}", path.display());
    let header = |i: usize| word(32) as usize + i * half(46);
    let names = word(header(half(50)) + 16) as usize;
    let mut sizes = Sizes { flash: 0, ram: 0 };
    for i in 0..half(48) {
        let name = names + word(header(i)) as usize;
        let length = file[name..].iter().position(|&c| c == 0).unwrap();
        let size = word(header(i) + 20);
        match &file[name..name + length] {
            b".text" | b".rodata" => sizes.flash += size,
            b".data" | b".bss" => sizes.ram += size,
            _ => {}
        }
    }
    sizes
}
