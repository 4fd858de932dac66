//! What a remedy does to the conclusion: the stretches with it beside those of the plan.

use super::Check;
use crate::cohort::Cohort;
use crate::comparison::ComparisonKind;
use crate::evaluate::Evaluation;
use crate::findings::{Difference, Direction, Stretch};
use crate::plan::Plan;
use crate::refusal::Refusal;
use crate::sentences::{capital, decimals, joined, number};
use crate::study::Study;
use courseband_engine::{Fit, fit};
use serde::Serialize;

/// What a remedy does to the conclusion. Both sides use the limits that rest on degrees of freedom.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Consequence {
    /// In one word.
    pub outcome: Outcome,
    /// In one sentence.
    pub sentence: String,
    /// Stretches of every pair; empty where the remedy could not be fitted.
    pub pairs: Vec<TriedPair>,
}

/// What becomes of the conclusion.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Outcome {
    /// A stretch apart appears, vanishes or changes sides.
    Turns,
    /// The same stretches, an end of which moves by more than half the time between visits.
    Moves,
    /// The same stretches.
    Stands,
    /// The remedy could not be fitted.
    Unknown,
}

/// One pair with the plan and with the remedy.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TriedPair {
    /// What the difference is between.
    pub kind: ComparisonKind,
    /// The group compared with.
    pub from: String,
    /// The group compared.
    pub to: String,
    /// Stretches apart with the plan.
    pub plan: Vec<Stretch>,
    /// Stretches apart with the remedy.
    pub trial: Vec<Stretch>,
}

/// The plan's own stretches, to compare with.
pub(super) struct Base {
    own: Vec<Difference>,
    time_word: String,
    /// Half the median time between visits.
    tolerance: f64,
}

impl Base {
    pub(super) fn new(plan: &Plan, cohort: &Cohort, fitted: &Fit, time_word: &str) -> Self {
        let mut gaps: Vec<f64> = cohort.visits.windows(2).map(|w| w[1] - w[0]).collect();
        gaps.sort_by(f64::total_cmp);
        let tolerance = 0.5 * gaps.get(gaps.len() / 2).copied().unwrap_or(0.0);
        let own = Evaluation::new(plan, cohort, fitted, None).differences();
        let time_word = plan.words.time.clone().unwrap_or_else(|| time_word.to_string());
        Base { own, time_word, tolerance }
    }

    /// The same stretches under another plan.
    pub(super) fn beside(&self, study: &mut Study, trial: &Plan) -> Consequence {
        match self.tried(study, trial) {
            Ok(Some(pairs)) => self.told(pairs),
            Ok(None) => unknown("With it the fit fails, so it says nothing.".into()),
            Err(refusal) => unknown(format!("It cannot be tried here. {}", refusal.message)),
        }
    }

    fn tried(&self, study: &mut Study, trial: &Plan) -> Result<Option<Vec<TriedPair>>, Refusal> {
        trial.check()?;
        let cohort = Cohort::new(study.answered(trial)?, trial)?;
        let Ok(fitted) = fit(&cohort.data, &cohort.model(trial)) else { return Ok(None) };
        let all = Evaluation::new(trial, &cohort, &fitted, None).differences();
        let pair = |own: &Difference| {
            let other = all.iter().find(|d| d.kind == own.kind && d.from == own.from && d.to == own.to)?;
            let (from, to) = (own.from.clone(), own.to.clone());
            Some(TriedPair { kind: own.kind, from, to, plan: own.stretches.clone(), trial: other.stretches.clone() })
        };
        Ok(self.own.iter().map(pair).collect())
    }

    fn told(&self, pairs: Vec<TriedPair>) -> Consequence {
        let each: Vec<Outcome> = pairs.iter().map(|pair| self.outcome(pair)).collect();
        let outcome = each.iter().copied().min().unwrap_or(Outcome::Unknown);
        let changed = pairs.iter().zip(&each).filter(|(_, one)| **one == outcome).map(|(pair, _)| pair);
        let sentence = match outcome {
            Outcome::Stands => "With it the groups are shown apart at the same times.".into(),
            Outcome::Unknown => "There is no gap to compare.".into(),
            _ => {
                let parts: Vec<String> = changed.take(3).map(|pair| self.words(pair)).collect();
                format!("With it {}.", joined(&parts))
            }
        };
        Consequence { outcome, sentence, pairs }
    }

    fn outcome(&self, pair: &TriedPair) -> Outcome {
        let sides = |stretches: &[Stretch]| stretches.iter().map(|s| s.direction).collect::<Vec<Option<Direction>>>();
        if sides(&pair.plan) != sides(&pair.trial) {
            return Outcome::Turns;
        }
        let far = |a: f64, b: f64| (a - b).abs() > self.tolerance;
        let moved = pair.plan.iter().zip(&pair.trial).any(|(a, b)| far(a.start, b.start) || far(a.end, b.end));
        if moved { Outcome::Moves } else { Outcome::Stands }
    }

    fn words(&self, pair: &TriedPair) -> String {
        let name = format!("{} and {}", pair.to, pair.from);
        match (pair.plan.is_empty(), pair.trial.is_empty()) {
            (false, true) => format!("{name} are no longer shown apart"),
            (true, false) => {
                format!("{name} are shown apart {}, and without it nowhere", self.spans(&pair.trial))
            }
            _ => format!("{name} are shown apart {} instead of {}", self.spans(&pair.trial), self.spans(&pair.plan)),
        }
    }

    fn spans(&self, stretches: &[Stretch]) -> String {
        let digits = decimals(self.tolerance);
        let both = stretches.windows(2).any(|w| w[0].direction != w[1].direction);
        let each: Vec<String> = (stretches.iter())
            .map(|s| {
                let side = match s.direction {
                    Some(Direction::Above) if both => " (above)",
                    Some(Direction::Below) if both => " (below)",
                    _ => "",
                };
                format!("{} to {}{side}", number(s.start, digits), number(s.end, digits))
            })
            .collect();
        format!("from {} {}", self.time_word, joined(&each))
    }
}

fn unknown(sentence: String) -> Consequence {
    Consequence { outcome: Outcome::Unknown, sentence, pairs: Vec::new() }
}

/// Which checks speak against the model, and whether what they ask about would change the conclusion.
pub(super) fn verdict(checks: &[Check]) -> String {
    let count = |lit: bool, outcome: Option<Outcome>| {
        let own = |c: &&Check| {
            c.lit == lit
                && outcome.is_none_or(|outcome| c.consequence.as_ref().is_some_and(|own| own.outcome == outcome))
        };
        checks.iter().filter(own).count()
    };
    let lit = count(true, None);
    let opening = match lit {
        0 => format!("None of {} checks speaks against the model.", checks.len()),
        1 => format!("1 of {} checks speaks against the model.", checks.len()),
        n => format!("{n} of {} checks speak against the model.", checks.len()),
    };
    let turning = count(true, Some(Outcome::Turns));
    let closing = if turning > 0 {
        let them =
            if turning == 1 { "what one of them asks".to_string() } else { format!("what {turning} of them ask") };
        format!("{} would change where the groups are shown apart: settle that before you write.", capital(&them))
    } else if count(true, Some(Outcome::Moves)) > 0 {
        "What they ask moves the times, not the conclusion.".into()
    } else if lit > 0 && count(true, Some(Outcome::Stands)) == lit {
        "What they ask leaves the conclusion as it is.".into()
    } else if lit == 0 && count(false, Some(Outcome::Turns)) > 0 {
        "The conclusion would still change with some of what they ask about: report that the table does not ask for it."
            .into()
    } else {
        return opening;
    };
    format!("{opening} {closing}")
}
