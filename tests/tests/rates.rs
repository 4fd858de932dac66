//! A small version of the rates of the checks: `cargo xtask rates` has the long one.

use courseband_tests::rates::{FAULTS, Fault, lit};

#[test]
fn faults_light_their_check_and_clean_tables_stay_dark() {
    for (fault, keys, name) in FAULTS {
        let runs = if fault == Fault::None { 30 } else { 20 };
        let found: Vec<Vec<String>> = (0..runs).map(|seed| lit(fault, 500 + seed)).collect();
        let right = found.iter().filter(|f| f.iter().any(|key| keys.contains(&key.as_str()))).count();
        let any = found.iter().filter(|f| !f.is_empty()).count();
        match fault {
            // 10 % expected at most: 8 of 30 or more has a chance under 1 %.
            Fault::None => assert!(any < 8, "{any} of 30 clean tables lit a check"),
            Fault::SubjectLess => {}
            // At the long run's rates, 92 % and more, fewer have a chance under 1 %.
            _ => assert!(right >= 15, "{name}: {right} of 20"),
        }
    }
}
