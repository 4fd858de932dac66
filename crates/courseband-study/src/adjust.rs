//! Adjustments: explanatory columns, and what is made of the first visit.

use crate::blocks::{Run, RunKind, block_runs};
use crate::findings::Note;
use crate::plan::{Plan, Start, Transform};
use crate::refusal::Refusal;
use crate::sentences;
use courseband_engine::{Data, Shared, SubjectRows};
use courseband_table::{CovariateValues, Observations};
use serde::Serialize;

/// Most categories of an explanatory column.
const MOST_LEVELS: usize = 20;

/// One column of the mean that all groups share.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Adjustment {
    /// Column of the table, or "value at the start".
    pub column: String,
    /// The category that this effect belongs to; `null` for a number.
    pub level: Option<String>,
    /// Where courses are stated: the mean, or the category that others are compared with.
    pub reference: String,
    /// What one unit more, or this category, adds to every course; on the modelled scale.
    pub estimate: Option<f64>,
    /// Its standard error.
    pub se: Option<f64>,
    /// Lower limit by itself, at the plan's level.
    pub lower: Option<f64>,
    /// Upper limit.
    pub upper: Option<f64>,
}

/// A column before its effect is known, with one value per row of the data.
struct Column {
    about: Adjustment,
    values: Vec<f64>,
}

/// Columns and notes.
#[derive(Debug, Default)]
pub(crate) struct Adjustments {
    pub(crate) columns: Vec<Adjustment>,
    /// One per run of penalised columns.
    pub(crate) runs: Vec<RunKind>,
    pub(crate) notes: Vec<Note>,
}

/// Rows as the plan's start wants them: which usable rows stay, their responses on the modelled scale,
/// and each subject's value at the start where it is used.
pub(crate) struct Started {
    pub(crate) kept: Vec<usize>,
    pub(crate) response: Vec<f64>,
    first: Vec<Option<f64>>,
    pub(crate) notes: Vec<Note>,
}

/// Applies the plan's start.
///
/// # Errors
/// A start that these data do not have.
pub(crate) fn started(observations: &Observations, plan: &Plan) -> Result<Started, Refusal> {
    let scale = |y: f64| if plan.response.transform == Transform::Log { libm::log(y) } else { y };
    let response: Vec<f64> = observations.response.iter().map(|&y| scale(y)).collect();
    let all = || (0..response.len()).collect();
    let first = first_values(observations, &response);
    if matches!(plan.response.start, Start::AsMeasured | Start::Common) {
        return Ok(Started { kept: all(), response, first, notes: Vec::new() });
    }
    let begin = observations.time.iter().copied().fold(f64::INFINITY, f64::min);
    let without = first.iter().filter(|value| value.is_none()).count();
    if without == first.len() || observations.time.iter().all(|&t| t <= begin) {
        return Err(Refusal::plan(format!(
            "response.start is \"{}\", but there are no values both at the first time ({begin}) and later. Use \"as-measured\".",
            plan.response.start.word()
        )));
    }
    let mut response = response;
    for (k, y) in response.iter_mut().enumerate() {
        let Some(start) = first[observations.subject[k] as usize] else { continue };
        match plan.response.start {
            Start::Change => *y -= start,
            Start::Percent if start > 0.0 => *y = 100.0 * (*y / start - 1.0),
            Start::Percent => return Err(not_positive(observations, k)),
            _ => {}
        }
    }
    let kept: Vec<usize> = (0..response.len())
        .filter(|&k| observations.time[k] > begin && first[observations.subject[k] as usize].is_some())
        .collect();
    let mut notes = vec![start_note(plan)];
    if without > 0 {
        let who = if without == 1 { &plan.words.subject } else { &plan.words.subjects };
        notes.push(format!("{without} {who} without a value at the first time take no part."));
    }
    let notes = notes.into_iter().map(|message| Note { about: "curves".into(), message }).collect();
    Ok(Started { kept, response, first, notes })
}

fn not_positive(observations: &Observations, k: usize) -> Refusal {
    let name = &observations.subjects[observations.subject[k] as usize].name;
    Refusal::table(format!(
        "response.start is \"percent\", but the first value of {name} is zero or negative (its row {}). Use \"change\" or \"covariate\".",
        observations.line[k]
    ))
}

