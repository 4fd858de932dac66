//! What the README's commands do.

mod debian;
mod dist;
mod failure;
mod places;
mod run;
mod serve;
mod test;
mod tidy;
mod wasm;
mod words;

use std::env;
use std::process::ExitCode;

use failure::Outcome;
use places::Places;
use words::Task;

fn main() -> ExitCode {
    match Task::read(env::args().skip(1)).and_then(|task| done(&task)) {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            eprintln!("xtask: {failure}");
            ExitCode::FAILURE
        }
    }
}

fn done(task: &Task) -> Outcome<()> {
    let places = Places::find();
    match task {
        Task::Build => wasm::build(&places),
        Task::Serve { port, open } => {
            wasm::build(&places)?;
            serve::serve(&places, *port, *open)
        }
        Task::Test { only, quick } => test::test(&places, only, *quick),
        Task::Dist => {
            wasm::build(&places)?;
            dist::write(&places).map(|_| ())
        }
        Task::Tidy => tidy::check(&places),
        Task::Reference => run::show(run::command("bash").arg("tests/reference/run.sh").current_dir(places.root())),
        Task::Bench { args } => bin(&places, "bench", args),
        Task::Rates { args } => bin(&places, "rates", args),
        Task::Evidence { args } => bin(&places, "evidence", args),
        Task::Help => {
            println!("{}", words::HELP);
            Ok(())
        }
    }
}

/// Runs a program of the tests package, optimised.
fn bin(places: &Places, name: &str, args: &[String]) -> Outcome<()> {
    let mut command = run::command("cargo");
    command.args(["run", "--release", "--quiet", "--package", "courseband-tests", "--bin", name, "--"]);
    run::show(command.args(args).current_dir(places.root()))
}
