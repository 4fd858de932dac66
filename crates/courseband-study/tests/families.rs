//! Binomial, beta and Tweedie responses and values beyond a limit, from the table to the findings.

use courseband_engine::special::Rng;
use courseband_study::{Findings, FitStatus, Plan, Study};
use std::fmt::Write as _;

fn run(table: &str, plan: &str) -> Findings {
    Study::open(table.as_bytes()).unwrap().run(&Plan::from_json(plan).unwrap()).unwrap()
}

fn refused(table: &str, plan: &str) -> String {
    Plan::from_json(plan).and_then(|plan| Study::open(table.as_bytes()).unwrap().run(&plan)).unwrap_err().message
}

fn logit(x: f64) -> f64 {
    1.0 / (1.0 + (-x).exp())
}

/// Twelve plates of ten seeds in each of two soils, counted on four days: germinated, total and share.
fn seeds(what: &str) -> String {
    let mut rng = Rng::new(12);
    let mut text = format!("plate,soil,day,{what},seeds\n");
    for plate in 0..24 {
        let level = 0.4 * rng.normal();
        for day in 0..4 {
            let p =
                logit(-1.2 + 0.5 * f64::from(day) + if plate % 2 == 1 { 0.6 * f64::from(day) } else { 0.0 } + level);
            let count = (0..10).filter(|_| rng.uniform() < p).count();
            let value = if what == "share" { format!("{:.1}", count as f64 / 10.0) } else { count.to_string() };
            let _ = writeln!(text, "p{plate},{},{day},{value},10", ["sand", "loam"][plate % 2]);
        }
    }
    text
}

const BINOMIAL: &str = r#"{"columns": {"response": "COLUMN", "total": "seeds"}, "response": {"distribution": "binomial"}, "curves": {"shape": "straight"}}"#;

#[test]
fn shares_with_their_total_are_the_successes() {
    let counts = run(&seeds("germinated"), &BINOMIAL.replace("COLUMN", "germinated"));
    let shares = run(&seeds("share"), &BINOMIAL.replace("COLUMN", "share"));
    assert_ne!(counts.fit.status, FitStatus::Failed, "{:?}", counts.fit.remarks);
    assert_eq!(counts.curves[0].at_visits.mean, shares.curves[0].at_visits.mean);
    assert_eq!((counts.scale.ratio, counts.scale.link), (true, "logit"));
    // Courses are shares, gaps are ratios of odds.
    let (sand, loam) =
        (counts.curves[0].at_visits.response_mean[3].unwrap(), counts.curves[1].at_visits.response_mean[3].unwrap());
    let odds = |p: f64| p / (1.0 - p);
    let ratio = counts.differences[0].at_visits.response_estimate[3].unwrap();
    assert!((ratio - odds(loam) / odds(sand)).abs() < 1e-9 * ratio);
    assert!((sand - logit(0.3)).abs() < 0.12 && (loam - logit(2.1)).abs() < 0.12, "{sand} {loam}");
    let text = counts.sentences.iter().map(|s| s.text.clone()).collect::<String>();
    assert!(text.contains("the odds in loam are") && text.contains("percentage points"), "{text}");
}

