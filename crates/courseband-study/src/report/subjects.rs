//! Each subject's course in a few numbers: for the author's own use, and for journals that ask for individual data.

use super::ReportTable;
use crate::cohort::Cohort;
use crate::findings::Findings;
use crate::plan::Transform;
use crate::sentences::plain;
use courseband_engine::usual::{SummaryMeasure, summarise};

/// One row per subject that was fitted: area and mean level by trapezoids from its first to its last value, slope of
/// its least-squares line (of logarithms where the course is modelled on the log scale), first and last value.
pub(super) fn table(cohort: &Cohort, findings: &Findings, log: bool) -> ReportTable {
    let word = &findings.scale.time_word;
    let slope = if log { format!("Slope of the log, per {word}") } else { format!("Slope, per {word}") };
    let heads = [
        "Subject".to_string(),
        "Group".into(),
        "Values".into(),
        format!("First {word}"),
        format!("Last {word}"),
        "First value".into(),
        "Last value".into(),
        "Area".into(),
        "Mean level".into(),
        slope,
    ];
    let rows = cohort.subject_names.iter().zip(&cohort.data.subjects).map(|(name, subject)| {
        let back = |y: f64| if log { libm::exp(y) } else { y };
        let shown: Vec<(f64, f64)> =
            subject.times.iter().copied().zip(subject.responses.iter().map(|&y| back(y))).collect();
        let modelled: Vec<(f64, f64)> = subject.times.iter().copied().zip(subject.responses.iter().copied()).collect();
        let (first, last) = (shown.first(), shown.last());
        let group = cohort.groups.get(subject.group).map_or_else(String::new, |group| group.name.clone());
        let numbers = [
            first.map(|p| p.0),
            last.map(|p| p.0),
            first.map(|p| p.1),
            last.map(|p| p.1),
            summarise(&shown, SummaryMeasure::Area),
            summarise(&shown, SummaryMeasure::MeanLevel),
            summarise(&modelled, SummaryMeasure::Slope),
        ];
        let cells = numbers.map(|value| value.map_or_else(|| "\u{2013}".into(), six_digits));
        [name.clone(), group, shown.len().to_string()].into_iter().chain(cells).collect()
    });
    ReportTable {
        key: "subjects".into(),
        title: format!("{} by {}", super::response(findings), findings.plan.words.subject),
        heads: heads.to_vec(),
        rows: rows.collect(),
    }
}

pub(super) fn is_log(findings: &Findings) -> bool {
    findings.plan.response.transform == Transform::Log
}

/// Six significant digits, as short as they are.
fn six_digits(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return plain(value);
    }
    let digits = (5.0 - libm::floor(libm::log10(value.abs()))).clamp(0.0, 12.0) as usize;
    let text = format!("{value:.digits$}");
    let short = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    short.strip_prefix('-').map_or_else(|| short.to_string(), |rest| format!("\u{2212}{rest}"))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Plan, ReportContext, Study};

    #[test]
    fn six_digits_are_kept() {
        assert_eq!(six_digits(-1234567.0), "\u{2212}1234567");
        assert_eq!(six_digits(0.001234567), "0.00123457");
        assert_eq!(six_digits(2.5), "2.5");
    }

    /// By hand: values 2, 4, 3 on days 0, 2, 3 have trapezoids 6 and 3.5, so area 9.5 and mean level 9.5 / 3; the
    /// least-squares slope about the centre 5/3 is (5/3·1 + 1/3·1 + 4/3·0) / (25/9 + 1/9 + 16/9) = 2 / (42/9) = 3/7.
    #[test]
    fn area_level_and_slope_are_those_of_the_subject() {
        let mut text = String::from("mouse,arm,day,size\nm0,a,0,2\nm0,a,2,4\nm0,a,3,3\n");
        for s in 1..8 {
            for day in 0..4 {
                let wave = (s * 5 + day * 3) % 7;
                text += &format!("m{s},{},{day},{}\n", ["a", "b"][s % 2], 3.0 + 0.2 * wave as f64);
            }
        }
        let mut study = Study::open(text.as_bytes()).unwrap();
        let report = study.report(&Plan::default(), None, &ReportContext::default()).unwrap();
        let table = report.tables.iter().find(|table| table.key == "subjects").unwrap();
        assert_eq!(table.rows[0], ["m0", "a", "3", "0", "3", "2", "3", "9.5", "3.16667", "0.428571"]);
        assert_eq!(table.rows.len(), 8);
    }
}
