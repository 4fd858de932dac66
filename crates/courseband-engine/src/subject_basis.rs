//! The columns of what differs from subject to subject (and from cluster to cluster).

use crate::spline::NaturalSpline;

/// Level, trend around the mean time, and for subject curves the penalised part of a natural spline.
#[derive(Debug, Clone)]
pub(crate) struct SubjectBasis {
    /// Number of columns among level and trend.
    lines: usize,
    /// Internal time at which level and trend are taken.
    centre: f64,
    spline: Option<NaturalSpline>,
}

impl SubjectBasis {
    /// `lines` at most 2; a spline needs both.
    pub(crate) fn new(lines: usize, centre: f64, spline: Option<NaturalSpline>) -> Self {
        SubjectBasis { lines, centre, spline }
    }

    /// Number of columns.
    pub(crate) fn width(&self) -> usize {
        self.lines + self.curved()
    }

    /// Number of columns of the spline.
    pub(crate) fn curved(&self) -> usize {
        self.spline.as_ref().map_or(0, NaturalSpline::len)
    }

    /// Writes the columns at internal time `t`.
    pub(crate) fn fill(&self, t: f64, out: &mut [f64]) {
        if self.lines > 0 {
            out[0] = 1.0;
        }
        if self.lines > 1 {
            out[1] = t - self.centre;
        }
        if let Some(spline) = &self.spline {
            spline.fill(t, false, &mut out[self.lines..]);
        }
    }

    /// The columns at several times, n rows.
    pub(crate) fn table(&self, times: &[f64]) -> Vec<f64> {
        let width = self.width();
        let mut table = vec![0.0; times.len() * width];
        if width > 0 {
            table.chunks_exact_mut(width).zip(times).for_each(|(row, &t)| self.fill(t, row));
        }
        table
    }
}
