//! A plan read from JSON, and what is wrong with a plan before any table is seen.

use crate::plan::*;
use crate::refusal::Refusal;
use courseband_engine as engine;
use courseband_table as table;

/// Most points of a grid.
const MOST_GRID_POINTS: usize = 5001;

impl Plan {
    /// Reads a plan from JSON text.
    ///
    /// # Errors
    /// Names the unknown key or the value that does not fit, with its line and column.
    pub fn from_json(text: &str) -> Result<Plan, Refusal> {
        let plan: Plan = serde_json::from_str(text).map_err(|error| {
            Refusal::plan(format!(
                "The plan cannot be read: {error}. Correct it there; keys left out take their defaults."
            ))
        })?;
        plan.check()?;
        Ok(plan)
    }

    /// What no table could mend.
    pub(crate) fn check(&self) -> Result<(), Refusal> {
        let c = &self.comparisons;
        if !(c.level >= 0.5 && c.level < 1.0) {
            return Err(Refusal::plan(format!(
                "comparisons.level is {}: give a number from 0.5 to below 1, such as 0.95.",
                c.level
            )));
        }
        if !(c.margin >= 0.0 && c.margin.is_finite()) {
            return Err(Refusal::plan(format!("comparisons.margin is {}: give 0 or a positive number.", c.margin)));
        }
        if c.margin_unit == MarginUnit::Percent && c.margin > 0.0 {
            if !self.is_ratio() {
                return Err(Refusal::plan(
                    "comparisons.margin_unit is percent, which needs a ratio scale. Set response.transform to \"log\", \
                     or give the margin in the response's unit.",
                ));
            }
            if c.margin >= 100.0 {
                return Err(Refusal::plan(format!(
                    "comparisons.margin is {} percent: give a number below 100.",
                    c.margin
                )));
            }
        }
        if c.pairs == Pairs::AgainstControl && c.control.is_none() {
            return Err(Refusal::plan("comparisons.pairs is against-control: name the group in comparisons.control."));
        }
        if c.small_sample == SmallSample::Calibrated && c.band == BandKind::Pointwise {
            return Err(Refusal::plan(
                "comparisons.small_sample is calibrated, which is for simultaneous bands. Set comparisons.band to \
                 \"simultaneous\", or comparisons.small_sample to \"df\".",
            ));
        }
        if c.refits < 99 || c.refits > 100_000 {
            return Err(Refusal::plan(format!(
                "comparisons.refits is {}: give a whole number from 99 to 100000.",
                c.refits
            )));
        }
        if c.landmark.is_some_and(|t| !t.is_finite()) {
            return Err(Refusal::plan(
                "comparisons.landmark is not a finite number. Give a time inside the follow-up, or null.",
            ));
        }
        self.check_grid()?;
        self.check_curves()?;
        self.check_reach()
    }

    fn check_grid(&self) -> Result<(), Refusal> {
        let grid = &self.grid;
        if grid.count < 2 || grid.count > MOST_GRID_POINTS {
            return Err(Refusal::plan(format!(
                "grid.count is {}: give a whole number from 2 to {MOST_GRID_POINTS}.",
                grid.count
            )));
        }
        for (name, value) in [("start", grid.start), ("end", grid.end)] {
            if value.is_some_and(|v| !v.is_finite()) {
                return Err(Refusal::plan(format!("grid.{name} is not a finite number.")));
            }
        }
        match (grid.start, grid.end) {
            (Some(start), Some(end)) if start >= end => {
                Err(Refusal::plan(format!("grid.start is {start} and grid.end is {end}: the end must be later.")))
            }
            _ => Ok(()),
        }
    }

    fn check_curves(&self) -> Result<(), Refusal> {
        let positive = |name: &str, value: Option<f64>| match value {
            Some(x) if !(x > 0.0 && x.is_finite()) => Err(Refusal::plan(format!(
                "curves.{name} is {x}. Give a time above zero, in the time unit of the table."
            ))),
            _ => Ok(()),
        };
        positive("period", self.curves.period)?;
        positive("range", self.curves.range)?;
        if self.curves.basis == Basis::Cyclic && self.curves.period.is_none() {
            return Err(Refusal::plan(
                "curves.basis is cyclic, which needs curves.period: the length of one round in the time unit of the table, \
                 such as 24 for hours of a day.",
            ));
        }
        Ok(())
    }

