//! How often the checks light on tables with a known fault, and on tables without one.
//!
//! Two groups of ten, eight visits, common course `10 + sin(t / 3)`, SD between subjects 1, error SD 0.7. Sizes of
//! the faults: serial correlation 0.6 from visit to visit; SDs of one group 2.5 times the other's; one subject off by
//! 6 or 4 SDs between subjects at every visit; one value off by 6 error SDs; trends with SD 0.35 a visit in a model with
//! levels only; log-normal values with SD 0.6 of the logs on the raw scale; a course of one and a half waves in three knots.

use courseband_engine::special::Rng;
use courseband_study::{Plan, Study};
use std::fmt::Write as _;

/// What is wrong with a table.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Fault {
    /// Nothing.
    None,
    /// AR(1) errors.
    Serial,
    /// Unequal spread.
    Spread,
    /// One subject off by 6 SD.
    Subject,
    /// One subject off by 4 SD: with ten a group, and this rate of false alarms over twenty subjects, found in under half of the tables.
    SubjectLess,
    /// One value off.
    Value,
    /// Wrong subject effects.
    Effects,
    /// Wrong scale.
    Scale,
    /// Too small a basis.
    Basis,
}

/// All faults, with the checks of which one should light, and what the fault is called.
pub const FAULTS: [(Fault, &[&str], &str); 9] = [
    (Fault::None, &[], "nothing wrong"),
    (Fault::Serial, &["serial"], "serial correlation 0.6"),
    (Fault::Spread, &["spread"], "spread 2.5 times as large in one group"),
    (Fault::Subject, &["subject", "influence"], "one subject off by 6 SD"),
    (Fault::SubjectLess, &["subject", "influence"], "one subject off by 4 SD"),
    (Fault::Value, &["outlying"], "one value off by 6 error SD"),
    (Fault::Effects, &["subjects"], "trends differ, the model has levels only"),
    (Fault::Scale, &["scale"], "log-normal on the raw scale"),
    (Fault::Basis, &["basis"], "three knots for one and a half waves"),
];

/// The checks that light on one table, by their keys.
///
/// # Panics
/// When the table cannot be read or checked: it is made here.
#[must_use]
pub fn lit(fault: Fault, seed: u64) -> Vec<String> {
    let plan = if fault == Fault::Basis { r#"{"curves": {"dimension": 3}}"# } else { "{}" };
    let plan = Plan::from_json(plan).expect("a plan of ours");
    let table = table(fault, seed);
    Study::open(table.as_bytes()).and_then(|mut study| study.checks_lit(&plan)).expect("a table of ours")
}

fn table(fault: Fault, seed: u64) -> String {
    let mut rng = Rng::new(seed);
    let mut text = String::from("mouse,arm,day,y\n");
    for s in 0..20 {
        let wide = if fault == Fault::Spread && s % 2 == 1 { 2.5 } else { 1.0 };
        let mut level = wide * rng.normal();
        if s == 7 && matches!(fault, Fault::Subject | Fault::SubjectLess) {
            level = if fault == Fault::Subject { 6.0 } else { 4.0 };
        }
        let trend = if fault == Fault::Effects { 0.35 * rng.normal() } else { 0.0 };
        let mut state = rng.normal();
        for day in 0..8 {
            let carry = if fault == Fault::Serial { 0.6 } else { 0.0 };
            state = carry * state + libm::sqrt(1.0 - carry * carry) * rng.normal();
            let t = f64::from(day);
            let course = if fault == Fault::Basis { 1.5 * libm::sin(t * 1.35) } else { libm::sin(t / 3.0) };
            let mut y = 10.0 + course + level + trend * (t - 3.5) + wide * 0.7 * state;
            if fault == Fault::Value && s == 7 && day == 4 {
                y += 6.0 * 0.7;
            }
            if fault == Fault::Scale {
                y = libm::exp(2.0 + 0.8 * libm::sin(t / 3.0) + 0.5 * level + 0.6 * state);
            }
            let _ = writeln!(text, "m{s},{},{day},{y:.4}", ["a", "b"][s as usize % 2]);
        }
    }
    text
}
