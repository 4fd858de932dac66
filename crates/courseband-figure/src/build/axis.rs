//! The time axis.

use crate::figure::TimeAxis;
use crate::source::Source;
use crate::ticks::{time_ticks, visit_ticks};
use crate::view::View;

/// Up to so many visits each is marked.
const MARKED_VISITS: usize = 20;

/// The axis from the first to the last visit, marked at the visits where they are few.
pub(super) fn time_axis(source: &Source, view: &View) -> TimeAxis {
    let first = source.visits.first().copied().unwrap_or(0.0);
    let last = source.visits.last().copied().unwrap_or(1.0);
    let (start, end) = if last > first { (first, last) } else { (first - 0.5, first + 0.5) };
    let ticks =
        if source.visits.len() <= MARKED_VISITS { visit_ticks(&source.visits) } else { time_ticks(start, end, 10) };
    let word = view.time_title.clone().unwrap_or_else(|| source.scale.time_word.clone());
    TimeAxis { start, end, ticks, word }
}
