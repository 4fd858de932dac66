//! The rows that are fitted: on the modelled scale, subject by subject.

use crate::adjust::{Adjustment, Started, adjust, started};
use crate::blocks::RunKind;
use crate::findings::{ColumnsUsed, GroupInfo, Note, Problem, Reason};
use crate::housing::Housing;
use crate::plan::{Basis, Distribution, Pairs, Plan, Serial, Shape, Transform};
use crate::refusal::Refusal;
use crate::sentences;
use courseband_engine::{Data, SubjectRows};
use courseband_table::{Observations, Reading};

/// Most distinct times of one group under `by-time`.
const MOST_MEANS: usize = 300;

/// What is fitted, with what is known about it.
#[derive(Debug)]
pub(crate) struct Cohort {
    pub(crate) data: Data,
    /// In the order of the data.
    pub(crate) subject_names: Vec<String>,
    /// For every subject, its rows as indices into the observations.
    pub(crate) places: Vec<Vec<usize>>,
    pub(crate) groups: Vec<GroupInfo>,
    /// In a crossed design the two labels of every group.
    pub(crate) cells: Vec<[String; 2]>,
    /// First and last time of each group.
    pub(crate) supports: Vec<[f64; 2]>,
    /// Distinct times, ascending.
    pub(crate) visits: Vec<f64>,
    /// Index of the control group, where the plan names one.
    pub(crate) control: Option<usize>,
    pub(crate) housing: Housing,
    /// One per shared column, without its effect.
    pub(crate) adjustments: Vec<Adjustment>,
    /// One per run of penalised shared columns.
    pub(crate) runs: Vec<RunKind>,
    /// Of a Gaussian process, where it was estimated.
    range: Option<f64>,
    /// Of a Tweedie distribution.
    power: Option<f64>,
    pub(crate) notes: Vec<Note>,
}

impl Cohort {
    pub(crate) fn new(reading: &Reading, plan: &Plan) -> Result<Cohort, Refusal> {
        let (observations, cluster) = (&reading.observations, reading.columns.cluster.as_deref());
        refuse_extremes(observations)?;
        refuse_non_positive(observations, plan)?;
        crate::families::refuse_values(observations, plan)?;
        let started = started(observations, plan)?;
        refuse_ties(observations, plan)?;
        let Filed { mut subjects, names: subject_names, places } = rows_by_subject(observations, &started);
        crate::families::give_details(&mut subjects, &places, observations, plan)?;
        let (names, kept) = keep_filled_groups(observations, &mut subjects);
        let cell =
            |name: &String| observations.groups.iter().position(|g| g == name).and_then(|g| observations.cells.get(g));
        let cells = names.iter().filter_map(cell).cloned().collect();
        let mut data = Data { groups: names.len(), subjects, ..Data::default() };
        let adjustments = adjust(&mut data, observations, &started, plan)?;
        let housing = Housing::new(&data, observations, cluster.unwrap_or("cluster"), plan);
        let visits = distinct(data.subjects.iter().flat_map(|s| s.times.iter().copied()));
        let groups = describe_groups(&data, names, &visits);
        let supports = supports(&data);
        let control = if observations.cells.is_empty() { find_control(plan, &groups)? } else { None };
        refuse_unknown_control(plan, observations)?;
        let mut notes = Vec::new();
        if kept < observations.groups.len() {
            let note = "A group without a single usable row is left out.";
            notes.push(Note { about: "table".into(), message: note.into() });
        }
        notes.extend(started.notes);
        notes.extend(adjustments.notes);
        notes.extend(housing.notes.iter().cloned());
        refuse_many_means(plan, &data, &groups)?;
        refuse_many_pairs(plan, groups.len())?;
        let (adjustments, runs) = (adjustments.columns, adjustments.runs);
        let mut cohort = Cohort {
            data,
            subject_names,
            places,
            groups,
            cells,
            supports,
            visits,
            control,
            housing,
            adjustments,
            runs,
            range: None,
            power: None,
            notes,
        };
        if cohort.has_limits() {
            plan.refuse_beside("a value beyond a limit (response.detection \"limits\")")?;
        }
        cohort.estimate_power(plan);
        cohort.estimate_range(plan);
        Ok(cohort)
    }

