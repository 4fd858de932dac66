//! Other models beside the plan's: how well each foresees, and whether the choice matters.
//!
//! Two measures, never one ranking: Akaike's criterion from full-likelihood fits among models of one scale
//! (Akaike 1974, IEEE Trans Autom Control 19:716; the marginal form, Greven & Kneib 2010, Biometrika 97:773), and
//! on the response's own scale the continuous ranked probability score of each subject foreseen by the others
//! (Gneiting & Raftery 2007, JASA 102:359, eq 21; for the log-normal Baran & Lerch 2015, QJRMS 141:2289, from memory).

use crate::cohort::Cohort;
use crate::evaluate::Evaluation;
use crate::plan::{
    Distribution, MarginUnit, Plan, Serial, Shape, Sharing, SmallSample, Spread, SubjectEffects, Transform,
};
use crate::refusal::Refusal;
use crate::sentences::{capital, number};
use crate::study::Study;
use courseband_engine::special::{normal_cdf, normal_pdf, normal_quantile};
use courseband_engine::{Fit, Foreseen, ForeseenValues, Likelihood, Model, fit};
use serde::Serialize;

/// Most subjects that are left out one by one, and where every one costs an approximation of its own.
const MOST_LEFT_OUT: usize = 400;
const MOST_APPROXIMATED: usize = 80;
/// Simulated values per row where the response is not normal.
const DRAWS: usize = 200;

/// All candidates.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Candidates {
    /// The plan's own model first.
    pub models: Vec<Candidate>,
    /// Compared pairs, as `[from, to]`.
    pub pairs: Vec<[String; 2]>,
    /// Times at which gaps are given.
    pub time: Vec<f64>,
    /// Lower band limits of the plan's own gaps, one list per pair, on the modelled scale.
    pub lower: Vec<Vec<Option<f64>>>,
    /// Upper limits.
    pub upper: Vec<Vec<Option<f64>>>,
    /// Index of the proposed model.
    pub proposed: usize,
    /// Why, in one sentence.
    pub reason: String,
}

/// One model.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Candidate {
    /// What differs from the plan, in words; "the plan" for its own.
    pub name: String,
    /// The plan that has it.
    pub plan: Plan,
    /// False where the fit failed.
    pub fitted: bool,
    /// Akaike's criterion less the plan's: below zero is better. `null` on another scale, or where a fit failed.
    pub aic: Option<f64>,
    /// Mean ranked probability score less the plan's, in the response's unit: below zero foresees better.
    pub score: Option<f64>,
    /// Standard error of that difference over subjects.
    pub score_se: Option<f64>,
    /// Estimated gaps, one list per pair, on the plan's own scale; empty where a fit failed.
    pub gaps: Vec<Vec<Option<f64>>>,
    /// Largest move of a gap against the plan's, in the plan's standard errors.
    pub moves: Option<f64>,
    /// What it says, in one sentence.
    pub sentence: String,
}

struct Fitted {
    plan: Plan,
    name: String,
    cohort: Option<Cohort>,
    fit: Option<Fit>,
    aic: Option<f64>,
    scores: Vec<f64>,
}

impl Study {
    /// Candidates beside a plan's model.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn candidates(&mut self, plan: &Plan) -> Result<Candidates, Refusal> {
        plan.check()?;
        plan.need_normal("Other models beside the plan")?;
        let mut all = Vec::new();
        for (name, candidate) in others(plan) {
            if candidate.check().is_err() {
                continue;
            }
            let reading = self.answered(&candidate)?;
            match Cohort::new(reading, &candidate) {
                Ok(cohort) => all.push(fitted(name, candidate, cohort)),
                Err(refusal) if all.is_empty() => return Err(refusal),
                Err(_) => {}
            }
        }
        Ok(compared(&all))
    }
}

