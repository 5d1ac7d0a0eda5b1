//! Strings, lists, maps and numbers that refuse what is too much *while* they are read, so that a hostile file costs no
//! more time and memory than the limits allow. Linear in what is read.
//!
//! How an error is built says where it stands (see [`explain`](crate::project::explain)): `invalid_length` at the value
//! that is about to be read, `custom` at the value that was just read.

use std::collections::BTreeMap;
use std::fmt;
use std::marker::PhantomData;

use serde::de::{Deserialize, Deserializer, Error, MapAccess, SeqAccess, Visitor};

use crate::project::{CellEntry, Step, limits};

/// A limit with the words for it.
pub(super) trait Most {
    /// The limit itself.
    const MOST: usize;
    /// What is counted, in the plural.
    const OF: &'static str;
    /// What would mend an excess.
    const MEND: &'static str;
}

/// Declares limits as empty types.
macro_rules! limits {
    ($($name:ident = $most:expr, $of:literal, $mend:literal;)*) => {$(
        pub(super) enum $name {}
        impl Most for $name {
            const MOST: usize = $most;
            const OF: &'static str = $of;
            const MEND: &'static str = $mend;
        }
    )*};
}

limits! {
    Name = limits::NAME, "characters in a name", "shorten it";
    Title = limits::TITLE, "characters in the title", "shorten it, or move text to the notes";
    Notes = limits::NOTES, "characters in the notes", "shorten them";
    Inputs = limits::INPUTS, "inputs", "remove inputs, or split the controller";
    Outputs = limits::OUTPUTS, "outputs", "remove outputs, or split the controller";
    Rows = limits::ROWS, "rows", "remove rows, or split the controller";
    Cells = limits::CELLS, "columns in one row", "remove columns that the inputs do not have";
    Scenarios = limits::SCENARIOS, "scenarios", "remove some";
    Steps = limits::SCENARIOS, "steps in one scenario", "split the scenario";
    Sets = limits::ROWS, "sets in the cover", "remove sets";
    Members = limits::ROWS, "rows in one set of the cover", "remove rows from the set";
    Merged = limits::ROWS, "names of merged rows", "remove names";
    Coded = limits::ROWS, "merged rows with codes", "remove some";
    Codes = limits::ROWS, "codes of one row", "remove codes";
    Late = limits::OUTPUTS, "late outputs", "remove names that stand twice";
}

fn excess<L: Most, E: Error>() -> E {
    let text = format!("more than {} {} are too many: {}", L::MOST, L::OF, L::MEND);
    E::invalid_length(L::MOST + 1, &text.as_str())
}

/// A string of at most `L::MOST` characters.
pub(super) struct Text<L>(pub String, PhantomData<L>);

/// Any short string: a name, a column, an output string.
pub(super) type Short = Text<Name>;

impl<L> Default for Text<L> {
    fn default() -> Self {
        Text(String::new(), PhantomData)
    }
}

impl<'de, L: Most> Deserialize<'de> for Text<L> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Reader<L>(PhantomData<L>);
        impl<L: Most> Visitor<'_> for Reader<L> {
            type Value = Text<L>;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("a string in double quotes")
            }
            fn visit_str<E: Error>(self, text: &str) -> Result<Self::Value, E> {
                // Bytes are never fewer than characters: the count is needed only for long strings.
                if text.len() > L::MOST {
                    let count = text.chars().count();
                    if count > L::MOST {
                        let (of, most, mend) = (L::OF, L::MOST, L::MEND);
                        return Err(E::custom(format!(
                            "{count} {of} are too many, the limit is {most}: {mend}"
                        )));
                    }
                }
                Ok(Text(text.to_owned(), PhantomData))
            }
        }
        deserializer.deserialize_str(Reader(PhantomData))
    }
}

/// A list of at most `L::MOST` items.
pub(super) struct List<T, L>(pub Vec<T>, PhantomData<L>);

impl<T, L> Default for List<T, L> {
    fn default() -> Self {
        List(Vec::new(), PhantomData)
    }
}

impl<L> List<Short, L> {
    /// The plain strings.
    pub(super) fn strings(self) -> Vec<String> {
        self.0.into_iter().map(|text| text.0).collect()
    }
}

impl<'de, T: Deserialize<'de>, L: Most> Deserialize<'de> for List<T, L> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Reader<T, L>(PhantomData<(T, L)>);
        impl<'de, T: Deserialize<'de>, L: Most> Visitor<'de> for Reader<T, L> {
            type Value = List<T, L>;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                write!(f, "a list of at most {} {}", L::MOST, L::OF)
            }
            fn visit_seq<A: SeqAccess<'de>>(self, mut list: A) -> Result<Self::Value, A::Error> {
                let mut items = Vec::new();
                while items.len() < L::MOST {
                    match list.next_element()? {
                        Some(item) => items.push(item),
                        None => return Ok(List(items, PhantomData)),
                    }
                }
                match list.next_element::<Surplus<L>>()? {
                    Some(_) => Err(excess::<L, _>()),
                    None => Ok(List(items, PhantomData)),
                }
            }
        }
        deserializer.deserialize_seq(Reader(PhantomData))
    }
}

/// The item that is one too many: refused before a single character of it is read.
struct Surplus<L>(PhantomData<L>);

impl<'de, L: Most> Deserialize<'de> for Surplus<L> {
    fn deserialize<D: Deserializer<'de>>(_: D) -> Result<Self, D::Error> {
        Err(excess::<L, _>())
    }
}

