//! The columns that describe one group's mean over time.
//!
//! All times here are internal: 0 at the table's first time, 1 at its last.

use crate::model::{Basis, Data, Dimension, Model, Shape};
use crate::spline::{NaturalSpline, Smooth, distinct_sorted, place_knots};

/// Columns of one group's mean. The unpenalised ones come first.
#[derive(Debug, Clone)]
pub(crate) enum GroupBasis {
    /// One distinct time: a level and nothing else.
    Constant,
    /// Level and trend.
    Line,
    /// Level, trend (not where it is cyclic) and penalised columns.
    Spline(Smooth),
    /// One column per distinct time.
    ByTime(Vec<f64>),
    /// One of the others without its value at internal time 0, which all groups share.
    FromStart(Box<GroupBasis>),
}

impl GroupBasis {
    /// Number of columns.
    pub(crate) fn columns(&self) -> usize {
        self.unpenalised() + self.penalised()
    }

    /// Number of columns without a penalty.
    pub(crate) fn unpenalised(&self) -> usize {
        match self {
            GroupBasis::Constant => 1,
            GroupBasis::Spline(smooth) if smooth.is_cyclic() => 1,
            GroupBasis::Line | GroupBasis::Spline(_) => 2,
            GroupBasis::ByTime(times) => times.len(),
            GroupBasis::FromStart(whole) => whole.unpenalised() - 1,
        }
    }

    /// Number of penalised columns, whose penalty is the identity.
    pub(crate) fn penalised(&self) -> usize {
        match self {
            GroupBasis::Spline(spline) => spline.len(),
            GroupBasis::FromStart(whole) => whole.penalised(),
            _ => 0,
        }
    }

    /// True where one column is time itself, so that the criterion depends on the unit of time.
    pub(crate) fn has_trend(&self) -> bool {
        match self {
            GroupBasis::Spline(smooth) => !smooth.is_cyclic(),
            GroupBasis::Line => true,
            GroupBasis::FromStart(whole) => whole.has_trend(),
            _ => false,
        }
    }

    /// How much of the mean at internal time 0 that all groups share is in the mean at `t`, or its derivative;
    /// `None` where the group has a level of its own.
    pub(crate) fn start_share(&self, t: f64, derivative: bool) -> Option<f64> {
        let GroupBasis::FromStart(whole) = self else {
            return None;
        };
        let mut all = vec![0.0; whole.columns()];
        whole.fill(t, derivative, &mut all);
        Some(all[0])
    }

    /// Writes the columns at internal time `t` into `out`, or their first derivatives.
    pub(crate) fn fill(&self, t: f64, derivative: bool, out: &mut [f64]) {
        let level = if derivative { 0.0 } else { 1.0 };
        match self {
            GroupBasis::Constant => out[0] = level,
            GroupBasis::Line | GroupBasis::Spline(_) => {
                out[0] = level;
                if self.has_trend() {
                    out[1] = if derivative { 1.0 } else { t };
                }
                if let GroupBasis::Spline(smooth) = self {
                    smooth.fill(t, derivative, &mut out[self.unpenalised()..]);
                }
            }
            GroupBasis::ByTime(times) => fill_joined(times, t, derivative, out),
            GroupBasis::FromStart(whole) => {
                // Level, or the mean of the first time: 1 at internal time 0, where the other columns are 0.
                let mut all = vec![0.0; whole.columns()];
                whole.fill(t, derivative, &mut all);
                out.copy_from_slice(&all[1..]);
            }
        }
    }
}

/// Straight joins between neighbouring times; constant outside.
fn fill_joined(times: &[f64], t: f64, derivative: bool, out: &mut [f64]) {
    out.fill(0.0);
    let last = times.len() - 1;
    if last == 0 || t <= times[0] || t >= times[last] {
        out[if t <= times[0] { 0 } else { last }] = if derivative { 0.0 } else { 1.0 };
        return;
    }
    let right = times.partition_point(|&time| time < t).clamp(1, last);
    let h = times[right] - times[right - 1];
    let share = (t - times[right - 1]) / h;
    let (left_weight, right_weight) = if derivative { (-1.0 / h, 1.0 / h) } else { (1.0 - share, share) };
    out[right - 1] = left_weight;
    out[right] = right_weight;
}

/// How internal numbers relate to the table's.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Units {
    /// First time in the table.
    pub(crate) time_origin: f64,
    /// Last minus first time; 1 where there is one time only.
    pub(crate) time_span: f64,
    /// Mean of the responses.
    pub(crate) response_centre: f64,
    /// Standard deviation of the responses; 1 where they do not vary.
    pub(crate) response_scale: f64,
    /// Internal time at which a subject's level and trend are taken.
    pub(crate) subject_centre: f64,
}

