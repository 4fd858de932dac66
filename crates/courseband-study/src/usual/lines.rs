//! Straight-line mixed model: the plan's model with lines for courses.

use super::beside::{DayOutcome, Manner, compare, compare_tests, curves_apart_at, nothing};
use super::context::{Context, Gap};
use super::days::DayGap;
use super::findings::*;
use super::print::*;
use crate::evaluate::Evaluation;
use crate::findings::{Difference, FitStatus};
use crate::plan::{Plan, Shape, SmallSample, Smoothness, SubjectEffects};
use crate::sentences::{joined, number};
use courseband_engine as engine;
use courseband_engine::special::{chi2_sf, t_quantile};
use courseband_engine::usual::holm;
use courseband_engine::{Fit, Posterior, fit};

const KIND: UsualKind = UsualKind::StraightLines;
const NAME: &str = "Straight-line mixed model";

/// How much better curved courses fit than straight ones.
pub(super) struct Bend {
    /// Rise of the log restricted likelihood from straight to curved.
    gain: f64,
    pub(super) p: f64,
    /// By group; a line has 2.
    effective_df: Vec<(String, f64)>,
}

impl Bend {
    /// None where either cannot be fitted.
    pub(super) fn new(context: &Context, straight: f64) -> Option<Bend> {
        let by_plan = &context.findings.fit;
        let smooth_plan = context.plan.curves.shape == Shape::Smooth;
        let (curved, effective_df) = if smooth_plan && by_plan.status != FitStatus::Failed {
            (by_plan.log_reml?, by_plan.effective_df.0.clone())
        } else {
            let shape = engine::Shape::Smooth(engine::Basis::Cubic, engine::Dimension::Auto);
            let fitted =
                fit(&context.cohort.data, &engine::Model { shape, ..context.cohort.model(context.plan) }).ok()?;
            let groups = context.cohort.groups.iter().enumerate();
            (fitted.log_reml(), groups.map(|(g, info)| (info.name.clone(), fitted.effective_df(g))).collect())
        };
        let smoothed = if context.plan.curves.smoothness == Smoothness::Shared { 1 } else { effective_df.len() };
        let gain = (curved - straight).max(0.0);
        Some(Bend { gain, p: mixture_tail(2.0 * gain, smoothed), effective_df })
    }

    fn said(&self) -> String {
        let df: Vec<String> = self.effective_df.iter().map(|(name, df)| format!("{name} {}", number(*df, 1))).collect();
        format!(
            "Curved courses raise the log restricted likelihood by {} ({}); effective degrees of freedom {}, where a line has 2.",
            number(self.gain, 2),
            p_said(self.p),
            joined(&df)
        )
    }
}

/// Tail of the mixture of chi-squared distributions with 0 to k degrees of freedom, binomial weights: k variances at
/// their bound of zero (Self & Liang 1987, JASA 82:605). Conservative for smoothing variances (Crainiceanu & Ruppert
/// 2004, JRSS-B 66:165).
fn mixture_tail(statistic: f64, variances: usize) -> f64 {
    if statistic <= 0.0 {
        return 1.0;
    }
    let mut weight = 1.0;
    (0..variances).for_each(|_| weight *= 0.5);
    let mut tail = 0.0;
    for j in 1..=variances {
        weight *= (variances + 1 - j) as f64 / j as f64;
        tail += weight * chi2_sf(statistic, j as f64);
    }
    tail
}

/// How much better lines fit whose slopes differ from subject to subject, where the plan has a level only.
struct Trends {
    gain: f64,
    p: f64,
}

impl Trends {
    fn new(context: &Context, straight: f64) -> Option<Trends> {
        if context.plan.subjects != SubjectEffects::Intercept {
            return None;
        }
        let subjects = engine::SubjectEffects::Slope;
        let model = engine::Model { shape: engine::Shape::Straight, subjects, ..context.cohort.model(context.plan) };
        let gain = (fit(&context.cohort.data, &model).ok()?.log_reml() - straight).max(0.0);
        // A variance at its bound and a covariance: Stram & Lee 1994, Biometrics 50:1171.
        let p = if gain > 0.0 { 0.5 * (chi2_sf(2.0 * gain, 1.0) + chi2_sf(2.0 * gain, 2.0)) } else { 1.0 };
        Some(Trends { gain, p })
    }
}

