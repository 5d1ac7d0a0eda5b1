//! Words without a domain: index types, findings, and how long a search may go on.
//!
//! Everything else is written in these terms, and this room imports nothing.

pub mod effort;
pub mod finding;
pub mod index;

pub use effort::{Bound, Effort, Halted, Progress, Stop};
pub use finding::{Finding, Level, Place};
pub use index::{Code, Column, Outputs, Row, TotalState};