    /// What goes with a distribution other than the normal.
    fn check_family(&self) -> Result<(), Refusal> {
        let name = match self.response.distribution {
            Distribution::Normal => return Ok(()),
            Distribution::Poisson => "poisson",
            Distribution::NegativeBinomial => "negative-binomial",
            Distribution::Gamma => "gamma",
            Distribution::Binomial => "binomial",
            Distribution::Beta => "beta",
            Distribution::Tweedie => "tweedie",
        };
        if self.response.detection == Detection::Limits {
            return Err(Refusal::plan(format!(
                "response.detection limits is made for normal responses and not available beside response.distribution \"{name}\". \
                 Use \"normal\", on the log scale where values are skewed."
            )));
        }
        self.refuse_beside(&format!("response.distribution \"{name}\""))
    }

    /// Refuses what is made for normal responses only.
    pub(crate) fn refuse_beside(&self, what_it_is: &str) -> Result<(), Refusal> {
        let columns = !self.columns.covariates.is_empty() || self.columns.block.is_some();
        let clash = [
            (
                self.response.transform == Transform::Log && self.response.distribution != Distribution::Normal,
                "response.transform log",
                "it has a link of its own: set \"identity\"",
            ),
            (self.errors.serial != Serial::None, "errors.serial", "set \"none\""),
            (self.errors.spread != Spread::Common, "errors.spread", "set \"common\""),
            (self.subjects == SubjectEffects::Curve, "subjects: curve", "set \"slope\""),
            (self.response.start != Start::AsMeasured, "response.start", "set \"as-measured\""),
            (columns, "columns.covariates and columns.block", "leave them out"),
        ];
        match clash.iter().find(|(clashes, ..)| *clashes) {
            Some((_, what, instead)) => {
                Err(Refusal::plan(format!("{what} is not available beside {what_it_is}: {instead}.")))
            }
            None => Ok(()),
        }
    }

    /// True where gaps are ratios: on the log scale, and for distributions with a log link.
    #[must_use]
    pub fn is_ratio(&self) -> bool {
        self.response.transform == Transform::Log || self.response.distribution != Distribution::Normal
    }

    /// True where the course is a share, under a logit link: gaps are then ratios of odds.
    #[must_use]
    pub fn is_logit(&self) -> bool {
        matches!(self.response.distribution, Distribution::Binomial | Distribution::Beta)
    }

    /// Refuses, for what is made for normal responses only.
    ///
    /// # Errors
    /// Another distribution.
    pub(crate) fn need_normal(&self, what: &str) -> Result<(), Refusal> {
        if self.response.distribution == Distribution::Normal && self.response.detection == Detection::AsWritten {
            return Ok(());
        }
        Err(Refusal::plan(format!(
            "{what} are made for normal responses, on the measured or the log scale, and not for other distributions or values beyond a limit in this version."
        )))
    }

    fn family(&self) -> engine::Family {
        match self.response.distribution {
            Distribution::Poisson => engine::Family::Poisson,
            Distribution::NegativeBinomial => engine::Family::NegativeBinomial,
            Distribution::Gamma => engine::Family::Gamma,
            Distribution::Binomial => engine::Family::Binomial,
            Distribution::Beta => engine::Family::Beta,
            Distribution::Tweedie => {
                engine::Family::Tweedie(libm::round(1000.0 * self.response.power.unwrap_or(1.5)) as u16)
            }
            Distribution::Normal => engine::Family::Normal,
        }
    }