    /// The model to fit: the plan's, with the clusters that the table has.
    pub(crate) fn model(&self, plan: &Plan) -> courseband_engine::Model {
        let normal = plan.response.distribution == Distribution::Normal;
        let limits = normal && self.has_limits();
        let plain = normal && !limits;
        let clusters = if plain { self.housing.effects } else { courseband_engine::ClusterEffects::None };
        let model = courseband_engine::Model { clusters, ..plan.model(self.range) };
        match (limits, plan.response.distribution) {
            (true, _) => courseband_engine::Model { family: courseband_engine::Family::Censored, ..model },
            (_, Distribution::Tweedie) => {
                let power = libm::round(1000.0 * self.power.unwrap_or(1.5)) as u16;
                courseband_engine::Model { family: courseband_engine::Family::Tweedie(power), ..model }
            }
            _ => model,
        }
    }

    /// True where some response is a limit beyond which the value lies.
    pub(crate) fn has_limits(&self) -> bool {
        self.data.subjects.iter().any(|s| s.detail.iter().any(|d| d.abs() == 1.0))
    }

    /// The power of a Tweedie distribution with the largest restricted likelihood, by fits over a grid.
    fn estimate_power(&mut self, plan: &Plan) {
        if plan.response.distribution != Distribution::Tweedie {
            return;
        }
        self.power = plan.response.power;
        if self.power.is_some() {
            return;
        }
        let mut best = (f64::NEG_INFINITY, 1.5);
        let mut try_all = |powers: &[f64]| {
            for &power in powers {
                self.power = Some(power);
                let value = courseband_engine::fit(&self.data, &self.model(plan))
                    .map_or(f64::NEG_INFINITY, |fit| fit.log_reml());
                best = if value > best.0 { (value, power) } else { best };
            }
            best.1
        };
        let rough = try_all(&[1.1, 1.25, 1.4, 1.55, 1.7, 1.85]);
        let near = try_all(&[rough - 0.07, rough + 0.07]);
        self.power = Some(near);
        let message =
            format!("The variance grows with the mean to the power {near:.2}: that is estimated, and taken as known.");
        self.notes.push(Note { about: "fit".into(), message });
    }

    /// The range of a Gaussian process with the largest restricted likelihood, by fits over a grid of shares of the
    /// follow-up and between the best and its neighbours.
    fn estimate_range(&mut self, plan: &Plan) {
        let wanted = plan.curves.basis == Basis::GaussianProcess && plan.curves.shape == Shape::Smooth;
        let (Some(first), Some(last)) = (self.visits.first(), self.visits.last()) else { return };
        if !wanted || plan.curves.range.is_some() {
            return;
        }
        let span = last - first;
        let mut at = |range: f64| {
            self.range = Some(range);
            courseband_engine::fit(&self.data, &self.model(plan)).map_or(f64::NEG_INFINITY, |fit| fit.log_reml())
        };
        let mut best = (f64::NEG_INFINITY, span / 3.0);
        for share in [0.06, 0.1, 0.18, 0.32, 0.56, 1.0, 1.8] {
            let value = at(share * span);
            best = if value > best.0 { (value, share * span) } else { best };
        }
        for step in [1.33, 1.15, 1.07] {
            for range in [best.1 / step, best.1 * step] {
                let value = at(range);
                best = if value > best.0 { (value, range) } else { best };
            }
        }
        self.range = Some(best.1);
        let unit = sentences::number(best.1, sentences::decimals(best.1 / 10.0));
        let message = format!(
            "Values of one course stay alike over about {unit} time units: that range is estimated, and taken as known."
        );
        self.notes.push(Note { about: "curves".into(), message });
    }

    /// Pairs that are compared, as group indices `(from, to)`.
    pub(crate) fn pairs(&self, plan: &Plan) -> Vec<(usize, usize)> {
        let groups = self.groups.len();
        let mut pairs = Vec::new();
        let wanted = |g: usize| plan.comparisons.control.as_ref() == self.cells.get(g).map(|cell| &cell[0]);
        for a in 0..groups {
            for b in a + 1..groups {
                if let (Some(one), Some(two)) = (self.cells.get(a), self.cells.get(b)) {
                    // Cells are compared where they share one of their labels.
                    let pair = if wanted(b) { (b, a) } else { (a, b) };
                    let against = plan.comparisons.pairs == Pairs::AgainstControl;
                    if one[1] == two[1] && (!against || wanted(pair.0)) || one[0] == two[0] && !against {
                        pairs.push(pair);
                    }
                    continue;
                }
                let pair = if Some(b) == self.control { (b, a) } else { (a, b) };
                if plan.comparisons.pairs == Pairs::All || Some(pair.0) == self.control {
                    pairs.push(pair);
                }
            }
        }
        pairs
    }
}

/// The kept rows, subject by subject.
#[derive(Default)]
struct Filed {
    subjects: Vec<SubjectRows>,
    names: Vec<String>,
    places: Vec<Vec<usize>>,
}

