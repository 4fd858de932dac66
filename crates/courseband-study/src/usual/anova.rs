//! Repeated-measures analysis of variance on complete subjects.

use super::beside::{compare_tests, nothing};
use super::by_visit::ByVisit;
use super::context::Context;
use super::findings::*;
use super::print::*;
use courseband_engine::usual::{EffectTest, RepeatedAnova, Sphericity, Undefined, WithinTest, repeated_anova};

const KIND: UsualKind = UsualKind::RepeatedAnova;
const NAME: &str = "Repeated-measures ANOVA";

fn assumption(context: &Context) -> String {
    format!(
        "Complete {} only, gaps having nothing to do with the response; one covariance for all groups; differences between \
         any two visits vary alike (sphericity).",
        context.plan.words.subjects
    )
}

/// A reason in the words of the table.
pub(super) fn why(context: &Context, reason: Undefined) -> String {
    match reason {
        Undefined::TooFewValues { group, have, need } => {
            format!("{} has {have} where {need} are needed", context.group(group))
        }
        other => other.to_string(),
    }
}

pub(super) fn analyse(context: &Context, by_visit: Result<&ByVisit, &String>) -> UsualAnalysis {
    let refuse = |why: String| context.refused(KIND, NAME, assumption(context), why);
    let by_visit = match by_visit {
        Ok(by_visit) => by_visit,
        Err(why) => return refuse(why.clone()),
    };
    let anova = match repeated_anova(&by_visit.panel) {
        Ok(anova) => anova,
        Err(reason) => return refuse(not_done(context, by_visit, reason)),
    };
    let complete = |subject: &usize| by_visit.panel.values[*subject].iter().all(Option::is_some);
    let rows = (0..by_visit.panel.values.len()).filter(complete).map(|subject| by_visit.rows_of(subject)).sum();
    let used = context.used(anova.complete, rows);
    UsualAnalysis {
        kind: KIND,
        name: NAME.into(),
        done: true,
        result: result(context, &anova, used),
        tables: tables(context, &anova),
        assumption: assumption(context),
        bearing: bearing(context, &anova, used),
        beside: beside(context, &anova, used),
        used,
        lines: Vec::new(),
    }
}

fn not_done(context: &Context, by_visit: &ByVisit, reason: Undefined) -> String {
    let visits = by_visit.panel.times.len();
    let complete = by_visit.panel.values.iter().filter(|row| row.iter().all(Option::is_some)).count();
    format!(
        "It needs {} with a value at all {visits} visits. There are {complete} of {}: {}. The day-as-category model uses the \
         incomplete ones too.",
        context.plan.words.subjects,
        context.cohort.data.subjects.len(),
        why(context, reason)
    )
}

/// Degrees of freedom and p as corrected by Greenhouse and Geisser.
fn corrected_said(test: &WithinTest, sphericity: &Sphericity) -> String {
    let (e, epsilon) = (&test.effect, sphericity.greenhouse_geisser);
    f_said(e.f, epsilon * e.df, epsilon * e.df_error, test.p_greenhouse_geisser)
}

fn result(context: &Context, anova: &RepeatedAnova, used: Used) -> String {
    let alpha = context.alpha();
    let mut said = Vec::new();
    if let (Ok(test), Ok(sphericity)) = (&anova.groups_by_times, &anova.sphericity) {
        let shown = if test.p_greenhouse_geisser < alpha {
            "are shown not to run parallel"
        } else {
            "are not shown to differ in shape"
        };
        said.push(format!("The courses {shown}: groups by visits {}.", corrected_said(test, sphericity)));
    }
    match &anova.groups {
        Ok(e) => {
            let shown = if e.p < alpha { "are shown to differ" } else { "are not shown to differ" };
            said.push(format!("Averaged over visits the groups {shown}: {}.", f_said(e.f, e.df, e.df_error, e.p)));
        }
        Err(Undefined::OneGroup) if context.cohort.groups.len() == 1 => {}
        Err(reason) => said.push(format!("Groups are not tested: {}.", why(context, *reason))),
    }
    match (&anova.times, &anova.sphericity) {
        (Ok(test), Ok(sphericity)) => {
            let shown = if test.p_greenhouse_geisser < alpha { "is shown" } else { "is not shown" };
            said.push(format!("A change over visits {shown}: {}.", corrected_said(test, sphericity)));
        }
        (Err(reason), _) | (_, Err(reason)) => said.push(format!("Visits are not tested: {}.", why(context, *reason))),
    }
    if anova.sphericity.is_ok() {
        said.push("F of visits with Greenhouse and Geisser's correction.".into());
    }
    if used.dropped_rows > 0 {
        said.push(format!(
            "It uses {} with all visits and leaves out {} with {}.",
            context.subjects(used.subjects),
            context.subjects(used.dropped_subjects),
            counted(used.dropped_rows, "measurement", "measurements")
        ));
    }
    for (g, _) in anova.complete_by_group.iter().enumerate().filter(|(_, n)| **n == 0) {
        said.push(format!("{} has nobody with all visits and takes no part.", context.group(g)));
    }
    said.join(" ")
}

