//! Small `Copy` index types: row, column, total state, code, and a word of outputs.
//!
//! Bit `i` of a [`Column`] is input `i`, bit `i` of a [`Code`] is state variable `y(i+1)`, bit `j` of an
//! [`Outputs`] is output `j`. Written as text, bit 0 comes *first* (leftmost), as in the project file.

use std::fmt;

/// A row of a flow table: an internal state. An index into the table that it belongs to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Row(pub u16);

impl Row {
    /// The row with index `i`; tables hold at most [`u16::MAX`] rows.
    pub fn new(i: usize) -> Self {
        debug_assert!(i < usize::from(u16::MAX));
        Row(i as u16)
    }

    /// The index as a `usize`, for slices.
    pub fn at(self) -> usize {
        usize::from(self.0)
    }
}

/// A column of a flow table: one combination of the inputs, bit `i` for input `i`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Column(pub u16);

impl Column {
    /// The index as a `usize`, for slices.
    pub fn at(self) -> usize {
        usize::from(self.0)
    }

    /// Number of inputs in which the two columns differ.
    pub fn distance(self, other: Column) -> u32 {
        (self.0 ^ other.0).count_ones()
    }

    /// The bit string in input order, `inputs` characters long.
    pub fn text(self, inputs: usize) -> String {
        bits_text(u32::from(self.0), inputs)
    }

    /// Reads a bit string of exactly `inputs` characters `0` or `1`.
    pub fn parse(text: &str, inputs: usize) -> Option<Column> {
        if text.len() != inputs || inputs > 16 {
            return None;
        }
        text.bytes()
            .enumerate()
            .try_fold(0u16, |bits, (i, b)| match b {
                b'0' => Some(bits),
                b'1' => Some(bits | 1 << i),
                _ => None,
            })
            .map(Column)
    }

    /// All columns strictly between this one and `to` and both ends: the subcube that a burst may pass through.
    pub fn between(self, to: Column) -> impl Iterator<Item = Column> {
        let free = self.0 ^ to.0;
        let base = self.0;
        let mut sub = Some(0u16);
        std::iter::from_fn(move || {
            let s = sub?;
            sub = if s == free { None } else { Some((s.wrapping_sub(free)) & free) };
            Some(Column(base ^ s))
        })
    }
}

/// A value of the state variables, bit `i` for `y(i+1)`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Code(pub u32);

impl Code {
    /// The bit string `y1 y2 ..`, `bits` characters long.
    pub fn text(self, bits: usize) -> String {
        bits_text(self.0, bits)
    }

    /// Reads a bit string of exactly `bits` characters `0` or `1`.
    pub fn parse(text: &str, bits: usize) -> Option<Code> {
        if text.len() != bits || bits > 32 {
            return None;
        }
        text.bytes()
            .enumerate()
            .try_fold(0u32, |acc, (i, b)| match b {
                b'0' => Some(acc),
                b'1' => Some(acc | 1 << i),
                _ => None,
            })
            .map(Code)
    }

    /// Number of state variables in which the two codes differ.
    pub fn distance(self, other: Code) -> u32 {
        (self.0 ^ other.0).count_ones()
    }
}

/// A total state: an internal state under one input combination.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct TotalState {
    /// The internal state.
    pub row: Row,
    /// The input combination.
    pub column: Column,
}

/// One of 0, 1, - for each output: bit `j` of `care` says that output `j` is specified, bit `j` of `ones` its value.
/// `ones` is always inside `care`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Outputs {
    /// Which outputs are specified.
    pub care: u32,
    /// Which of the specified outputs are 1.
    pub ones: u32,
}

impl Outputs {
    /// The value of output `j`, if it is specified.
    pub fn get(self, j: usize) -> Option<bool> {
        (self.care >> j & 1 == 1).then_some(self.ones >> j & 1 == 1)
    }

    /// The same word with output `j` set to `value` (`None`: open).
    #[must_use]
    pub fn with(self, j: usize, value: Option<bool>) -> Outputs {
        let bit = 1 << j;
        match value {
            None => Outputs { care: self.care & !bit, ones: self.ones & !bit },
            Some(false) => Outputs { care: self.care | bit, ones: self.ones & !bit },
            Some(true) => Outputs { care: self.care | bit, ones: self.ones | bit },
        }
    }

    /// The outputs that are 0 in one word and 1 in the other, as a bit mask.
    pub fn conflicts(self, other: Outputs) -> u32 {
        self.care & other.care & (self.ones ^ other.ones)
    }

    /// This word, with what it leaves open taken from `other`. Where both speak, this word stands.
    #[must_use]
    pub fn or(self, other: Outputs) -> Outputs {
        let fresh = other.care & !self.care;
        Outputs { care: self.care | fresh, ones: self.ones | (other.ones & fresh) }
    }

    /// As text in output order, `outputs` characters of `0`, `1`, `-`.
    pub fn text(self, outputs: usize) -> String {
        (0..outputs).map(|j| self.get(j).map_or('-', |v| if v { '1' } else { '0' })).collect()
    }

    /// Reads exactly `outputs` characters of `0`, `1`, `-`.
    pub fn parse(text: &str, outputs: usize) -> Option<Outputs> {
        if text.len() != outputs || outputs > 32 {
            return None;
        }
        text.bytes().enumerate().try_fold(Outputs::default(), |word, (j, b)| match b {
            b'0' => Some(word.with(j, Some(false))),
            b'1' => Some(word.with(j, Some(true))),
            b'-' => Some(word),
            _ => None,
        })
    }
}

impl fmt::Display for Row {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "row {}", self.0)
    }
}

/// `width` bits of `value` as text, bit 0 first.
pub fn bits_text(value: u32, width: usize) -> String {
    (0..width).map(|i| if value >> i & 1 == 1 { '1' } else { '0' }).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn between_visits_the_whole_subcube_once() {
        let mut seen: Vec<u16> = Column(0b0101).between(Column(0b0110)).map(|c| c.0).collect();
        seen.sort_unstable();
        assert_eq!(seen, [0b0100, 0b0101, 0b0110, 0b0111]);
        assert_eq!(Column(3).between(Column(3)).count(), 1);
    }

    #[test]
    fn text_and_parse_are_inverse() {
        assert_eq!(Column::parse("100", 3), Some(Column(1)));
        assert_eq!(Column(1).text(3), "100");
        assert_eq!(Column::parse("10", 3), None);
        assert_eq!(Column::parse("1-0", 3), None);
        let word = Outputs::parse("0-1", 3).expect("valid");
        assert_eq!(word.text(3), "0-1");
        assert_eq!(word.conflicts(Outputs::parse("1-1", 3).expect("valid")), 1);
    }
}
