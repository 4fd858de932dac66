//! Hand-made findings for tests: invented numbers on ten visits.

use crate::source::{
    Comparisons, Course, CoursePoints, Direction, Gap, GapPoints, Group, Names, Nouns, Run, Series, Source, Traces,
};

const VISITS: [f64; 10] = [0.0, 2.0, 4.0, 7.0, 9.0, 11.0, 14.0, 16.0, 18.0, 21.0];
const NAMES: [&str; 6] =
    ["Saline", "Silver-coated foam dressing", "Hydrogel", "Honey gauze", "Collagen with zinc", "Sham"];

/// Groups on a ratio scale, all pairs compared, eight subjects each, all followed to the end.
pub(crate) fn source(groups: usize) -> Source {
    let pairs = (0..groups).flat_map(|a| (a + 1..groups).map(move |b| (a, b)));
    Source {
        groups: NAMES[..groups]
            .iter()
            .map(|name| Group { name: (*name).into(), subjects: 8, last_times: vec![21.0; 8] })
            .collect(),
        curves: (0..groups).map(course).collect(),
        rates: Vec::new(),
        differences: pairs.map(|(a, b)| gap(a, b)).collect(),
        visits: VISITS.to_vec(),
        scale: Names { time_word: "day".into(), response: "wound area (mm²)".into(), ratio: true, link: "log".into() },
        plan: crate::source::Choices {
            words: Nouns { subject: "mouse".into(), subjects: "mice".into() },
            comparisons: Comparisons { margin: 10.0, margin_unit: "percent".into(), ..Comparisons::default() },
            ..Default::default()
        },
    }
}

fn mean(group: usize, t: f64) -> f64 {
    60.0 * libm::exp(-(0.06 + 0.02 * group as f64) * t)
}

fn series(times: &[f64], f: impl Fn(f64) -> f64) -> Series {
    times.iter().map(|&t| Some(f(t))).collect()
}

fn grid() -> Vec<f64> {
    (0..=20).map(|k| 1.05 * f64::from(k)).collect()
}

fn course(group: usize) -> Course {
    let values = |times: &[f64], factor: f64| series(times, |t| factor * mean(group, t));
    Course {
        time: grid(),
        response_mean: values(&grid(), 1.0),
        response_lower: values(&grid(), 0.85),
        response_upper: values(&grid(), 1.18),
        support: [0.0, 21.0],
        at_visits: CoursePoints {
            time: VISITS.to_vec(),
            response_mean: values(&VISITS, 1.0),
            response_lower: values(&VISITS, 0.85),
            response_upper: values(&VISITS, 1.18),
        },
    }
}

fn gap(from: usize, to: usize) -> Gap {
    let run = |start: f64| Run { start, end: 21.0, direction: Some(Direction::Below) };
    let mut gap = Gap {
        from: NAMES[from].into(),
        to: NAMES[to].into(),
        support: Some([0.0, 21.0]),
        margin: [libm::log(0.9), -libm::log(0.9)],
        stretches: vec![run(9.5 / (to - from) as f64)],
        beyond: vec![run(14.8 / (to - from) as f64)],
        ..Gap::default()
    };
    gap_rows(&mut gap, 0.02 * (to - from) as f64);
    gap
}

/// Fills a gap whose logarithm falls by `rate` in a day.
pub(crate) fn gap_rows(gap: &mut Gap, rate: f64) {
    let values = |times: &[f64], factor: f64| series(times, |t| factor * libm::exp(-rate * t));
    gap.time = grid();
    gap.response_estimate = values(&grid(), 1.0);
    gap.response_lower = values(&grid(), 0.82);
    gap.response_upper = values(&grid(), 1.21);
    gap.at_visits = GapPoints {
        time: VISITS.to_vec(),
        response_estimate: values(&VISITS, 1.0),
        response_lower: values(&VISITS, 0.82),
        response_upper: values(&VISITS, 1.21),
    };
}

/// So many subjects per group, each a constant factor beside its group.
pub(crate) fn traces(source: &Source, subjects: usize) -> Traces {
    let mut traces = Traces { offsets: vec![0], ..Traces::default() };
    for group in 0..source.groups.len() {
        for k in 0..subjects {
            let factor = 0.8 + 0.4 * k as f64 / subjects as f64;
            traces.group.push(group as u32);
            traces.time.extend(VISITS);
            traces.response.extend(VISITS.map(|t| factor * mean(group, t)));
            traces.offsets.push(traces.time.len() as u32);
        }
    }
    traces
}