fn tables(context: &Context, anova: &RepeatedAnova) -> Vec<UsualTable> {
    let mut rows = Vec::new();
    if let Ok(e) = &anova.groups {
        let mut cells = effect_cells(e);
        cells.extend([no_cell(), no_cell()]);
        rows.push(row(&["Groups"], cells));
    }
    let unequal = anova.times_weighted.is_some();
    let mut within = |name: &str, test: &Result<WithinTest, Undefined>| {
        if let Ok(test) = test {
            let mut cells = effect_cells(&test.effect);
            cells.extend([p_cell(test.p_greenhouse_geisser), p_cell(test.p_huynh_feldt)]);
            rows.push(row(&[name], cells));
        }
    };
    within(if unequal { "Visits, groups weighted alike (type III)" } else { "Visits" }, &anova.times);
    if let Some(weighted) = &anova.times_weighted {
        within("Visits, groups weighted by size (type II)", weighted);
    }
    within("Groups by visits", &anova.groups_by_times);
    let complete: Vec<String> = (anova.complete_by_group.iter().enumerate())
        .map(|(g, n)| format!("{} {n} of {}", context.group(g), context.cohort.groups[g].subjects))
        .collect();
    let effects = UsualTable {
        title: "Analysis of variance".into(),
        label_heads: heads(&["Effect"]),
        heads: heads(&["SS", "df", "SS error", "df error", "F", "p", "p, Greenhouse-Geisser", "p, Huynh-Feldt"]),
        rows,
        note: format!("Complete {}: {}.", context.plan.words.subjects, complete.join(", ")),
    };
    let mut tables = vec![effects];
    tables.extend(anova.sphericity.ok().map(|s| sphericity_table(context, &s)));
    tables
}

fn effect_cells(e: &EffectTest) -> Vec<UsualCell> {
    let squares = |ss: f64| by_width(ss, ss / 10.0);
    vec![squares(e.ss), df_cell(e.df), squares(e.ss_error), df_cell(e.df_error), fixed(e.f, 2), p_cell(e.p)]
}

fn sphericity_table(context: &Context, s: &Sphericity) -> UsualTable {
    let mauchly = s.mauchly.ok();
    let note = match s.mauchly {
        Ok(_) => String::new(),
        Err(reason) => format!("Mauchly's test cannot be computed: {}.", why(context, reason)),
    };
    UsualTable {
        title: "Sphericity".into(),
        label_heads: heads(&["Of"]),
        heads: heads(&[
            "Mauchly's W",
            "df",
            "p",
            "Greenhouse-Geisser epsilon",
            "Huynh-Feldt epsilon (Lecoutre)",
            "Huynh-Feldt epsilon used",
            "Lower bound",
        ]),
        rows: vec![row(
            &["Differences between visits"],
            vec![
                maybe(mauchly.map(|m| m.w), |w| cell(w, small(w))),
                maybe(mauchly.map(|m| m.df), df_cell),
                maybe(mauchly.map(|m| m.p), p_cell),
                fixed(s.greenhouse_geisser, 3),
                maybe(s.huynh_feldt, |e| fixed(e, 3)),
                fixed(s.huynh_feldt_used, 3),
                fixed(s.lower_bound, 3),
            ],
        )],
        note,
    }
}

fn w_said(w: f64) -> String {
    let text = small(w);
    if text.starts_with('<') { format!("W {text}") } else { format!("W = {text}") }
}

