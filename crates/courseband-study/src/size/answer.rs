//! Counts to an answer: power with its Monte-Carlo interval, the smallest design, the paragraph.

use super::request::{GoalKind, SizeRequest};
use super::simulate::Counts;
use crate::plan::Transform;
use crate::sentences::{number, percent, plain};
use courseband_engine::special::normal_quantile;
use serde::Serialize;

/// The answer of one design.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DesignAnswer {
    /// Subjects per group that stay to the end, about.
    pub per_group: [usize; 2],
    /// Subjects to enrol per group.
    pub enrolled: [usize; 2],
    /// What was counted.
    pub counts: Counts,
    /// Share of studies that met the goal.
    pub power: f64,
    /// 95 % Monte-Carlo interval (Wilson 1927, JASA 22:209).
    pub interval: [f64; 2],
}

/// The answer over all designs.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SizeFindings {
    /// One per design, in the order asked.
    pub designs: Vec<DesignAnswer>,
    /// Index of the smallest design whose power reaches the target.
    pub smallest: Option<usize>,
    /// The answer in one sentence.
    pub sentence: String,
    /// What was simulated and fitted, precisely.
    pub model: String,
    /// Paragraph for a protocol or an ethics application.
    pub paragraph: String,
    /// Cautions.
    pub cautions: Vec<String>,
}

impl SizeRequest {
    /// The answer from the counts of each design, in the order of `designs`.
    #[must_use]
    pub fn answer(&self, counts: &[Counts]) -> SizeFindings {
        let designs: Vec<DesignAnswer> =
            self.designs.iter().zip(counts).map(|(&design, &counts)| self.design_answer(design, counts)).collect();
        let total = |d: &DesignAnswer| d.per_group[0] + d.per_group[1];
        let smallest = (0..designs.len())
            .filter(|&k| designs[k].counts.studies > 0 && designs[k].power >= self.target)
            .min_by_key(|&k| total(&designs[k]));
        let sentence = match smallest {
            Some(k) => self.design_sentence(&designs[k]),
            None => match designs.iter().filter(|d| d.counts.studies > 0).max_by(|a, b| a.power.total_cmp(&b.power)) {
                Some(best) => format!(
                    "None of these designs reaches {}. The best is {}",
                    percent(self.target),
                    self.design_sentence(best)
                ),
                None => "Nothing is simulated yet.".into(),
            },
        };
        let model = self.model_text();
        let paragraph = match smallest {
            Some(k) => self.paragraph(&designs[k], &model),
            None => String::new(),
        };
        SizeFindings { designs, smallest, sentence, model, paragraph, cautions: self.cautions() }
    }

    fn design_answer(&self, design: [usize; 2], counts: Counts) -> DesignAnswer {
        let (n, met) = (counts.studies as f64, counts.met as f64);
        let share = if n > 0.0 { met / n } else { 0.0 };
        let z = normal_quantile(0.975);
        let middle = (met + 0.5 * z * z) / (n + z * z);
        let reach = z * libm::sqrt(n * share * (1.0 - share) + 0.25 * z * z) / (n + z * z);
        DesignAnswer {
            per_group: design,
            enrolled: self.enrolled(design),
            counts,
            power: share,
            interval: [(middle - reach).max(0.0), (middle + reach).min(1.0)],
        }
    }

    /// `8 per group, 16 in all, 2 more for expected losses: power 83 % (80 to 86).`
    fn design_sentence(&self, d: &DesignAnswer) -> String {
        let [a, b] = d.per_group;
        let groups = if a == b {
            format!("{a} per group, {} in all", a + b)
        } else {
            format!("{a} in {}, {b} in {}, {} in all", self.control.name, self.treated.name, a + b)
        };
        let more = d.enrolled[0] + d.enrolled[1] - a - b;
        let losses = if more > 0 { format!(", {more} more for expected losses") } else { String::new() };
        let share = |x: f64| number(100.0 * x, 0);
        format!("{groups}{losses}: power {} % ({} to {}).", share(d.power), share(d.interval[0]), share(d.interval[1]))
    }