#[test]
fn what_is_no_share_is_refused_with_what_to_do() {
    let table = seeds("germinated");
    let plan = BINOMIAL.replace("COLUMN", "germinated");
    let high = table.replacen(",10\n", ",0\n", 1);
    assert!(refused(&high, &plan).contains("whole numbers from 1 on"), "{}", refused(&high, &plan));
    let alone = plan.replace(r#", "total": "seeds""#, "");
    assert!(
        refused(&table, &alone).contains("0 or 1") && refused(&table, &alone).contains("name the column of totals")
    );
    assert!(refused(&table, r#"{"columns": {"total": "seeds"}}"#).contains("binomial"));
    let serial = plan.replace(r#""curves""#, r#""errors": {"serial": "ar1"}, "curves""#);
    assert!(refused(&table, &serial).contains("errors.serial"));
    let beta = r#"{"columns": {"response": "germinated"}, "response": {"distribution": "beta"}}"#;
    assert!(refused(&table, beta).contains("Divide percents by 100"));
}

/// Recovery for every family: means over simulated tables within Monte-Carlo error of the truth, on the link's scale.
#[test]
fn parameters_come_back() {
    type Draw = fn(&mut Rng, f64) -> f64;
    let beta: Draw = |rng, eta| {
        let (m, k) = (logit(eta), 15.0);
        let (a, b) = (rng.gamma(m * k), rng.gamma((1.0 - m) * k));
        (a / (a + b)).clamp(1e-6, 1.0 - 1e-6)
    };
    let binomial: Draw = |rng, eta| (0..12).filter(|_| rng.uniform() < logit(eta)).count() as f64;
    let tweedie: Draw = |rng, eta| {
        let (mu, p, phi): (f64, f64, f64) = (eta.exp(), 1.5, 0.6);
        let count = rng.poisson(mu.powf(2.0 - p) / (phi * (2.0 - p)));
        if count == 0.0 { 0.0 } else { phi * (p - 1.0) * mu.powf(p - 1.0) * rng.gamma(count * (2.0 - p) / (p - 1.0)) }
    };
    let gamma: Draw = |rng, eta| eta.exp() * 0.3 * rng.gamma(1.0 / 0.3);
    let negative: Draw = |rng, eta| {
        let rate = (eta + 1.0).exp() * 0.4 * rng.gamma(1.0 / 0.4);
        rng.poisson(rate)
    };
    let cases: [(&str, &str, Draw, f64); 5] = [
        ("binomial", r#""columns": {"total": "n"}, "response": {"distribution": "binomial"}"#, binomial, 0.0),
        ("beta", r#""response": {"distribution": "beta"}"#, beta, 0.0),
        ("tweedie", r#""response": {"distribution": "tweedie", "power": 1.5}"#, tweedie, 0.0),
        ("gamma", r#""response": {"distribution": "gamma"}"#, gamma, 0.0),
        ("negative-binomial", r#""response": {"distribution": "negative-binomial"}"#, negative, 1.0),
    ];
    for (name, response, draw, shift) in cases {
        let (mut found, runs) = (Vec::new(), 25);
        for seed in 0..runs {
            let mut rng = Rng::new(100 + seed);
            let mut text = String::from("who,arm,day,y,n\n");
            for s in 0..24 {
                let level = 0.3 * rng.normal();
                for day in 0..5 {
                    let eta =
                        -0.5 + 0.2 * f64::from(day) + if s % 2 == 1 { 0.25 * f64::from(day) } else { 0.0 } + level;
                    let _ = writeln!(text, "s{s},{},{day},{:.6},12", ["a", "b"][s % 2], draw(&mut rng, eta));
                }
            }
            let plan = format!(r#"{{{response}, "curves": {{"shape": "straight"}}}}"#)
                .replace(r#""columns": {"#, r#""columns": {"response": "y", "#);
            let plan =
                if name == "binomial" { plan } else { plan.replacen('{', r#"{"columns": {"response": "y"}, "#, 1) };
            let findings = run(&text, &plan);
            assert_ne!(findings.fit.status, FitStatus::Failed, "{name} {seed}");
            found.push([
                findings.curves[0].at_visits.mean[2].unwrap() - shift,
                findings.differences[0].at_visits.estimate[4].unwrap(),
            ]);
        }
        for (k, truth) in [-0.1, 1.0].into_iter().enumerate() {
            let mean = found.iter().map(|f| f[k]).sum::<f64>() / runs as f64;
            let sd = (found.iter().map(|f| (f[k] - mean).powi(2)).sum::<f64>() / (runs - 1) as f64).sqrt();
            // Three and a half Monte-Carlo errors, and two hundredths for Laplace's approximation.
            assert!((mean - truth).abs() < 3.5 * sd / (runs as f64).sqrt() + 0.02, "{name} {k}: {mean} {truth} {sd}");
        }
    }
}

/// A quarter of the values lie below what can be measured: as limits they give the course back, left out they bend it.
#[test]
fn values_below_detection_are_used_as_limits() {
    let mut rng = Rng::new(3);
    let mut text = String::from("patient,arm,week,marker\n");
    for s in 0..40 {
        let level = 0.5 * rng.normal();
        for week in 0..5 {
            let y =
                (2.0 - 0.5 * f64::from(week) * if s % 2 == 1 { 1.6 } else { 1.0 } + level + 0.4 * rng.normal()).exp();
            let shown = if y < 1.5 { "<1.5".to_string() } else { format!("{y:.3}") };
            let _ = writeln!(text, "p{s},{},{week},{shown}", ["a", "b"][s % 2]);
        }
    }
    let plan = |detection: &str| {
        format!(
            r#"{{"response": {{"transform": "log", "detection": "{detection}"}}, "curves": {{"shape": "straight"}}}}"#
        )
    };
    let (used, out) = (run(&text, &plan("limits")), run(&text, &plan("as-written")));
    assert!(used.rows == 200 && out.rows < 160, "{} {}", used.rows, out.rows);
    let end = |f: &Findings| f.differences[0].at_visits.estimate.last().unwrap().unwrap();
    // The true gap at the last week is -1.2.
    assert!((end(&used) + 1.2).abs() < 0.45, "{}", end(&used));
    assert!(end(&out) > end(&used) + 0.2, "{} {}", end(&out), end(&used));
    assert!(used.notes.iter().any(|n| n.message.contains("limits beyond which the value lies")));
    let serial = plan("limits").replace(r#""curves""#, r#""errors": {"serial": "ar1"}, "curves""#);
    assert!(refused(&text, &serial).contains("a value beyond a limit"));
}

#[test]
fn values_suggest_their_distribution() {
    use courseband_study::{Distribution, Transform};
    let mut rng = Rng::new(6);
    let mut table = |draw: &mut dyn FnMut(&mut Rng, f64) -> String| {
        let mut text = String::from("who,arm,day,y\n");
        for s in 0..20 {
            for day in 0..5 {
                let _ = writeln!(text, "s{s},{},{day},{}", ["a", "b"][s % 2], draw(&mut rng, f64::from(day)));
            }
        }
        run(&text, r#"{"subjects": "none"}"#).proposal.map(|p| (p.distribution, p.transform))
    };
    let plain = Transform::Identity;
    assert_eq!(table(&mut |r, t| format!("{:.2}", 20.0 + t + r.normal())), None);
    assert_eq!(table(&mut |r, _| u8::from(r.uniform() < 0.4).to_string()), Some((Distribution::Binomial, plain)));
    assert_eq!(table(&mut |r, _| r.poisson(3.0).to_string()), Some((Distribution::Poisson, plain)));
    let wide = |r: &mut Rng, t: f64| {
        let rate = (1.0 + 0.5 * t).exp() * r.gamma(2.0) / 2.0;
        r.poisson(rate).to_string()
    };
    assert_eq!(table(&mut { wide }), Some((Distribution::NegativeBinomial, plain)));
    assert_eq!(
        table(&mut |r, t| format!("{:.3}", (0.5 * t + 0.3 * r.normal()).exp())),
        Some((Distribution::Normal, Transform::Log))
    );
    assert_eq!(table(&mut |r, _| format!("{:.4}", 0.02 + 0.9 * r.uniform())), Some((Distribution::Beta, plain)));
    let zeros = |r: &mut Rng, _| if r.uniform() < 0.2 { "0".into() } else { format!("{:.3}", 5.0 * r.gamma(2.0)) };
    assert_eq!(table(&mut { zeros }), Some((Distribution::Tweedie, plain)));
}
