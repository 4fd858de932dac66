//! Seeded faults are caught, and clean tables are left alone.
//!
//! Ten subjects a group, two groups, eight visits. Faults: AR(1) errors with correlation 0.6 from visit
//! to visit; standard deviation 2.5 times as large in one group; one value off by six error SDs; trends with
//! SD 0.35 per visit in a model with levels only; lognormal values with SD 0.6 of the logs on the raw scale.

use super::ChecksFindings;
use crate::{Plan, Study};
use courseband_engine::special::Rng;
use std::fmt::Write as _;

#[derive(Clone, Copy, PartialEq)]
enum Fault {
    None,
    Serial,
    Spread,
    Outlying,
    Trend,
    Scale,
}

fn checked(fault: Fault, seed: u64) -> ChecksFindings {
    let mut rng = Rng::new(seed);
    let mut text = String::from("mouse,arm,day,y\n");
    for s in 0..20 {
        let wide = if fault == Fault::Spread && s % 2 == 1 { 2.5 } else { 1.0 };
        let level = wide * rng.normal();
        let trend = if fault == Fault::Trend { 0.35 * rng.normal() } else { 0.0 };
        let mut state = rng.normal();
        for day in 0..8 {
            let carry = if fault == Fault::Serial { 0.6 } else { 0.0 };
            state = carry * state + libm::sqrt(1.0 - carry * carry) * rng.normal();
            let t = f64::from(day);
            let mut y = 10.0 + libm::sin(t / 3.0) + level + trend * (t - 3.5) + wide * 0.7 * state;
            if fault == Fault::Outlying && s == 7 && day == 4 {
                y += 6.0 * 0.7;
            }
            if fault == Fault::Scale {
                y = libm::exp(2.0 + 0.8 * libm::sin(t / 3.0) + 0.5 * level + 0.6 * state);
            }
            let _ = writeln!(text, "m{s},{},{day},{y:.4}", ["a", "b"][s % 2]);
        }
    }
    Study::open(text.as_bytes()).unwrap().checks(&Plan::default()).unwrap()
}

fn lights(fault: Fault, key: &str, runs: u64) -> u64 {
    (0..runs)
        .filter(|&k| checked(fault, 100 + k).checks.iter().any(|c| c.lit && (key.is_empty() || c.key == key)))
        .count() as u64
}

#[test]
fn seeded_faults_light_the_right_check() {
    for (fault, key) in [
        (Fault::Serial, "serial"),
        (Fault::Spread, "spread"),
        (Fault::Outlying, "outlying"),
        (Fault::Trend, "subjects"),
        (Fault::Scale, "scale"),
    ] {
        let lit = lights(fault, key, 20);
        assert!(lit >= 17, "{key}: {lit} of 20");
    }
}

#[test]
fn clean_tables_stay_dark() {
    let lit = lights(Fault::None, "", 60);
    assert!(lit <= 9, "{lit} of 60");
}