/// The plan and models one step from it.
fn others(plan: &Plan) -> Vec<(String, Plan)> {
    let mut all = vec![("the plan".to_string(), plan.clone())];
    let mut add = |name: &str, change: &dyn Fn(&mut Plan)| {
        let mut other = plan.clone();
        change(&mut other);
        if other != *plan {
            all.push((name.to_string(), other));
        }
    };
    add("curved courses", &|p| p.curves.shape = Shape::Smooth);
    add("straight courses", &|p| p.curves.shape = Shape::Straight);
    add("a mean at every visit", &|p| p.curves.shape = Shape::ByTime);
    add("subjects with a level only", &|p| p.subjects = SubjectEffects::Intercept);
    add("subjects with level and trend", &|p| p.subjects = SubjectEffects::Slope);
    add("subjects with curves of their own", &|p| {
        p.subjects = SubjectEffects::Curve;
        p.errors.serial = Serial::None;
    });
    add("independent visits", &|p| p.errors.serial = Serial::None);
    add("visits alike when close in time", &|p| {
        p.errors.serial = Serial::Ar1;
        p.errors.nugget = false;
        if p.subjects == SubjectEffects::Curve {
            p.subjects = SubjectEffects::Slope;
        }
    });
    add("one spread for all groups", &|p| p.errors.spread = Spread::Common);
    add("a spread of its own in each group", &|p| p.errors.spread = Spread::ByGroup);
    // A margin has a meaning on its own scale only.
    let gamma = |p: &mut Plan| {
        p.response.transform = Transform::Identity;
        p.response.distribution = Distribution::Gamma;
        (p.errors.serial, p.errors.nugget, p.errors.spread) = (Serial::None, false, Spread::Common);
        p.subjects_spread = Sharing::Common;
        p.comparisons.small_sample = SmallSample::Df;
        (p.comparisons.margin, p.comparisons.margin_unit) = (0.0, MarginUnit::Response);
    };
    let rescaled = |p: &mut Plan, transform: Transform| {
        if p.response.transform != transform {
            p.response.transform = transform;
            (p.comparisons.margin, p.comparisons.margin_unit) = (0.0, MarginUnit::Response);
        }
    };
    add("the measured scale", &|p| rescaled(p, Transform::Identity));
    add("a log scale", &|p| rescaled(p, Transform::Log));
    add("gamma values, whose spread grows with the mean", &gamma);
    all
}

fn fitted(name: String, plan: Plan, cohort: Cohort) -> Fitted {
    let model = cohort.model(&plan);
    let log = plan.response.transform == Transform::Log;
    let Ok(own) = fit(&cohort.data, &model) else {
        return Fitted { plan, name, cohort: Some(cohort), fit: None, aic: None, scores: Vec::new() };
    };
    let normal = plan.response.distribution == Distribution::Normal;
    let full = normal.then(|| fit(&cohort.data, &Model { likelihood: Likelihood::Full, ..model }).ok()).flatten();
    let aic = full.map(|full| 2.0 * (full.parameters() as f64 - full.log_likelihood()));
    let subjects = cohort.data.subjects.len();
    let scores = match plan.response.distribution {
        Distribution::Normal if subjects <= MOST_LEFT_OUT => own.foreseen().iter().map(|one| score(one, log)).collect(),
        Distribution::Normal => Vec::new(),
        _ if subjects <= MOST_APPROXIMATED => {
            own.foreseen_values(DRAWS, plan.seed).iter().map(simulated_score).collect()
        }
        _ => Vec::new(),
    };
    Fitted { plan, name, cohort: Some(cohort), fit: Some(own), aic, scores }
}

/// Mean ranked probability score of a subject's rows, in the response's own unit.
fn score(one: &Foreseen, log: bool) -> f64 {
    let rows = one.mean.iter().zip(&one.sd).zip(&one.response);
    let sum: f64 = rows.map(|((&m, &s), &y)| if log { log_normal_score(m, s, y) } else { normal_score(m, s, y) }).sum();
    sum / one.mean.len() as f64
}

