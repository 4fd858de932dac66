//! Two crossed factors as cells, and the order of the groups.

use crate::plan::Plan;
use crate::refusal::Refusal;
use courseband_table::{CovariateValues, Observations};

/// Between the names of a cell.
const BETWEEN: &str = " \u{b7} ";
/// Most cells.
const MOST_CELLS: usize = 12;

/// Makes every combination of the group column and the plan's crossed column a group, and puts groups into the plan's order.
///
/// # Errors
/// A column that is no factor, changes within a subject or has too many values; an order that names no group.
pub(crate) fn settle(observations: &mut Observations, plan: &Plan) -> Result<(), Refusal> {
    if let Some(column) = &plan.columns.crossed {
        cross(observations, column)?;
    }
    order(observations, &plan.reading.group_order)
}

fn cross(observations: &mut Observations, column: &str) -> Result<(), Refusal> {
    let refuse = |why: String| Refusal::plan(format!("columns.crossed is \"{column}\", {why}"));
    let found = observations.covariates.iter().position(|covariate| covariate.name == column);
    let Some(at) = found else { return Err(refuse("which is no column of the table.".into())) };
    let covariate = observations.covariates.remove(at);
    let labels: Vec<String> = match covariate.values {
        CovariateValues::Categorical { levels, index } => index.iter().map(|&k| levels[k as usize].clone()).collect(),
        CovariateValues::Numeric(values) => values.iter().map(|v| crate::sentences::plain(*v)).collect(),
    };
    let mut own: Vec<Option<&str>> = vec![None; observations.subjects.len()];
    for (k, label) in labels.iter().enumerate() {
        let subject = observations.subject[k] as usize;
        match own[subject] {
            Some(known) if known != label => {
                let (name, line) = (&observations.subjects[subject].name, observations.line[k]);
                return Err(refuse(format!(
                    "which changes within subject {name} (\"{known}\", then \"{label}\" in row {line}). A crossed factor belongs to a \
                     subject for good."
                )));
            }
            _ => own[subject] = Some(label),
        }
    }
    let mut levels: Vec<&str> = Vec::new();
    for label in own.iter().flatten() {
        if !levels.contains(label) {
            levels.push(label);
        }
    }
    if levels.len() < 2 {
        return Err(refuse("which has one value only. Leave it out.".into()));
    }
    let groups = observations.groups.len();
    if groups * levels.len() > MOST_CELLS {
        return Err(refuse(format!(
            "which with {groups} groups makes {} cells; at most {MOST_CELLS} are compared.",
            groups * levels.len()
        )));
    }
    let (mut cells, mut names, mut codes) = (Vec::new(), Vec::new(), Vec::new());
    for (g, group) in observations.groups.iter().enumerate() {
        for (l, level) in levels.iter().enumerate() {
            let here = |s: usize| observations.subjects[s].group as usize == g && own[s] == Some(*level);
            if (0..own.len()).any(here) {
                cells.push([group.clone(), (*level).to_string()]);
                names.push(format!("{group}{BETWEEN}{level}"));
                codes.push((g, l));
            }
        }
    }
    let code = |s: usize| {
        let level = levels.iter().position(|level| own[s] == Some(*level));
        codes.iter().position(|&(g, l)| g == observations.subjects[s].group as usize && Some(l) == level)
    };
    let new: Vec<u32> = (0..own.len()).map(|s| code(s).unwrap_or(0) as u32).collect();
    observations.subjects.iter_mut().zip(new).for_each(|(subject, group)| subject.group = group);
    (observations.groups, observations.cells) = (names, cells);
    Ok(())
}

fn order(observations: &mut Observations, asked: &[String]) -> Result<(), Refusal> {
    if asked.is_empty() {
        return Ok(());
    }
    // In a crossed design the order is that of the group column's own names.
    let name = |g: usize| observations.cells.get(g).map_or(&observations.groups[g], |cell| &cell[0]);
    if let Some(unknown) = asked.iter().find(|&one| (0..observations.groups.len()).all(|g| name(g) != one)) {
        let names: Vec<String> = observations.groups.iter().map(|g| format!("\"{g}\"")).collect();
        return Err(Refusal::plan(format!(
            "reading.group_order names \"{unknown}\", which is no group of the table. The groups are {}.",
            names.join(", ")
        )));
    }
    let place = |g: usize| asked.iter().position(|one| one == name(g)).unwrap_or(asked.len());
    let mut sorted: Vec<usize> = (0..observations.groups.len()).collect();
    sorted.sort_by_key(|&g| (place(g), g));
    let mut new = vec![0; sorted.len()];
    sorted.iter().enumerate().for_each(|(to, &from)| new[from] = to as u32);
    observations.groups = sorted.iter().map(|&g| observations.groups[g].clone()).collect();
    if !observations.cells.is_empty() {
        observations.cells = sorted.iter().map(|&g| observations.cells[g].clone()).collect();
    }
    observations.subjects.iter_mut().for_each(|subject| subject.group = new[subject.group as usize]);
    Ok(())
}