fn rows_by_subject(observations: &Observations, started: &Started) -> Filed {
    let Filed { mut subjects, mut names, mut places } = Filed::default();
    let mut last: Option<u32> = None;
    for &k in &started.kept {
        let subject = observations.subject[k];
        if last != Some(subject) {
            let info = &observations.subjects[subject as usize];
            let (group, cluster) = (info.group as usize, info.cluster.map(|c| c as usize));
            subjects.push(SubjectRows { group, cluster, ..SubjectRows::default() });
            names.push(info.name.clone());
            places.push(Vec::new());
            last = Some(subject);
        }
        if let Some(rows) = subjects.last_mut() {
            rows.times.push(observations.time[k]);
            rows.responses.push(started.response[k]);
        }
        places.last_mut().into_iter().for_each(|own| own.push(k));
    }
    Filed { subjects, names, places }
}

/// Groups with at least one row, renumbered; their names and how many they are.
fn keep_filled_groups(observations: &Observations, subjects: &mut [SubjectRows]) -> (Vec<String>, usize) {
    let mut filled = vec![false; observations.groups.len()];
    subjects.iter().for_each(|s| filled[s.group] = true);
    let mut new_index = vec![0; filled.len()];
    let mut names = Vec::new();
    for (g, name) in observations.groups.iter().enumerate() {
        new_index[g] = names.len();
        if filled[g] {
            names.push(name.clone());
        }
    }
    subjects.iter_mut().for_each(|s| s.group = new_index[s.group]);
    let kept = names.len();
    (names, kept)
}

pub(crate) fn distinct(values: impl Iterator<Item = f64>) -> Vec<f64> {
    let mut sorted: Vec<f64> = values.collect();
    sorted.sort_by(f64::total_cmp);
    sorted.dedup();
    sorted
}

fn describe_groups(data: &Data, names: Vec<String>, visits: &[f64]) -> Vec<GroupInfo> {
    let mut groups: Vec<GroupInfo> = names
        .into_iter()
        .map(|name| GroupInfo { name, subjects: 0, rows: 0, last_times: Vec::new(), at_visit: vec![0; visits.len()] })
        .collect();
    for subject in &data.subjects {
        let group = &mut groups[subject.group];
        group.subjects += 1;
        group.rows += subject.times.len();
        group.last_times.extend(subject.times.last());
        let mut previous = None;
        for &t in &subject.times {
            if previous != Some(t) {
                group.at_visit[visits.partition_point(|&v| v < t)] += 1;
            }
            previous = Some(t);
        }
    }
    groups.iter_mut().for_each(|g| g.last_times.sort_by(f64::total_cmp));
    groups
}

fn supports(data: &Data) -> Vec<[f64; 2]> {
    let mut supports = vec![[f64::INFINITY, f64::NEG_INFINITY]; data.groups];
    for subject in &data.subjects {
        let [low, high] = &mut supports[subject.group];
        for &t in &subject.times {
            *low = low.min(t);
            *high = high.max(t);
        }
    }
    supports
}

fn find_control(plan: &Plan, groups: &[GroupInfo]) -> Result<Option<usize>, Refusal> {
    let Some(name) = &plan.comparisons.control else {
        return Ok(None);
    };
    match groups.iter().position(|g| &g.name == name) {
        Some(index) => Ok(Some(index)),
        None => {
            let names: Vec<String> = groups.iter().map(|g| format!("\"{}\"", g.name)).collect();
            Err(Refusal::plan(format!(
                "comparisons.control is \"{name}\", which is no group of the table. The groups are {}.",
                names.join(", ")
            )))
        }
    }
}

/// In a crossed design the control is a name of the group column.
fn refuse_unknown_control(plan: &Plan, observations: &Observations) -> Result<(), Refusal> {
    let Some(name) = plan.comparisons.control.as_ref().filter(|_| !observations.cells.is_empty()) else {
        return Ok(());
    };
    if observations.cells.iter().any(|cell| cell[0] == *name) {
        return Ok(());
    }
    Err(Refusal::plan(format!(
        "comparisons.control is \"{name}\", which is no group of the table. In a crossed design name the group alone, without the \
         value of the crossed column."
    )))
}

/// Squares of values beyond these do not fit into a number of the computer.
const EXTREMES: [f64; 2] = [1e-150, 1e150];

