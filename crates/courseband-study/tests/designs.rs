//! Designs beyond groups of independent subjects: cages, blocks, explanatory columns, first values.

use courseband_engine::special::Rng;
use courseband_study::{Findings, Plan, run};

/// Mice in cages, treatment by the cage or within it, three repeats of the experiment, a weight with a bent effect.
fn table(within: bool, cages_per_group: usize) -> String {
    let mut rng = Rng::new(77);
    let mut rows = vec!["mouse,cage,arm,repeat,weight,day,score".to_string()];
    for cage in 0..2 * cages_per_group {
        let level = rng.normal();
        for k in 0..4 {
            let arm = if within { k % 2 } else { cage % 2 };
            let repeat = (cage / 2 + k) % 3;
            let (own, weight) = (0.5 * rng.normal(), 20.0 + 8.0 * rng.uniform());
            for day in [0, 2, 4, 7, 10] {
                let shift = [0.0, 0.8, -0.8][repeat] + if arm == 1 { [0.6, -0.6, 0.0][repeat] } else { 0.0 };
                let gap = if arm == 1 { 0.3 * f64::from(day) } else { 0.0 };
                let bent = 0.05 * (weight - 24.0) * (weight - 24.0);
                let y = 10.0 + gap + shift + bent + level + own + 0.3 * rng.normal();
                rows.push(format!("m{cage}-{k},c{cage},{},r{repeat},{weight:.2},{day},{y:.3}", ["a", "b"][arm]));
            }
        }
    }
    rows.join("\n")
}

fn found(table: &str, plan: &str) -> Findings {
    let plan = Plan::from_json(plan).unwrap();
    run(table.as_bytes(), &plan).unwrap()
}

fn refused(table: &str, plan: &str) -> String {
    Plan::from_json(plan).and_then(|plan| run(table.as_bytes(), &plan)).unwrap_err().message
}

const CAGES: &str =
    r#"{"columns": {"subject": "mouse", "group": "arm", "time": "day", "response": "score", "cluster": "cage"}"#;

