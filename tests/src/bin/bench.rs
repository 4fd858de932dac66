//! Prints how long fits take, stage by stage, beside their limits and a yardstick in the same run.
//!
//! `bench [--quick]`; `--quick` leaves the large tables out. Where Linux tells the processor time of this thread
//! it is printed beside the time on the clock and held to the limits, so that a busy machine does no harm.
//! Yardstick: statsmodels' MixedLM on the same straight-line model, where a Python with statsmodels is found
//! (`COURSEBAND_PYTHON`, else `python3`).

use courseband_engine::special::Rng;
use courseband_engine::{Data, Model, Serial, SubjectEffects, SubjectRows, fit};
use courseband_study::{Plan, Study, run};
use std::fmt::Write as _;
use std::hint::black_box;
use std::process::Command;
use std::time::Instant;

const SERIAL: &str = r#"{"subjects":"slope","errors":{"serial":"ar1"},"columns":{"cluster":false}}"#;
const PLUG_IN: &str = r#"{"subjects":"slope","errors":{"serial":"ar1"},"columns":{"cluster":false},
    "comparisons":{"small_sample":"none"}}"#;
const STRAIGHT: &str = r#"{"subjects":"slope","curves":{"shape":"straight"},"columns":{"cluster":false}}"#;

/// Seconds on the clock, and of the processor where known.
#[derive(Clone, Copy)]
struct Cost {
    clock: f64,
    processor: Option<f64>,
}

impl Cost {
    /// What counts: processor time where known.
    fn own(self) -> f64 {
        self.processor.unwrap_or(self.clock)
    }
}

/// Processor seconds of this thread: the first number of Linux's `schedstat`, in nanoseconds.
fn processor() -> Option<f64> {
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").ok()?;
    Some(text.split_whitespace().next()?.parse::<f64>().ok()? * 1e-9)
}

/// The cheapest of some rounds. Short work is repeated within a round: the processor's clock ticks in milliseconds.
fn cost<T>(rounds: usize, mut work: impl FnMut() -> T) -> Cost {
    let began = Instant::now();
    black_box(work());
    let repeats = (0.1 / began.elapsed().as_secs_f64()).clamp(1.0, 100.0) as usize;
    let once = |_| {
        let (clock, before) = (Instant::now(), processor());
        for _ in 0..repeats {
            black_box(work());
        }
        let each = |seconds: f64| seconds / repeats as f64;
        let spent = before.zip(processor()).map(|(before, after)| each(after - before));
        Cost { clock: each(clock.elapsed().as_secs_f64()), processor: spent }
    };
    let rounds = (0..rounds).map(once);
    rounds.reduce(|best, next| if next.own() < best.own() { next } else { best }).expect("at least one round")
}

/// Subjects in three groups, level, trend and AR(1), `visits` visits of which a share is missing.
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

/// Bytes to findings.
fn whole(text: &str, plan: &str, rounds: usize) -> Cost {
    let plan = Plan::from_json(plan).expect("the plan is fixed here");
    cost(rounds, || {
        let findings = run(text.as_bytes(), &plan).expect("the table is made here");
        assert!(!findings.curves.is_empty(), "{:?}", findings.fit.remarks);
        findings
    })
}

/// Bytes to observations.
fn reading(text: &str, rounds: usize) -> Cost {
    let plan = Plan::from_json(SERIAL).expect("the plan is fixed here");
    cost(rounds, || {
        let mut study = Study::open(text.as_bytes()).expect("the table is made here");
        study.reading(&plan).expect("the table is made here");
        study
    })
}

/// Observations to a fitted model, slope + AR(1), nothing after it; and how often its criterion was evaluated.
fn fitting(text: &str, rounds: usize) -> (Cost, usize) {
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
    let data = Data { groups: 3, subjects, ..Data::default() };
    let model = Model { subjects: SubjectEffects::Slope, serial: Serial::Ar1, ..Model::default() };
    let mut evaluations = 0;
    let cost = cost(rounds, || {
        let fitted = fit(&data, &model).expect("the model fits the table made here");
        evaluations = fitted.evaluations();
        fitted
    });
    (cost, evaluations)
}

/// Largest memory of this process so far, in megabytes.
fn peak_memory() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM"))?;
    Some(line.split_whitespace().nth(1)?.parse::<f64>().ok()? / 1024.0)
}

