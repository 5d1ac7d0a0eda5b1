//! Dichotomies and the search for codes that satisfy them all.
//!
//! A dichotomy has two sides of one or two rows. A bit satisfies it if it has one value on one side and the other value
//! on the other; codes satisfy it if some bit does.

use crate::base::{Code, Effort, Halted, Row};
use crate::search::sat::{Lit, Sat};

/// Starts tried for the set of dichotomies that exclude one another.
const STARTS: usize = 24;

/// Two sides; a side of one row names it twice.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Dichotomy {
    /// One side, ascending.
    pub left: [Row; 2],
    /// The other side, ascending, after the first.
    pub right: [Row; 2],
}

impl Dichotomy {
    /// The dichotomy of two sides in any order.
    pub fn new(mut a: [Row; 2], mut b: [Row; 2]) -> Self {
        a.sort_unstable();
        b.sort_unstable();
        Dichotomy { left: a.min(b), right: a.max(b) }
    }

    /// Number of rows.
    pub fn size(&self) -> usize {
        2 + usize::from(self.left[0] != self.left[1]) + usize::from(self.right[0] != self.right[1])
    }

    /// Whether one bit can satisfy both.
    fn fits(&self, other: &Dichotomy) -> bool {
        let (a, b, c, d) = (&self.left, &self.right, &other.left, &other.right);
        (!meet(a, d) && !meet(b, c)) || (!meet(a, c) && !meet(b, d))
    }

    /// Whether some bit of the codes satisfies it; `full` has a one for each bit.
    fn holds(&self, codes: &[Code], full: u32) -> bool {
        let [a, b, c, d] =
            [self.left[0], self.left[1], self.right[0], self.right[1]].map(|row| codes[row.at()].0);
        !(a ^ b) & !(c ^ d) & (a ^ c) & full != 0
    }
}

fn meet(a: &[Row; 2], b: &[Row; 2]) -> bool {
    a[0] == b[0] || a[0] == b[1] || a[1] == b[0] || a[1] == b[1]
}

/// Dichotomies of which no two fit into one bit, found greedily: there must be as many bits.
pub(super) fn apart(list: &[Dichotomy]) -> Vec<Dichotomy> {
    let mut best: Vec<Dichotomy> = Vec::new();
    let stride = list.len().div_ceil(STARTS).max(1);
    for first in list.iter().step_by(stride) {
        let mut chosen = vec![*first];
        for next in list {
            if chosen.iter().all(|one| !one.fits(next)) {
                chosen.push(*next);
            }
        }
        if chosen.len() > best.len() {
            best = chosen;
        }
    }
    best
}

/// Codes that satisfy all dichotomies, each put into the first bit that takes it. At most 32 bits are of use; beyond, the
/// number of bits is right and the codes are not.
///
/// # Errors
/// The effort ran out.
pub(super) fn pack(list: &[Dichotomy], rows: usize, effort: &Effort) -> Result<(usize, Vec<Code>), Halted> {
    // For each bit and row: not yet decided, or the value.
    let mut bits: Vec<Vec<Option<bool>>> = Vec::new();
    for dichotomy in list {
        effort.spend(bits.len() as u64 / 20)?;
        let accepts = |bit: &Vec<Option<bool>>, left: bool| {
            let ok = |side: [Row; 2], value: bool| side.iter().all(|r| bit[r.at()] != Some(!value));
            ok(dichotomy.left, left) && ok(dichotomy.right, !left)
        };
        let place = bits.iter().enumerate().find_map(|(at, bit)| {
            [false, true].into_iter().find(|&left| accepts(bit, left)).map(|left| (at, left))
        });
        let (at, left) = place.unwrap_or_else(|| {
            bits.push(vec![None; rows]);
            (bits.len() - 1, false)
        });
        for row in dichotomy.left {
            bits[at][row.at()] = Some(left);
        }
        for row in dichotomy.right {
            bits[at][row.at()] = Some(!left);
        }
    }
    let code = |row: usize| {
        let set = bits.iter().take(32).enumerate().filter(|(_, bit)| bit[row] == Some(true));
        Code(set.fold(0, |code, (at, _)| code | 1 << at))
    };
    Ok((bits.len(), (0..rows).map(code).collect()))
}