    /// Refuses what this version does not compute, rather than computing something else.
    fn check_reach(&self) -> Result<(), Refusal> {
        let missing = |what: &str, instead: &str| {
            Err(Refusal::plan(format!("{what} is not available in this version. Use {instead}.")))
        };
        self.check_family()?;
        if self.subjects == SubjectEffects::Curve && self.errors.serial == Serial::Ar1 && !self.errors.nugget {
            return Err(Refusal::plan(
                "subjects is curve and errors.serial is ar1 without measurement error: the two cannot be told apart. \
                 Set subjects to \"slope\", or errors.serial to \"none\".",
            ));
        }
        match self.errors.serial {
            Serial::Unstructured if self.subjects != SubjectEffects::None => {
                return Err(Refusal::plan(
                    "errors.serial is unstructured beside subject effects: the two cannot be told apart. \
                     Set subjects to \"none\", or errors.serial to \"none\".",
                ));
            }
            Serial::Unstructured => return missing("errors.serial: unstructured", "\"ar1\" or \"none\""),
            _ => {}
        }
        if matches!(self.errors.spread, Spread::WithMean | Spread::ByVisit) {
            return missing("errors.spread: with-mean and by-visit", "\"common\", \"by-group\", or the log scale");
        }
        if let Some(name) = self.columns.bending.iter().find(|name| !self.columns.covariates.contains(name)) {
            return Err(Refusal::plan(format!(
                "columns.bending names \"{name}\", which is not among columns.covariates. Add it there too."
            )));
        }
        let used = |name: &String| self.columns.covariates.contains(name) || self.columns.block.as_ref() == Some(name);
        if let Some(name) = self.columns.crossed.as_ref().filter(|name| used(name)) {
            return Err(Refusal::plan(format!(
                "columns.crossed is \"{name}\", which is used as a covariate or block too. Use it once."
            )));
        }
        if let Some(power) = self.response.power.filter(|p| !(*p > 1.0 && *p < 2.0)) {
            return Err(Refusal::plan(format!(
                "response.power is {power}; a Tweedie power lies between 1 and 2, such as 1.5."
            )));
        }
        if self.columns.total.is_some() && self.response.distribution != Distribution::Binomial {
            return Err(Refusal::plan(
                "columns.total names numbers of trials, which a binomial response has. Set response.distribution \"binomial\", or leave it out.",
            ));
        }
        let c = &self.comparisons;
        if c.not_worse.is_some() && !(c.margin > 0.0) {
            return Err(Refusal::plan(
                "comparisons.not_worse needs a comparisons.margin above zero: how much worse still does not matter.",
            ));
        }
        if let Some([start, end]) = c.growth_over.filter(|[start, end]| !(start < end)) {
            return Err(Refusal::plan(format!(
                "comparisons.growth_over is [{start}, {end}]; it needs a first time and a later one."
            )));
        }
        if let Some(target) =
            c.target.filter(|t| !t.is_finite() || self.is_ratio() && *t <= 0.0 || self.is_logit() && *t >= 1.0)
        {
            return Err(Refusal::plan(format!(
                "comparisons.target is {target}; it needs a level of the response{}.",
                if self.is_ratio() { " above zero, as the log scale does" } else { "" }
            )));
        }
        if self.columns.crossed.is_some() && self.comparisons.trend {
            return Err(Refusal::plan(
                "comparisons.trend asks for one order of groups and is not available beside columns.crossed. Use one of them.",
            ));
        }
        if let Some(name) = self.columns.block.iter().find(|name| self.columns.covariates.contains(name)) {
            return Err(Refusal::plan(format!(
                "columns.block is \"{name}\", which is among columns.covariates too. Use it once."
            )));
        }
        if self.response.start == Start::Percent && self.response.transform == Transform::Log {
            return Err(Refusal::plan(
                "response.start is percent on the log scale, which has no percent of its own. Use \"change\": on the log scale \
                 it is the ratio to the start.",
            ));
        }
        Ok(())
    }

