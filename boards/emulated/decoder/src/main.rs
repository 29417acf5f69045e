//! Reads defmt's frames from standard input and prints them as text: `decoder IMAGE < frames`.

use defmt_decoder::{DecodeError, Table};
use std::error::Error;
use std::io::Read;

fn main() -> Result<(), Box<dyn Error>> {
    let image = std::fs::read(std::env::args().nth(1).ok_or("usage: decoder IMAGE < frames")?)?;
    let table = Table::parse(&image)?.ok_or("the image has no log")?;
    let mut frames = Vec::new();
    std::io::stdin().read_to_end(&mut frames)?;
    let mut stream = table.new_stream_decoder();
    stream.received(&frames);
    loop {
        match stream.decode() {
            Ok(frame) => {
                let level = frame.level().map_or("", |level| level.as_str());
                println!("{level} {}", frame.display_message());
            }
            Err(DecodeError::UnexpectedEof) => return Ok(()),
            Err(DecodeError::Malformed) => return Err("a malformed frame".into()),
        }
    }
}