fn assumption(context: &Context) -> String {
    format!(
        "Every group's course is a straight line{}; the rest as in the plan.",
        if context.is_log() { " on the log scale" } else { "" }
    )
}

/// The analysis, and how much better curves fit.
pub(super) fn analyse(context: &Context) -> (UsualAnalysis, Option<Bend>) {
    let mut plan = context.plan.clone();
    plan.curves.shape = Shape::Straight;
    plan.comparisons.small_sample = SmallSample::Df;
    plan.grid.count = 2;
    let fitted = match fit(&context.cohort.data, &context.cohort.model(&plan)) {
        Ok(fitted) => fitted,
        Err(error) => {
            let why = crate::remarks::failure(&error, &context.cohort.groups);
            return (context.refused(KIND, NAME, assumption(context), why), None);
        }
    };
    let differences = Evaluation::new(&plan, context.cohort, &fitted, None).differences();
    let bend = Bend::new(context, fitted.log_reml());
    let trends = Trends::new(context, fitted.log_reml());
    let posterior = fitted.corrected();
    let slopes = Slopes::new(context, &fitted, &posterior);
    let analysis = UsualAnalysis {
        kind: KIND,
        name: NAME.into(),
        done: true,
        result: slopes.result(context),
        tables: slopes.tables(context),
        assumption: assumption(context),
        bearing: bearing(context, &bend, &trends),
        beside: beside(context, &slopes, &outcomes(context, &plan, &differences)),
        used: context.used(context.cohort.data.subjects.len(), context.cohort.data.rows()),
        lines: lines(context, &fitted, &posterior),
    };
    (analysis, bend)
}

/// Slopes per time unit, on the modelled scale.
struct Slopes {
    groups: Vec<DayGap>,
    /// By pair, with the p-value adjusted over the pairs.
    pairs: Vec<(DayGap, f64)>,
}

impl Slopes {
    fn new(context: &Context, fitted: &Fit, posterior: &Posterior) -> Slopes {
        let at = context.cohort.visits[0];
        let estimate = |contrast| {
            let e = posterior.estimate(&contrast);
            DayGap::new(e.mean, e.se, e.df, context.level())
        };
        let groups = (0..context.cohort.groups.len()).map(|g| estimate(fitted.rate(g, at))).collect();
        let gap = |&(from, to): &(usize, usize)| estimate(fitted.rate(to, at).plus(-1.0, &fitted.rate(from, at)));
        let pairs: Vec<DayGap> = context.pairs.iter().map(gap).collect();
        let adjusted = holm(&pairs.iter().map(|g| g.p).collect::<Vec<f64>>());
        Slopes { groups, pairs: pairs.into_iter().zip(adjusted).collect() }
    }

    fn result(&self, context: &Context) -> String {
        let word = unit(context.time_word());
        let say = |(&(from, to), (g, p_holm)): (&(usize, usize), &(DayGap, f64))| {
            let (from, to) = (context.group(from), context.group(to));
            let test = t_said(g.estimate / g.se, g.df, g.p);
            let holm = if self.pairs.len() > 1 { format!(", adjusted {}", p_said(*p_holm)) } else { String::new() };
            let shown = if *p_holm < context.alpha() { "differ" } else { "are not shown to differ" };
            format!(
                "The slopes of {to} and {from} {shown}: per {word} {}, {test}{holm}.",
                slope_said(context, g.said(), from, to)
            )
        };
        let mut said: Vec<String> = context.pairs.iter().zip(&self.pairs).take(3).map(say).collect();
        if self.pairs.len() > 3 {
            said.push(format!("{} in the table.", counted(self.pairs.len() - 3, "more pair", "more pairs")));
        }
        if self.pairs.is_empty() {
            let g = &self.groups[0];
            said.push(format!(
                "The slope per {word} is {}, {}.",
                number(g.estimate, crate::sentences::decimals(g.se) + 1),
                t_said(g.estimate / g.se, g.df, g.p)
            ));
        }
        said.join(" ")
    }

