//! One number per subject, compared by group: area or mean level, and slope.

use super::beside::{compare_tests, nothing};
use super::context::{Context, Gap};
use super::findings::*;
use super::lines::Bend;
use super::print::*;
use courseband_engine::usual::{
    MeanComparison, OneWay, SummaryMeasure, Undefined, Variances, compare_means, holm, one_way_welch, summarise,
};

const KIND: UsualKind = UsualKind::OnePerSubject;
const NAME: &str = "One number per subject";

/// One measure, compared.
struct Measured {
    measure: SummaryMeasure,
    /// By group.
    values: Vec<Vec<f64>>,
    overall: Result<OneWay, Undefined>,
    /// By pair, with the p-value adjusted over the pairs.
    pairs: Vec<Result<(MeanComparison, f64), Undefined>>,
}

pub(super) fn analyse(context: &Context, bend: Option<&Bend>) -> UsualAnalysis {
    let assumption = format!(
        "One number says what matters of a course, and is as sure for every {}; numbers about normal in each group{}.",
        context.plan.words.subject,
        if context.is_log() { " (courses on the log scale)" } else { "" }
    );
    let courses: Vec<Vec<(f64, f64)>> = context.cohort.data.subjects.iter().map(course).collect();
    let usable = |points: &&Vec<(f64, f64)>| points.len() > 1;
    let subjects = courses.iter().filter(usable).count();
    if context.pairs.is_empty() || subjects == 0 {
        let why = if subjects == 0 {
            format!("No {} has two values at different times.", context.plan.words.subject)
        } else {
            "There is one group, so nothing is compared.".into()
        };
        return context.refused(KIND, NAME, assumption, why);
    }
    let spans = Spans::of(context, &courses);
    // Areas over different spans cannot be compared, and an area of logarithms has no meaning of its own.
    let level =
        if spans.full == spans.all && !context.is_log() { SummaryMeasure::Area } else { SummaryMeasure::MeanLevel };
    let measured: Vec<Measured> =
        [level, SummaryMeasure::Slope].into_iter().map(|measure| compare(context, &courses, measure)).collect();
    let rows = (courses.iter().zip(&context.cohort.data.subjects))
        .filter(|(c, _)| usable(c))
        .map(|(_, s)| s.times.len())
        .sum();
    let done = measured.iter().any(|m| m.pairs.iter().any(Result::is_ok));
    UsualAnalysis {
        kind: KIND,
        name: NAME.into(),
        done,
        result: measured.iter().map(|m| result(context, m)).collect::<Vec<String>>().join(" "),
        tables: measured.iter().map(|m| table(context, m)).collect(),
        assumption,
        bearing: bearing(context, &spans, bend),
        beside: beside(context, &measured, &spans),
        used: context.used(subjects, rows),
        lines: Vec::new(),
    }
}

/// Times and values of a subject, those at one time averaged.
fn course(subject: &courseband_engine::SubjectRows) -> Vec<(f64, f64)> {
    let mut points: Vec<(f64, f64)> = Vec::new();
    let mut count = 0.0;
    for (&t, &y) in subject.times.iter().zip(&subject.responses) {
        match points.last_mut() {
            Some((last, mean)) if *last == t => {
                count += 1.0;
                *mean += (y - *mean) / count;
            }
            _ => {
                points.push((t, y));
                count = 1.0;
            }
        }
    }
    points
}

/// How many subjects were seen from the first to the last time.
struct Spans {
    all: usize,
    /// At the very first and last time.
    full: usize,
    /// Within a twentieth of the follow-up of both.
    near: usize,
}

impl Spans {
    fn of(context: &Context, courses: &[Vec<(f64, f64)>]) -> Spans {
        let visits = &context.cohort.visits;
        let (first, last) = (visits[0], visits[visits.len() - 1]);
        let within = |room: f64| {
            let spans = |points: &&Vec<(f64, f64)>| {
                points.first().is_some_and(|p| p.0 <= first + room) && points.last().is_some_and(|p| p.0 >= last - room)
            };
            courses.iter().filter(spans).count()
        };
        Spans { all: courses.len(), full: within(0.0), near: within(0.05 * (last - first)) }
    }
}