    fn model_text(&self) -> String {
        let s = &self.spread;
        let days: Vec<String> = self.days.iter().map(|&t| plain(t)).collect();
        let course = |c: &super::request::CourseMeans| {
            let means: Vec<String> =
                c.means.iter().map(|m| format!("{} on day {}", plain(m[1]), plain(m[0]))).collect();
            format!("{}: {}", c.name, means.join(", "))
        };
        let scale = if self.transform == Transform::Log { " of the logarithms" } else { "" };
        let mut text = format!(
            "Means {}; {}; straight between these days{}. Measured on days {}. On one day {} of a group differ with \
             standard deviation {}{scale}; two visits of one {} correlate with {}",
            course(&self.control),
            course(&self.treated),
            if self.transform == Transform::Log { " on the log scale" } else { "" },
            days.join(", "),
            self.words[1],
            plain(s.on_a_day),
            self.words[0],
            plain(s.alike),
        );
        if s.trend > 0.0 {
            text += &format!("; trends differ with standard deviation {} per day", plain(s.trend));
        }
        if s.serial > 0.0 {
            text += &format!("; what remains correlates with {} from one day to the next", plain(s.serial));
        }
        if self.in_clusters() {
            text += &format!(
                "; {} share a cluster and its treatment, and two of one cluster correlate with {}",
                self.cluster_size,
                plain(s.cluster_alike)
            );
        }
        if self.effect != 1.0 {
            text += &format!("; the gap is taken as {} of that between the means", percent(self.effect));
        }
        if self.losses > 0.0 {
            text += &format!("; {} leave, each at a random visit after the first", percent(self.losses));
        }
        text + "."
    }

    fn paragraph(&self, d: &DesignAnswer, model: &str) -> String {
        let goal = match (self.goal.find, self.goal.day) {
            (GoalKind::Landmark, Some(day)) => {
                format!("a difference on day {} by its {} interval", plain(day), percent(self.goal.level))
            }
            (GoalKind::Average, _) => {
                format!("a difference averaged over the measuring days by its {} interval", percent(self.goal.level))
            }
            (GoalKind::Slope, _) => format!("a difference of the slopes by its {} interval", percent(self.goal.level)),
            (GoalKind::Onset, _) => format!(
                "the day from which the gap passes {}{} for good, with an interval from the {} band of at most {} days",
                plain(self.goal.margin),
                if self.transform == Transform::Log { " percent" } else { "" },
                percent(self.goal.level),
                plain(self.goal.width)
            ),
            _ => format!(
                "a stretch of time in which the {} band, which holds over the whole course, excludes no difference",
                percent(self.goal.level)
            ),
        };
        format!(
            "Sample size was determined by simulation ({} studies per design, seed {}). {model} Each simulated table was analysed \
             with {} per group in a mixed model fitted by restricted maximum likelihood, with degrees of freedom by \
             Satterthwaite's rule. The goal was to show {goal}. {} The Monte-Carlo interval of the power is given in brackets.",
            d.counts.studies,
            self.seed,
            match self.goal.find {
                GoalKind::Average => "a mean for every day",
                GoalKind::Slope => "a straight line",
                _ if self.days.len() < 4 => "a mean for every day",
                _ => "a smooth course",
            },
            self.design_sentence(d)
        )
    }

    fn cautions(&self) -> Vec<String> {
        let mut cautions = vec![
            "The power holds for the assumed courses and spread; try a low and a high guess of each.".to_string(),
            "Power from an effect that was observed in a small study is optimistic: choose the smallest effect that matters.".to_string(),
        ];
        if self.losses > 0.0 {
            cautions.push("Losses are taken to have nothing to do with the response.".into());
        }
        cautions
    }
}
