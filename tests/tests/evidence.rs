//! The bands keep their promise on a few kinds of study: a small, fixed part of the evidence.
//!
//! Seeded, so the counts are always the same; the limits are those of a one-sided binomial test at 1 %
//! against 93 % coverage and against 6 % false stretches.

use courseband_tests::evidence::{Tally, all_cells, simulate};

const STUDIES: u64 = 150;

fn counted(name: &str) -> (Tally, Tally) {
    let cell = all_cells().into_iter().find(|cell| cell.name() == name).unwrap();
    let (mut quick, mut calibrated) = (Tally::default(), Tally::default());
    for index in 0..STUDIES {
        let (one, other) = simulate(&cell, index, 99);
        quick.add(&one);
        calibrated.add(&other.unwrap());
    }
    (quick, calibrated)
}

/// With 150 studies: at least 131 covered rejects nothing above 93 %, at most 17 false stretches nothing below 6 %.
fn keeps_its_promise(name: &str) {
    let (quick, calibrated) = counted(name);
    for (band, tally) in [("quick", quick), ("calibrated", calibrated)] {
        assert!(tally.covered >= 131, "{name}, {band}: {} of {STUDIES} covered", tally.covered);
        assert!(tally.failed == 0, "{name}: {} fits failed", tally.failed);
        if name.contains(" same ") {
            assert!(tally.stretch <= 17, "{name}, {band}: {} of {STUDIES} with a false stretch", tally.stretch);
        }
    }
    assert!(calibrated.covered < STUDIES || quick.covered < STUDIES, "{name}: a band that always covers is too wide");
}

#[test]
fn few_subjects_without_a_difference() {
    keeps_its_promise("n5 v5 same iid level complete");
    keeps_its_promise("n5 v8 same iid trend dropout");
    keeps_its_promise("n8 v5 same ar1 level dropout");
}

#[test]
fn shifted_and_crossing_courses() {
    keeps_its_promise("n5 v5 shifted ar1 level complete");
    keeps_its_promise("n5 v8 crossing iid trend complete");
}

#[test]
fn a_late_kink() {
    keeps_its_promise("n5 v8 late iid level complete");
    keeps_its_promise("n8 v8 late iid level dropout");
    keeps_its_promise("n12 v5 late iid trend complete");
}