fn bearing(context: &Context, anova: &RepeatedAnova, used: Used) -> Bearing {
    let mut numbers = vec![named("Share of subjects left out", {
        let whole = used.subjects + used.dropped_subjects;
        cell(used.dropped_subjects as f64 / whole as f64, share(used.dropped_subjects, whole))
    })];
    let (mut verdict, mut sentence) = match &anova.sphericity {
        Err(reason) => (Borne::Unknown, format!("Sphericity cannot be checked: {}.", why(context, *reason))),
        Ok(s) => {
            numbers.push(named("Greenhouse-Geisser epsilon", fixed(s.greenhouse_geisser, 3)));
            match s.mauchly {
                Ok(m) if m.p < 0.05 => (
                    Borne::No,
                    format!(
                        "Mauchly's test speaks against sphericity ({}, {}; epsilon {}): read the corrected p-values.",
                        w_said(m.w),
                        p_said(m.p),
                        crate::sentences::number(s.greenhouse_geisser, 2)
                    ),
                ),
                Ok(m) => (
                    Borne::Yes,
                    format!(
                        "Mauchly's test does not speak against sphericity ({}, {}), which with few subjects says little.",
                        w_said(m.w),
                        p_said(m.p)
                    ),
                ),
                Err(Undefined::TwoTimes) => (Borne::Yes, "With two visits sphericity holds by itself.".into()),
                Err(reason) => {
                    (Borne::Unknown, format!("Mauchly's test cannot be computed: {}.", why(context, reason)))
                }
            }
        }
    };
    if used.dropped_subjects > 0 {
        let whole = used.subjects + used.dropped_subjects;
        if 20 * used.dropped_subjects > whole && verdict != Borne::No {
            verdict = Borne::Doubtful;
        }
        sentence.push_str(&format!(
            " {} of {} ({}) are left out; if those left out fare differently, the result is biased.",
            used.dropped_subjects,
            context.subjects(whole),
            share(used.dropped_subjects, whole)
        ));
    }
    Bearing { verdict, sentence, numbers }
}

/// The overall tests against the smallest of the curves' own tests over the pairs.
fn beside(context: &Context, anova: &RepeatedAnova, used: Used) -> Beside {
    let alpha = context.alpha();
    let smallest = |p: &dyn Fn(usize) -> Option<f64>| {
        let all: Vec<f64> = (0..context.pairs.len()).filter_map(p).collect();
        let least = all.iter().copied().fold(f64::INFINITY, f64::min);
        // Bonferroni over the pairs: the analysis of variance asks about all groups at once.
        (!all.is_empty()).then(|| (least * all.len() as f64).min(1.0))
    };
    let mut questions = Vec::new();
    if let (Ok(test), Some(p)) = (&anova.groups_by_times, smallest(&|k| context.effects(k)?.shape_p)) {
        questions.push(compare_tests(alpha, "A gap that changes over time", test.p_greenhouse_geisser, p));
    }
    if let (Ok(test), Some(p)) = (&anova.groups, smallest(&|k| context.effects(k)?.level_p)) {
        questions.push(compare_tests(alpha, "a gap on average", test.p, p));
    }
    if questions.is_empty() {
        return nothing("There is nothing on the curves to compare it with.");
    }
    let agrees = questions.iter().all(|(agree, _)| *agree);
    let said: Vec<String> = questions.into_iter().map(|(_, text)| text).collect();
    let over = if context.pairs.len() > 1 { " (curves: smallest p over the pairs, times their number)" } else { "" };
    let mut sentence = format!("{}{over}. This analysis names no {}.", said.join("; "), context.time_word());
    if !agrees {
        let mut whys = Vec::new();
        if used.dropped_subjects > 0 {
            whys.push(format!("it rests on {} fewer", context.subjects(used.dropped_subjects)));
        }
        if context.cohort.groups.len() > 2 {
            whys.push("one F asks about all groups, the curves about each pair".to_string());
        }
        whys.push(
            "it gives all visits the same weight whatever the time between them, and does not smooth".to_string(),
        );
        sentence.push_str(&format!(" Why: {}.", crate::sentences::joined(&whys)));
    }
    Beside { agrees: Some(agrees), sentence, pairs: Vec::new() }
}
