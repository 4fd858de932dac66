//! A table held open in a worker.

use crate::refused::Refused;
use crate::wire;
use courseband_study::{Calibrator, Plan, Study};
use courseband_table::Observations;
use wasm_bindgen::prelude::wasm_bindgen;

/// Rows of the table that a preview shows.
const PREVIEW_ROWS: usize = 200;

/// A table held open, with the answers to one plan after another.
///
/// Plans and answers are JSON text. Every method but `open` needs a table.
#[wasm_bindgen]
#[derive(Default)]
pub struct Session {
    open: Option<Study>,
    /// The plan of the last run.
    last: Option<Plan>,
    calibrator: Option<(String, Option<Calibrator>)>,
}

#[wasm_bindgen]
impl Session {
    /// A session without a table.
    #[wasm_bindgen(constructor)]
    #[must_use]
    pub fn new() -> Session {
        Session::default()
    }

    /// Reads a table from the bytes of a file or of pasted text. The table before it is given up.
    ///
    /// # Errors
    /// Bytes that are no table.
    pub fn open(&mut self, bytes: &[u8]) -> Result<(), Refused> {
        (self.open, self.last, self.calibrator) = (None, None, None);
        self.open = Some(Study::open(bytes)?);
        Ok(())
    }

    /// The table as it was read under a plan: columns with roles and reasons, first rows, problems,
    /// questions and notes; and why it cannot be used as asked, where that is so.
    ///
    /// # Errors
    /// A plan that cannot be read.
    pub fn preview(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        let outcome = study.reading(&plan).err();
        let (table, sheets) = (study.table(), study.sheets());
        let preview = match (outcome, study.kept_reading()) {
            (None, Some(reading)) => wire::Preview::new(table, sheets, PREVIEW_ROWS, reading, None),
            (refusal, _) => {
                let outline = table.outline(&plan.request());
                let message = refusal.map(|refusal| refusal.message);
                wire::Preview::new(table, sheets, PREVIEW_ROWS, &outline, message)
            }
        };
        wire::text(&preview)
    }

    /// Count, mean, standard deviation and median of each group at each time, and the lines with
    /// values that a log scale cannot take. Empty where the table cannot be used as asked.
    ///
    /// # Errors
    /// A plan that cannot be read.
    pub fn describe(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        match study.reading(&plan) {
            Ok(reading) => wire::text(&wire::Description::new(&reading.observations)),
            Err(_) => wire::text(&wire::Description::new(&Observations::default())),
        }
    }

    /// Findings under a plan.
    ///
    /// # Errors
    /// A plan that cannot be read, a table that cannot be used as asked, and questions that need an answer first.
    pub fn run(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        let findings = wire::text(&study.run(&plan)?)?;
        self.last = Some(plan);
        Ok(findings)
    }

    /// The subjects' own courses under the plan of the last run, as the drawing takes them.
    ///
    /// # Errors
    /// Without a run before it.
    pub fn traces(&mut self) -> Result<String, Refused> {
        match (&mut self.open, &self.last) {
            (Some(study), Some(plan)) => wire::text(&study.traces(plan)?),
            _ => Err(Refused::page("There are no courses before a run.")),
        }
    }

    /// Refits number `first` to `first + count` of a plan's calibration, as JSON for
    /// [`Session::run_calibrated`]. Chunks may come from several workers, in any order. An empty
    /// text where nothing can be calibrated.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn refits(&mut self, plan: &str, first: u32, count: u32) -> Result<String, Refused> {
        if self.calibrator.as_ref().is_none_or(|(of, _)| of != plan) {
            let (study, parsed) = self.with(plan)?;
            let calibrator = study.calibration(&parsed)?;
            self.calibrator = Some((plan.to_owned(), calibrator));
        }
        match &self.calibrator {
            Some((_, Some(calibrator))) => {
                wire::text(&wire::Refits::from(&calibrator.refits(u64::from(first), u64::from(count))))
            }
            _ => Ok(String::new()),
        }
    }

    /// Findings with the critical values that refits gave. `refits` is a JSON list of what
    /// [`Session::refits`] returned.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn run_calibrated(&mut self, plan: &str, refits: &str) -> Result<String, Refused> {
        let all = wire::all_refits(refits)?;
        let (study, plan) = self.with(plan)?;
        wire::text(&study.run_calibrated(&plan, &all)?)
    }
}

impl Session {
    pub(crate) fn with(&mut self, plan: &str) -> Result<(&mut Study, Plan), Refused> {
        let plan = Plan::from_json(plan)?;
        match &mut self.open {
            Some(study) => Ok((study, plan)),
            None => Err(Refused::page("There is no table yet. Paste or choose one first.")),
        }
    }
}
