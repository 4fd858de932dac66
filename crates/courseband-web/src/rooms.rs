//! What the rooms beyond the time courses ask of the worker: checks and sample size.

use crate::refused::Refused;
use crate::session::Session;
use crate::wire;
use courseband_study::{Counts, ReportContext, Sensitivity, SizeRequest};
use wasm_bindgen::prelude::wasm_bindgen;

#[wasm_bindgen]
impl Session {
    /// Checks of a plan's model against the table.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn checks(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.checks(&plan)?)
    }

    /// The usual analyses of the same rows.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn usual(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.usual(&plan)?)
    }

    /// Who leaves when.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn dropout(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.dropout(&plan)?)
    }

    /// Gaps when those who left are taken to go on as asked.
    ///
    /// # Errors
    /// As [`Session::run`], and rows that cannot be filled in.
    pub fn sensitivity(&mut self, plan: &str, asked: &str) -> Result<String, Refused> {
        let asked: Sensitivity = wire::parsed(asked, "assumption")?;
        let (study, plan) = self.with(plan)?;
        wire::text(&study.sensitivity(&plan, &asked)?)
    }

    /// Other models beside the plan's.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn candidates(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.candidates(&plan)?)
    }

    /// The report of a plan, composed in words. `refits` is a JSON list as for [`Session::run_calibrated`], or empty text;
    /// `context` is what the author did: see the study crate's `ReportContext`.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn report(&mut self, plan: &str, refits: &str, context: &str) -> Result<String, Refused> {
        let context: ReportContext = wire::parsed(context, "report's context")?;
        let refits = if refits.is_empty() { None } else { Some(wire::all_refits(refits)?) };
        let (study, plan) = self.with(plan)?;
        wire::text(&study.report(&plan, refits.as_ref(), &context)?)
    }

    /// A sample-size request that starts from what the table showed of a compared pair; empty text where there is none.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn size_from(&mut self, plan: &str, pair: usize) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        match SizeRequest::from_findings(&study.run(&plan)?, pair) {
            Some(request) => wire::text(&request),
            None => Ok(String::new()),
        }
    }
}

/// Simulated studies number `first` to `first + count` of design number `design` of a request, as JSON counts
/// `{studies, met, failed}`. Needs no table. Chunks may come from several workers, in any order, and are added up.
///
/// # Errors
/// A request that cannot be read or cannot be simulated, or a design that it does not have.
#[wasm_bindgen]
pub fn size_run(request: &str, design: u32, first: u32, count: u32) -> Result<String, Refused> {
    let request = SizeRequest::from_json(request)?;
    let Some(&design) = request.designs.get(design as usize) else {
        return Err(Refused::page("There is no such design."));
    };
    wire::text(&request.simulate(design, first as usize, count as usize))
}

/// The answer of a request from the counts of each of its designs, given as a JSON list in their order.
///
/// # Errors
/// A request or counts that cannot be read.
#[wasm_bindgen]
pub fn size_answer(request: &str, counts: &str) -> Result<String, Refused> {
    let request = SizeRequest::from_json(request)?;
    let counts: Vec<Counts> = wire::parsed(counts, "counts")?;
    wire::text(&request.answer(&counts))
}
