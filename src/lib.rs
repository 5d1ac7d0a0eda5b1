//! Stillgate derives asynchronous (clockless) controllers: from a primitive flow table to codes without critical races,
//! hazard-free equations, and a proof of both. This library knows no screen; `main.rs` and the window are thin.
//!
//! # The chain on one page
//!
//! ```text
//! behaviour  ->  merging  ->  codes  ->  equations  ->  proof  ->  hand-off
//! (spec/)       (merge/)     (codes/)   (logic/ gates/)  (proof/)   (handoff/)
//! ```
//!
//! [`project::Project`] is the only thing that is edited. `design::derive` runs the stages on it. Each stage is a pure
//! function from the stage before and the user's choices to a plain value; the plain values of a stage live in its
//! `values.rs`, apart from the algorithms that make them:
//!
//! | stage | function | value |
//! | --- | --- | --- |
//! | behaviour | `spec::check` | [`spec::Spec`]: a flow table in normal mode, and what can happen in it |
//! | merging | `merge::merge` | [`merge::Merged`]: implication table, closed cover, reduced table |
//! | codes | `codes::assign` | [`codes::Coded`]: codes, ways between them, encoded table |
//! | equations | `logic::equations` | [`logic::Equations`]: hazard-free products with the reason for each |
//! | proof | `proof::races`, `proof::prove` | [`proof::Races`], [`proof::Proof`] |
//! | hand-off | [`handoff`] | strings: the record as JSON, the design as text |
//!
//! What goes wrong is a value ([`base::Finding`]), a long search takes an [`base::Effort`] and says whether its result is
//! proved ([`base::Bound`]), and the checker in [`proof`] shares nothing with the stages but their plain values.

pub mod base;
pub mod codes;
pub mod design;
pub mod drawing;
pub mod explain;
pub mod gates;
pub mod handoff;
pub mod logic;
pub mod merge;
pub mod project;
pub mod proof;
pub mod search;
pub mod spec;
#[cfg(feature = "window")]
pub mod window;
