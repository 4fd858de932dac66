//! What is asked: courses, spread, goal, designs.

use crate::plan::Transform;
use crate::refusal::Refusal;
use serde::{Deserialize, Serialize};

/// What is asked of a sample-size simulation. Unknown keys are refused by name.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct SizeRequest {
    /// Days on which everybody is measured, ascending.
    pub days: Vec<f64>,
    /// The control group's course.
    pub control: CourseMeans,
    /// The treated group's course.
    pub treated: CourseMeans,
    /// Scale on which subjects vary and gaps are judged.
    pub transform: Transform,
    /// How subjects and visits vary, on that scale.
    pub spread: SizeSpread,
    /// Share of the gap between the two courses that is assumed: 1 as given.
    pub effect: f64,
    /// What must be found.
    pub goal: Goal,
    /// Subjects per group to try: control first.
    pub designs: Vec<[usize; 2]>,
    /// Subjects that share a cage, litter or site and get one treatment; 0 or 1 for none.
    pub cluster_size: usize,
    /// Share of subjects expected to leave before the end.
    pub losses: f64,
    /// Wanted power.
    pub target: f64,
    /// Simulated studies per design.
    pub studies: usize,
    /// Seed.
    pub seed: u64,
    /// One subject and several, in words.
    pub words: [String; 2],
}

/// A course as means on some days, joined by straight lines.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct CourseMeans {
    /// What the group is called.
    pub name: String,
    /// `[day, mean]` in the response's unit, ascending days; geometric means under log.
    pub means: Vec<[f64; 2]>,
}

/// How subjects and visits vary.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct SizeSpread {
    /// Standard deviation between subjects of one group on one day. Under log: of the logarithms
    /// (0.2 is about 20 percent of the mean).
    pub on_a_day: f64,
    /// How alike two visits of one subject are: their correlation, from 0 to below 1.
    pub alike: f64,
    /// Standard deviation of the subjects' trends, per time unit.
    pub trend: f64,
    /// Correlation of the rest of two visits one time unit apart; 0 for none.
    pub serial: f64,
    /// Correlation of two subjects of one cluster on one day, from 0 to at most `alike`.
    pub cluster_alike: f64,
}

/// What must be found.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Goal {
    /// The kind.
    pub find: GoalKind,
    /// Day of a landmark.
    pub day: Option<f64>,
    /// For an onset: largest gap that does not matter, in the response's unit (percent where gaps are ratios), and
    /// the width in days that its interval may have.
    pub margin: f64,
    /// Width that the onset's interval may have.
    pub width: f64,
    /// Level of the bands.
    pub level: f64,
}

/// The kind of goal.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum GoalKind {
    /// Some stretch of the course shown apart, in the assumed direction.
    Stretch,
    /// The gap on one day, by its own interval.
    Landmark,
    /// The gap averaged over the measuring days, by its own interval; a mean is fitted for every day.
    Average,
    /// The difference of two straight lines' slopes, by its own interval.
    Slope,
    /// The onset beyond the margin, with an interval no wider than asked.
    Onset,
}

impl Default for SizeRequest {
    fn default() -> Self {
        SizeRequest {
            days: Vec::new(),
            control: CourseMeans { name: "control".into(), means: Vec::new() },
            treated: CourseMeans { name: "treated".into(), means: Vec::new() },
            transform: Transform::Identity,
            spread: SizeSpread::default(),
            effect: 1.0,
            goal: Goal::default(),
            designs: vec![[5, 5], [6, 6], [8, 8], [10, 10], [12, 12], [15, 15]],
            cluster_size: 0,
            losses: 0.0,
            target: 0.8,
            studies: 500,
            seed: 20260,
            words: ["subject".into(), "subjects".into()],
        }
    }
}

impl Default for CourseMeans {
    fn default() -> Self {
        CourseMeans { name: "group".into(), means: Vec::new() }
    }
}

impl Default for SizeSpread {
    fn default() -> Self {
        SizeSpread { on_a_day: 1.0, alike: 0.5, trend: 0.0, serial: 0.0, cluster_alike: 0.0 }
    }
}

impl Default for Goal {
    fn default() -> Self {
        Goal { find: GoalKind::Stretch, day: None, margin: 0.0, width: 0.0, level: 0.95 }
    }
}

impl SizeRequest {
    /// Reads a request from JSON text.
    ///
    /// # Errors
    /// Names the key or value that does not fit and says what to do.
    pub fn from_json(text: &str) -> Result<SizeRequest, Refusal> {
        let request: SizeRequest = serde_json::from_str(text)
            .map_err(|error| Refusal::plan(format!("The request cannot be read: {error}. Correct it there.")))?;
        request.check()?;
        Ok(request)
    }

