//! A table held open, and the way from a plan to its findings.

use crate::cohort::{Cohort, columns_used, problems};
use crate::evaluate::{CalibratedValues, Evaluation};
use crate::findings::*;
use crate::plan::{BandKind, Distribution, MarginUnit, Plan, Serial, SmallSample};
use crate::refusal::Refusal;
use crate::{adjust, remarks, sentences};
use courseband_engine::{Calibration, Fit, FitError, Verdict, calibrated_quantile, fit};
use courseband_table::{Reading, Table, TableError, Workbook};

/// A table held open. The last reading is kept, so that a change of the model does not read the table again.
#[derive(Debug)]
pub struct Study {
    table: Table,
    /// Where the table stands on a sheet: its workbook, with the sheet and cells asked for.
    workbook: Option<Workbook>,
    shown: (Option<String>, Option<String>),
    kept: Option<(Plan, Reading)>,
}

impl Study {
    /// Reads a table.
    ///
    /// # Errors
    /// Bytes that are no table.
    pub fn open(bytes: &[u8]) -> Result<Study, Refusal> {
        let workbook = Workbook::open(bytes)?;
        let table = match &workbook {
            Some(workbook) => workbook.table(None, None)?,
            None => Table::read(bytes)?,
        };
        Ok(Study { table, workbook, shown: (None, None), kept: None })
    }

    /// Names of the workbook's sheets; none where the table is text.
    #[must_use]
    pub fn sheets(&self) -> &[String] {
        self.workbook.as_ref().map_or(&[], Workbook::sheets)
    }

    /// Turns to the sheet and cells that a plan names.
    fn turn_to(&mut self, plan: &Plan) -> Result<(), Refusal> {
        let asked = (plan.reading.sheet.clone(), plan.reading.cells.clone());
        if asked == self.shown {
            return Ok(());
        }
        let Some(workbook) = &self.workbook else { return Err(TableError::NotWorkbook.into()) };
        self.table = workbook.table(asked.0.as_deref(), asked.1.as_deref())?;
        (self.shown, self.kept) = (asked, None);
        Ok(())
    }

    /// The table as read.
    #[must_use]
    pub fn table(&self) -> &Table {
        &self.table
    }

    /// Observations, problems and questions under a plan.
    ///
    /// # Errors
    /// What makes the table unusable as asked.
    pub fn reading(&mut self, plan: &Plan) -> Result<&Reading, Refusal> {
        self.turn_to(plan)?;
        let same = |kept: &Plan| {
            kept.columns == plan.columns
                && kept.exclusions == plan.exclusions
                && kept.reading == plan.reading
                && kept.response.detection == plan.response.detection
        };
        if !self.kept.as_ref().is_some_and(|(kept, _)| same(kept)) {
            self.kept = None;
            let mut reading = self.table.observe(&plan.request())?;
            if reading.open_question().is_none() {
                crate::factors::settle(&mut reading.observations, plan)?;
            }
            self.kept = Some((plan.clone(), reading));
        }
        match &self.kept {
            Some((_, reading)) => Ok(reading),
            None => Err(Refusal::table("The table could not be read.")),
        }
    }

    /// The last reading, if it could be made.
    #[must_use]
    pub fn kept_reading(&self) -> Option<&Reading> {
        self.kept.as_ref().map(|(_, reading)| reading)
    }

    /// Findings under a plan.
    ///
    /// # Errors
    /// A plan or table that cannot be used. A fit that fails is no error: see [`FitStatus::Failed`].
    pub fn run(&mut self, plan: &Plan) -> Result<Findings, Refusal> {
        plan.check()?;
        if plan.comparisons.small_sample == SmallSample::Calibrated
            && let Some(calibrator) = self.calibration(plan)?
        {
            let refits = calibrator.refits(0, plan.comparisons.refits as u64);
            return self.run_calibrated(plan, &refits);
        }
        find(self.answered(plan)?, plan, None)
    }
}