/// Mean ranked probability score of a subject's rows from simulated values: mean |x - y| less half the mean |x - x'|
/// (Gneiting & Raftery 2007, eq 21).
fn simulated_score(one: &ForeseenValues) -> f64 {
    let rows = one.values.iter().zip(&one.response);
    let sum: f64 = rows
        .map(|(values, y)| {
            let mut x = values.clone();
            x.sort_by(f64::total_cmp);
            let n = x.len() as f64;
            let near = x.iter().map(|x| (x - y).abs()).sum::<f64>() / n;
            let apart: f64 = x.iter().enumerate().map(|(k, x)| (2.0 * k as f64 - n + 1.0) * x).sum();
            near - apart / (n * (n - 1.0))
        })
        .sum();
    sum / one.response.len() as f64
}

fn normal_score(mean: f64, sd: f64, y: f64) -> f64 {
    let z = (y - mean) / sd;
    sd * (z * (2.0 * normal_cdf(z) - 1.0) + 2.0 * normal_pdf(z) - 1.0 / libm::sqrt(std::f64::consts::PI))
}

/// `mean`, `sd` and `y` of the logarithm.
fn log_normal_score(mean: f64, sd: f64, y: f64) -> f64 {
    let w = (y - mean) / sd;
    let tail = normal_cdf(w - sd) + normal_cdf(sd * std::f64::consts::FRAC_1_SQRT_2) - 1.0;
    libm::exp(y) * (2.0 * normal_cdf(w) - 1.0) - 2.0 * libm::exp(mean + 0.5 * sd * sd) * tail
}

fn compared(all: &[Fitted]) -> Candidates {
    let own = &all[0];
    let (mut pairs, mut time, mut lower, mut upper, mut base) =
        (Vec::new(), Vec::new(), Vec::new(), Vec::new(), Vec::new());
    if let (Some(cohort), Some(fit)) = (&own.cohort, &own.fit) {
        let evaluation = Evaluation::new(&own.plan, cohort, fit, None);
        for d in evaluation.differences() {
            pairs.push([d.from.clone(), d.to.clone()]);
            time.clone_from(&d.grid.time);
            lower.push(d.grid.lower);
            upper.push(d.grid.upper);
            base.push((d.grid.estimate, d.grid.se));
        }
    }
    let models: Vec<Candidate> = all.iter().map(|one| candidate(one, own, &base)).collect();
    let (proposed, reason) = propose(&models);
    Candidates { models, pairs, time, lower, upper, proposed, reason }
}

type Gap = (Vec<Option<f64>>, Vec<Option<f64>>);

fn candidate(one: &Fitted, own: &Fitted, base: &[Gap]) -> Candidate {
    let same_scale = one.plan.response == own.plan.response;
    let gaps: Vec<Vec<Option<f64>>> = match (&one.cohort, &one.fit) {
        (Some(cohort), Some(fit)) => Evaluation::new(&one.plan, cohort, fit, None).gaps_on_scale(own.plan.is_ratio()),
        _ => Vec::new(),
    };
    let moves = (!gaps.is_empty()).then(|| largest_move(&gaps, base));
    let difference = |a: Option<f64>, b: Option<f64>| Some(a? - b?);
    let aic = if same_scale { difference(one.aic, own.aic) } else { None };
    let (score, score_se) = score_difference(&one.scores, &own.scores);
    let fitted = one.fit.is_some();
    let mut result = Candidate {
        name: one.name.clone(),
        plan: one.plan.clone(),
        fitted,
        aic,
        score,
        score_se,
        gaps,
        moves,
        sentence: String::new(),
    };
    result.sentence = sentence(&result);
    result
}

fn largest_move(gaps: &[Vec<Option<f64>>], base: &[Gap]) -> f64 {
    let mut largest = 0.0_f64;
    for (gap, (estimate, se)) in gaps.iter().zip(base) {
        for ((g, e), s) in gap.iter().zip(estimate).zip(se) {
            if let (Some(g), Some(e), Some(s)) = (g, e, s)
                && *s > 0.0
            {
                largest = largest.max((g - e).abs() / s);
            }
        }
    }
    largest
}

