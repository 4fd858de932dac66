//! Prints how long fits take, as ratios to a yardstick in the same run.
//!
//! Yardsticks: the 900-row fit for the large tables, and statsmodels' MixedLM on the same
//! straight-line model where a Python with statsmodels is found (`COURSEBAND_PYTHON`, else `python3`).

use courseband_engine::special::Rng;
use courseband_engine::{Data, Model, Serial, SubjectEffects, SubjectRows, fit};
use courseband_study::{Plan, run};
use std::fmt::Write as _;
use std::process::Command;
use std::time::{Duration, Instant};

/// Subjects in three groups, slope + AR(1), `visits` visits of which a share is missing.
fn table(subjects: usize, visits: usize, missing: f64, seed: u64) -> String {
    let mut rng = Rng::new(seed);
    let mut text = String::from("subject,group,day,y\n");
    let step = 30.0 / visits as f64;
    for s in 0..subjects {
        let (level, trend, mut error) = (rng.normal(), 0.05 * rng.normal(), 0.7 * rng.normal());
        for visit in 0..visits {
            let t = step * visit as f64;
            let carry = libm::pow(0.7, step);
            error = carry * error + libm::sqrt(1.0 - carry * carry) * 0.7 * rng.normal();
            if visit > 0 && rng.uniform() < missing {
                continue;
            }
            let mean = 3.0 + libm::sin(t / 5.0) * (1.0 + 0.4 * (s % 3) as f64);
            let _ = writeln!(text, "s{s},g{},{t:.2},{:.5}", s % 3, mean + level + trend * t + error);
        }
    }
    text
}

fn timed(text: &str, plan: &str, rounds: u32) -> Duration {
    let plan = Plan::from_json(plan).expect("the plan is fixed here");
    let mut best = Duration::MAX;
    for _ in 0..rounds {
        let began = Instant::now();
        let findings = run(text.as_bytes(), &plan).expect("the table is made here");
        assert!(!findings.curves.is_empty(), "{:?}", findings.fit.remarks);
        best = best.min(began.elapsed());
    }
    best
}

/// The engine's fit of a table, slope + AR(1), without what follows it.
fn fit_alone(text: &str) -> Duration {
    let mut subjects: Vec<SubjectRows> = Vec::new();
    let mut last = "";
    for line in text.lines().skip(1) {
        let cells: Vec<&str> = line.split(',').collect();
        if cells[0] != last {
            last = cells[0];
            subjects.push(SubjectRows { group: cells[1][1..].parse().expect("g0 to g2"), ..SubjectRows::default() });
        }
        if let Some(rows) = subjects.last_mut() {
            rows.times.push(cells[2].parse().expect("a time"));
            rows.responses.push(cells[3].parse().expect("a response"));
        }
    }
    let data = Data { groups: 3, subjects };
    let model = Model { subjects: SubjectEffects::Slope, serial: Serial::Ar1, ..Model::default() };
    let mut best = Duration::MAX;
    for _ in 0..5 {
        let began = Instant::now();
        assert!(fit(&data, &model).is_ok());
        best = best.min(began.elapsed());
    }
    best
}

fn peak_memory() -> String {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find(|line| line.starts_with("VmHWM")).unwrap_or("VmHWM: unknown");
    line.split_whitespace().skip(1).collect::<Vec<_>>().join(" ")
}

/// Seconds of one MixedLM fit on the same table, random intercept and slope, straight lines per group.
fn statsmodels(text: &str) -> Option<Duration> {
    let python = std::env::var("COURSEBAND_PYTHON").unwrap_or_else(|_| "python3".into());
    let file = std::env::temp_dir().join(format!("courseband-bench-{}.csv", std::process::id()));
    std::fs::write(&file, text).ok()?;
    let code = "import sys,time,warnings;warnings.simplefilter('ignore')\n\
        import pandas as pd, statsmodels.formula.api as smf\n\
        t=pd.read_csv(sys.argv[1])\n\
        b=time.perf_counter();smf.mixedlm('y ~ 0 + group + group:day', t, groups=t.subject, re_formula='~day').fit(reml=True)\n\
        print(time.perf_counter()-b)";
    let output = Command::new(python).args(["-c", code]).arg(&file).output();
    let _ = std::fs::remove_file(&file);
    let seconds: f64 = String::from_utf8_lossy(&output.ok()?.stdout).trim().parse().ok()?;
    Some(Duration::from_secs_f64(seconds))
}

fn main() {
    let serial = r#"{"subjects":"slope","errors":{"serial":"ar1"},"columns":{"cluster":false}}"#;
    let straight = r#"{"subjects":"slope","curves":{"shape":"straight"},"columns":{"cluster":false}}"#;
    let small = table(60, 15, 0.0, 1);
    let typical = timed(&small, serial, 5);
    println!("Whole way from bytes to findings; best of several runs.\n");
    println!("{:<58} {:>12} {:>10}", "", "time", "ratio");
    let line = |what: &str, time: Duration, yardstick: Duration| {
        println!(
            "{what:<58} {:>9.1} ms {:>10.2}",
            time.as_secs_f64() * 1e3,
            time.as_secs_f64() / yardstick.as_secs_f64()
        );
    };
    line("900 rows, 60 subjects, 3 groups, slope + AR(1)", typical, typical);
    line("the fit alone, without bands and findings", fit_alone(&small), typical);
    let own = timed(&small, straight, 5);
    line("the same rows, straight lines, slope", own, typical);
    match statsmodels(&small) {
        Some(time) => line("statsmodels MixedLM, the same straight-line model", time, own),
        None => println!("statsmodels MixedLM: no Python with statsmodels was found"),
    }
    let hundred = timed(&table(1000, 111, 0.1, 2), serial, 2);
    line("100,000 rows, 1,000 subjects, a tenth missing", hundred, typical);
    let million = timed(&table(10_000, 111, 0.1, 3), serial, 1);
    line("1,000,000 rows, 10,000 subjects, a tenth missing", million, hundred);
    println!(
        "\nThe last ratio is growth from 100,000 to 1,000,000 rows. Peak memory of this process: {}.",
        peak_memory()
    );
}
