//! Simulates studies and keeps the counts: `evidence FILE [--cells TEXT] [--studies N] [--refits N] [--minutes M]`.
//!
//! FILE is a CSV of counts per cell and band. Cells whose name holds TEXT get further studies, `N` more each,
//! until the minutes are over; what was counted before is kept.

use courseband_tests::evidence::{Cell, Rate, Tally, all_cells, simulate};
use std::collections::BTreeMap;
use std::process::ExitCode;
use std::sync::Mutex;
use std::sync::atomic::{AtomicU64, Ordering};
use std::time::Instant;

type Counts = BTreeMap<(u64, String), Tally>;

fn main() -> ExitCode {
    match run(&std::env::args().skip(1).collect::<Vec<_>>()) {
        Ok(()) => ExitCode::SUCCESS,
        Err(message) => {
            eprintln!("{message}");
            ExitCode::from(2)
        }
    }
}

fn run(arguments: &[String]) -> Result<(), String> {
    let file = arguments.first().ok_or("Name the file of counts.")?;
    let option = |name: &str| arguments.iter().position(|a| a == name).and_then(|k| arguments.get(k + 1));
    let number = |name: &str, default: u64| match option(name) {
        Some(text) => text.parse().map_err(|_| format!("{name} needs a whole number, not {text}.")),
        None => Ok(default),
    };
    let (studies, refits, minutes) = (number("--studies", 200)?, number("--refits", 199)?, number("--minutes", 60)?);
    let wanted = option("--cells").map_or("", String::as_str);
    let began = Instant::now();
    let mut counts = read(file)?;
    for cell in all_cells().iter().filter(|cell| cell.name().contains(wanted)) {
        if began.elapsed().as_secs() >= 60 * minutes {
            println!("Time is over; {} and what follows is not run.", cell.name());
            break;
        }
        more(cell, studies, refits, &mut counts);
        std::fs::write(file, text(&counts)).map_err(|error| format!("{file}: {error}"))?;
        report(cell, &counts);
    }
    Ok(())
}

/// Further studies of one cell, on all cores.
fn more(cell: &Cell, studies: u64, refits: u64, counts: &mut Counts) {
    let first = counts.get(&(cell.number, "quick".into())).map_or(0, |tally| tally.studies);
    let next = AtomicU64::new(first);
    let outcomes = Mutex::new(Vec::new());
    let threads = std::thread::available_parallelism().map_or(1, usize::from);
    std::thread::scope(|scope| {
        for _ in 0..threads {
            scope.spawn(|| {
                loop {
                    let index = next.fetch_add(1, Ordering::Relaxed);
                    if index >= first + studies {
                        break;
                    }
                    let outcome = simulate(cell, index, refits);
                    if let Ok(mut all) = outcomes.lock() {
                        all.push((index, outcome));
                    }
                }
            });
        }
    });
    let mut all = outcomes.into_inner().unwrap_or_default();
    // Sums of floating-point numbers in the order of the studies, whoever was first.
    all.sort_by_key(|(index, _)| *index);
    for (_, (quick, calibrated)) in &all {
        counts.entry((cell.number, "quick".into())).or_default().add(quick);
        if let Some(calibrated) = calibrated {
            counts.entry((cell.number, "calibrated".into())).or_default().add(calibrated);
        }
    }
}

fn report(cell: &Cell, counts: &Counts) {
    for band in ["quick", "calibrated"] {
        if let Some(tally) = counts.get(&(cell.number, band.to_string())) {
            let (covered, stretch) = (Rate::of(tally.covered, tally.studies), Rate::of(tally.stretch, tally.studies));
            println!(
                "{:<34} {band:<10} studies {:>5}  covered {:.3} ({:.3})  across {:.3}  stretch {:.3}  area {:.3}  onset {:.3}  width {:.2}  failed {}",
                cell.name(),
                tally.studies,
                covered.share,
                covered.error,
                tally.across / tally.studies as f64,
                stretch.share,
                Rate::of(tally.area, tally.studies).share,
                Rate::of(tally.onset, tally.onsets).share,
                tally.width / tally.studies as f64,
                tally.failed
            );
        }
    }
}

fn text(counts: &Counts) -> String {
    let cells = all_cells();
    let mut text = format!("cell,name,band,{}\n", Tally::HEADER);
    for ((number, band), tally) in counts {
        text += &format!("{number},{},{band},{}\n", cells[*number as usize].name(), tally.csv());
    }
    text
}

fn read(file: &str) -> Result<Counts, String> {
    let mut counts = Counts::new();
    let Ok(bytes) = std::fs::read(file) else {
        return Ok(counts);
    };
    for record in csv::Reader::from_reader(bytes.as_slice()).records() {
        let record = record.map_err(|error| format!("{file}: {error}"))?;
        let whole = |k: usize| record[k].parse::<u64>().map_err(|_| format!("{file}: {} is no count", &record[k]));
        let real = |k: usize| record[k].parse::<f64>().map_err(|_| format!("{file}: {} is no number", &record[k]));
        let tally = Tally {
            studies: whole(3)?,
            covered: whole(4)?,
            across: real(5)?,
            stretch: whole(6)?,
            onset: whole(7)?,
            onsets: whole(8)?,
            area: whole(9)?,
            width: real(10)?,
            failed: whole(11)?,
        };
        counts.insert((whole(0)?, record[2].to_string()), tally);
    }
    Ok(counts)
}
