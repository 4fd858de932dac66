//! Prints what is read from a table: `cargo run -p courseband-table --example look -- TABLE`.

use courseband_table::{Request, Table, TableError};
use std::time::Instant;

fn main() {
    for path in std::env::args().skip(1) {
        println!("== {path}");
        match std::fs::read(&path) {
            Ok(bytes) => {
                if let Err(error) = look(&bytes) {
                    println!("refused: {error}");
                }
            }
            Err(error) => println!("cannot be opened: {error}"),
        }
    }
}

fn look(bytes: &[u8]) -> Result<(), TableError> {
    let start = Instant::now();
    let table = Table::read(bytes)?;
    let read = start.elapsed();
    let reading = table.observe(&Request::default())?;
    println!("read in {read:?}, observed in {:?}", start.elapsed() - read);
    let observations = &reading.observations;
    println!(
        "{:?} {:?} rows {} subjects {} groups {:?} clusters {} time in {}",
        reading.layout,
        reading.columns,
        observations.time.len(),
        observations.subjects.len(),
        observations.groups,
        observations.clusters.len(),
        observations.time_word
    );
    for reason in &reading.reasons {
        println!("  {}: {}", reason.role, reason.reason);
    }
    for question in &reading.questions {
        println!("  ? {} {:?}", question.text, question.choices);
    }
    for note in &reading.notes {
        println!("  - {note}");
    }
    for problem in reading.problems.iter().take(20) {
        println!("  ! row {} {} {:?}: {}", problem.row, problem.column, problem.value, problem.message);
    }
    Ok(())
}
