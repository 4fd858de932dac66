//! Where an axis is marked.

use crate::numbers::{decimals_of, fixed, plain};
use crate::scale::{Kind, Scale};

/// A mark on an axis, with what is written beside it.
#[derive(Debug, Clone, PartialEq)]
pub struct Tick {
    /// Where.
    pub value: f64,
    /// What is written.
    pub label: String,
}

impl Tick {
    fn plain(value: f64) -> Self {
        Tick { value, label: plain(value) }
    }
}

/// Marks of a value axis: round numbers, about `about` of them.
pub(crate) fn value_ticks(scale: Scale, about: usize) -> Vec<Tick> {
    match scale.kind() {
        Kind::Linear => even(scale.low(), scale.high(), about),
        Kind::Log => logarithmic(scale, about),
    }
}

/// Marks of a ratio axis: 1 and its doublings or tens, written as percent or as multiples.
pub(crate) fn ratio_ticks(scale: Scale, about: usize, as_percent: bool) -> Vec<Tick> {
    let write = |value: f64| Tick {
        value,
        label: if as_percent { plain(100.0 * value) } else { format!("{}×", plain(value)) },
    };
    let within = |values: &[f64]| values.iter().copied().filter(|&v| scale.holds(v)).collect::<Vec<f64>>();
    let steps: [&[f64]; 5] = [
        &[0.8, 0.9, 1.0, 1.1, 1.2],
        &[0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4, 1.5],
        &[0.25, 0.5, 0.75, 1.0, 1.5, 2.0],
        &[0.0625, 0.125, 0.25, 0.5, 1.0, 2.0, 4.0, 8.0, 16.0],
        &[0.001, 0.01, 0.1, 1.0, 10.0, 100.0, 1000.0],
    ];
    let chosen = steps.iter().map(|step| within(step)).find(|v| v.len() <= about.max(2) && fits(v, scale, about));
    match chosen.filter(|v| v.len() >= 2) {
        Some(values) => values.into_iter().map(write).collect(),
        None => logarithmic(scale, about).into_iter().map(|tick| write(tick.value)).collect(),
    }
}

/// No two marks nearer than the axis has room for.
fn fits(values: &[f64], scale: Scale, about: usize) -> bool {
    let least = 0.62 / about.max(1) as f64;
    values.windows(2).all(|w| scale.fraction(w[1]) - scale.fraction(w[0]) >= least)
}

/// Marks of the time axis where there are too many visits to mark each.
pub(crate) fn time_ticks(start: f64, end: f64, about: usize) -> Vec<Tick> {
    even(start, end, about)
}

/// A mark per visit.
pub(crate) fn visit_ticks(visits: &[f64]) -> Vec<Tick> {
    visits.iter().map(|&t| Tick::plain(t)).collect()
}

/// Multiples of 1, 2, 2.5 or 5 times a power of ten.
fn even(low: f64, high: f64, about: usize) -> Vec<Tick> {
    let rough = (high - low) / about.max(1) as f64;
    let power = libm::pow(10.0, libm::floor(libm::log10(rough)));
    let step = [1.0, 2.0, 2.5, 5.0, 10.0].map(|m| m * power).into_iter().find(|s| *s >= rough * 0.999).unwrap_or(rough);
    let first = libm::ceil(low / step - 1e-9);
    let count = (libm::floor(high / step + 1e-9) - first).max(0.0) as usize;
    let decimals = decimals_of(step);
    let large = low.abs().max(high.abs()) >= 1e7 || step < 1e-4;
    (0..=count.min(200))
        .map(|k| {
            let value = (first + k as f64) * step;
            if large { Tick::plain(value) } else { Tick { value, label: fixed(value, decimals) } }
        })
        .collect()
}

fn logarithmic(scale: Scale, about: usize) -> Vec<Tick> {
    let (low, high) = (scale.low(), scale.high());
    let first = libm::floor(libm::log10(low)) as i32;
    let last = libm::ceil(libm::log10(high)) as i32;
    let with = |factors: &[f64], every: i32| -> Vec<f64> {
        (first..=last)
            .filter(|e| e.rem_euclid(every) == 0)
            .flat_map(|e| factors.iter().map(move |f| f * libm::pow(10.0, f64::from(e))).collect::<Vec<f64>>())
            .filter(|&v| scale.holds(v))
            .collect()
    };
    let mut choices = vec![with(&[1.0, 2.0, 5.0], 1), with(&[1.0, 3.0], 1)];
    choices.extend([1, 2, 3, 5, 10, 20, 50].map(|every| with(&[1.0], every)));
    let chosen = choices.iter().find(|v| v.len() <= about + 1 && fits(v, scale, about)).cloned().unwrap_or_default();
    if chosen.len() >= 3 {
        return chosen.into_iter().map(Tick::plain).collect();
    }
    let mut spread = even(low, high, about);
    spread.retain(|t| t.value > 0.0);
    let mut kept: Vec<Tick> = Vec::new();
    for tick in spread.into_iter().rev() {
        let far = |other: &Tick| scale.fraction(other.value) - scale.fraction(tick.value) >= 0.62 / about.max(1) as f64;
        if kept.last().is_none_or(far) {
            kept.push(tick);
        }
    }
    kept.reverse();
    if kept.len() > chosen.len() { kept } else { chosen.into_iter().map(Tick::plain).collect() }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(ticks: Vec<Tick>) -> String {
        ticks.into_iter().map(|t| t.label).collect::<Vec<_>>().join(" ")
    }

    #[test]
    fn marks_are_round_numbers_within_the_axis() {
        let linear = |low, high| labels(value_ticks(Scale::new(Kind::Linear, low, high), 5));
        assert_eq!(linear(0.0, 100.0), "0 20 40 60 80 100");
        assert_eq!(linear(-0.3, 0.9), "\u{2212}0.25 0.00 0.25 0.50 0.75");
        let log = |low, high| labels(value_ticks(Scale::new(Kind::Log, low, high), 5));
        assert_eq!(log(7.0, 85.0), "10 20 50");
        assert_eq!(log(0.5, 4.0e5), "1 10 100 1000 10\u{2009}000 100\u{2009}000");
        assert_eq!(log(20.0, 29.0), "20 22 24 26 28");
    }

    #[test]
    fn ratios_are_marked_around_one() {
        let percent = |low, high| labels(ratio_ticks(Scale::new(Kind::Log, low, high), 4, true));
        assert_eq!(percent(0.23, 1.2), "25 50 75 100");
        assert_eq!(percent(0.93, 1.25), "100 110 120");
        let times = labels(ratio_ticks(Scale::new(Kind::Log, 0.5, 200.0), 4, false));
        assert_eq!(times, "1× 10× 100×");
    }

    #[test]
    fn no_marks_crowd() {
        for (low, high) in [(0.9, 1.1), (0.01, 30.0), (1e-5, 1e5), (0.97, 1.03), (0.4, 11.0)] {
            let scale = Scale::new(Kind::Log, low, high);
            for ticks in [value_ticks(scale, 4), ratio_ticks(scale, 4, true)] {
                assert!(!ticks.is_empty(), "{low} to {high}");
                assert!(ticks.len() <= 9, "{low} to {high}: {ticks:?}");
                let mut parts = ticks.windows(2).map(|w| scale.fraction(w[1].value) - scale.fraction(w[0].value));
                assert!(parts.all(|gap| gap > 0.1), "{low} to {high}: {ticks:?}");
            }
        }
    }
}