fn start_note(plan: &Plan) -> String {
    match plan.response.start {
        Start::Covariate => "The value at the first time is an explanatory value, not part of the course.",
        Start::Change => {
            "Courses are changes from each one's value at the first time. Chance in that value is in every change; the start \
             as an explanatory value is usually more exact."
        }
        _ => {
            "Courses are percent changes from each one's value at the first time. Percentages of noisy starts are skewed; \
             the log scale with the start as an explanatory value is usually more exact."
        }
    }
    .into()
}

/// Mean of each subject's values at the table's first time.
fn first_values(observations: &Observations, response: &[f64]) -> Vec<Option<f64>> {
    let begin = observations.time.iter().copied().fold(f64::INFINITY, f64::min);
    let mut sums = vec![(0.0, 0.0); observations.subjects.len()];
    for (k, &subject) in observations.subject.iter().enumerate() {
        if observations.time[k] <= begin {
            let (sum, count) = &mut sums[subject as usize];
            (*sum, *count) = (*sum + response[k], *count + 1.0);
        }
    }
    sums.into_iter().map(|(sum, count)| (count > 0.0).then(|| sum / count)).collect()
}

/// Gives the data their shared columns.
///
/// # Errors
/// A column that cannot be adjusted for.
pub(crate) fn adjust(
    data: &mut Data,
    observations: &Observations,
    started: &Started,
    plan: &Plan,
) -> Result<Adjustments, Refusal> {
    let (mut columns, mut runs, mut notes) = (Vec::new(), Vec::new(), Vec::new());
    if plan.response.start == Start::Covariate {
        let value = |k: usize| started.first[observations.subject[k] as usize].unwrap_or(f64::NAN);
        let values = started.kept.iter().map(|&k| value(k)).collect();
        columns.push(numeric("value at the start".into(), values));
    }
    let block = plan.columns.block.as_deref();
    let total = plan.columns.total.as_deref();
    let explains = |name: &str| Some(name) != block && Some(name) != total;
    for covariate in observations.covariates.iter().filter(|c| explains(&c.name)) {
        let bends = plan.columns.bending.contains(&covariate.name);
        let changes = match &covariate.values {
            CovariateValues::Numeric(values) => {
                let own: Vec<f64> = started.kept.iter().map(|&k| values[k]).collect();
                runs.extend(bends.then(|| Run::bend(&covariate.name, &own)).flatten());
                columns.push(numeric(covariate.name.clone(), own));
                changes_within(observations, &started.kept, |k| values[k].to_bits())
            }
            CovariateValues::Categorical { .. } if bends => return Err(no_number(&covariate.name)),
            CovariateValues::Categorical { levels, index } => {
                let own: Vec<u32> = started.kept.iter().map(|&k| index[k]).collect();
                columns.extend(categories(&covariate.name, levels, &own)?);
                changes_within(observations, &started.kept, |k| u64::from(index[k]))
            }
        };
        if changes {
            notes.push(Note { about: "curves".into(), message: after_start_note(&covariate.name, plan) });
        }
    }
    if !columns.is_empty() {
        notes.push(Note { about: "curves".into(), message: stated_at(&columns) });
    }
    if let Some(covariate) = observations.covariates.iter().find(|c| Some(c.name.as_str()) == block) {
        runs.extend(block_runs(data, &covariate.name, &covariate.values, &started.kept)?);
    }
    let penalised: Vec<usize> = runs.iter().map(|run| run.columns.len()).collect();
    let all: Vec<&Vec<f64>> = columns.iter().map(|c| &c.values).chain(runs.iter().flat_map(|r| &r.columns)).collect();
    data.shared = Shared { free: columns.len(), penalised, reference: vec![0.0; all.len()] };
    let mut row = 0;
    for subject in &mut data.subjects {
        subject.shared = shared_rows(subject, &all, row);
        row += subject.times.len();
    }
    let runs = runs.into_iter().map(|run| run.kind).collect();
    Ok(Adjustments { columns: columns.into_iter().map(|c| c.about).collect(), runs, notes })
}

fn no_number(name: &str) -> Refusal {
    Refusal::plan(format!("columns.bending names \"{name}\", which holds words. Only the effect of a number can bend."))
}

