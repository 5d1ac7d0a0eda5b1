//! Codes without critical races: six assignment methods and the encoded table.
//!
//! [`assign`] gives each row of the reduced table a code (or several) and each unstable cell a [`Way`] from code to
//! code, such that the order in which bits change cannot matter. The methods, one module each:
//!
//! - `adjacency`: one code a row, one bit a step;
//! - `shared_row`: the same with spare codes;
//! - `single_step`: all bits of a move at once;
//! - `one_hot`: a bit a row;
//! - `multiple_row`: several codes a row;
//! - `by_hand`: the user's codes, checked, with the best ways that they allow.
//!
//! `net`, `routes` and `search` look for codes whose bits change one at a time, `dichotomy` for single-step codes;
//! `table` makes the encoded table. The race check is no part of this room: it knows nothing of the methods.

mod adjacency;
mod by_hand;
mod cube;
mod dichotomy;
mod fit;
mod multiple_row;
mod net;
mod one_hot;
mod routes;
mod search;
mod shared_row;
mod single_step;
mod table;
pub mod values;

pub use values::{Coded, Encoded, Entry, Role, Spare, Step, Way};

use crate::base::{Bound, Code, Effort, Finding};
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// Codes for the rows of a reduced table in normal mode, ways for all its unstable cells, and the encoded table.
///
/// A table of one row needs no state variable: it has the empty code whatever the method.
///
/// # Errors
/// Findings of level error that say why the method cannot serve and what would: `adjacency-impossible`,
/// `too-many-variables`, `code-..` for what is wrong with codes by hand, `..-not-found` if the effort ran out before
/// anything was found.
pub fn assign(reduced: &Reduced, method: &Method, effort: &Effort) -> Result<Coded, Vec<Finding>> {
    if let Method::ByHand(given) = method {
        return by_hand::assign(reduced, given, effort);
    }
    if reduced.table.len() <= 1 {
        return Ok(single_row(reduced, method));
    }
    match method {
        Method::Adjacency => adjacency::assign(reduced, effort),
        Method::SharedRow => shared_row::assign(reduced, effort),
        Method::SingleStep => single_step::assign(reduced, effort),
        Method::OneHot => one_hot::assign(reduced),
        Method::MultipleRow => multiple_row::assign(reduced),
        Method::ByHand(given) => by_hand::assign(reduced, given, effort),
    }
}

fn single_row(reduced: &Reduced, method: &Method) -> Coded {
    let codes = vec![vec![Code(0)]; reduced.table.len()];
    let method = method.clone();
    let (bound, tidy) = (Bound::Proved, Bound::Proved);
    table::finish(reduced, table::Draft { method, bits: 0, codes, ways: Vec::new(), bound, tidy })
}
