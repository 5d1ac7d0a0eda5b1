//! Exact combinatorics without a domain: cliques, covering, satisfiability.

pub mod clique;
pub mod cover;
pub mod sat;