/// What courses are courses of.
pub(crate) fn called(plan: &Plan, response: &str) -> String {
    match plan.response.start {
        Start::Change if plan.response.transform == Transform::Log => format!("ratio of {response} to its start"),
        Start::Change => format!("change in {response}"),
        Start::Percent => format!("percent change in {response}"),
        _ => response.into(),
    }
}

/// The effect of an explanatory column as a sentence.
pub(crate) fn in_words(adjustment: &Adjustment, plan: &Plan) -> Option<Note> {
    let (estimate, lower, upper) = (adjustment.estimate?, adjustment.lower?, adjustment.upper?);
    let log = plan.response.transform == Transform::Log;
    let back = |value: f64| if log { libm::exp(value) } else { value };
    let digits = sentences::decimals(back(upper) - back(lower));
    let say = |value: f64| sentences::number(back(value), digits);
    let what = match &adjustment.level {
        None => format!("One unit more of {}", adjustment.column),
        Some(level) => format!("{} {level} against {}", adjustment.column, adjustment.reference),
    };
    let value = say(estimate);
    let does =
        if log { format!("multiplies every course by {value}") } else { format!("adds {value} to every course") };
    let limits = format!("{} to {}", say(lower), say(upper));
    let level = sentences::percent(plan.comparisons.level);
    let message = format!("{what} {does} ({level} limits by itself {limits}).");
    Some(Note { about: "curves".into(), message })
}

fn shared_rows(subject: &SubjectRows, columns: &[&Vec<f64>], first: usize) -> Vec<f64> {
    let rows = first..first + subject.times.len();
    rows.flat_map(|row| columns.iter().map(move |column| column[row])).collect()
}

fn empty(column: String, level: Option<String>, reference: String) -> Adjustment {
    Adjustment { column, level, reference, estimate: None, se: None, lower: None, upper: None }
}

/// A number, around its mean over the rows.
fn numeric(column: String, mut values: Vec<f64>) -> Column {
    let mean = values.iter().sum::<f64>() / values.len().max(1) as f64;
    values.iter_mut().for_each(|value| *value -= mean);
    let digits = sentences::number(mean, sentences::decimals(mean.abs()));
    Column { about: empty(column, None, digits), values }
}

/// One column per category but the most frequent.
fn categories(name: &str, levels: &[String], index: &[u32]) -> Result<Vec<Column>, Refusal> {
    let mut counts = vec![0usize; levels.len()];
    index.iter().for_each(|&level| counts[level as usize] += 1);
    let used: Vec<usize> = (0..levels.len()).filter(|&level| counts[level] > 0).collect();
    if used.len() > MOST_LEVELS {
        return Err(Refusal::plan(format!(
            "Column \"{name}\" has {} categories; at most {MOST_LEVELS} can be adjusted for. \
             If subjects are grouped in them, use it as columns.cluster.",
            used.len()
        )));
    }
    let Some(&most) = used.iter().rev().max_by_key(|&&level| counts[level]) else {
        return Ok(Vec::new());
    };
    let column = |level: usize| Column {
        about: empty(name.into(), Some(levels[level].clone()), levels[most].clone()),
        values: index.iter().map(|&own| f64::from(u8::from(own as usize == level))).collect(),
    };
    Ok(used.into_iter().filter(|&level| level != most).map(column).collect())
}

fn changes_within(observations: &Observations, kept: &[usize], value: impl Fn(usize) -> u64) -> bool {
    kept.windows(2).any(|w| observations.subject[w[0]] == observations.subject[w[1]] && value(w[0]) != value(w[1]))
}

fn after_start_note(name: &str, plan: &Plan) -> String {
    format!(
        "\"{name}\" changes while the {} are followed. Adjusting for what comes after the start can take away part of the \
         groups' difference.",
        plan.words.subjects
    )
}

fn stated_at(columns: &[Column]) -> String {
    let mut parts: Vec<String> = Vec::new();
    for column in columns {
        let about = &column.about;
        let part = match about.level {
            None => format!("{} {} (the mean)", about.column, about.reference),
            Some(_) => format!("{} {}", about.column, about.reference),
        };
        if !parts.contains(&part) {
            parts.push(part);
        }
    }
    format!("Courses are stated at {}; gaps are the same at every value.", parts.join(", "))
}