    fn tables(&self, context: &Context) -> Vec<UsualTable> {
        let word = unit(context.time_word());
        let cells = |g: &DayGap| {
            let mut cells = context.gap_cells(g.said(), g.se);
            cells.extend([df_cell(g.df), fixed(g.estimate / g.se, 2), p_cell(g.p)]);
            cells
        };
        let head = if context.is_log() { format!("Factor per {word}") } else { format!("Slope per {word}") };
        let columns = [head.as_str(), "Lower", "Upper", context.se_head(), "df", "t", "p"];
        let groups = UsualTable {
            title: "Slopes".into(),
            label_heads: heads(&["Group"]),
            heads: heads(&columns),
            rows: (self.groups.iter().enumerate()).map(|(k, g)| row(&[context.group(k)], cells(g))).collect(),
            note: String::new(),
        };
        let with_holm = |(&(from, to), (g, p_holm)): (&(usize, usize), &(DayGap, f64))| {
            let mut cells = cells(g);
            cells.push(p_cell(*p_holm));
            row(&[context.group(from), context.group(to)], cells)
        };
        let gap_head = if context.is_log() {
            format!("Ratio of factors per {word}")
        } else {
            format!("Slope difference per {word}")
        };
        let columns = [gap_head.as_str(), "Lower", "Upper", context.se_head(), "df", "t", "p", "p, Holm"];
        let pairs = UsualTable {
            title: "Differences of slopes".into(),
            label_heads: heads(&["From", "To"]),
            heads: heads(&columns),
            rows: context.pairs.iter().zip(&self.pairs).map(with_holm).collect(),
            note: "Degrees of freedom by Satterthwaite's rule.".into(),
        };
        if self.pairs.is_empty() { vec![groups] } else { vec![groups, pairs] }
    }
}

/// `Gel changes 1.23 less than Saline (difference -1.50 to -0.96)`, `Gel's factor is 95 % of Saline's (93 % to 97 %)`.
fn slope_said(context: &Context, gap: Gap, from: &str, to: &str) -> String {
    if context.is_log() {
        return format!("{to}'s factor is {}", context.gap_said(gap, &format!("{from}'s")));
    }
    let digits = crate::sentences::decimals(gap.upper - gap.lower);
    let word = if gap.estimate >= 0.0 { "more" } else { "less" };
    format!(
        "{to} changes {} {word} than {from} (difference {} to {})",
        number(gap.estimate.abs(), digits),
        number(gap.lower, digits),
        number(gap.upper, digits)
    )
}

fn bearing(context: &Context, bend: &Option<Bend>, trends: &Option<Trends>) -> Bearing {
    let Some(bend) = bend else {
        let sentence =
            "Curved courses could not be fitted, so it is not checked whether the courses are straight.".into();
        return Bearing { verdict: Borne::Unknown, sentence, numbers: Vec::new() };
    };
    let (mut verdict, lead) = match bend.p {
        p if p < 0.05 => (Borne::No, "The courses bend."),
        p if p < 0.2 => (Borne::Doubtful, "The courses may bend."),
        _ => (Borne::Yes, "The data show no bend."),
    };
    let mut numbers = vec![named("Gain in log restricted likelihood", fixed(bend.gain, 2)), named("p", p_cell(bend.p))];
    numbers.extend(bend.effective_df.iter().map(|(name, df)| named(&format!("Effective df, {name}"), fixed(*df, 1))));
    let mut sentence = format!("{lead} {}", bend.said());
    if let Some(trends) = trends {
        numbers.push(named("p of slopes that differ within groups", p_cell(trends.p)));
        if trends.p < 0.05 {
            verdict = Borne::No;
            let words = &context.plan.words;
            sentence.push_str(&format!(
                " Slopes differ from {} to {}, which the plan leaves out (log restricted likelihood rises by {}, {}): with \
                 levels only the slope tests are too sure.",
                words.subject,
                words.subject,
                number(trends.gain, 2),
                p_said(trends.p)
            ));
        }
    }
    Bearing { verdict, sentence, numbers }
}

