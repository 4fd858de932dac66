//! Simulated studies that show how often the bands keep their promise.
//!
//! A *cell* is a kind of study. Its truths are stated in between-subject
//! standard deviations (level SD 1); errors have SD 0.5; where subjects differ in
//! trend, its SD over the whole follow-up is 0.5. Two groups. The model that is
//! fitted has the subject effects and serial correlation of the cell, so that what
//! is shown is the procedure, not the choice of the model. A failed fit counts as a miss.
//!
//! Study `k` of a cell depends on the cell's number and `k` alone, so that runs can be
//! split and continued.

mod cell;
mod study;
mod tally;

pub use cell::{Cell, Truth, all_cells};
pub use study::{Outcome, simulate};
pub use tally::{Rate, Tally};
