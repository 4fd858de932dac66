//! What the README's commands do.

mod debian;
mod failure;
mod places;
mod run;
mod serve;
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
        _ => {
            println!("{}", words::HELP);
            Ok(())
        }
    }
}