fn compare(context: &Context, courses: &[Vec<(f64, f64)>], measure: SummaryMeasure) -> Measured {
    let mut values = vec![Vec::new(); context.cohort.groups.len()];
    for (points, subject) in courses.iter().zip(&context.cohort.data.subjects) {
        values[subject.group].extend(summarise(points, measure));
    }
    let in_groups = |reason: Undefined, from: usize, to: usize| match reason {
        Undefined::TooFewValues { group, have, need } => {
            Undefined::TooFewValues { group: if group == 0 { from } else { to }, have, need }
        }
        other => other,
    };
    let compared: Vec<Result<MeanComparison, Undefined>> = (context.pairs.iter())
        .map(|&(from, to)| {
            compare_means(&values[from], &values[to], Variances::Unequal, context.level())
                .map_err(|reason| in_groups(reason, from, to))
        })
        .collect();
    let family: Vec<f64> = compared.iter().filter_map(|c| c.ok().map(|c| c.p)).collect();
    let mut adjusted = holm(&family).into_iter();
    let pairs = compared.into_iter().map(|c| c.map(|c| (c, adjusted.next().unwrap_or(1.0)))).collect();
    Measured { measure, overall: one_way_welch(&values), values, pairs }
}

fn called(context: &Context, measure: SummaryMeasure) -> String {
    match measure {
        SummaryMeasure::Area => "Area under the course".into(),
        SummaryMeasure::MeanLevel => "Mean level".into(),
        SummaryMeasure::Slope if context.is_log() => format!("Factor per {}", unit(context.time_word())),
        SummaryMeasure::Slope => format!("Slope per {}", unit(context.time_word())),
    }
}

fn result(context: &Context, m: &Measured) -> String {
    let name = called(context, m.measure);
    let mut said = Vec::new();
    for (&(from, to), compared) in context.pairs.iter().zip(&m.pairs).take(3) {
        let (from, to) = (context.group(from), context.group(to));
        said.push(match compared {
            Ok((c, p_holm)) => {
                let gap = Gap { estimate: c.difference, lower: c.interval.0, upper: c.interval.1 };
                let shown = if *p_holm < context.alpha() { "" } else { ", not shown to differ" };
                let adjusted =
                    if m.pairs.len() > 1 { format!(", adjusted {}", p_said(*p_holm)) } else { String::new() };
                format!("{to} {}, {}{adjusted}{shown}", context.gap_said(gap, from), t_said(c.t, c.df, c.p))
            }
            Err(reason) => format!("{to} and {from} are not compared: {}", super::anova::why(context, *reason)),
        });
    }
    let more = m.pairs.len().saturating_sub(3);
    if more > 0 {
        said.push(format!("{} in the table", counted(more, "more pair", "more pairs")));
    }
    format!("{name}: {}.", said.join("; "))
}

fn table(context: &Context, m: &Measured) -> UsualTable {
    let rows = context.pairs.iter().zip(&m.pairs).map(|(&(from, to), compared)| {
        let size = |g: usize| cell(m.values[g].len() as f64, m.values[g].len().to_string());
        let mut cells = vec![size(from), size(to)];
        match compared {
            Ok((c, p_holm)) => {
                let width = c.interval.1 - c.interval.0;
                let mean = |x: f64| {
                    let x = context.back(x);
                    by_width(x, if context.is_log() { x * width.min(1.0) } else { width })
                };
                cells.extend([mean(c.first.mean), mean(c.second.mean)]);
                let gap = Gap { estimate: c.difference, lower: c.interval.0, upper: c.interval.1 };
                cells.extend(context.gap_cells(gap, c.se));
                cells.extend([df_cell(c.df), fixed(c.t, 2), p_cell(c.p), p_cell(*p_holm)]);
            }
            Err(_) => cells.extend((0..10).map(|_| no_cell())),
        }
        row(&[context.group(from), context.group(to)], cells)
    });
    let overall = match m.overall {
        Ok(o) if context.cohort.groups.len() > 2 => {
            format!("All groups together, Welch's F: {}.", f_said(o.f, o.df, o.df_error, o.p))
        }
        Err(reason) if context.cohort.groups.len() > 2 => {
            format!("All groups together cannot be tested: {}.", super::anova::why(context, reason))
        }
        _ => String::new(),
    };
    UsualTable {
        title: called(context, m.measure),
        label_heads: heads(&["From", "To"]),
        heads: heads(&[
            "n, from",
            "n, to",
            "Mean, from",
            "Mean, to",
            context.gap_head(),
            "Lower",
            "Upper",
            context.se_head(),
            "df",
            "t",
            "p",
            "p, Holm",
        ]),
        rows: rows.collect(),
        note: overall,
    }
}

