//! The grid of cells.

use courseband_engine::special::Rng;
use courseband_engine::{Basis, Data, Dimension, Model, Serial, Shape, Sharing, SubjectEffects, SubjectRows};

/// Length of the follow-up, in days.
const FOLLOW_UP: f64 = 20.0;
/// Correlation of errors one day apart in cells with serial correlation.
const PHI: f64 = 0.8;
/// Standard deviation of the errors, and of the subjects' trends over the follow-up.
const HALF: f64 = 0.5;

/// How the second group's course differs from the first's, in between-subject SDs.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Truth {
    /// Not at all.
    Same,
    /// By 1 throughout.
    Shifted,
    /// Not until 60 % of the follow-up, then rising straight to 1.5: a kink.
    Late,
    /// From -0.75 straight to 0.75.
    Crossing,
}

/// A kind of study.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Cell {
    /// Number in the grid; part of the seed.
    pub number: u64,
    /// Subjects per group.
    pub subjects: usize,
    /// Planned visits, equally spaced.
    pub visits: usize,
    /// Difference of the courses.
    pub truth: Truth,
    /// Errors serially correlated (0.8 a day) or independent.
    pub serial: bool,
    /// Subjects differ in level and trend, or in level only.
    pub slope: bool,
    /// 30 % of the subjects leave, at a random visit after the second.
    pub dropout: bool,
}

/// Every cell, in a fixed order.
#[must_use]
pub fn all_cells() -> Vec<Cell> {
    let mut cells = Vec::new();
    for subjects in [5, 8, 12, 20] {
        for visits in [5, 8, 15] {
            for truth in [Truth::Same, Truth::Shifted, Truth::Late, Truth::Crossing] {
                for serial in [false, true] {
                    for slope in [false, true] {
                        for dropout in [false, true] {
                            let number = cells.len() as u64;
                            cells.push(Cell { number, subjects, visits, truth, serial, slope, dropout });
                        }
                    }
                }
            }
        }
    }
    cells
}

impl Cell {
    /// A name such as `n5 v8 late iid level complete`.
    #[must_use]
    pub fn name(&self) -> String {
        let truth = match self.truth {
            Truth::Same => "same",
            Truth::Shifted => "shifted",
            Truth::Late => "late",
            Truth::Crossing => "crossing",
        };
        format!(
            "n{} v{} {truth} {} {} {}",
            self.subjects,
            self.visits,
            if self.serial { "ar1" } else { "iid" },
            if self.slope { "trend" } else { "level" },
            if self.dropout { "dropout" } else { "complete" }
        )
    }

    /// The model that is fitted.
    #[must_use]
    pub fn model(&self) -> Model {
        Model {
            shape: Shape::Smooth(Basis::Cubic, Dimension::Auto),
            smoothness: Sharing::ByGroup,
            subjects: if self.slope { SubjectEffects::Slope } else { SubjectEffects::Intercept },
            serial: if self.serial { Serial::Ar1 } else { Serial::None },
            ..Model::default()
        }
    }

    /// True difference, second group minus first, at day `t`.
    #[must_use]
    pub fn difference(&self, t: f64) -> f64 {
        let x = t / FOLLOW_UP;
        match self.truth {
            Truth::Same => 0.0,
            Truth::Shifted => 1.0,
            Truth::Late => 1.5 * (x - 0.6).max(0.0) / 0.4,
            Truth::Crossing => 1.5 * x - 0.75,
        }
    }

    /// Course of the first group: up and down by 1.5 SD.
    fn course(t: f64) -> f64 {
        1.5 * libm::sin(2.5 * t / FOLLOW_UP)
    }

    /// Table number `study` of this cell.
    #[must_use]
    pub fn table(&self, study: u64) -> Data {
        let mut rng = Rng::stream(0xC0FF_EE00 + self.number, study);
        let step = FOLLOW_UP / (self.visits - 1) as f64;
        let mut subjects = Vec::new();
        for group in 0..2 {
            for _ in 0..self.subjects {
                let level = rng.normal();
                let trend = if self.slope { HALF * rng.normal() } else { 0.0 };
                let stays = rng.uniform() >= 0.3 || !self.dropout;
                let leaves = 2 + rng.below((self.visits - 2) as u64) as usize;
                let kept = if stays { self.visits } else { leaves };
                let carry = if self.serial { libm::pow(PHI, step) } else { 0.0 };
                let mut error = rng.normal();
                let (mut times, mut responses) = (Vec::new(), Vec::new());
                for visit in 0..self.visits {
                    if visit > 0 {
                        error = carry * error + libm::sqrt(1.0 - carry * carry) * rng.normal();
                    }
                    if visit < kept {
                        let t = step * visit as f64;
                        let gap = if group == 1 { self.difference(t) } else { 0.0 };
                        times.push(t);
                        responses.push(Cell::course(t) + gap + level + trend * (t / FOLLOW_UP - 0.5) + HALF * error);
                    }
                }
                subjects.push(SubjectRows { group, times, responses, ..SubjectRows::default() });
            }
        }
        Data { groups: 2, subjects, ..Data::default() }
    }
}