fn refuse_extremes(observations: &Observations) -> Result<(), Refusal> {
    let size = |k: usize| observations.response[k].abs();
    let Some(largest) = (0..observations.response.len()).max_by(|&a, &b| size(a).total_cmp(&size(b))) else {
        return Ok(());
    };
    let (row, value) = (observations.line[largest], observations.response[largest]);
    if value.abs() > EXTREMES[1] {
        return Err(Refusal::table(format!(
            "Row {row} has the response {value:e}, which is too large to compute with. Correct it, exclude the row, or give \
             all responses in a larger unit."
        )));
    }
    if value != 0.0 && value.abs() < EXTREMES[0] {
        return Err(Refusal::table(format!(
            "All responses are tiny: the largest is {value:e}, in row {row}. Give them in a smaller unit."
        )));
    }
    Ok(())
}

fn refuse_non_positive(observations: &Observations, plan: &Plan) -> Result<(), Refusal> {
    if plan.response.transform != Transform::Log {
        return Ok(());
    }
    let bad: Vec<usize> = (0..observations.response.len()).filter(|&k| observations.response[k] <= 0.0).collect();
    let Some(&first) = bad.first() else {
        return Ok(());
    };
    let rows: Vec<String> = bad.iter().take(5).map(|&k| observations.line[k].to_string()).collect();
    let more = if bad.len() > 5 { format!(" and {} more", bad.len() - 5) } else { String::new() };
    Err(Refusal::table(format!(
        "The log scale needs values above zero, but row {} has {} (zero or negative in row{} {}{more}). \
         Use response.transform \"identity\", correct the values, or exclude these rows.",
        observations.line[first],
        observations.response[first],
        if bad.len() == 1 { "" } else { "s" },
        rows.join(", "),
    )))
}

fn refuse_ties(observations: &Observations, plan: &Plan) -> Result<(), Refusal> {
    if plan.errors.serial != Serial::Ar1 || plan.errors.nugget {
        return Ok(());
    }
    let tie = (1..observations.time.len()).find(|&k| {
        observations.subject[k] == observations.subject[k - 1] && observations.time[k] == observations.time[k - 1]
    });
    match tie {
        None => Ok(()),
        Some(k) => Err(Refusal::table(format!(
            "Rows {} and {} are of one subject ({}) at one time ({}). With errors.serial \"ar1\" replicates need \
             errors.nugget true; or exclude one of the rows.",
            observations.line[k - 1],
            observations.line[k],
            observations.subjects[observations.subject[k] as usize].name,
            observations.time[k]
        ))),
    }
}

/// Every pair has its own curve, band and effects: their number grows with the square of the groups.
const MOST_PAIRS: usize = 200;

fn refuse_many_pairs(plan: &Plan, groups: usize) -> Result<(), Refusal> {
    let pairs = groups * groups.saturating_sub(1) / 2;
    if plan.comparisons.pairs == Pairs::All && pairs > MOST_PAIRS {
        return Err(Refusal::plan(format!(
            "There are {groups} groups, which make {pairs} pairs; at most {MOST_PAIRS} are compared. Compare each group with \
             one (comparisons.pairs against-control), unite spellings of one group, or take another column as the group.",
        )));
    }
    Ok(())
}

fn refuse_many_means(plan: &Plan, data: &Data, groups: &[GroupInfo]) -> Result<(), Refusal> {
    if plan.curves.shape != Shape::ByTime {
        return Ok(());
    }
    for (g, info) in groups.iter().enumerate() {
        let own = data.subjects.iter().filter(|s| s.group == g);
        let count = distinct(own.flat_map(|s| s.times.iter().copied())).len();
        if count > MOST_MEANS {
            return Err(Refusal::plan(format!(
                "curves.shape is by-time, but group \"{}\" has {count} distinct times; at most {MOST_MEANS} means can be \
                 estimated. Use \"smooth\".",
                info.name
            )));
        }
    }
    Ok(())
}

pub(crate) fn columns_used(reading: &Reading) -> ColumnsUsed {
    let c = &reading.columns;
    ColumnsUsed {
        subject: c.subject.clone(),
        time: c.time.clone(),
        group: c.group.clone(),
        response: c.response.clone(),
        cluster: c.cluster.clone(),
        covariates: c.covariates.clone(),
        reasons: (reading.reasons.iter())
            .map(|r| Reason { role: r.role.word().into(), column: r.column.clone(), reason: r.reason.clone() })
            .collect(),
    }
}

pub(crate) fn problems(reading: &Reading) -> Vec<Problem> {
    (reading.problems.iter())
        .map(|p| Problem { row: p.row, column: p.column.clone(), value: p.value.clone(), message: p.message.clone() })
        .collect()
}