    pub(crate) fn check(&self) -> Result<(), Refusal> {
        let refuse = |message: String| Err(Refusal::plan(message));
        let ascending = |times: &[f64]| times.windows(2).all(|w| w[0] < w[1]) && times.iter().all(|t| t.is_finite());
        if self.days.len() < 2 || self.days.len() > 100 || !ascending(&self.days) {
            return refuse("Give 2 to 100 measuring days in ascending order.".into());
        }
        for course in [&self.control, &self.treated] {
            let times: Vec<f64> = course.means.iter().map(|m| m[0]).collect();
            if course.means.is_empty() || !ascending(&times) || course.means.iter().any(|m| !m[1].is_finite()) {
                return refuse(format!(
                    "Give at least one mean for \"{}\", with days in ascending order.",
                    course.name
                ));
            }
            if self.transform == Transform::Log && course.means.iter().any(|m| m[1] <= 0.0) {
                return refuse(format!("The log scale needs means above zero for \"{}\".", course.name));
            }
        }
        let s = &self.spread;
        if !(s.on_a_day > 0.0 && s.on_a_day.is_finite()) {
            return refuse("The standard deviation on one day must be above zero.".into());
        }
        let shares = (0.0..1.0).contains(&s.alike) && (0.0..1.0).contains(&s.serial);
        if !(shares && s.trend >= 0.0 && s.trend.is_finite()) {
            return refuse(
                "Correlations are from 0 to below 1, and the trend's standard deviation is 0 or more.".into(),
            );
        }
        if !(0.0..=s.alike).contains(&s.cluster_alike) || self.cluster_size > 200 {
            return refuse(
                "Two subjects of one cluster are alike from 0 to as much as two visits of one subject, and clusters hold up to 200."
                    .into(),
            );
        }
        let one_each = |n: &[usize; 2]| self.in_clusters() && n.iter().any(|&n| n < 2 * self.cluster_size);
        if self.designs.iter().any(one_each) {
            return refuse(format!(
                "With {} in a cluster each group needs {} or more, so that it has two clusters.",
                self.cluster_size,
                2 * self.cluster_size
            ));
        }
        if self.designs.is_empty() || self.designs.iter().flatten().any(|&n| !(2..=2000).contains(&n)) {
            return refuse("Give designs with 2 to 2000 per group.".into());
        }
        let shares = (0.0..0.9).contains(&self.losses) && self.target > 0.0 && self.target < 1.0;
        if !(shares && self.effect.is_finite()) {
            return refuse("Losses are from 0 to below 0.9, the wanted power is between 0 and 1.".into());
        }
        if !(self.goal.level >= 0.5 && self.goal.level < 1.0) {
            return refuse("The level is from 0.5 to below 1, such as 0.95.".into());
        }
        let (first, last) = (self.days[0], self.days[self.days.len() - 1]);
        match (self.goal.find, self.goal.day) {
            (GoalKind::Onset, _) if !(self.goal.margin > 0.0 && self.goal.width > 0.0) => {
                refuse("An onset needs a margin and a width above zero.".into())
            }
            (GoalKind::Onset, _) if self.transform == Transform::Log && self.goal.margin >= 100.0 => {
                refuse("Where gaps are ratios the margin is in percent, under 100.".into())
            }
            (GoalKind::Landmark, None) => refuse("Name the landmark day.".into()),
            (GoalKind::Landmark, Some(day)) if !(day >= first && day <= last) => refuse(format!(
                "The landmark day must lie between the first and last measuring day, {first} and {last}."
            )),
            _ => Ok(()),
        }
    }

    pub(crate) fn in_clusters(&self) -> bool {
        self.cluster_size > 1
    }

    /// Mean of a course on the modelled scale, straight between the given days, constant outside.
    pub(crate) fn course(&self, course: &CourseMeans, t: f64) -> f64 {
        let value = |m: &[f64; 2]| if self.transform == Transform::Log { libm::log(m[1]) } else { m[1] };
        let means = &course.means;
        let right = means.partition_point(|m| m[0] <= t);
        if right == 0 {
            return value(&means[0]);
        }
        if right == means.len() {
            return value(&means[right - 1]);
        }
        let (a, b) = (&means[right - 1], &means[right]);
        let share = (t - a[0]) / (b[0] - a[0]);
        value(a) + share * (value(b) - value(a))
    }

    /// Assumed gap, treated minus control, on the modelled scale.
    pub(crate) fn gap(&self, t: f64) -> f64 {
        self.effect * (self.course(&self.treated, t) - self.course(&self.control, t))
    }

    /// Subjects to enrol per group so that about the design's number stay to the end.
    pub(crate) fn enrolled(&self, design: [usize; 2]) -> [usize; 2] {
        design.map(|n| libm::ceil(n as f64 / (1.0 - self.losses) - 1e-9) as usize)
    }
}
