//! Everything that is checked, step by step, with what is missing installed first.

mod browser;
mod count;

use std::time::Instant;

use crate::failure::{Failure, Outcome};
use crate::places::Places;
use crate::{run, tidy, wasm};

/// A named step; it gives the number of tests that it ran.
type Step = (&'static str, fn(&Places) -> Outcome<usize>);

const STEPS: [Step; 8] = [
    ("tidy", |places| tidy::check(places).map(|()| 1)),
    ("format", format),
    ("lint", lint),
    ("rust", rust),
    ("page", page),
    ("types", browser::types),
    ("wasm", |places| wasm::build(places).map(|()| 1)),
    ("browser", browser::tests),
];

/// Runs all steps, or those named; goes on after one that fails, and fails at the end.
///
/// # Errors
/// When a step fails or there is no step of a given name.
pub(crate) fn test(places: &Places, only: &[String], quick: bool) -> Outcome<()> {
    if let Some(unknown) = only.iter().find(|name| STEPS.iter().all(|(step, _)| step != name)) {
        let names: Vec<&str> = STEPS.iter().map(|(name, _)| *name).collect();
        return Err(Failure::new(format!("there is no step `{unknown}`; the steps are {}", names.join(", "))));
    }
    let (mut passed, mut failures) = (0, Vec::new());
    for (name, step) in STEPS {
        let wanted = only.is_empty() || only.iter().any(|asked| asked == name);
        if !wanted || (quick && matches!(name, "wasm" | "browser" | "types")) {
            continue;
        }
        println!("\n== {name}");
        let began = Instant::now();
        match step(places) {
            Ok(count) => {
                passed += count;
                println!("== {name}: {count} passed in {:.0} s", began.elapsed().as_secs_f64());
            }
            Err(failure) => {
                println!("== {name}: failed after {:.0} s: {failure}", began.elapsed().as_secs_f64());
                failures.push(name);
            }
        }
    }
    println!("\n{passed} passed, {} failed", failures.len());
    if failures.is_empty() { Ok(()) } else { Err(Failure::new(format!("failed: {}", failures.join(", ")))) }
}

fn format(places: &Places) -> Outcome<usize> {
    run::show(run::command("cargo").args(["fmt", "--all", "--check"]).current_dir(places.root())).map(|()| 1)
}

/// Lints of what is shipped; tests may use the platform's own functions. A toolchain without the linter is told so.
fn lint(places: &Places) -> Outcome<usize> {
    let present = run::command("cargo").args(["clippy", "--version"]).output().is_ok_and(|out| out.status.success());
    if !present {
        println!("the toolchain has no clippy: nothing is linted");
        return Ok(0);
    }
    let mut command = run::command("cargo");
    command.args(["clippy", "--workspace", "--lib", "--bins", "--locked", "--quiet", "--", "-D", "warnings"]);
    run::show(command.current_dir(places.root())).map(|()| 1)
}

fn rust(places: &Places) -> Outcome<usize> {
    let mut command = run::command("cargo");
    command.args(["test", "--workspace", "--locked", "--no-fail-fast"]).current_dir(places.root());
    count::of(&mut command, count::cargo)
}

fn page(places: &Places) -> Outcome<usize> {
    let mut command = run::command("node");
    command.arg("--test").args(count::files(&places.root().join("tests/page"), ".test.mjs")?);
    count::of(command.current_dir(places.root()), count::node)
}
