//! Cuts a message into units and a unit into header and parameters (IEEE 488.2, chapter 7).

use super::error::LinkError;
use heapless::Vec;

/// Most nodes of a header.
pub(crate) const MOST_NODES: usize = 8;
/// Most characters of a mnemonic.
const MOST_CHARACTERS: usize = 12;

/// The nodes of a header, as sent.
pub(crate) type Nodes<'a> = Vec<&'a [u8], MOST_NODES>;

/// A header as sent.
pub(crate) struct Header<'a> {
    /// Whether it starts at the root whatever came before: with a colon or a star.
    pub(crate) absolute: bool,
    /// Whether it is a common command, which leaves the path alone.
    pub(crate) common: bool,
    /// Whether it ends with a question mark.
    pub(crate) query: bool,
    /// Its nodes.
    pub(crate) nodes: Nodes<'a>,
}

/// White space: all control characters and the blank.
const fn is_white(byte: u8) -> bool {
    byte <= b' '
}

/// Without white space at the start; at the end it may belong to a block.
pub(crate) fn trim_start(mut bytes: &[u8]) -> &[u8] {
    while let [first, rest @ ..] = bytes
        && is_white(*first)
    {
        bytes = rest;
    }
    bytes
}

/// Without white space at both ends.
pub(crate) fn trim(bytes: &[u8]) -> &[u8] {
    let mut bytes = trim_start(bytes);
    while let [rest @ .., last] = bytes
        && is_white(*last)
    {
        bytes = rest;
    }
    bytes
}

/// Up to `separator` and what follows it; separators inside strings and blocks do not count.
pub(crate) fn cut(bytes: &[u8], separator: u8) -> Result<(&[u8], Option<&[u8]>), LinkError> {
    let mut at = 0;
    while let Some([byte, rest @ ..]) = bytes.get(at..) {
        if *byte == separator {
            return Ok((bytes.get(..at).unwrap_or(&[]), Some(rest)));
        }
        at += 1 + match byte {
            b'"' | b'\'' => rest.iter().position(|b| b == byte).ok_or(LinkError::InvalidString)? + 1,
            b'#' => block(rest)?.map_or(0, |(prefix, data)| prefix + data.len()),
            _ => 0,
        };
    }
    Ok((bytes, None))
}

/// The block that starts after a number sign: bytes of its prefix, and its data; `None` when it is no block.
pub(crate) fn block(after_sign: &[u8]) -> Result<Option<(usize, &[u8])>, LinkError> {
    let Some(count @ b'0'..=b'9') = after_sign.first() else { return Ok(None) };
    let prefix = 1 + usize::from(count - b'0');
    let digits = after_sign.get(1..prefix).filter(|digits| !digits.is_empty()).ok_or(LinkError::InvalidBlock)?;
    let mut length = 0_usize;
    for digit in digits {
        let value = digit.is_ascii_digit().then(|| usize::from(digit - b'0')).ok_or(LinkError::InvalidBlock)?;
        length = length.saturating_mul(10).saturating_add(value);
    }
    let data = after_sign.get(prefix..).and_then(|rest| rest.get(..length)).ok_or(LinkError::InvalidBlock)?;
    Ok(Some((prefix, data)))
}

/// Splits a unit, which must not be empty, into its header and its parameters.
pub(crate) fn header(unit: &[u8]) -> Result<(Header<'_>, &[u8]), LinkError> {
    let of_header = |b: &u8| b.is_ascii_alphanumeric() || matches!(b, b'_' | b':' | b'*');
    let end = unit.iter().position(|b| !of_header(b)).unwrap_or(unit.len());
    let (name, rest) = (unit.get(..end).unwrap_or(&[]), unit.get(end..).unwrap_or(&[]));
    let (query, rest) = match rest {
        [b'?', rest @ ..] => (true, rest),
        _ => (false, rest),
    };
    if let Some(&after) = rest.first().filter(|b| !is_white(**b)) {
        let separator = matches!(after, b'"' | b'\'' | b'#' | b'(' | b',' | b'.' | b'+' | b'-');
        return Err(if separator { LinkError::HeaderSeparator } else { LinkError::InvalidCharacter });
    }
    let common = name.first() == Some(&b'*');
    let rooted = name.first() == Some(&b':');
    let nodes = nodes(if rooted { name.get(1..).unwrap_or(&[]) } else { name }, common)?;
    Ok((Header { absolute: rooted || common, common, query, nodes }, trim_start(rest)))
}

fn nodes(name: &[u8], common: bool) -> Result<Nodes<'_>, LinkError> {
    let mut nodes = Nodes::new();
    for node in name.split(|&b| b == b':') {
        let mnemonic = if common { node.get(1..).unwrap_or(&[]) } else { node };
        if !mnemonic.first().is_some_and(u8::is_ascii_alphabetic) || mnemonic.contains(&b'*') {
            return Err(LinkError::SyntaxError);
        }
        if mnemonic.len() > MOST_CHARACTERS {
            return Err(LinkError::MnemonicTooLong);
        }
        nodes.push(node).map_err(|_| LinkError::UndefinedHeader)?;
    }
    Ok(nodes)
}