/// What the lines say at the visits; apart by their own band.
fn outcomes(context: &Context, plan: &Plan, differences: &[Difference]) -> Vec<Vec<DayOutcome>> {
    let level = plan.comparisons.level;
    let of_pair = |d: &Difference| {
        let points = &d.at_visits;
        let outcome = |(k, &time): (usize, &f64)| {
            let (estimate, se) = (points.estimate[k]?, points.se[k]?);
            let alone = estimate.abs() > t_quantile(0.5 + 0.5 * level, points.df[k].unwrap_or(f64::INFINITY)) * se;
            Some(DayOutcome { time, estimate, se, apart: curves_apart_at(d, time), apart_alone: alone })
        };
        points.time.iter().enumerate().filter_map(outcome).collect()
    };
    debug_assert_eq!(differences.len(), context.pairs.len());
    differences.iter().map(of_pair).collect()
}

fn beside(context: &Context, slopes: &Slopes, outcomes: &[Vec<DayOutcome>]) -> Beside {
    if context.pairs.is_empty() {
        return nothing("There is one group, so nothing is compared.");
    }
    let mut beside = compare(context, outcomes, Manner::Lines);
    if context.plan.curves.shape == Shape::Straight {
        beside.sentence = format!("The plan's own courses are straight lines. {}", beside.sentence);
        return beside;
    }
    let tests = slopes.pairs.iter().enumerate().filter_map(|(k, (g, _))| {
        let (from, to) = context.pairs[k];
        let question = format!("A gap of {} and {} that changes over time", context.group(to), context.group(from));
        Some(compare_tests(context.alpha(), &question, g.p, context.effects(k)?.shape_p?))
    });
    let differ: Vec<String> = tests.filter(|(agree, _)| !agree).map(|(_, said)| said).take(3).collect();
    if !differ.is_empty() {
        beside.agrees = Some(false);
        beside.sentence.push_str(&format!(
            " {} (slopes, before Holm's correction). The curves also see gaps that come and go; the slopes only steady ones.",
            differ.join("; ")
        ));
    }
    beside
}

fn lines(context: &Context, fitted: &Fit, posterior: &Posterior) -> Vec<UsualLine> {
    let points = if context.is_log() { 41 } else { 2 };
    let line = |(g, info): (usize, &crate::findings::GroupInfo)| {
        let [start, end] = context.cohort.supports[g];
        let time: Vec<f64> = (0..points).map(|k| start + (end - start) * k as f64 / (points - 1) as f64).collect();
        let mean = |&t: &f64| context.back(posterior.estimate(&fitted.course(g, t)).mean);
        UsualLine { group: info.name.clone(), response_mean: time.iter().map(mean).collect(), time }
    };
    context.cohort.groups.iter().enumerate().map(line).collect()
}

#[cfg(test)]
mod tests {
    use super::mixture_tail;
    use courseband_engine::special::chi2_sf;

    #[test]
    fn mixture_of_chi_squared_distributions() {
        // By hand: half of chi-squared 1; a half of 1 and a quarter of 2 degrees of freedom.
        assert!((mixture_tail(2.7, 1) - 0.5 * chi2_sf(2.7, 1.0)).abs() < 1e-15);
        assert!((mixture_tail(2.7, 2) - 0.5 * chi2_sf(2.7, 1.0) - 0.25 * chi2_sf(2.7, 2.0)).abs() < 1e-15);
        assert_eq!(mixture_tail(0.0, 3), 1.0);
    }
}
