//! Several codes a row, so that every code is one bit away from every other row [Huffman 1954; Hamming 1950].
//!
//! With 2^m rows and 2^m - 1 bits, the rows are the cosets of a Hamming code: a code belongs to the row whose number
//! is the exclusive or of the numbers, counted from 1, of the bits that are set. Changing bit number d takes row r to row
//! r xor d, so each move is one bit. Four rows get pairs of complementary codes of three bits. With fewer rows than 2^m
//! some cosets stay unused; by this construction no bit can then be saved, since any 2^(m-1) + 1 numbers differ in all
//! 2^m - 1 ways.
//!
//! A construction: nothing is searched. Cost: linear in codes times columns, and there are 2^(2^m - 1) codes: 8 with
//! 3 bits, 128 with 7. Nine rows would need 15 bits and 32,768 codes, whose equations take minutes and gigabytes: the
//! method stops at eight rows.

use crate::base::{Bound, Code, Finding, Level};
use crate::codes::fit::{bits_for, room, too_many};
use crate::codes::table::{Draft, finish};
use crate::codes::values::{Coded, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// Most rows that get codes by this method.
const MOST_ROWS: usize = 8;

/// Multiple-row codes.
///
/// # Errors
/// `too-many-rows`: beyond eight rows. `too-many-variables`: where the inputs leave too little room.
pub(super) fn assign(reduced: &Reduced) -> Result<Coded, Vec<Finding>> {
    let table = &reduced.table;
    let rows = table.len();
    if rows > MOST_ROWS {
        let text = format!(
            "The multiple-row method is offered up to {MOST_ROWS} rows, and this design has {rows}: with 15 state \
             variables and thousands of codes the equations would be out of reach. Use the single-step, shared-row \
             or one-hot method."
        );
        return Err(vec![Finding::new(Level::Error, "too-many-rows", text)]);
    }
    let bits = (1usize << bits_for(rows)) - 1;
    if bits > room(reduced) {
        let why = " (the next power of two, less one)";
        return Err(vec![too_many(reduced, "multiple row", bits, why)]);
    }
    // The initial row is coset 0, so that it owns code 0; the others follow in order.
    let home = reduced.initial.row.at();
    let coset = |row: usize| if row == home { 0 } else { row + usize::from(row < home) };
    let mut codes = vec![Vec::new(); rows];
    let by_coset: Vec<Option<usize>> =
        (0..=bits).map(|wanted| (0..rows).find(|&row| coset(row) == wanted)).collect();
    for code in 0..1u32 << bits {
        if let Some(row) = by_coset[syndrome(code)] {
            codes[row].push(Code(code));
        }
    }
    let mut ways = Vec::new();
    for from in table.rows() {
        for column in table.columns() {
            let Some(to) = table.next(from, column).filter(|&to| to != from) else { continue };
            let bit = (coset(from.at()) ^ coset(to.at())) - 1;
            ways.extend(codes[from.at()].iter().map(|&code| {
                let path = vec![code, Code(code.0 ^ 1 << bit)];
                Way { from, column, to, path, step: Step::OneBit }
            }));
        }
    }
    let method = Method::MultipleRow;
    Ok(finish(reduced, Draft { method, bits, codes, ways, bound: Bound::Proved, tidy: Bound::Proved }))
}

/// The exclusive or of the numbers, from 1, of the bits that are set.
fn syndrome(code: u32) -> usize {
    (0..u32::BITS as usize).filter(|&bit| code >> bit & 1 == 1).fold(0, |sum, bit| sum ^ (bit + 1))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_code_touches_every_other_coset_once() {
        for code in 0..1u32 << 7 {
            let mut seen: Vec<usize> = (0..7).map(|bit| syndrome(code ^ 1 << bit)).collect();
            seen.push(syndrome(code));
            seen.sort_unstable();
            assert_eq!(seen, [0, 1, 2, 3, 4, 5, 6, 7]);
        }
    }
}