fn score_difference(scores: &[f64], own: &[f64]) -> (Option<f64>, Option<f64>) {
    if scores.len() != own.len() || own.len() < 2 {
        return (None, None);
    }
    let n = own.len() as f64;
    let each: Vec<f64> = scores.iter().zip(own).map(|(a, b)| a - b).collect();
    let mean = each.iter().sum::<f64>() / n;
    let square = each.iter().map(|d| (d - mean) * (d - mean)).sum::<f64>() / (n - 1.0);
    (Some(mean), Some(libm::sqrt(square / n)))
}

fn sentence(c: &Candidate) -> String {
    if !c.fitted {
        return "Its fit failed, so it says nothing.".into();
    }
    if c.name == "the plan" {
        return "What is in use.".into();
    }
    let foresees = match (c.score, c.score_se) {
        (Some(score), Some(se)) if score.abs() <= se || se == 0.0 => "foresees new subjects about as well",
        (Some(score), _) if score < 0.0 => "foresees new subjects better",
        (Some(_), _) => "foresees new subjects worse",
        _ => "was not tried on new subjects",
    };
    let weighs = match c.aic {
        Some(aic) if aic < -2.0 => format!("; fits better for its size (by {} in Akaike's criterion)", number(-aic, 1)),
        Some(aic) if aic > 2.0 => format!("; fits worse for its size (by {} in Akaike's criterion)", number(aic, 1)),
        Some(_) => "; fits about as well for its size".into(),
        None => String::new(),
    };
    let moves = match c.moves {
        Some(moves) => format!("; gaps move by at most {} of their standard errors", number(moves, 1)),
        None => String::new(),
    };
    let text = format!("{foresees}{weighs}{moves}.");
    text[..1].to_uppercase() + &text[1..]
}

/// The model to propose: one that foresees clearly better, else one of the same scale that fits clearly better for
/// its size without foreseeing worse, else the plan's own. "Clearly" allows for the number of models looked at
/// (Bonferroni at 5 %, normal limit); a difference of 6 in Akaike's criterion is common practice, no source.
fn propose(models: &[Candidate]) -> (usize, String) {
    let gain = |c: &Candidate| match (c.score, c.score_se) {
        (Some(score), Some(se)) if se > 0.0 => -score / se,
        _ => 0.0,
    };
    let looked_at = models.iter().skip(1).filter(|c| c.score.is_some()).count().max(1);
    let clear = normal_quantile(1.0 - 0.025 / looked_at as f64);
    let best = (1..models.len()).filter(|&k| models[k].fitted && gain(&models[k]) > clear);
    if let Some(k) = best.max_by(|&a, &b| gain(&models[a]).total_cmp(&gain(&models[b]))) {
        let text = format!(
            "{} foresees subjects that it has not seen clearly better than the plan: by {} standard errors, more than the {} that              looking at {looked_at} models asks for.",
            models[k].name,
            number(gain(&models[k]), 1),
            number(clear, 1)
        );
        return (k, capital(&text));
    }
    let better = (1..models.len()).filter(|&k| models[k].aic.is_some_and(|aic| aic < -6.0) && gain(&models[k]) > -1.0);
    let by_aic = |&a: &usize, &b: &usize| models[a].aic.unwrap_or(0.0).total_cmp(&models[b].aic.unwrap_or(0.0));
    if let Some(k) = better.min_by(by_aic) {
        let text = format!("{} fits clearly better for its size than the plan and foresees no worse.", models[k].name);
        return (k, capital(&text));
    }
    let text = format!("None of the {looked_at} foresees or fits clearly better than the plan: it can stay.");
    (0, text)
}

#[cfg(test)]
mod tests {
    use super::*;
    use courseband_engine::special::Rng;
    use std::fmt::Write;