impl Units {
    /// `data` has at least one row.
    pub(crate) fn of(data: &Data) -> Self {
        let times = || data.subjects.iter().flat_map(|s| s.times.iter().copied());
        let responses = || data.subjects.iter().flat_map(|s| s.responses.iter().copied());
        let rows = data.rows() as f64;
        let origin = times().fold(f64::INFINITY, f64::min);
        let span = times().fold(f64::NEG_INFINITY, f64::max) - origin;
        let span = if span > 0.0 { span } else { 1.0 };
        let first = responses().next().unwrap_or(0.0);
        let centre = first + responses().map(|y| y - first).sum::<f64>() / rows;
        let square = responses().map(|y| (y - centre) * (y - centre)).sum::<f64>() / rows;
        let scale = libm::sqrt(square);
        Units {
            time_origin: origin,
            time_span: span,
            response_centre: centre,
            response_scale: if scale > 0.0 && scale.is_finite() { scale } else { 1.0 },
            subject_centre: times().map(|t| (t - origin) / span).sum::<f64>() / rows,
        }
    }

    /// The same with responses in their own unit, as a distribution with a link needs them.
    pub(crate) fn with_plain_responses(self) -> Self {
        Units { response_centre: 0.0, response_scale: 1.0, ..self }
    }

    /// Table time to internal time.
    pub(crate) fn inner_time(&self, t: f64) -> f64 {
        (t - self.time_origin) / self.time_span
    }
}

/// The data with the column of a common start put before the other shared ones.
pub(crate) fn with_start(data: &Data, bases: &[GroupBasis], units: &Units) -> Data {
    let mut data = data.clone();
    let width = data.shared.columns();
    for subject in &mut data.subjects {
        let mut rows = Vec::with_capacity(subject.times.len() * (width + 1));
        for (j, &t) in subject.times.iter().enumerate() {
            rows.extend(bases[subject.group].start_share(units.inner_time(t), false));
            rows.extend(&subject.shared[j * width..(j + 1) * width]);
        }
        subject.shared = rows;
    }
    data.shared.free += 1;
    data.shared.reference.insert(0, 1.0);
    data
}

/// The penalised columns over the pooled distinct times; `None` where a line is all there can be.
fn smooth(basis: Basis, dimension: Dimension, pooled: &[f64], units: &Units) -> Option<Smooth> {
    let knots = place_knots(pooled, dimension);
    let count = knots.len();
    let made = match basis {
        Basis::Cubic => Some(Smooth::Natural(NaturalSpline::new(knots))),
        Basis::ThinPlate if pooled.len() > MOST_PLATES => {
            Smooth::thin_plate(&place_knots(pooled, Dimension::Knots(MOST_PLATES)), count)
        }
        Basis::ThinPlate => Smooth::thin_plate(pooled, count),
        // Two more than knots: as many columns as an interpolating spline through the knots.
        Basis::Pieces => Smooth::pieces(pooled, count + 2),
        Basis::Process { range, roughness } => Smooth::process(knots, range / units.time_span, roughness),
        Basis::Cyclic { period } => Smooth::cyclic(period / units.time_span, count.min(MOST_AROUND)),
    };
    made.filter(|smooth| smooth.len() > 0)
}

/// Most distinct times that a thin plate spline is made over.
const MOST_PLATES: usize = 200;
/// Most values around a circle.
const MOST_AROUND: usize = 24;

/// One basis per group.
pub(crate) fn group_bases(data: &Data, model: &Model, units: &Units) -> Vec<GroupBasis> {
    let inner = |t: f64| units.inner_time(t);
    let pooled = distinct_sorted(data.subjects.iter().flat_map(|s| s.times.iter().map(|&t| inner(t))));
    let spline = match model.shape {
        Shape::Smooth(basis, dimension) if pooled.len() > 2 => smooth(basis, dimension, &pooled, units),
        _ => None,
    };
    (0..data.groups)
        .map(|group| {
            let own = data.subjects.iter().filter(|s| s.group == group);
            let times = distinct_sorted(own.flat_map(|s| s.times.iter().map(|&t| inner(t))));
            let whole = match (model.shape, times.len()) {
                (Shape::ByTime, _) => GroupBasis::ByTime(times),
                (_, 1) => GroupBasis::Constant,
                (Shape::Smooth(..), _) => spline.clone().map_or(GroupBasis::Line, GroupBasis::Spline),
                (Shape::Straight, _) => GroupBasis::Line,
            };
            if model.common_start { GroupBasis::FromStart(Box::new(whole)) } else { whole }
        })
        .collect()
}
