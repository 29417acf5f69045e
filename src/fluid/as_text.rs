//! Names and curves for `serde`: a name as text, a curve as a list of pairs.

use super::stored::{Curve, Name};
use core::fmt;
use serde::de::{Error, SeqAccess, Visitor};
use serde::{Deserialize, Deserializer, Serialize, Serializer};

impl Serialize for Name {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(self.as_str())
    }
}

impl<'de> Deserialize<'de> for Name {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Text;
        impl Visitor<'_> for Text {
            type Value = Name;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("a fluid name of 1 to 24 printable ASCII characters")
            }
            fn visit_str<E: Error>(self, text: &str) -> Result<Name, E> {
                Name::checked(text).map_err(E::custom)
            }
        }
        deserializer.deserialize_str(Text)
    }
}

impl<const NODES: usize> Serialize for Curve<NODES> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        self.nodes.as_slice().serialize(serializer)
    }
}

impl<'de, const NODES: usize> Deserialize<'de> for Curve<NODES> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Pairs<const NODES: usize>;
        impl<'de, const NODES: usize> Visitor<'de> for Pairs<NODES> {
            type Value = Curve<NODES>;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                write!(f, "{NODES} pairs of value and slope")
            }
            fn visit_seq<A: SeqAccess<'de>>(self, mut list: A) -> Result<Self::Value, A::Error> {
                let mut curve = Curve::constant(0.0);
                for (i, node) in curve.nodes.iter_mut().enumerate() {
                    *node = list.next_element()?.ok_or_else(|| A::Error::invalid_length(i, &self))?;
                }
                if list.next_element::<[f32; 2]>()?.is_some() {
                    return Err(A::Error::invalid_length(NODES + 1, &self));
                }
                Ok(curve)
            }
        }
        deserializer.deserialize_seq(Pairs::<NODES>)
    }
}
