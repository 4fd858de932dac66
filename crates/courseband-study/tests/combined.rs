//! Crossed factors, trends over doses, days to a level, rates and what is not worse, against closed forms.

use courseband_engine::special::{Rng, t_quantile};
use courseband_study::{ComparisonKind, Difference, Findings, Plan, Study};
use std::fmt::Write as _;

fn run(table: &str, plan: &str) -> Findings {
    Study::open(table.as_bytes()).unwrap().run(&Plan::from_json(plan).unwrap()).unwrap()
}

fn refused(table: &str, plan: &str) -> String {
    let plan = match Plan::from_json(plan) {
        Ok(plan) => plan,
        Err(refusal) => return refusal.message,
    };
    Study::open(table.as_bytes()).unwrap().run(&plan).unwrap_err().message
}

fn find<'a>(findings: &'a Findings, kind: ComparisonKind, to: &str) -> &'a Difference {
    findings.differences.iter().find(|d| d.kind == kind && d.to == to).unwrap()
}

/// Ten mice in each of four cells, three days; the drug works in one genotype only.
fn crossed() -> String {
    let mut rng = Rng::new(3);
    let mut text = String::from("mouse,drug,genotype,day,y\n");
    for (c, (drug, genotype)) in
        [("none", "wild"), ("none", "mutant"), ("drug", "wild"), ("drug", "mutant")].into_iter().enumerate()
    {
        for k in 0..10 {
            for day in 0..3 {
                let effect = if c == 3 { 4.0 * f64::from(day) } else { 0.0 };
                let _ = writeln!(text, "m{c}_{k},{drug},{genotype},{day},{}", 10.0 + effect + rng.normal());
            }
        }
    }
    text
}

/// With a mean at every visit and independent visits, all is arithmetic on cell means.
#[test]
fn crossed_factors_are_arithmetic_on_cell_means() {
    let table = crossed();
    let plan =
        r#"{"columns": {"group": "drug", "crossed": "genotype"}, "curves": {"shape": "by-time"}, "subjects": "none"}"#;
    let findings = run(&table, plan);
    let names: Vec<&str> = findings.groups.iter().map(|g| g.name.as_str()).collect();
    assert_eq!(names, ["none \u{b7} wild", "none \u{b7} mutant", "drug \u{b7} wild", "drug \u{b7} mutant"]);
    let kinds: Vec<ComparisonKind> = findings.differences.iter().map(|d| d.kind).collect();
    use ComparisonKind::{Factor, Interaction, Pair};
    assert_eq!(kinds, [Pair, Pair, Pair, Pair, Factor, Factor, Interaction]);
    let mean = |cell: usize| findings.curves[cell].at_visits.mean[2].unwrap();
    let check = |d: &Difference, expected: f64, cells: f64| {
        assert!((d.at_visits.estimate[2].unwrap() - expected).abs() < 1e-9, "{}", d.to);
        // s^2 of a cell of ten, times the sum of squared weights.
        let se = findings.fit.residual_sd.0[0].1 * (cells / 10.0_f64).sqrt();
        assert!((d.at_visits.se[2].unwrap() - se).abs() < 1e-6 * se, "{} {se}", d.at_visits.se[2].unwrap());
    };
    check(find(&findings, Factor, "drug"), 0.5 * (mean(2) + mean(3) - mean(0) - mean(1)), 1.0);
    check(find(&findings, Factor, "mutant"), 0.5 * (mean(1) + mean(3) - mean(0) - mean(2)), 1.0);
    let both = &findings.differences[6];
    check(both, mean(3) - mean(1) - mean(2) + mean(0), 4.0);
    assert_eq!((both.from.as_str(), both.to.as_str()), ("drug against none in wild", "drug against none in mutant"));
    let told = findings.sentences.iter().find(|s| s.pair == Some(6)).unwrap();
    assert!(
        told.headline.contains("drug against none in mutant")
            && told.text.contains("difference of the differences is "),
        "{told:?}"
    );
}