/// What refits of simulated tables gave, one pair of values per refit: the largest |error| / SE over all
/// courses, and over all compared gaps.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Refits {
    /// Over all courses; infinite where a refit failed.
    pub curves: Vec<f64>,
    /// Over all gaps.
    pub differences: Vec<f64>,
}

impl Refits {
    /// Adds the refits of another worker. The order does not matter.
    pub fn add(&mut self, other: &Refits) {
        self.curves.extend(&other.curves);
        self.differences.extend(&other.differences);
    }
}

/// A fit prepared for refits: see [`Study::calibration`].
#[derive(Debug)]
pub struct Calibrator(Calibration);

impl Calibrator {
    /// Refits number `first` up to `first + count`, the same whoever computes them.
    #[must_use]
    pub fn refits(&self, first: u64, count: u64) -> Refits {
        let mut refits = Refits::default();
        for index in first..first + count {
            let values = self.0.refit(index);
            refits.curves.push(values[0]);
            refits.differences.push(values[1]);
        }
        refits
    }
}

impl Study {
    /// Prepares the calibration of a plan's bands. `None` where the fit failed or nothing can be simulated.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn calibration(&mut self, plan: &Plan) -> Result<Option<Calibrator>, Refusal> {
        plan.check()?;
        let reading = self.answered(plan)?;
        let cohort = Cohort::new(reading, plan)?;
        let Ok(fitted) = fit(&cohort.data, &cohort.model(plan)) else {
            return Ok(None);
        };
        let families = Evaluation::new(plan, &cohort, &fitted, None).families();
        Ok(Calibration::new(fitted, families, plan.seed).map(Calibrator))
    }

    /// Findings with the critical values that refits gave.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn run_calibrated(&mut self, plan: &Plan, refits: &Refits) -> Result<Findings, Refusal> {
        plan.check()?;
        find(self.answered(plan)?, plan, Some(refits))
    }

    pub(crate) fn answered(&mut self, plan: &Plan) -> Result<&Reading, Refusal> {
        let reading = self.reading(plan)?;
        match reading.open_question() {
            Some(question) => Err(Refusal { about: "question", message: question.refusal() }),
            None => Ok(reading),
        }
    }
}

/// Findings of a table, given as the bytes of a file or of pasted text, under a plan.
///
/// # Errors
/// A plan or table that cannot be used.
pub fn run(bytes: &[u8], plan: &Plan) -> Result<Findings, Refusal> {
    plan.check()?;
    Study::open(bytes)?.run(plan)
}

fn find(reading: &Reading, plan: &Plan, refits: Option<&Refits>) -> Result<Findings, Refusal> {
    let cohort = Cohort::new(reading, plan)?;
    let columns = columns_used(reading);
    let ratio = plan.is_ratio();
    let scale = ScaleInfo {
        time_word: plan.words.time.clone().unwrap_or_else(|| reading.observations.time_word.clone()),
        response: adjust::called(
            plan,
            &plan.words.response.clone().or_else(|| columns.response.clone()).unwrap_or_default(),
        ),
        ratio,
        link: if plan.is_logit() {
            "logit"
        } else if ratio {
            "log"
        } else {
            "identity"
        },
    };
    let mut notes: Vec<Note> =
        reading.notes.iter().map(|message| Note { about: "table".into(), message: message.clone() }).collect();
    notes.extend(cohort.notes.iter().cloned());
    notes.extend(plan_notes(plan, &cohort));
    if cohort.has_limits() {
        let count = cohort.data.subjects.iter().flat_map(|s| &s.detail).filter(|d| d.abs() == 1.0).count();
        notes.push(Note {
            about: "fit".into(),
            message: format!(
                "{count} responses are limits beyond which the value lies (Tobin 1958). The likelihood is Laplace's approximation, \
                 and bands rest on degrees of freedom."
            ),
        });
    }
    let mut findings = Findings {
        version: env!("CARGO_PKG_VERSION").into(),
        rows: cohort.data.rows(),
        subjects: cohort.data.subjects.len(),
        columns,
        problems: problems(reading),
        fit: failed_summary(),
        curves: Vec::new(),
        rates: Vec::new(),
        proposal: crate::proposal::proposal(&cohort, plan),
        cells: cohort.cells.clone(),
        differences: Vec::new(),
        notes,
        plan: plan.clone(),
        groups: cohort.groups.clone(),
        visits: cohort.visits.clone(),
        scale,
        sentences: Vec::new(),
        pair_effects: Vec::new(),
        group_effects: Vec::new(),
        clusters: cohort.housing.summary.clone(),
        adjustments: cohort.adjustments.clone(),
        bends: Vec::new(),
        blocks: None,
    };
    match fit(&cohort.data, &cohort.model(plan)) {
        Ok(fitted) => fill(&mut findings, plan, &cohort, &fitted, refits),
        Err(error) => refuse_or_fail(&mut findings, &cohort, &error)?,
    }
    findings.sentences = sentences::write(&findings);
    Ok(findings)
}