#[test]
fn treatment_given_by_the_cage_is_compared_between_cages() {
    let text = table(false, 4);
    let with = found(&text, &format!("{CAGES}}}"));
    let without = found(&text, &format!(r#"{CAGES}, "clusters": "none"}}"#));
    let clusters = with.clusters.as_ref().unwrap();
    assert_eq!((clusters.count, clusters.nested, clusters.effects), (8, true, "slope"));
    let width = |f: &Findings| f.differences[0].grid.se[50].unwrap();
    assert!(width(&with) > 1.2 * width(&without), "{} {}", width(&with), width(&without));
    let most = with.differences[0].grid.df.iter().flatten().copied().fold(0.0, f64::max);
    assert!(most <= 6.0, "degrees of freedom count cages: {most}");
    assert!(without.notes.iter().any(|n| n.message.contains("too narrow")));
}

#[test]
fn treatment_within_the_cage_takes_the_cage_out() {
    let text = table(true, 4);
    let with = found(&text, &format!("{CAGES}}}"));
    let without = found(&text, &format!(r#"{CAGES}, "clusters": "none"}}"#));
    let clusters = with.clusters.as_ref().unwrap();
    assert_eq!((clusters.nested, clusters.effects), (false, "intercept"));
    let width = |f: &Findings| f.differences[0].grid.se[50].unwrap();
    assert!(width(&with) < 0.9 * width(&without));
}

#[test]
fn one_cage_a_group_claims_nothing() {
    let findings = found(&table(false, 1), &format!("{CAGES}}}"));
    assert!(findings.differences[0].stretches.is_empty());
    assert!(findings.differences[0].grid.lower.iter().all(Option::is_none));
    assert!(findings.sentences[0].text.contains("cannot be told from its cage"), "{}", findings.sentences[0].text);
}

#[test]
fn a_bent_effect_and_blocks_are_found() {
    let text = table(true, 8);
    let plan = r#"{"columns": {"subject": "mouse", "group": "arm", "time": "day", "response": "score", "cluster": "cage",
        "covariates": ["weight"], "bending": ["weight"], "block": "repeat"}}"#;
    let findings = found(&text, plan);
    let bend = &findings.bends[0];
    let at = |x: f64| bend.estimate[bend.at.iter().position(|a| *a >= x).unwrap()];
    assert!(at(20.5) - at(24.0) > 0.3 && at(27.5) - at(24.0) > 0.3, "{:?}", bend.estimate);
    let blocks = findings.blocks.as_ref().unwrap();
    assert!(blocks.sd.unwrap() > 0.3 && blocks.sd_by_group.unwrap() > 0.1, "{blocks:?}");
    let gap = |block: &str| blocks.gaps.iter().find(|g| g.block == block).unwrap().estimate;
    assert!(gap("r0") > 0.15 && gap("r1") < -0.15, "{blocks:?}");
    let plain = found(&text, &format!("{CAGES}}}"));
    assert!(findings.differences[0].grid.se[50].unwrap() > plain.differences[0].grid.se[50].unwrap());
}

#[test]
fn first_values_are_used_as_asked() {
    let text = table(true, 4);
    let with = |start: &str| found(&text, &format!(r#"{CAGES}, "response": {{"start": "{start}"}}}}"#));
    let (plain, common, covariate, change) = (with("as-measured"), with("common"), with("covariate"), with("change"));
    assert!(common.differences[0].grid.se[0].unwrap() < 1e-9 && plain.differences[0].grid.se[0].unwrap() > 0.1);
    assert_eq!(covariate.rows, plain.rows - plain.subjects);
    assert_eq!(covariate.adjustments[0].column, "value at the start");
    assert!((covariate.adjustments[0].estimate.unwrap() - 1.0).abs() < 0.4);
    assert_eq!(change.scale.response, "change in score");
    let percent = with("percent");
    assert_eq!(percent.scale.response, "percent change in score");
}

#[test]
fn what_cannot_be_adjusted_for_is_refused_by_name() {
    let text = table(true, 4);
    let columns = |more: &str| {
        format!(r#"{{"columns": {{"subject": "mouse", "group": "arm", "time": "day", "response": "score", {more}}}}}"#)
    };
    for (more, word) in [
        (r#""covariates": ["wait"]"#, "wait"),
        (r#""covariates": ["weight"], "bending": ["arm"]"#, "arm"),
        (r#""covariates": ["repeat"], "bending": ["repeat"]"#, "repeat"),
        (r#""block": "mouse""#, "mouse"),
        (r#""covariates": ["repeat"], "block": "repeat""#, "repeat"),
    ] {
        let message = refused(&text, &columns(more));
        assert!(message.contains(word), "{more}: {message}");
    }
    assert!(refused(&text, r#"{"curves": {"basis": "cyclic"}}"#).contains("curves.period"));
    assert!(refused(&text, r#"{"response": {"transform": "log", "start": "percent"}}"#).contains("change"));
}

/// Colonies counted on plates over days; the second arm grows faster.
fn colonies() -> String {
    let mut rng = Rng::new(13);
    let mut rows = vec!["plate,arm,day,colonies".to_string()];
    for s in 0..20 {
        let level = 0.3 * rng.normal();
        for day in 0..6 {
            let mean = libm::exp(1.2 + 0.2 * f64::from(day) * (1 + s % 2) as f64 * 0.7 + level);
            let (mut product, mut count) = (rng.uniform(), 0);
            while product > libm::exp(-mean) {
                product *= rng.uniform();
                count += 1;
            }
            rows.push(format!("p{s},{},{day},{count}", ["a", "b"][s % 2]));
        }
    }
    rows.join("\n")
}

#[test]
fn counts_are_compared_as_ratios() {
    let text = colonies();
    for family in ["poisson", "negative-binomial"] {
        let findings = found(
            &text,
            &format!(
                r#"{{"response": {{"distribution": "{family}"}}, "comparisons": {{"margin": 20, "margin_unit": "percent"}}}}"#
            ),
        );
        let d = &findings.differences[0];
        let last = d.at_visits.response_estimate[5].unwrap();
        assert!(findings.scale.ratio && (last - libm::exp(0.7)).abs() < 0.5, "{family}: {last}");
        assert!(
            !d.stretches.is_empty() && findings.fit.residual_sd.0.is_empty(),
            "{family}: {:?} {:?}",
            d.at_visits,
            d.critical
        );
        assert!(findings.notes.iter().any(|n| n.message.contains("Laplace")));
        assert_eq!(findings.fit.dispersion.is_some(), family == "negative-binomial");
    }
}

#[test]
fn values_that_a_distribution_cannot_give_are_refused_by_row() {
    let text = colonies();
    let with = |family: &str, more: &str| format!(r#"{{"response": {{"distribution": "{family}"}}{more}}}"#);
    let fraction = text.replacen("p0,a,0,", "p0,a,0,1.5", 1).replacen(",1.52", ",1.5", 1);
    assert!(refused(&fraction, &with("poisson", "")).contains("row 2"), "{}", refused(&fraction, &with("poisson", "")));
    let zero = text.lines().enumerate().map(|(k, line)| if k == 1 { "p0,a,0,0" } else { line });
    let zero = zero.collect::<Vec<_>>().join("\n");
    assert!(refused(&zero, &with("gamma", "")).contains("row 2 has 0"), "{}", refused(&zero, &with("gamma", "")));
    assert!(refused(&text, &with("poisson", r#", "errors": {"serial": "ar1"}"#)).contains("errors.serial"));
    assert!(refused(&text, &with("beta", "")).contains("shares above 0 and below 1"));
    let plan = Plan::from_json(&with("poisson", "")).unwrap();
    let mut study = courseband_study::Study::open(text.as_bytes()).unwrap();
    assert!(study.checks(&plan).unwrap_err().message.contains("normal responses"));
    assert!(study.calibration(&plan).unwrap().is_none());
}
