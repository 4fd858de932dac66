//! Critical values of a family of contrasts, and runs of time in which a condition holds.

use crate::special::{DirectionMaxima, normal_quantile, t_quantile};

/// Critical values of one family at one level, as a function of the degrees of freedom.
#[derive(Debug, Clone)]
pub struct CriticalValues {
    kind: Kind,
}

#[derive(Debug, Clone)]
enum Kind {
    /// One for all.
    Fixed(f64),
    /// Student's t of each point by itself.
    Pointwise(f64),
    /// `ln c` at nodes in `1 / df`, joined by a polynomial through all (Berrut & Trefethen 2004, SIAM Review 46:501).
    Nodes(Vec<(f64, f64)>),
}

/// Number of nodes in 1/df: enough for the interpolated value to be within 1e-3 of the computed one.
fn node_count(width: f64) -> usize {
    if width < 0.01 {
        3
    } else if width < 0.1 {
        5
    } else {
        8
    }
}

impl CriticalValues {
    /// Each point by itself.
    #[must_use]
    pub fn pointwise(level: f64) -> Self {
        CriticalValues { kind: Kind::Pointwise(level) }
    }

    /// A value from elsewhere, such as a calibration.
    #[must_use]
    pub fn fixed(value: f64) -> Self {
        CriticalValues { kind: Kind::Fixed(value) }
    }

    /// Over the whole family at once, for degrees of freedom between `least` and `most`
    /// (both infinite: normal theory, one value).
    #[must_use]
    pub fn simultaneous(maxima: &DirectionMaxima, level: f64, least: f64, most: f64) -> Self {
        if least.is_infinite() {
            return CriticalValues::fixed(maxima.quantile(level, None).value);
        }
        let (low, high) = (1.0 / most, 1.0 / least);
        if high - low < 1e-4 {
            return CriticalValues::fixed(maxima.quantile(level, Some(least)).value);
        }
        let count = node_count(high - low);
        let nodes = (0..count)
            .map(|k| {
                let angle = std::f64::consts::PI * (k as f64 + 0.5) / count as f64;
                let x = 0.5 * (low + high) - 0.5 * (high - low) * libm::cos(angle);
                (x, libm::log(maxima.quantile(level, Some(1.0 / x)).value))
            })
            .collect();
        CriticalValues { kind: Kind::Nodes(nodes) }
    }

    /// The value for these degrees of freedom.
    #[must_use]
    pub fn at(&self, df: f64) -> f64 {
        match &self.kind {
            Kind::Fixed(value) => *value,
            Kind::Pointwise(level) if df.is_infinite() => normal_quantile(0.5 + 0.5 * level),
            Kind::Pointwise(level) => t_quantile(0.5 + 0.5 * level, df),
            Kind::Nodes(nodes) => libm::exp(barycentric(nodes, 1.0 / df)),
        }
    }

    /// The one value, where there is one for all points.
    #[must_use]
    pub fn single(&self) -> Option<f64> {
        match &self.kind {
            Kind::Fixed(value) => Some(*value),
            _ => None,
        }
    }
}

/// Polynomial through Chebyshev points of the first kind.
fn barycentric(nodes: &[(f64, f64)], x: f64) -> f64 {
    let (mut top, mut bottom) = (0.0, 0.0);
    for (k, &(node, value)) in nodes.iter().enumerate() {
        if x == node {
            return value;
        }
        let angle = std::f64::consts::PI * (k as f64 + 0.5) / nodes.len() as f64;
        let sign = if k % 2 == 0 { 1.0 } else { -1.0 };
        let weight = sign * libm::sin(angle) / (x - node);
        top += weight * value;
        bottom += weight;
    }
    top / bottom
}

/// A run of time.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Run {
    /// Where it begins.
    pub start: f64,
    /// Where it ends.
    pub end: f64,
    /// It begins at the first point, so may have begun before.
    pub open_start: bool,
    /// It ends at the last point, so may go on.
    pub open_end: bool,
}

/// Maximal runs where `value` is above zero, over ascending `points`; ends are found on the
/// continuous function by bisection to 1e-10 of the whole length.
///
/// `at_points` holds the function at the points; `value` computes it anywhere between.
pub fn runs_above_zero(points: &[f64], at_points: &[f64], value: impl Fn(f64) -> f64) -> Vec<Run> {
    let mut runs = Vec::new();
    let mut begun: Option<(f64, bool)> = None;
    let Some((&first, &last)) = points.first().zip(points.last()) else {
        return runs;
    };
    let width = (last - first).abs().max(1e-300) * 1e-10;
    for k in 0..points.len() {
        let inside = at_points[k] > 0.0;
        let crossing = |k: usize| bisect(points[k - 1], points[k], at_points[k] > 0.0, width, &value);
        match (begun, inside) {
            (None, true) => begun = Some(if k == 0 { (points[0], true) } else { (crossing(k), false) }),
            (Some((start, open_start)), false) => {
                runs.push(Run { start, end: crossing(k), open_start, open_end: false });
                begun = None;
            }
            _ => {}
        }
    }
    if let Some((start, open_start)) = begun {
        runs.push(Run { start, end: last, open_start, open_end: true });
    }
    runs
}

fn bisect(mut low: f64, mut high: f64, rising: bool, width: f64, value: &impl Fn(f64) -> f64) -> f64 {
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if high - low < width || middle <= low || middle >= high {
            break;
        }
        if (value(middle) > 0.0) == rising {
            high = middle;
        } else {
            low = middle;
        }
    }
    0.5 * (low + high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn runs_end_on_the_continuous_curve() {
        let points: Vec<f64> = (0..=20).map(|k| f64::from(k) * 0.5).collect();
        let f = |t: f64| libm::sin(t);
        let values: Vec<f64> = points.iter().map(|&t| f(t)).collect();
        let runs = runs_above_zero(&points, &values, f);
        assert_eq!(runs.len(), 2);
        // sin is zero at 0, so the first run begins there.
        assert!(runs[0].start.abs() < 1e-8 && !runs[0].open_start);
        assert!((runs[0].end - std::f64::consts::PI).abs() < 1e-8);
        assert!((runs[1].end - 3.0 * std::f64::consts::PI).abs() < 1e-8 && !runs[1].open_end);
        let whole = runs_above_zero(&points, &[1.0; 21], |_| 1.0);
        assert!(whole[0].open_start && whole[0].open_end);
    }

    #[test]
    fn critical_values_between_nodes_are_those_computed() {
        // Ten equally correlated contrasts in eleven dimensions.
        let rows: Vec<f64> = (0..10)
            .flat_map(|j| (0..11).map(move |k| if k == j || k == 10 { std::f64::consts::FRAC_1_SQRT_2 } else { 0.0 }))
            .collect();
        let maxima = DirectionMaxima::new(&rows, 10, 11, 4096, 1);
        let values = CriticalValues::simultaneous(&maxima, 0.95, 1.0, 300.0);
        let narrow = CriticalValues::simultaneous(&maxima, 0.95, 8.0, 30.0);
        let wide = [1.0, 1.7, 4.4, 9.0, 33.0, 250.0].map(|df| (&values, df));
        for (values, df) in wide.into_iter().chain([(&narrow, 8.0), (&narrow, 13.0), (&narrow, 29.0)]) {
            let expected = maxima.quantile(0.95, Some(df)).value;
            assert!((values.at(df) / expected - 1.0).abs() < 1e-3, "{df}: {} {expected}", values.at(df));
        }
    }
}