    /// What is asked of the table.
    #[must_use]
    pub fn request(&self) -> table::Request {
        let column = |choice: &ColumnChoice| match choice {
            ColumnChoice::Infer => table::ColumnRequest::Infer,
            ColumnChoice::Absent => table::ColumnRequest::Absent,
            ColumnChoice::Named(name) => table::ColumnRequest::Named(name.clone()),
        };
        table::Request {
            subject: column(&self.columns.subject),
            time: column(&self.columns.time),
            group: column(&self.columns.group),
            response: column(&self.columns.response),
            cluster: column(&self.columns.cluster),
            covariates: (self.columns.covariates.iter())
                .chain(&self.columns.block)
                .chain(&self.columns.crossed)
                .chain(&self.columns.total)
                .cloned()
                .collect(),
            exclusions: self
                .exclusions
                .iter()
                .map(|e| table::Exclusion { row: e.row, column: e.column.clone(), reason: e.reason.clone() })
                .collect(),
            merges: (self.reading.merges.iter())
                .map(|m| table::Merge { from: m.from.clone(), into: m.into.clone() })
                .collect(),
            day_zero: match self.reading.day_zero {
                DayZero::Common => table::DayZero::Common,
                DayZero::PerSubject => table::DayZero::PerSubject,
            },
            date_order: self.reading.date_order.map(|order| match order {
                DateOrder::DayFirst => table::DateOrder::DayFirst,
                DateOrder::MonthFirst => table::DateOrder::MonthFirst,
            }),
            shared_ids: self.reading.shared_ids.map(|meaning| match meaning {
                SharedIds::Different => table::SharedIds::Different,
                SharedIds::Same => table::SharedIds::Same,
                SharedIds::Mistake => table::SharedIds::Mistake,
            }),
            limits: self.response.detection == Detection::Limits,
            layout: self.reading.layout.map(|layout| match layout {
                Layout::Long => table::Layout::Long,
                Layout::WideByTime => table::Layout::WideByTime,
                Layout::WideBySubject => table::Layout::WideBySubject,
            }),
        }
    }

    fn basis(&self, range: Option<f64>) -> engine::Basis {
        let curves = &self.curves;
        match curves.basis {
            Basis::Cubic => engine::Basis::Cubic,
            Basis::ThinPlate => engine::Basis::ThinPlate,
            Basis::PSpline => engine::Basis::Pieces,
            Basis::GaussianProcess => engine::Basis::Process {
                range: curves.range.or(range).unwrap_or(1.0),
                roughness: match curves.roughness {
                    Roughness::ThreeHalves => engine::Roughness::ThreeHalves,
                    Roughness::FiveHalves => engine::Roughness::FiveHalves,
                },
            },
            Basis::Cyclic => engine::Basis::Cyclic { period: curves.period.unwrap_or(1.0) },
        }
    }

    /// The engine's model. Measurement error counts only beside serial correlation.
    /// `range`: that of a Gaussian process, where it was estimated.
    pub(crate) fn model(&self, range: Option<f64>) -> engine::Model {
        let sharing = |by_group: bool| if by_group { engine::Sharing::ByGroup } else { engine::Sharing::Common };
        engine::Model {
            shape: match self.curves.shape {
                Shape::Smooth => engine::Shape::Smooth(
                    self.basis(range),
                    match self.curves.dimension {
                        Dimension::Auto => engine::Dimension::Auto,
                        Dimension::Full => engine::Dimension::Full,
                        Dimension::Knots(count) => engine::Dimension::Knots(count),
                    },
                ),
                Shape::Straight => engine::Shape::Straight,
                Shape::ByTime => engine::Shape::ByTime,
            },
            common_start: self.response.start == Start::Common,
            smoothness: sharing(self.curves.smoothness == Smoothness::PerGroup),
            subjects: match self.subjects {
                SubjectEffects::None => engine::SubjectEffects::None,
                SubjectEffects::Intercept => engine::SubjectEffects::Intercept,
                SubjectEffects::Slope => engine::SubjectEffects::Slope,
                SubjectEffects::Curve => engine::SubjectEffects::Curve,
            },
            subjects_spread: sharing(self.subjects_spread == Sharing::ByGroup),
            clusters: engine::ClusterEffects::None,
            serial: match (self.errors.serial, self.errors.nugget) {
                (Serial::Ar1, true) => engine::Serial::Ar1Nugget,
                (Serial::Ar1, false) => engine::Serial::Ar1,
                _ => engine::Serial::None,
            },
            spread: sharing(self.errors.spread == Spread::ByGroup),
            likelihood: engine::Likelihood::Restricted,
            family: self.family(),
        }
    }
}