/// One MixedLM fit of the same table, random level and trend, a straight line per group; best of three rounds.
/// The processor time is Python's own, with one thread for its matrices.
fn statsmodels(text: &str) -> Option<Cost> {
    let python = std::env::var("COURSEBAND_PYTHON").unwrap_or_else(|_| "python3".into());
    let file = std::env::temp_dir().join(format!("courseband-bench-{}.csv", std::process::id()));
    std::fs::write(&file, text).ok()?;
    let code = "import sys,time,warnings;warnings.simplefilter('ignore')\n\
        import pandas as pd, statsmodels.formula.api as smf\n\
        t=pd.read_csv(sys.argv[1])\n\
        def once():\n\
        \x20 a,b=time.perf_counter(),time.process_time()\n\
        \x20 smf.mixedlm('y ~ 0 + group + group:day', t, groups=t.subject, re_formula='~day').fit(reml=True)\n\
        \x20 return time.process_time()-b,time.perf_counter()-a\n\
        print(*min(once() for _ in range(3)))";
    let mut command = Command::new(python);
    command.args(["-c", code]).arg(&file).env("OMP_NUM_THREADS", "1").env("OPENBLAS_NUM_THREADS", "1");
    let output = command.output();
    let _ = std::fs::remove_file(&file);
    let text = String::from_utf8_lossy(&output.ok()?.stdout).into_owned();
    let mut numbers = text.split_whitespace().map(str::parse::<f64>);
    let (processor, clock) = (numbers.next()?.ok()?, numbers.next()?.ok()?);
    Some(Cost { clock, processor: Some(processor) })
}

fn line(what: &str, cost: Cost, limit: Option<f64>) {
    let ms = |seconds: f64| format!("{:.1}", seconds * 1e3);
    let own = cost.processor.map_or_else(|| "-".into(), ms);
    let limit = limit.map_or_else(String::new, |limit| {
        format!("{:>9} {}", ms(limit), if cost.own() <= limit { "met" } else { "NOT MET" })
    });
    println!("{what:<52} {:>11} {own:>11} {limit}", ms(cost.clock));
}

fn ratio(what: &str, value: f64, limit: Option<f64>) {
    let limit = limit
        .map_or_else(String::new, |limit| format!("{limit:>9.1} {}", if value <= limit { "met" } else { "NOT MET" }));
    println!("{what:<52} {value:>11.2} {:>11} {limit}", "");
}

fn main() {
    let quick = std::env::args().any(|word| word == "--quick");
    println!("{:<52} {:>11} {:>11} {:>9}", "milliseconds, best of several rounds", "clock", "processor", "at most");
    let small = table(60, 15, 0.0, 1);
    println!("\n900 rows, 60 subjects, 3 groups, 15 visits");
    line("  bytes to observations", reading(&small, 5), None);
    line("  fit: curves, slope + AR(1)", fitting(&small, 5).0, Some(0.03));
    line("  bytes to findings, plug-in bands", whole(&small, PLUG_IN, 5), None);
    let typical = whole(&small, SERIAL, 5);
    line("  bytes to findings, small-sample bands", typical, None);
    let own = whole(&small, STRAIGHT, 5);
    line("  bytes to findings, straight lines, slope", own, None);
    match statsmodels(&small) {
        Some(other) => {
            line("  statsmodels MixedLM, fit of the same lines", other, None);
            ratio("  statsmodels' fit to our bytes-to-findings", other.own() / own.own(), None);
        }
        None => println!("  statsmodels MixedLM: no Python with statsmodels was found"),
    }
    if quick {
        return;
    }
    println!("\n100,000 rows, 1,000 subjects, 111 visits, a tenth missing");
    let text = table(1000, 111, 0.1, 2);
    line("  bytes to observations", reading(&text, 3), None);
    let (hundred_fit, few) = fitting(&text, 3);
    line("  fit: curves, slope + AR(1)", hundred_fit, None);
    let hundred = whole(&text, SERIAL, 3);
    line("  bytes to findings", hundred, None);
    println!("\n1,000,000 rows, 10,000 subjects, 111 visits, a tenth missing");
    let text = table(10_000, 111, 0.1, 3);
    line("  bytes to observations", reading(&text, 1), None);
    let (million_fit, many) = fitting(&text, 1);
    line("  fit: curves, slope + AR(1)", million_fit, None);
    let million = whole(&text, SERIAL, 1);
    line("  bytes to findings", million, Some(12.0));
    ratio("  growth from 100,000 rows, bytes to findings", million.own() / hundred.own(), Some(13.0));
    let evaluation = |fit: Cost, count: usize| fit.own() / count as f64;
    ratio("  growth of one evaluation", evaluation(million_fit, many) / evaluation(hundred_fit, few), None);
    println!("  evaluations of the criterion: {few} and {many}");
    match peak_memory() {
        Some(megabytes) => ratio("  peak memory of this process, MB", megabytes, Some(1200.0)),
        None => println!("  peak memory: unknown on this system"),
    }
}