#[test]
fn crossed_factors_are_refused_where_they_make_no_sense() {
    let table = crossed();
    let own = table.replace("m3_0,drug,mutant,2", "m3_0,drug,wild,2");
    let plan = r#"{"columns": {"group": "drug", "crossed": "genotype"}}"#;
    assert!(refused(&own, plan).contains("changes within subject m3_0"), "{}", refused(&own, plan));
    assert!(
        refused(&table, r#"{"columns": {"crossed": "genotype"}, "comparisons": {"trend": true}}"#)
            .contains("not available beside")
    );
    let control = r#"{"columns": {"group": "drug", "crossed": "genotype"}, "comparisons": {"control": "wild"}}"#;
    assert!(refused(&table, control).contains("name the group alone"));
}

fn doses() -> String {
    let mut rng = Rng::new(8);
    let mut text = String::from("rat,dose,day,y\n");
    for (g, name) in ["high", "none", "low"].into_iter().enumerate() {
        let slope = [1.0, 0.0, 0.5][g];
        for k in 0..12 {
            for day in 0..5 {
                let _ = writeln!(text, "r{g}_{k},{name},{day},{}", 5.0 + slope * f64::from(day) + 0.6 * rng.normal());
            }
        }
    }
    text
}

#[test]
fn a_trend_over_doses_is_a_slope_over_steps() {
    let plan = r#"{"reading": {"group_order": ["none", "low", "high"]}, "comparisons": {"trend": true},
        "curves": {"shape": "by-time"}, "subjects": "none"}"#;
    let findings = run(&doses(), plan);
    let names: Vec<&str> = findings.groups.iter().map(|g| g.name.as_str()).collect();
    assert_eq!(names, ["none", "low", "high"]);
    let trend = find(&findings, ComparisonKind::Trend, "high");
    // Three equally spaced steps: half the last mean less the first.
    let mean = |g: usize| findings.curves[g].at_visits.mean[4].unwrap();
    assert!((trend.at_visits.estimate[4].unwrap() - 0.5 * (mean(2) - mean(0))).abs() < 1e-9);
    assert!(findings.sentences.iter().any(|s| s.headline == "The response rises with the order of the groups."));
    assert!(refused(&doses(), r#"{"reading": {"group_order": ["medium"]}}"#).contains("no group of the table"));
}

/// The day at which a straight line reaches a level: Fieller's limits (Fieller 1954, JRSS-B 16:175) for one group without
/// subject effects, from least squares by hand.
#[test]
fn days_to_a_level_have_the_limits_of_fieller() {
    let table = doses();
    let plan = r#"{"curves": {"shape": "straight"}, "subjects": "none", "errors": {"spread": "by-group"},
        "comparisons": {"target": 7.0, "rates": true, "growth_over": [1, 3]}}"#;
    let findings = run(&table, plan);
    let g = findings.groups.iter().position(|g| g.name == "high").unwrap();
    let rows: Vec<(f64, f64)> = (table.lines().filter(|l| l.contains(",high,")))
        .map(|l| {
            let cells: Vec<&str> = l.split(',').collect();
            (cells[2].parse().unwrap(), cells[3].parse().unwrap())
        })
        .collect();
    let n = rows.len() as f64;
    let (mt, my) = (rows.iter().map(|r| r.0).sum::<f64>() / n, rows.iter().map(|r| r.1).sum::<f64>() / n);
    let stt: f64 = rows.iter().map(|r| (r.0 - mt).powi(2)).sum();
    let slope = rows.iter().map(|r| (r.0 - mt) * (r.1 - my)).sum::<f64>() / stt;
    let s2 = rows.iter().map(|r| (r.1 - my - slope * (r.0 - mt)).powi(2)).sum::<f64>() / (n - 2.0);
    let q = t_quantile(0.975, n - 2.0);
    // Roots in x = t - mean time of (7 - my - slope x)^2 = q^2 s2 (1 / n + x^2 / stt).
    let d = 7.0 - my;
    let (a, b, c) = (slope * slope - q * q * s2 / stt, -2.0 * d * slope, d * d - q * q * s2 / n);
    let root = |sign: f64| mt + (-b + sign * (b * b - 4.0 * a * c).sqrt()) / (2.0 * a);
    let effect = findings.group_effects[g].to_level.as_ref().unwrap();
    assert!((effect.estimate.unwrap() - (mt + d / slope)).abs() < 1e-4, "{effect:?}");
    // Quantiles of draws: their own Monte-Carlo error.
    assert!((effect.lower.unwrap() - root(-1.0)).abs() < 0.03, "{effect:?} {}", root(-1.0));
    assert!((effect.upper.unwrap() - root(1.0)).abs() < 0.03, "{effect:?} {}", root(1.0));
    let never = findings.groups.iter().position(|g| g.name == "none").unwrap();
    let none = findings.group_effects[never].to_level.as_ref().unwrap();
    assert!(none.estimate.is_none() && none.upper.is_none() && none.never > 0.95);
    // The rate of a straight line is its slope, at all times and over any stretch.
    let rate = &findings.rates[g];
    assert!(rate.response_mean.iter().all(|r| (r.unwrap() - slope).abs() < 1e-6));
    let growth = findings.group_effects[g].growth.unwrap();
    assert!((growth.estimate - slope).abs() < 1e-6 && findings.group_effects[g].growth_over == Some([1.0, 3.0]));
    assert!(rate.response_lower[0].unwrap() < growth.lower, "a band over all groups is wider than one interval");
}

#[test]
fn not_worse_follows_one_limit_of_the_band() {
    let plan = |side: &str| {
        format!(
            r#"{{"reading": {{"group_order": ["none", "low", "high"]}}, "comparisons": {{"margin": 1.5, "not_worse": "{side}"}}}}"#
        )
    };
    // Where lower is worse, a group that rises is nowhere worse; where higher is worse it is in the end.
    let lower = run(&doses(), &plan("lower"));
    let high = |f: &Findings| f.differences.iter().find(|d| d.from == "none" && d.to == "high").unwrap().clone();
    assert!(high(&lower).not_worse.iter().any(|s| s.open_start && s.open_end));
    assert!(
        lower
            .sentences
            .iter()
            .any(|s| s.text.contains("high is not worse than none by more than 1.5 (one-sided, 97.5 %)"))
    );
    let higher = high(&run(&doses(), &plan("higher")));
    assert!(higher.not_worse.len() == 1 && !higher.not_worse[0].open_end, "{:?}", higher.not_worse);
    assert!(refused(&doses(), r#"{"comparisons": {"not_worse": "lower"}}"#).contains("margin above zero"));
}
