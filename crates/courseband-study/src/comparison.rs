//! What is compared: pairs of groups and, where asked for, factors, differences of differences and a trend over doses.

use crate::cohort::Cohort;
use crate::plan::{Pairs, Plan};
use courseband_engine::{Contrast, Fit};
use serde::Serialize;

/// What a difference is between.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum ComparisonKind {
    /// Two groups.
    Pair,
    /// Two values of one factor, averaged over the values of the other with equal weights.
    Factor,
    /// How the difference of two values of one factor differs between two values of the other.
    Interaction,
    /// Change per step in the order of the groups (least squares over equally spaced steps).
    Trend,
}

/// A weighted sum of the groups' courses; weights sum to zero.
#[derive(Debug, Clone)]
pub(crate) struct Comparison {
    pub(crate) kind: ComparisonKind,
    pub(crate) from: String,
    pub(crate) to: String,
    pub(crate) weights: Vec<(usize, f64)>,
}

impl Comparison {
    /// The gap at a time.
    pub(crate) fn at(&self, fit: &Fit, time: f64) -> Contrast {
        let mut parts = self.weights.iter();
        let first = parts.next().map(|&(g, weight)| fit.course(g, time).times(weight));
        let first = first.unwrap_or_else(|| fit.course(0, time).times(0.0));
        parts.fold(first, |sum, &(g, weight)| sum.plus(weight, &fit.course(g, time)))
    }

    /// The two groups of a plain pair, as (from, to).
    pub(crate) fn pair(&self) -> Option<(usize, usize)> {
        match (self.kind, self.weights.as_slice()) {
            (ComparisonKind::Pair, [(to, _), (from, _)]) => Some((*from, *to)),
            _ => None,
        }
    }
}

impl Cohort {
    /// All that is compared, plain pairs first.
    pub(crate) fn comparisons(&self, plan: &Plan) -> Vec<Comparison> {
        let name = |g: usize| self.groups[g].name.clone();
        let pair = |(from, to): (usize, usize)| Comparison {
            kind: ComparisonKind::Pair,
            from: name(from),
            to: name(to),
            weights: vec![(to, 1.0), (from, -1.0)],
        };
        let mut all: Vec<Comparison> = self.pairs(plan).into_iter().map(pair).collect();
        if !self.cells.is_empty() {
            all.extend(self.crossed(plan));
        } else if plan.comparisons.trend && self.groups.len() > 2 {
            all.push(self.trend());
        }
        all
    }

    fn trend(&self) -> Comparison {
        let k = self.groups.len() as f64;
        let score = |g: usize| g as f64 - 0.5 * (k - 1.0);
        let sum: f64 = (0..self.groups.len()).map(|g| score(g) * score(g)).sum();
        Comparison {
            kind: ComparisonKind::Trend,
            from: self.groups[0].name.clone(),
            to: self.groups[self.groups.len() - 1].name.clone(),
            weights: (0..self.groups.len()).rev().map(|g| (g, score(g) / sum)).collect(),
        }
    }

    /// Factors and differences of differences of a crossed design.
    fn crossed(&self, plan: &Plan) -> Vec<Comparison> {
        let labels = |k: usize| {
            let mut all: Vec<&str> = Vec::new();
            for cell in &self.cells {
                if !all.contains(&cell[k].as_str()) {
                    all.push(&cell[k]);
                }
            }
            all
        };
        let (groups, levels) = (labels(0), labels(1));
        let cell = |g: &str, l: &str| self.cells.iter().position(|cell| cell[0] == g && cell[1] == l);
        let against = plan.comparisons.pairs == Pairs::AgainstControl;
        let control = plan.comparisons.control.as_deref();
        let group_pairs: Vec<(&str, &str)> = pairs_of(&groups, control, against);
        let level_pairs: Vec<(&str, &str)> = pairs_of(&levels, None, false);
        let mut all = Vec::new();
        let averaged = |from: Vec<usize>, to: Vec<usize>| -> Vec<(usize, f64)> {
            let weight = 1.0 / to.len() as f64;
            to.into_iter().map(|g| (g, weight)).chain(from.into_iter().map(|g| (g, -weight))).collect()
        };
        for &(from, to) in &group_pairs {
            // Levels that both have, so that like is compared with like.
            let both: Vec<(usize, usize)> =
                levels.iter().filter_map(|l| Some((cell(from, l)?, cell(to, l)?))).collect();
            if both.len() > 1 {
                let (a, b) = both.into_iter().unzip();
                let (from, to) = (from.to_string(), to.to_string());
                all.push(Comparison { kind: ComparisonKind::Factor, from, to, weights: averaged(a, b) });
            }
        }
        for &(from, to) in &level_pairs {
            let both: Vec<(usize, usize)> =
                groups.iter().filter_map(|g| Some((cell(g, from)?, cell(g, to)?))).collect();
            if both.len() > 1 {
                let (a, b) = both.into_iter().unzip();
                let (from, to) = (from.to_string(), to.to_string());
                all.push(Comparison { kind: ComparisonKind::Factor, from, to, weights: averaged(a, b) });
            }
        }
        for &(a, b) in &group_pairs {
            for &(k, l) in &level_pairs {
                let corners = [cell(b, l), cell(a, l), cell(b, k), cell(a, k)];
                if let [Some(bl), Some(al), Some(bk), Some(ak)] = corners {
                    all.push(Comparison {
                        kind: ComparisonKind::Interaction,
                        from: format!("{b} against {a} in {k}"),
                        to: format!("{b} against {a} in {l}"),
                        weights: vec![(bl, 1.0), (al, -1.0), (bk, -1.0), (ak, 1.0)],
                    });
                }
            }
        }
        all
    }
}

/// Pairs of labels, the control (else the earlier) first.
fn pairs_of<'a>(labels: &[&'a str], control: Option<&str>, against: bool) -> Vec<(&'a str, &'a str)> {
    let mut pairs = Vec::new();
    for (k, &a) in labels.iter().enumerate() {
        for &b in &labels[k + 1..] {
            let pair = if control == Some(b) { (b, a) } else { (a, b) };
            if !against || control.is_none() || control == Some(pair.0) {
                pairs.push(pair);
            }
        }
    }
    pairs
}
