//! Counts over studies, with their Monte-Carlo errors.

use super::study::Outcome;

/// Sums over the studies of a cell.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Tally {
    /// Studies.
    pub studies: u64,
    /// Whole difference covered.
    pub covered: u64,
    /// Sum of the shares of time covered.
    pub across: f64,
    /// Studies with a stretch apart.
    pub stretch: u64,
    /// Onset intervals that hold the truth, of `onsets`.
    pub onset: u64,
    /// Studies whose truth has an onset.
    pub onsets: u64,
    /// Area intervals that hold the truth.
    pub area: u64,
    /// Sum of mean widths.
    pub width: f64,
    /// Failed fits.
    pub failed: u64,
}

/// A share with its binomial standard error.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Rate {
    /// The share.
    pub share: f64,
    /// Its Monte-Carlo standard error.
    pub error: f64,
}

impl Rate {
    /// `count` of `total`; a share of nothing is NaN.
    #[must_use]
    pub fn of(count: u64, total: u64) -> Self {
        let share = count as f64 / total as f64;
        Rate { share, error: libm::sqrt(share * (1.0 - share) / total as f64) }
    }
}

impl Tally {
    /// Counts one study.
    pub fn add(&mut self, outcome: &Outcome) {
        self.studies += 1;
        self.covered += u64::from(outcome.covered);
        self.across += outcome.across;
        self.stretch += u64::from(outcome.stretch);
        self.onset += u64::from(outcome.onset == Some(true));
        self.onsets += u64::from(outcome.onset.is_some());
        self.area += u64::from(outcome.area);
        self.width += outcome.width;
        self.failed += u64::from(outcome.failed);
    }

    /// Fields as CSV, in the order of [`Tally::HEADER`].
    #[must_use]
    pub fn csv(&self) -> String {
        format!(
            "{},{},{:.4},{},{},{},{},{:.4},{}",
            self.studies,
            self.covered,
            self.across,
            self.stretch,
            self.onset,
            self.onsets,
            self.area,
            self.width,
            self.failed
        )
    }

    /// Names of the fields.
    pub const HEADER: &'static str = "studies,covered,across,stretch,onset,onsets,area,width,failed";
}
