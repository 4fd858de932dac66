//! Clusters: cages, litters, sites, and animals that carry several subjects.

use crate::findings::Note;
use crate::plan::{ClusterChoice, Plan};
use crate::sentences::capital;
use courseband_engine::{ClusterEffects, Data};
use courseband_table::Observations;
use serde::Serialize;
use std::collections::BTreeMap;

/// How the clusters take part.
#[derive(Debug, Clone, Default)]
pub(crate) struct Housing {
    pub(crate) effects: ClusterEffects,
    /// Per group: true where its clusters cannot show how clusters differ.
    pub(crate) lone: Vec<bool>,
    pub(crate) summary: Option<ClusterSummary>,
    pub(crate) notes: Vec<Note>,
}

/// What is known about the clusters.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ClusterSummary {
    /// Number of clusters.
    pub count: usize,
    /// Clusters that each group has a part in.
    pub per_group: Vec<usize>,
    /// True where no cluster holds subjects of two groups: the groups differ between clusters.
    pub nested: bool,
    /// `none`, `intercept` or `slope`: what differs from cluster to cluster in the model.
    pub effects: &'static str,
}

impl Housing {
    /// Decides; `column` is the name of the cluster column.
    pub(crate) fn new(data: &Data, observations: &Observations, column: &str, plan: &Plan) -> Housing {
        if observations.clusters.is_empty() {
            return Housing { lone: vec![false; data.groups], ..Housing::default() };
        }
        let mut groups_of: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
        let mut members: BTreeMap<usize, usize> = BTreeMap::new();
        for (k, subject) in data.subjects.iter().enumerate() {
            // A subject without a cluster is one of its own.
            let cluster = subject.cluster.unwrap_or(usize::MAX - k);
            let groups = groups_of.entry(cluster).or_default();
            if !groups.contains(&subject.group) {
                groups.push(subject.group);
            }
            *members.entry(cluster).or_default() += 1;
        }
        let nested = groups_of.values().all(|groups| groups.len() == 1);
        let per_group: Vec<usize> =
            (0..data.groups).map(|g| groups_of.values().filter(|groups| groups.contains(&g)).count()).collect();
        let several = members.values().any(|&count| count > 1);
        let (effects, note) = decide(plan.clusters, several, nested, (groups_of.len(), data.groups), column, plan);
        let modelled = effects != ClusterEffects::None;
        let told = |own: usize| !several || plan.clusters == ClusterChoice::None || !nested || own > 1;
        let lone: Vec<bool> = per_group.iter().map(|&own| !told(own)).collect();
        let summary = ClusterSummary { count: groups_of.len(), per_group, nested, effects: word(effects) };
        let notes = [note, modelled.then(|| unit_note(nested, &summary, column, plan))];
        let notes = notes.into_iter().flatten().map(|message| Note { about: "fit".into(), message }).collect();
        Housing { effects, lone, summary: Some(summary), notes }
    }
}

fn word(effects: ClusterEffects) -> &'static str {
    match effects {
        ClusterEffects::None => "none",
        ClusterEffects::Intercept => "intercept",
        ClusterEffects::Slope => "slope",
    }
}

/// Clusters that are needed beyond one a group for the covariance of level and trend.
const FOR_TRENDS: usize = 3;

fn decide(
    choice: ClusterChoice,
    several: bool,
    nested: bool,
    (clusters, groups): (usize, usize),
    column: &str,
    plan: &Plan,
) -> (ClusterEffects, Option<String>) {
    let Some(spare) = (clusters > groups || !nested).then(|| clusters.saturating_sub(groups)) else {
        let note = format!(
            "Each group has one {column} only: a difference between the groups cannot be told from a difference between \
             one {column} and another. No bands are given for the gaps."
        );
        let untold = several && choice != ClusterChoice::None;
        return (ClusterEffects::None, untold.then_some(note));
    };
    if !several {
        let note = format!("Every {column} holds one {}: it is the same as the {0}.", plan.words.subject);
        return (ClusterEffects::None, Some(note));
    }
    match choice {
        ClusterChoice::None => {
            let harm = if nested { " Treatment differs between them, so the bands are too narrow." } else { "" };
            let note = format!("{} of one {column} are taken as independent.{harm}", capital(&plan.words.subjects));
            (ClusterEffects::None, Some(note))
        }
        ClusterChoice::Intercept => (ClusterEffects::Intercept, None),
        ClusterChoice::Slope => (ClusterEffects::Slope, None),
        ClusterChoice::Auto if nested && spare >= FOR_TRENDS => (ClusterEffects::Slope, None),
        ClusterChoice::Auto => (ClusterEffects::Intercept, None),
    }
}

fn unit_note(nested: bool, summary: &ClusterSummary, column: &str, plan: &Plan) -> String {
    let vary = if summary.effects == "slope" { "level and trend" } else { "level" };
    let subjects = &plan.words.subjects;
    if nested {
        format!(
            "Each {column} is in one group, so groups are compared between {} clusters ({column}), which differ in {vary}; \
             degrees of freedom count them, not the {subjects}.",
            summary.count
        )
    } else {
        format!(
            "Groups differ within a {column}: its {vary} is taken out, {} clusters ({column}) in all.",
            summary.count
        )
    }
}
