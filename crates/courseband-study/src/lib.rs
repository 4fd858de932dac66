//! Plan in, findings out: the one way from a table to numbers and sentences.
//!
//! Both doors (the page's worker and the native command) call [`run`]; neither
//! computes anything itself.
//!
//! This crate does no I/O and knows no clock. Reading bytes is
//! `courseband-table`'s work, mathematics is `courseband-engine`'s.

mod findings;
mod plan;

pub use findings::*;
pub use plan::*;
