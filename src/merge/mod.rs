//! Merging: implication table, compatible sets, the smallest closed cover, the reduced table.

pub mod values;

pub use values::{Conflict, CoverFault, MergeChoice, Merged, Pair, PairTable, Reduced, Verdict};
