//! Families of sets of at most [`MOST`] variables as one bit for each set, so that closures take a few operations on words.
//!
//! Set `s` is bit `s`. Adding or removing one variable in all sets of a family at once is a shift within words for the first
//! six variables, and a move of words above. A closure over v variables costs v·2^v/64 word operations.

/// Most variables that a family is kept over.
pub(crate) const MOST: usize = 13;

const WORDS: usize = (1 << MOST) / 64;

/// For each of the first six variables, the sets of a word that hold it.
const HOLDS: [u64; 6] = [
    0xAAAA_AAAA_AAAA_AAAA,
    0xCCCC_CCCC_CCCC_CCCC,
    0xF0F0_F0F0_F0F0_F0F0,
    0xFF00_FF00_FF00_FF00,
    0xFFFF_0000_FFFF_0000,
    0xFFFF_FFFF_0000_0000,
];

/// A family of sets of variables.
#[derive(Debug, Clone)]
pub(crate) struct Family {
    words: [u64; WORDS],
    /// Words in use.
    used: usize,
}

impl Family {
    /// The empty family over `variables` variables, at most [`MOST`].
    pub(crate) fn new(variables: usize) -> Family {
        debug_assert!(variables <= MOST);
        Family { words: [0; WORDS], used: ((1usize << variables) / 64).clamp(1, WORDS) }
    }

    /// Empties it, for `variables` variables.
    pub(crate) fn reset(&mut self, variables: usize) {
        self.used = ((1usize << variables) / 64).clamp(1, WORDS);
        self.words[..self.used].fill(0);
    }

    pub(crate) fn insert(&mut self, set: u32) {
        self.words[set as usize / 64] |= 1 << (set % 64);
    }

    /// Adds every set that holds a member, by variables of `over`.
    pub(crate) fn close_upward(&mut self, over: u32) {
        for v in variables(over) {
            self.step_up(v);
        }
    }

    /// Adds every set that lies in a member, by variables of `over`.
    pub(crate) fn close_downward(&mut self, over: u32) {
        for v in variables(over) {
            if v < 6 {
                self.words[..self.used].iter_mut().for_each(|w| *w |= (*w & HOLDS[v]) >> (1 << v));
            } else {
                let bit = 1 << (v - 6);
                for w in (0..self.used).filter(|w| w & bit == 0) {
                    self.words[w] |= self.words[w | bit];
                }
            }
        }
    }

    fn step_up(&mut self, v: usize) {
        if v < 6 {
            self.words[..self.used].iter_mut().for_each(|w| *w |= (*w & !HOLDS[v]) << (1 << v));
        } else {
            let bit = 1 << (v - 6);
            for w in (0..self.used).filter(|w| w & bit == 0) {
                self.words[w | bit] |= self.words[w];
            }
        }
    }

    /// Takes out all members of the other family.
    pub(crate) fn subtract(&mut self, other: &Family) {
        let used = self.used;
        self.words[..used].iter_mut().zip(&other.words[..used]).for_each(|(a, b)| *a &= !b);
    }

    /// Adds all members of the other family.
    pub(crate) fn join(&mut self, other: &Family) {
        let used = self.used;
        self.words[..used].iter_mut().zip(&other.words[..used]).for_each(|(a, b)| *a |= b);
    }

    /// Keeps the members that lie in no other member; `over` holds all variables of the members.
    pub(crate) fn keep_maximal(&mut self, over: u32, scratch: &mut Family) {
        let used = self.used;
        scratch.used = used;
        scratch.words[..used].copy_from_slice(&self.words[..used]);
        scratch.close_downward(over);
        // A member is not maximal if it is a set of the closure with one variable more, less that variable.
        for v in variables(over) {
            if v < 6 {
                for (w, closed) in self.words[..used].iter_mut().zip(&scratch.words[..used]) {
                    *w &= !((closed & HOLDS[v]) >> (1 << v));
                }
            } else {
                let bit = 1 << (v - 6);
                for w in (0..used).filter(|w| w & bit == 0) {
                    self.words[w] &= !scratch.words[w | bit];
                }
            }
        }
    }

    /// The members, ascending.
    pub(crate) fn members(&self) -> impl Iterator<Item = u32> + '_ {
        self.words[..self.used].iter().enumerate().flat_map(|(w, &word)| {
            let mut word = word;
            std::iter::from_fn(move || {
                let bit = (word != 0).then(|| word.trailing_zeros())?;
                word &= word - 1;
                Some(w as u32 * 64 + bit)
            })
        })
    }
}

fn variables(over: u32) -> impl Iterator<Item = usize> {
    (0..MOST).filter(move |v| over >> v & 1 == 1)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn closures_and_maximal_members_are_what_they_say() {
        let over = 0b1011_0110_1101;
        let seeds = [0b1, 0b1000_0000_0100, 0b11_0110_0000, 0b1011_0000_1101, 0b1001];
        let (mut up, mut down, mut top) = (Family::new(MOST), Family::new(MOST), Family::new(MOST));
        for s in seeds {
            up.insert(s);
            down.insert(s);
            top.insert(s);
        }
        up.close_upward(over);
        down.close_downward(over);
        let mut scratch = Family::new(MOST);
        top.keep_maximal(over, &mut scratch);
        let subsets = (0..1u32 << 12).filter(|s| s & !over == 0);
        let expected: Vec<u32> = subsets.clone().filter(|s| seeds.iter().any(|m| m & !s == 0)).collect();
        assert_eq!(up.members().collect::<Vec<_>>(), expected);
        let expected: Vec<u32> = subsets.filter(|s| seeds.iter().any(|m| s & !m == 0)).collect();
        assert_eq!(down.members().collect::<Vec<_>>(), expected);
        assert_eq!(top.members().collect::<Vec<_>>(), [0b11_0110_0000, 0b1011_0000_1101]);
    }
}
