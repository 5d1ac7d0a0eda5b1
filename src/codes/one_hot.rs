//! A bit a row [Huffman 1954].
//!
//! Row i has the code in which bit i alone is 1. A move from i to k sets bit k, then clears bit i: the code with both
//! stands between. In a column such a code belongs to one move only, for k is stable there and starts none.
//!
//! A construction: nothing is searched. Cost: linear in the cells.

use crate::base::{Bound, Code, Finding};
use crate::codes::fit::{room, too_many};
use crate::codes::table::{Draft, finish};
use crate::codes::values::{Coded, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// One-hot codes.
///
/// # Errors
/// `too-many-variables` if there are more rows than the inputs leave room for.
pub(super) fn assign(reduced: &Reduced) -> Result<Coded, Vec<Finding>> {
    let table = &reduced.table;
    let bits = table.len();
    if bits > room(reduced) {
        return Err(vec![too_many(reduced, "one hot", bits, "")]);
    }
    let mut ways = Vec::new();
    for from in table.rows() {
        for column in table.columns() {
            let Some(to) = table.next(from, column).filter(|&to| to != from) else { continue };
            let (old, new) = (1 << from.at(), 1 << to.at());
            let path = vec![Code(old), Code(old | new), Code(new)];
            ways.push(Way { from, column, to, path, step: Step::OneBit });
        }
    }
    let codes = table.rows().map(|row| vec![Code(1 << row.at())]).collect();
    let method = Method::OneHot;
    Ok(finish(reduced, Draft { method, bits, codes, ways, bound: Bound::Proved, tidy: Bound::Proved }))
}