    /// Both scores against their definition, the integral of (F(x) - 1{x >= y})^2, by the midpoint rule.
    #[test]
    fn scores_equal_their_definition() {
        for (mean, sd, y) in [(1.0, 0.5, 1.3), (0.2, 0.8, -0.9), (2.0, 0.3, 2.0)] {
            let integral = |cdf: &dyn Fn(f64) -> f64, at: f64, low: f64, high: f64| {
                let steps = 400_000;
                let h = (high - low) / f64::from(steps);
                let part = |k: i32| {
                    let x = low + (f64::from(k) + 0.5) * h;
                    let step = if x >= at { 1.0 } else { 0.0 };
                    (cdf(x) - step) * (cdf(x) - step) * h
                };
                (0..steps).map(part).sum::<f64>()
            };
            let plain = integral(&|x| normal_cdf((x - mean) / sd), y, -12.0, 12.0);
            assert!((normal_score(mean, sd, y) - plain).abs() < 1e-4, "{plain}");
            let log = integral(&|x| normal_cdf((x.ln() - mean) / sd), y.exp(), 0.0, 150.0);
            assert!((log_normal_score(mean, sd, y) - log).abs() < 2e-3, "{} {log}", log_normal_score(mean, sd, y));
        }
    }

    /// Simulated values score like the distribution that they come from.
    #[test]
    fn simulated_values_score_like_their_distribution() {
        let mut rng = Rng::new(9);
        let values: Vec<f64> = (0..20_000).map(|_| 1.0 + 0.5 * rng.normal()).collect();
        let one = ForeseenValues { subject: 0, values: vec![values], response: vec![1.3] };
        assert!((simulated_score(&one) - normal_score(1.0, 0.5, 1.3)).abs() < 3e-3);
    }

    fn table(bent: bool, serial: bool) -> String {
        let mut rng = Rng::new(3);
        let mut text = String::from("who,arm,day,size\n");
        for s in 0..30 {
            let (level, mut state) = (rng.normal(), rng.normal());
            for day in 0..10 {
                state = if serial { 0.8 * state + 0.6 * rng.normal() } else { rng.normal() };
                let t = f64::from(day);
                let mean = if bent { 20.0 + 3.0 * libm::sin(t / 1.5) } else { 20.0 + t };
                let _ = writeln!(text, "s{s},{},{day},{:.3}", ["a", "b"][s as usize % 2], mean + level + 0.5 * state);
            }
        }
        text
    }

    fn of(table: &str, plan: &str) -> Candidates {
        Study::open(table.as_bytes()).unwrap().candidates(&Plan::from_json(plan).unwrap()).unwrap()
    }

    #[test]
    fn a_wrong_plan_is_told_so_and_a_right_one_can_stay() {
        let straight = of(&table(true, false), r#"{"curves": {"shape": "straight"}}"#);
        assert_eq!(straight.models[straight.proposed].plan.curves.shape, Shape::Smooth, "{}", straight.reason);
        assert!(straight.models[straight.proposed].moves.is_some());
        let serial = of(&table(false, true), "{}");
        assert_eq!(serial.models[serial.proposed].plan.errors.serial, Serial::Ar1, "{}", serial.reason);
        let right = of(&table(true, false), "{}");
        assert_eq!(right.proposed, 0, "{}", right.reason);
        let log = right.models.iter().find(|m| m.name == "a log scale").unwrap();
        assert!(log.aic.is_none() && log.gaps.len() == 1 && log.score.is_some());
        // Another scale, put on the plan's: about the same gap.
        assert!(log.moves.unwrap() < 1.5, "{:?}", log.moves);
        let gamma = right.models.iter().find(|m| m.name.starts_with("gamma")).unwrap();
        assert!(gamma.aic.is_none() && gamma.score.is_some() && gamma.moves.unwrap() < 1.5, "{gamma:?}");
    }
}
