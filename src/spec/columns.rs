//! A set of columns of one row as a bit set, with the two questions that bursts put to it: what lies strictly below or
//! above some member, seen from a start column.
//!
//! A column is named by its *difference* from the start (exclusive or), so that "on the way" means "a subset of the
//! bits that change". Exact. Cost of every operation for `n` inputs: `O(n 2^n / 64)` word operations, and never less
//! than `n`.

use crate::base::Column;
use crate::project::limits;

const WORDS: usize = (1 << limits::INPUTS) / 64;

/// `MASKS[i]` holds the positions of a word whose bit `i` is 0.
const MASKS: [u64; 6] = [
    0x5555_5555_5555_5555,
    0x3333_3333_3333_3333,
    0x0f0f_0f0f_0f0f_0f0f,
    0x00ff_00ff_00ff_00ff,
    0x0000_ffff_0000_ffff,
    0x0000_0000_ffff_ffff,
];

/// A set of columns, or of differences from a start column.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ColumnSet {
    inputs: usize,
    words: [u64; WORDS],
}

impl ColumnSet {
    /// The empty set of columns over `inputs` inputs, at most [`limits::INPUTS`].
    pub fn new(inputs: usize) -> Self {
        ColumnSet { inputs, words: [0; WORDS] }
    }

    /// Adds a column.
    pub fn insert(&mut self, column: Column) {
        self.words[column.at() / 64] |= 1 << (column.at() % 64);
    }

    /// Removes a column.
    pub fn remove(&mut self, column: Column) {
        self.words[column.at() / 64] &= !(1 << (column.at() % 64));
    }

    /// Whether the column is a member.
    pub fn contains(&self, column: Column) -> bool {
        self.words[column.at() / 64] >> (column.at() % 64) & 1 == 1
    }

    /// Members in the order of their numbers.
    pub fn iter(&self) -> impl Iterator<Item = Column> + '_ {
        self.words[..self.used()].iter().enumerate().flat_map(|(w, &word)| {
            let mut rest = word;
            std::iter::from_fn(move || {
                if rest == 0 {
                    return None;
                }
                let bit = rest.trailing_zeros();
                rest &= rest - 1;
                Some(Column((w * 64) as u16 + bit as u16))
            })
        })
    }

    /// Members of both sets.
    #[must_use]
    pub fn and(mut self, other: &ColumnSet) -> Self {
        for w in 0..self.used() {
            self.words[w] &= other.words[w];
        }
        self
    }

    /// Members of this set that are not in the other.
    #[must_use]
    pub fn minus(mut self, other: &ColumnSet) -> Self {
        for w in 0..self.used() {
            self.words[w] &= !other.words[w];
        }
        self
    }

    /// Every member combined with `start` by exclusive or: columns become differences, and differences columns.
    #[must_use]
    pub fn seen_from(mut self, start: Column) -> Self {
        for (i, &mask) in MASKS.iter().enumerate().take(self.inputs) {
            if start.0 >> i & 1 == 1 {
                for word in &mut self.words[..(1 << self.inputs.saturating_sub(6))] {
                    *word = (*word & mask) << (1 << i) | *word >> (1 << i) & mask;
                }
            }
        }
        let high = start.at() >> 6;
        if high != 0 {
            for w in 0..self.used() {
                if w < w ^ high {
                    self.words.swap(w, w ^ high);
                }
            }
        }
        self
    }

    /// The differences that hold a member strictly inside: every way there passes a member of this set.
    #[must_use]
    pub fn strictly_above(&self) -> Self {
        let mut up = *self;
        for i in 0..self.inputs {
            up.spread(&up.clone(), i, true);
        }
        let mut strict = ColumnSet::new(self.inputs);
        for i in 0..self.inputs {
            strict.spread(&up, i, true);
        }
        strict
    }

    /// The differences that lie strictly inside a member: they are passed on the way to a member of this set.
    #[must_use]
    pub fn strictly_below(&self) -> Self {
        let mut down = *self;
        for i in 0..self.inputs {
            down.spread(&down.clone(), i, false);
        }
        let mut strict = ColumnSet::new(self.inputs);
        for i in 0..self.inputs {
            strict.spread(&down, i, false);
        }
        strict
    }

    /// Adds what the members of `from` become when bit `i` is set (`up`) or cleared.
    fn spread(&mut self, from: &ColumnSet, i: usize, up: bool) {
        if i < 6 {
            for w in 0..self.used() {
                let word = from.words[w];
                self.words[w] |= if up { (word & MASKS[i]) << (1 << i) } else { word >> (1 << i) & MASKS[i] };
            }
        } else {
            let step = 1 << (i - 6);
            for w in (0..self.used()).filter(|w| w & step == 0) {
                if up {
                    self.words[w | step] |= from.words[w];
                } else {
                    self.words[w] |= from.words[w | step];
                }
            }
        }
    }

    fn used(&self) -> usize {
        1 << self.inputs.saturating_sub(6)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A few scattered sets for every number of inputs.
    fn samples() -> impl Iterator<Item = ColumnSet> {
        (1..=limits::INPUTS).flat_map(|inputs| {
            (0..20u32).map(move |seed| {
                let mut set = ColumnSet::new(inputs);
                let mut state = seed.wrapping_mul(2_654_435_761).wrapping_add(inputs as u32);
                for _ in 0..=seed % 5 {
                    state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
                    set.insert(Column((state >> 16) as u16 & ((1 << inputs) - 1)));
                }
                set
            })
        })
    }

    #[test]
    fn above_and_below_mean_proper_subsets() {
        for set in samples() {
            let (above, below) = (set.strictly_above(), set.strictly_below());
            for d in 0..1u16 << set.inputs {
                let strict = |a: u16, b: u16| a != b && a & b == a;
                assert_eq!(above.contains(Column(d)), set.iter().any(|m| strict(m.0, d)));
                assert_eq!(below.contains(Column(d)), set.iter().any(|m| strict(d, m.0)));
            }
        }
    }

    #[test]
    fn seen_from_a_start_is_exclusive_or() {
        for set in samples() {
            for start in [0u16, 1, 5, 77, 513, 1023].map(|s| Column(s & ((1 << set.inputs) - 1))) {
                let moved: Vec<u16> = set.seen_from(start).iter().map(|c| c.0).collect();
                let mut wanted: Vec<u16> = set.iter().map(|c| c.0 ^ start.0).collect();
                wanted.sort_unstable();
                assert_eq!(moved, wanted);
                assert_eq!(set.seen_from(start).seen_from(start), set);
            }
        }
    }
}
