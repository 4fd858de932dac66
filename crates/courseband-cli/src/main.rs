//! The native command `courseband`: a table and a plan in, findings out.
//!
//! Exit 0: findings written, also for a fit at a boundary or failed (both said in them).
//! Exit 2: the plan or the table cannot be used; one message on standard error, nothing on standard output.

mod arguments;
mod check;

use arguments::{Ask, Task};
use courseband_study::{Plan, Refusal, run};
use std::io::{Read, Write};
use std::process::ExitCode;

const HELP: &str = "\
courseband: when groups followed over time come apart, by how much, how surely

  courseband TABLE --plan plan.json [--out findings.json]
  courseband check TABLE [--plan plan.json]

TABLE is text (commas, semicolons, tabs) or a workbook (.xlsx, .ods); it or the plan may be '-' for standard input. Without --plan every choice takes its default.
Findings go to standard output, or to the file named by --out, as JSON.
'check' prints what the reader understood and every problem that it found.

  --help       this text
  --version    the version

Statistical results are not treatment advice; have confirmatory analyses reviewed.
";

fn main() -> ExitCode {
    let arguments: Vec<String> = std::env::args_os().skip(1).map(|a| a.to_string_lossy().into_owned()).collect();
    match act(&arguments) {
        Ok(()) => ExitCode::SUCCESS,
        Err(message) => {
            // A closed standard error leaves nobody to tell.
            let _ = writeln!(std::io::stderr(), "{}", one_line(&message));
            ExitCode::from(2)
        }
    }
}

fn act(arguments: &[String]) -> Result<(), String> {
    match Task::parse(arguments)? {
        Task::Help => put(None, HELP.as_bytes()),
        Task::Version => put(None, concat!("courseband ", env!("CARGO_PKG_VERSION"), "\n").as_bytes()),
        Task::Find(ask) => {
            let (table, plan) = inputs(&ask)?;
            let findings = run(&table, &plan).map_err(in_words)?;
            let mut text = serde_json::to_vec_pretty(&findings)
                .map_err(|error| format!("The findings cannot be written: {error}."))?;
            text.push(b'\n');
            put(ask.out.as_deref(), &text)
        }
        Task::Check(ask) => {
            let (table, plan) = inputs(&ask)?;
            put(None, check::report(&table, &plan).map_err(in_words)?.as_bytes())
        }
    }
}

fn inputs(ask: &Ask) -> Result<(Vec<u8>, Plan), String> {
    let plan = match &ask.plan {
        None => Plan::default(),
        Some(path) => {
            let bytes = get(path)?;
            let text = String::from_utf8(bytes)
                .map_err(|_| format!("{path}: the plan is not UTF-8 text. Save it as UTF-8."))?;
            Plan::from_json(text.trim_start_matches('\u{feff}')).map_err(in_words)?
        }
    };
    Ok((get(&ask.table)?, plan))
}

fn get(path: &str) -> Result<Vec<u8>, String> {
    let mut bytes = Vec::new();
    let read = if path == "-" {
        std::io::stdin().lock().read_to_end(&mut bytes).map(|_| ())
    } else {
        std::fs::read(path).map(|read| bytes = read)
    };
    let what = if path == "-" { "Standard input" } else { path };
    read.map(|()| bytes).map_err(|error| format!("{what} cannot be read: {error}. Check the name and the permissions."))
}

/// Writes everything, or says why not. A reader that has seen enough (a closed pipe) is no error.
fn put(path: Option<&str>, bytes: &[u8]) -> Result<(), String> {
    let written = match path {
        None => {
            let mut out = std::io::stdout().lock();
            out.write_all(bytes).and_then(|()| out.flush())
        }
        Some(path) => std::fs::write(path, bytes),
    };
    match written {
        Err(error) if path.is_none() && error.kind() == std::io::ErrorKind::BrokenPipe => Ok(()),
        other => other.map_err(|error| format!("{} cannot be written: {error}.", path.unwrap_or("Standard output"))),
    }
}

fn in_words(refusal: Refusal) -> String {
    refusal.to_string()
}

fn one_line(message: &str) -> String {
    message.split_whitespace().collect::<Vec<_>>().join(" ")
}