fn failed_summary() -> FitSummary {
    FitSummary {
        status: FitStatus::Failed,
        log_reml: None,
        residual_sd: PerGroup::default(),
        dispersion: None,
        subject_covariance: Vec::new(),
        subject_covariance_by_group: Vec::new(),
        cluster_covariance: Vec::new(),
        serial_correlation: None,
        measurement_error_share: None,
        effective_df: PerGroup::default(),
        evaluations: 0,
        remarks: Vec::new(),
    }
}

fn fill(findings: &mut Findings, plan: &Plan, cohort: &Cohort, fitted: &Fit, refits: Option<&Refits>) {
    findings.fit = summary(plan, cohort, fitted);
    let calibrated = refits.and_then(|refits| calibrated_values(refits, plan, &mut findings.notes));
    let evaluation = Evaluation::new(plan, cohort, fitted, calibrated);
    findings.curves = evaluation.curves();
    findings.differences = evaluation.differences();
    if plan.comparisons.rates {
        findings.rates = evaluation.rates();
    }
    findings.pair_effects = evaluation.pair_effects(&findings.differences);
    findings.group_effects = evaluation.group_effects();
    evaluation.fill_adjustments(&mut findings.adjustments);
    (findings.bends, findings.blocks) = evaluation.runs();
    findings.notes.extend(findings.adjustments.iter().filter_map(|a| adjust::in_words(a, plan)));
    for remark in &findings.fit.remarks {
        findings.notes.push(Note { about: "fit".into(), message: remark.clone() });
    }
    findings.notes.extend(band_notes(plan, &evaluation, calibrated.is_some()));
}

/// Quantiles of the refits, with a note that says how sure they are. `None` where too many refits failed.
fn calibrated_values<'a>(refits: &'a Refits, plan: &Plan, notes: &mut Vec<Note>) -> Option<CalibratedValues<'a>> {
    let level = plan.comparisons.level;
    let failed = refits.differences.iter().chain(&refits.curves).filter(|x| x.is_infinite()).count();
    let values = |kept: &[f64]| {
        if kept.is_empty() { (f64::INFINITY, [f64::INFINITY; 2]) } else { calibrated_quantile(kept, level) }
    };
    let (curves, _) = values(&refits.curves);
    let (differences, reach) = values(&refits.differences);
    let count = refits.curves.len();
    if !curves.is_finite() || !differences.is_finite() {
        notes.push(Note {
            about: "bands".into(),
            message: format!("Calibration did not succeed: {failed} of {count} refits failed. The limits stay with degrees of freedom."),
        });
        return None;
    }
    notes.push(Note {
        about: "bands".into(),
        message: format!(
            "Calibrated: on {count} simulated tables with the same {} and visits the critical value for gaps is {differences:.3} \
             (Monte-Carlo range {:.3} to {:.3}; seed {}).",
            plan.words.subjects, reach[0], reach[1], plan.seed
        ),
    });
    Some(CalibratedValues { curves, differences, kept: &refits.differences })
}