fn bearing(context: &Context, spans: &Spans, bend: Option<&Bend>) -> Bearing {
    let words = &context.plan.words;
    let mut numbers = vec![named(
        "Share seen from first to last time",
        cell(spans.near as f64 / spans.all as f64, share(spans.near, spans.all)),
    )];
    let mut doubtful = 20 * (spans.all - spans.near) > spans.all;
    let mut sentence = if spans.near == spans.all {
        format!("All {} {} were seen from the first time to the last.", spans.all, words.subjects)
    } else {
        format!(
            "{} of {} {} were seen from the first time to the last; the numbers of the others speak of less, and are less sure.",
            spans.near, spans.all, words.subjects
        )
    };
    let mut bent = false;
    if let Some(bend) = bend {
        numbers.push(named("p of a bend", p_cell(bend.p)));
        bent = bend.p < 0.05;
        doubtful |= bend.p < 0.2;
        if bent {
            sentence.push_str(&format!(
                " The courses bend ({}), so one slope does not say what matters of them.",
                p_said(bend.p)
            ));
        }
    }
    let verdict = match (bent, doubtful) {
        (true, _) => Borne::No,
        (false, true) => Borne::Doubtful,
        (false, false) => Borne::Yes,
    };
    Bearing { verdict, sentence, numbers }
}

fn beside(context: &Context, measured: &[Measured], spans: &Spans) -> Beside {
    let mut differ = Vec::new();
    let mut compared = 0;
    for m in measured {
        let slope = m.measure == SummaryMeasure::Slope;
        for (k, result) in m.pairs.iter().enumerate() {
            let (Ok((c, _)), Some(effects)) = (result, context.effects(k)) else {
                continue;
            };
            let Some(curves) = (if slope { effects.shape_p } else { effects.level_p }) else {
                continue;
            };
            compared += 1;
            let (from, to) = context.pairs[k];
            let names = format!("{} and {}", context.group(to), context.group(from));
            let question = if slope {
                format!("A gap of {names} that changes over time")
            } else {
                format!("A gap of {names} on average")
            };
            let (agree, said) = compare_tests(context.alpha(), &question, c.p, curves);
            if !agree {
                let why = if slope {
                    "a slope sees only steady change, the curves also what comes and goes".to_string()
                } else if spans.near < spans.all {
                    "each counts alike here however long it was seen".to_string()
                } else {
                    format!(
                        "Welch's test gives each group a spread of its own, with {} degrees of freedom",
                        degrees(c.df)
                    )
                };
                differ.push(format!("{said}: {why}."));
            }
        }
    }
    if compared == 0 {
        return nothing("There is nothing on the curves to compare it with.");
    }
    let more = differ.len().saturating_sub(3);
    let agrees = differ.is_empty();
    differ.truncate(3);
    let sentence = match (agrees, more) {
        (true, _) => format!(
            "Level and change of the gaps agree with the curves (each pair by itself). It names no {}.",
            context.time_word()
        ),
        (false, 0) => differ.join(" "),
        (false, n) => format!("{} {}.", differ.join(" "), counted(n, "more differs", "more differ")),
    };
    Beside { agrees: Some(agrees), sentence, pairs: Vec::new() }
}