/// A map of at most `L::MOST` entries, no key twice.
pub(super) struct Map<T, L>(pub BTreeMap<String, T>, PhantomData<L>);

impl<T, L> Default for Map<T, L> {
    fn default() -> Self {
        Map(BTreeMap::new(), PhantomData)
    }
}

impl<'de, T: Deserialize<'de>, L: Most> Deserialize<'de> for Map<T, L> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Reader<T, L>(PhantomData<(T, L)>);
        impl<'de, T: Deserialize<'de>, L: Most> Visitor<'de> for Reader<T, L> {
            type Value = Map<T, L>;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                write!(f, "a map of at most {} {}", L::MOST, L::OF)
            }
            fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Self::Value, A::Error> {
                let mut entries = BTreeMap::new();
                loop {
                    if entries.len() == L::MOST {
                        return match map.next_key::<Surplus<L>>()? {
                            Some(_) => Err(excess::<L, _>()),
                            None => Ok(Map(entries, PhantomData)),
                        };
                    }
                    let Some(Text(key, _)) = map.next_key::<Short>()? else {
                        return Ok(Map(entries, PhantomData));
                    };
                    if entries.contains_key(&key) {
                        let text = format!(
                            "\"{}\" stands twice between these braces: keep one of the two entries",
                            key.escape_debug()
                        );
                        return Err(Error::custom(text));
                    }
                    entries.insert(key, map.next_value()?);
                }
            }
        }
        deserializer.deserialize_map(Reader(PhantomData))
    }
}

/// A bracket with `LEAST` to `MOST` short strings.
struct Strings<const LEAST: usize, const MOST: usize> {
    /// The whole of it in words.
    expected: &'static str,
}

impl<'de, const LEAST: usize, const MOST: usize> Visitor<'de> for Strings<LEAST, MOST> {
    type Value = [Option<String>; MOST];
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.expected)
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut list: A) -> Result<Self::Value, A::Error> {
        let mut strings = [const { None }; MOST];
        for (i, string) in strings.iter_mut().enumerate() {
            match list.next_element::<Short>()? {
                Some(text) => *string = Some(text.0),
                None if i < LEAST => {
                    let text = format!("a value is missing: {} belongs here", self.expected);
                    return Err(A::Error::invalid_length(i, &text.as_str()));
                }
                None => break,
            }
        }
        Ok(strings)
    }
}

fn strings<'de, const LEAST: usize, const MOST: usize, D: Deserializer<'de>>(
    deserializer: D,
    expected: &'static str,
) -> Result<[String; MOST], D::Error> {
    let found = deserializer.deserialize_tuple(MOST, Strings::<LEAST, MOST> { expected })?;
    Ok(found.map(Option::unwrap_or_default))
}

/// A total state: row and column.
pub(super) struct Total(pub String, pub String);

impl<'de> Deserialize<'de> for Total {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let [row, column] = strings::<2, 2, D>(deserializer, "(\"row\", \"column\")")?;
        Ok(Total(row, column))
    }
}

impl<'de> Deserialize<'de> for CellEntry {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let [next, outputs] = strings::<2, 2, D>(deserializer, "(\"next row\", \"outputs\")")?;
        Ok(CellEntry { next, outputs })
    }
}

impl<'de> Deserialize<'de> for Step {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let expected = "(\"inputs\", \"outputs\") or (\"inputs\", \"outputs\", \"row\")";
        let reader = Strings::<2, 3> { expected };
        let [inputs, outputs, row] = deserializer.deserialize_tuple(3, reader)?;
        Ok(Step { inputs: inputs.unwrap_or_default(), outputs: outputs.unwrap_or_default(), row })
    }
}

/// A fan-in within its limits.
pub(super) struct FanIn(pub u8);

impl<'de> Deserialize<'de> for FanIn {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let number = i64::deserialize(deserializer)?;
        match u8::try_from(number) {
            Ok(fan_in) if (2..=limits::FAN_IN).contains(&fan_in) => Ok(FanIn(fan_in)),
            _ => Err(D::Error::custom(format!(
                "a fan-in of {number} cannot be built: choose 2 to {}",
                limits::FAN_IN
            ))),
        }
    }
}

/// Smallest and largest delay, both sensible.
pub(super) struct Delay(pub f64, pub f64);

/// Whether the two delays can be computed with, and what to do if not.
pub(super) fn delay_fault(least: f64, most: f64) -> Option<String> {
    let sound =
        least.is_finite() && most.is_finite() && 0.0 <= least && least <= most && most <= limits::DELAY;
    (!sound).then(|| {
        format!(
            "({least:?}, {most:?}) is no range of delays: give the smallest and the largest, from 0 to {:?}",
            limits::DELAY
        )
    })
}

impl<'de> Deserialize<'de> for Delay {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Reader;
        impl<'de> Visitor<'de> for Reader {
            type Value = Delay;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("(smallest, largest)")
            }
            fn visit_seq<A: SeqAccess<'de>>(self, mut list: A) -> Result<Delay, A::Error> {
                let missing = &"a delay is missing: give the smallest and the largest, as in (0.5, 1.5)";
                let least = list.next_element()?.ok_or_else(|| A::Error::invalid_length(0, missing))?;
                let most = list.next_element()?.ok_or_else(|| A::Error::invalid_length(1, missing))?;
                match delay_fault(least, most) {
                    Some(fault) => Err(A::Error::custom(fault)),
                    None => Ok(Delay(least, most)),
                }
            }
        }
        deserializer.deserialize_tuple(2, Reader)
    }
}