fn summary(plan: &Plan, cohort: &Cohort, fitted: &Fit) -> FitSummary {
    let per_group = |f: &dyn Fn(usize) -> f64| {
        PerGroup(cohort.groups.iter().enumerate().map(|(g, info)| (info.name.clone(), f(g))).collect())
    };
    let normal = plan.response.distribution == Distribution::Normal;
    let by_group = plan.subjects_spread == crate::plan::Sharing::ByGroup;
    FitSummary {
        status: match fitted.verdict() {
            Verdict::Converged => FitStatus::Converged,
            Verdict::Boundary => FitStatus::Boundary,
        },
        log_reml: Some(fitted.log_reml()),
        residual_sd: if normal { per_group(&|g| fitted.residual_sd(g)) } else { PerGroup::default() },
        dispersion: fitted.dispersion(),
        subject_covariance: fitted.subject_covariance(0),
        subject_covariance_by_group: if by_group {
            (0..cohort.groups.len()).map(|g| fitted.subject_covariance(g)).collect()
        } else {
            Vec::new()
        },
        cluster_covariance: fitted.cluster_covariance(),
        serial_correlation: fitted.serial_correlation(),
        measurement_error_share: fitted.measurement_error_share(),
        effective_df: per_group(&|g| fitted.effective_df(g)),
        evaluations: fitted.evaluations(),
        remarks: fitted.remarks().iter().map(|r| remarks::in_words(*r, cohort, plan)).collect(),
    }
}

fn refuse_or_fail(findings: &mut Findings, cohort: &Cohort, error: &FitError) -> Result<(), Refusal> {
    let message = remarks::failure(error, &cohort.groups);
    findings.fit.remarks.push(message.clone());
    findings.notes.push(Note { about: "fit".into(), message });
    Ok(())
}

fn plan_notes(plan: &Plan, cohort: &Cohort) -> Vec<Note> {
    let mut notes = Vec::new();
    let mut say = |about: &str, message: String| notes.push(Note { about: about.into(), message });
    if plan.errors.nugget && plan.errors.serial == Serial::None {
        say(
            "fit",
            "Measurement error is set without serial correlation, where it has no part of its own: it is ignored."
                .into(),
        );
    }
    if let Some(message) = crate::families::note(plan) {
        say("fit", message);
    }
    let c = &plan.comparisons;
    if c.margin > 0.0 && c.margin_unit == MarginUnit::Response && plan.is_ratio() {
        say(
            "comparisons",
            format!(
                "The margin {} is taken on the log scale: ratios from {:.3} to {:.3}.",
                c.margin,
                libm::exp(-c.margin),
                libm::exp(c.margin)
            ),
        );
    }
    if cohort.groups.len() == 1 {
        say("comparisons", "There is one group, so nothing is compared.".into());
    }
    notes
}

fn band_notes(plan: &Plan, evaluation: &Evaluation, calibrated: bool) -> Vec<Note> {
    let c = &plan.comparisons;
    let percent = sentences::percent(c.level);
    let pairs = evaluation.comparisons().len();
    let reach = match (c.band, pairs) {
        (BandKind::Pointwise, _) => format!("{percent} bands hold at each time by itself, not over the whole course."),
        (BandKind::Simultaneous, 0 | 1) => format!("{percent} bands hold over the whole course at once."),
        (BandKind::Simultaneous, 2) => format!("{percent} bands hold over the whole course and both pairs at once."),
        (BandKind::Simultaneous, n) => format!("{percent} bands hold over the whole course and all {n} pairs at once."),
    };
    let small = match (c.small_sample, evaluation.is_corrected()) {
        (SmallSample::None, _) => {
            "Standard errors take the variance parameters as known, and limits use normal theory: too narrow in small samples.".into()
        }
        (_, true) => "For small samples, standard errors include the uncertainty of the variance parameters, and limits use \
                      t distributions with degrees of freedom by Satterthwaite's rule, which may differ over time."
            .to_string(),
        (_, false) => "The small-sample correction could not be computed here: limits use normal theory and are too narrow.".into(),
    };
    let mut messages = vec![reach];
    if !calibrated {
        messages.push(small);
    }
    messages.into_iter().map(|message| Note { about: "bands".into(), message }).collect()
}
