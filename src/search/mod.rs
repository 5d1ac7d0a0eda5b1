//! Exact combinatorics without a domain: cliques, covering, satisfiability.

pub mod clique;
pub mod cover;
mod cyclic;
pub mod sat;
