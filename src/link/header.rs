//! Matches a header against a pattern: short and long forms, nodes that may be left out, numeric suffixes
//! (SCPI-99 volume 1, 6.2).
//!
//! A pattern reads as in a manual: `MEASure:FLOW[:VOLume]`, `[SENSe:]REFerence:PRESsure`, `OUTPut#:STATe`. Capitals are
//! the short form; only it and the long form are accepted, in any case. A node in brackets may be left out. `#` stands
//! for a number, which is 1 when left out.

use super::error::LinkError;
use super::lexer::{Header, MOST_NODES, Nodes};
use heapless::Vec;

/// Most numeric suffixes of a header.
pub(crate) const MOST_SUFFIXES: usize = 4;

/// The numbers that stand for `#` in a pattern, from left to right.
pub(crate) type Suffixes = Vec<u16, MOST_SUFFIXES>;

/// The nodes a message has come down to: where a header without a leading colon goes on.
///
/// The path of a message starts at the root. After a header it is that header, as sent, without its last node
/// (SCPI-99 volume 1, 6.2.4). Common commands leave it alone.
#[derive(Default)]
pub(crate) struct Path<'a> {
    nodes: Nodes<'a>,
}

impl<'a> Path<'a> {
    /// The whole header, from the root; moves the path.
    pub(crate) fn resolve(&mut self, header: Header<'a>) -> Result<Nodes<'a>, LinkError> {
        if header.common {
            return Ok(header.nodes);
        }
        let mut nodes = if header.absolute { Nodes::new() } else { self.nodes.clone() };
        nodes.extend_from_slice(&header.nodes).map_err(|_| LinkError::UndefinedHeader)?;
        self.nodes = nodes.clone();
        self.nodes.pop();
        Ok(nodes)
    }
}

/// A node of a pattern.
struct Node<'p> {
    name: &'p [u8],
    optional: bool,
    numbered: bool,
}

/// The first node of a pattern and the rest of it; `None` at the end.
fn first_node(pattern: &[u8]) -> Option<(Node<'_>, &[u8])> {
    let mark = |b: &u8| matches!(b, b'[' | b':' | b']');
    let start = pattern.iter().position(|b| !mark(b))?;
    let (marks, rest) = (pattern.get(..start)?, pattern.get(start..)?);
    let end = rest.iter().position(|b| mark(b) || *b == b'#').unwrap_or(rest.len());
    let (name, rest) = (rest.get(..end)?, rest.get(end..)?);
    let numbered = rest.first() == Some(&b'#');
    let rest = if numbered { rest.get(1..)? } else { rest };
    Some((Node { name, optional: marks.contains(&b'['), numbered }, rest))
}

/// The suffixes of a header that matches `pattern`; `None` when it does not.
pub(crate) fn matched(pattern: &str, header: &[&[u8]]) -> Option<Suffixes> {
    let (mut pattern, mut header, mut suffixes) = (pattern.as_bytes(), header, Suffixes::new());
    for _ in 0..=MOST_NODES {
        let Some((node, rest)) = first_node(pattern) else { break };
        pattern = rest;
        let suffix = header.first().and_then(|sent| node_matched(&node, sent));
        if suffix.is_some() {
            header = header.get(1..)?;
        }
        if suffix.is_none() && !node.optional {
            return None;
        }
        if node.numbered {
            suffixes.push(suffix.unwrap_or(1)).ok()?;
        }
    }
    header.is_empty().then_some(suffixes)
}

/// The suffix of a sent node that is this node, 1 when it has none.
fn node_matched(node: &Node<'_>, sent: &[u8]) -> Option<u16> {
    if is_word(node.name, sent) {
        return Some(1);
    }
    let end = sent.iter().rposition(|b| !b.is_ascii_digit())? + 1;
    let (word, digits) = (sent.get(..end)?, sent.get(end..)?);
    if !node.numbered || digits.is_empty() || !is_word(node.name, word) {
        return None;
    }
    Some(digits.iter().fold(0, |n: u16, b| n.saturating_mul(10).saturating_add(u16::from(b - b'0'))))
}

/// Whether `sent` is the short or the long form of `word`.
pub(crate) fn is_word(word: &[u8], sent: &[u8]) -> bool {
    let short = word.iter().position(u8::is_ascii_lowercase).unwrap_or(word.len());
    (sent.len() == short || sent.len() == word.len()) && word.iter().zip(sent).all(|(a, b)| a.eq_ignore_ascii_case(b))
}
