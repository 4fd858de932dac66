//! Binomial, beta, Tweedie and censored responses against statsmodels and scipy: `reference/links.py` says how.

use courseband_engine::{Data, Family, Fit, Model, Shape, SubjectEffects, SubjectRows, fit};

fn read(name: &str) -> Vec<Vec<String>> {
    let text = std::fs::read_to_string(format!("{}/reference/{name}", env!("CARGO_MANIFEST_DIR"))).unwrap();
    let lines = text.lines().filter(|line| !line.starts_with('#')).skip(1);
    lines.map(|line| line.split(',').map(str::to_string).collect()).collect()
}

fn fitted(case: &str, family: Family) -> Fit {
    let number = |text: &String| text.parse::<f64>().unwrap();
    let subjects = (read("data/links.csv").iter().filter(|row| row[0] == case))
        .map(|row| SubjectRows {
            group: row[1].parse().unwrap(),
            times: vec![number(&row[2])],
            responses: vec![number(&row[3])],
            detail: vec![number(&row[4])],
            ..SubjectRows::default()
        })
        .collect();
    let model = Model { family, shape: Shape::Straight, subjects: SubjectEffects::None, ..Model::default() };
    fit(&Data { groups: 2, subjects, ..Data::default() }, &model).unwrap()
}

#[test]
fn families_without_subject_effects_agree_with_libraries() {
    let mut checked = 0;
    for (case, family) in [
        ("binomial", Family::Binomial),
        ("beta", Family::Beta),
        ("censored", Family::Censored),
        ("tweedie", Family::Tweedie(1400)),
    ] {
        let fit = fitted(case, family);
        let posterior = fit.plug_in();
        for row in read("expected/links.csv").iter().filter(|row| row[0] == case) {
            let (value, tolerance): (f64, f64) = (row[4].parse().unwrap(), row[5].parse().unwrap());
            let estimate = || posterior.estimate(&fit.course(row[2].parse().unwrap(), row[3].parse().unwrap()));
            let got = match row[1].as_str() {
                "mean" => estimate().mean,
                "se" => estimate().se,
                "dispersion" if case == "censored" => fit.residual_sd(0) * fit.residual_sd(0),
                "dispersion" => fit.dispersion().unwrap(),
                _ => fit.log_reml(),
            };
            assert!((got - value).abs() <= tolerance * value.abs().max(1.0), "{row:?}: {got}");
            checked += 1;
        }
    }
    assert_eq!(checked, 8 * 4 + 2 * 3);
}
