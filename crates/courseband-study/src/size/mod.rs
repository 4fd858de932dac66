//! How many subjects the next study needs: simulate, refit, count.
//!
//! What is simulated is exactly what is said in [`SizeFindings::model`]: two
//! groups with given courses, subjects that differ in level (and trend), errors
//! that may go on from visit to visit, losses at random visits. Each simulated
//! table is fitted with a smooth course per group and the band with degrees of
//! freedom, and the goal is either met or not. A fit that fails counts as not met.
//!
//! Study `k` of a design depends on the seed, the design's numbers and `k` alone, so
//! that work can be split over workers, stopped, and continued with the same digits.

mod answer;
mod from_findings;
mod request;
mod simulate;

pub use answer::{DesignAnswer, SizeFindings};
pub use request::{CourseMeans, Goal, GoalKind, SizeRequest, SizeSpread};
pub use simulate::Counts;

#[cfg(test)]
mod tests;