/// Codes of `bits` bits that satisfy all dichotomies; `Ok(None)` is a proof that there are none. `separate` holds
/// dichotomies of which no two fit into one bit; each gets a bit of its own, which breaks most of the symmetry.
///
/// Dichotomies enter the satisfiability problem only once a model violates them: most never do.
///
/// # Errors
/// The effort ran out.
pub(super) fn solve(
    list: &[Dichotomy],
    separate: &[Dichotomy],
    rows: usize,
    bits: usize,
    effort: &Effort,
) -> Result<Option<Vec<Code>>, Halted> {
    if separate.len() > bits || bits > 31 {
        return if bits > 31 { Err(Halted) } else { Ok(None) };
    }
    let mut search = Search::new(rows, bits, separate);
    let full = (1u32 << bits) - 1;
    loop {
        effort.spend(list.len() as u64 / 100 + 1)?;
        if !search.sat.solve(&[], effort)? {
            return Ok(None);
        }
        let codes = search.codes();
        let mut violated = list.iter().filter(|dichotomy| !dichotomy.holds(&codes, full)).peekable();
        if violated.peek().is_none() {
            return Ok(Some(codes));
        }
        for dichotomy in violated.take(rows) {
            search.require(dichotomy);
        }
    }
}

struct Search {
    sat: Sat,
    rows: usize,
    bits: usize,
    code: Vec<Lit>,
}

impl Search {
    fn new(rows: usize, bits: usize, separate: &[Dichotomy]) -> Self {
        let mut sat = Sat::new();
        let code = (0..rows * bits).map(|_| sat.variable()).collect();
        let mut search = Search { sat, rows, bits, code };
        for (bit, dichotomy) in separate.iter().enumerate() {
            for row in dichotomy.left {
                search.sat.clause(&[!search.bit(row, bit)]);
            }
            for row in dichotomy.right {
                search.sat.clause(&[search.bit(row, bit)]);
            }
        }
        search.order_bits(separate.len());
        search
    }

    /// Bits that no dichotomy has to itself: the first row has 0, and each is used no earlier than the one before.
    fn order_bits(&mut self, named: usize) {
        for bit in named..self.bits {
            let first = self.bit(Row::new(0), bit);
            self.sat.clause(&[!first]);
            for row in (0..self.rows).filter(|_| bit > named) {
                let mut clause = vec![!self.bit(Row::new(row), bit)];
                clause.extend((0..=row).map(|earlier| self.bit(Row::new(earlier), bit - 1)));
                self.sat.clause(&clause);
            }
        }
    }

    fn bit(&self, row: Row, bit: usize) -> Lit {
        self.code[row.at() * self.bits + bit]
    }

    fn require(&mut self, dichotomy: &Dichotomy) {
        let (left, right) = (dichotomy.left, dichotomy.right);
        let mut clause = Vec::with_capacity(self.bits);
        for bit in 0..self.bits {
            let here = self.sat.variable();
            let [a, b, c, d] = [left[0], left[1], right[0], right[1]].map(|row| self.bit(row, bit));
            self.sat.clause(&[!here, a, c]);
            self.sat.clause(&[!here, !a, !c]);
            for (x, y, two) in [(a, b, left[0] != left[1]), (c, d, right[0] != right[1])] {
                if two {
                    self.sat.clause(&[!here, x, !y]);
                    self.sat.clause(&[!here, !x, y]);
                }
            }
            clause.push(here);
        }
        self.sat.clause(&clause);
    }

    fn codes(&self) -> Vec<Code> {
        let code = |row: usize| {
            let set = (0..self.bits).filter(|&bit| self.sat.value(self.bit(Row::new(row), bit)));
            Code(set.fold(0, |code, bit| code | 1 << bit))
        };
        (0..self.rows).map(code).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn dichotomy(left: [u16; 2], right: [u16; 2]) -> Dichotomy {
        Dichotomy::new(left.map(Row), right.map(Row))
    }

    #[test]
    fn two_fit_into_one_bit_in_either_direction_or_not_at_all() {
        let one = dichotomy([0, 1], [2, 3]);
        assert!(one.fits(&dichotomy([0, 4], [3, 5])));
        assert!(one.fits(&dichotomy([0, 4], [5, 6])));
        assert!(!one.fits(&dichotomy([0, 2], [1, 3])));
        assert!(!one.fits(&dichotomy([0, 2], [4, 5])));
    }

    #[test]
    fn three_pairings_of_four_rows_need_three_bits() {
        let list = [dichotomy([0, 1], [2, 3]), dichotomy([0, 2], [1, 3]), dichotomy([0, 3], [1, 2])];
        let effort = Effort::of(100_000);
        assert_eq!(apart(&list).len(), 3);
        assert_eq!(pack(&list, 4, &effort).map(|found| found.0), Ok(3));
        assert_eq!(solve(&list, &[], 4, 2, &effort), Ok(None));
        let codes = solve(&list, &[], 4, 3, &effort).expect("enough effort").expect("three bits do");
        assert!(list.iter().all(|one| one.holds(&codes, 7)));
    }
}
