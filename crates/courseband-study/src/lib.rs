//! Plan in, findings out: the one way from a table to numbers and sentences.
//!
//! Both doors (the page's worker and the native command) call [`Study::run`];
//! neither computes anything itself.
//!
//! This crate does no I/O and knows no clock. Reading bytes is
//! `courseband-table`'s work, mathematics is `courseband-engine`'s.

mod adjust;
mod blocks;
mod candidates;
mod check_plan;
mod checks;
mod cohort;
mod comparison;
mod dropout;
mod effects;
mod endings;
mod evaluate;
mod factors;
mod families;
mod findings;
mod housing;
mod markers;
mod plan;
mod proposal;
mod refusal;
mod remarks;
mod report;
mod sentences;
mod size;
mod study;
mod traces;
mod usual;

pub use adjust::Adjustment;
pub use blocks::{BendEffect, BlockEffects, BlockGap};
pub use candidates::{Candidate, Candidates};
pub use checks::{Check, CheckPlot, ChecksFindings, Consequence, Outcome, PlotSeries, TriedPair};
pub use comparison::ComparisonKind;
pub use dropout::{After, DropoutFindings, Leaver, Leaving, PooledGap, Sensitivity, SensitivityFindings};
pub use endings::{EventGroup, EventTimes};
pub use findings::*;
pub use housing::ClusterSummary;
pub use markers::{Marker, MarkerPair, MarkersFindings};
pub use plan::*;
pub use proposal::Proposal;
pub use refusal::Refusal;
pub use report::{
    GivenReport, Report, ReportContext, ReportItem, ReportSection, ReportTable, report_document, tables_workbook,
};
pub use size::{Counts, CourseMeans, DesignAnswer, Goal, GoalKind, SizeFindings, SizeRequest, SizeSpread};
pub use study::{Calibrator, Refits, Study, run};
pub use traces::Traces;
pub use usual::*;
