//! The subjects' own courses.

use courseband_table::Observations;
use serde::Serialize;

/// Rows of subject `k` are `offsets[k]` to `offsets[k + 1]`, ascending in time.
#[derive(Debug, Default, Serialize)]
pub(crate) struct Traces {
    /// Group of each subject, as an index into the findings' groups.
    group: Vec<u32>,
    /// Name of each subject.
    subject: Vec<String>,
    offsets: Vec<u32>,
    time: Vec<f64>,
    response: Vec<f64>,
}

impl Traces {
    pub(crate) fn new(observations: &Observations) -> Self {
        let groups = kept_groups(observations);
        let mut traces =
            Traces { time: observations.time.clone(), response: observations.response.clone(), ..Self::default() };
        let mut start = 0;
        for rows in observations.subject.chunk_by(|a, b| a == b) {
            let subject = &observations.subjects[rows[0] as usize];
            traces.group.push(groups[subject.group as usize]);
            traces.subject.push(subject.name.clone());
            traces.offsets.push(start);
            start += rows.len() as u32;
        }
        traces.offsets.push(start);
        traces
    }
}

/// Groups without a usable row have no place in the findings: each group's index there.
fn kept_groups(observations: &Observations) -> Vec<u32> {
    let mut filled = vec![false; observations.groups.len()];
    observations.subject.iter().for_each(|&s| filled[observations.subjects[s as usize].group as usize] = true);
    let mut next = 0;
    let place = |&is_filled: &bool| {
        let index = next;
        next += u32::from(is_filled);
        index
    };
    filled.iter().map(place).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use courseband_table::SubjectInfo;

    #[test]
    fn groups_are_numbered_as_in_the_findings() {
        let subject = |name: &str, group| SubjectInfo { name: name.into(), group, cluster: None };
        let observations = Observations {
            subjects: vec![subject("a", 2), subject("gone", 1), subject("b", 0)],
            groups: vec!["first".into(), "empty".into(), "last".into()],
            subject: vec![0, 0, 2],
            time: vec![1.0, 2.0, 1.0],
            response: vec![5.0, 6.0, 7.0],
            line: vec![2, 3, 4],
            ..Observations::default()
        };
        let traces = Traces::new(&observations);
        assert_eq!(traces.group, [1, 0]);
        assert_eq!(traces.offsets, [0, 2, 3]);
        assert_eq!(traces.subject, ["a", "b"]);
    }
}
