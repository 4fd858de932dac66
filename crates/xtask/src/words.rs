//! The words after `cargo xtask`.

use crate::failure::{Failure, Outcome};
use crate::serve;

pub(crate) const HELP: &str = "\
cargo xtask build                 build the page's wasm into www/wasm
cargo xtask serve                 build, then give the page out on localhost
    --port N                      on this port (default 8127; 0 takes a free one)
    --no-open                     without opening a browser
cargo xtask test                  run everything that is checked
    --only STEP                   this step alone; may be given several times
    --quick                       without wasm and browser
cargo xtask dist                  write the page for giving away into dist: a folder for a web server, and one .html file
cargo xtask tidy                  check the texts and the layout of the repository
cargo xtask reference             recompute the reference values of the tests
cargo xtask bench                 print how long fits take
cargo xtask rates [RUNS [FILE]]   how often the checks light on tables with a known fault
cargo xtask evidence FILE         simulate studies and add to the counts in FILE
    --cells TEXT                  cells whose name holds this text
    --studies N --refits N        further studies per cell, refits per study
    --minutes N                   begin no cell after this time";

/// What is asked for.
#[derive(Debug, PartialEq, Eq)]
pub(crate) enum Task {
    Build,
    Serve { port: u16, open: bool },
    Test { only: Vec<String>, quick: bool },
    Dist,
    Tidy,
    Reference,
    Bench { args: Vec<String> },
    Rates { args: Vec<String> },
    Evidence { args: Vec<String> },
    Help,
}

impl Task {
    /// # Errors
    /// When a word is not known; the message names it.
    pub(crate) fn read(words: impl IntoIterator<Item = String>) -> Outcome<Self> {
        let mut words = words.into_iter();
        let Some(first) = words.next() else {
            return Ok(Self::Help);
        };
        let task = match first.as_str() {
            "build" => Self::Build,
            "serve" => serving(&mut words)?,
            "test" => testing(&mut words)?,
            "dist" => Self::Dist,
            "tidy" => Self::Tidy,
            "reference" => Self::Reference,
            "bench" => Self::Bench { args: words.by_ref().collect() },
            "rates" => Self::Rates { args: words.by_ref().collect() },
            "evidence" => Self::Evidence { args: words.by_ref().collect() },
            "help" | "--help" | "-h" => Self::Help,
            other => return Err(unknown(other)),
        };
        match words.next() {
            None => Ok(task),
            Some(extra) => Err(unknown(&extra)),
        }
    }
}

fn serving(words: &mut impl Iterator<Item = String>) -> Outcome<Task> {
    let (mut port, mut open) = (serve::PORT, true);
    while let Some(word) = words.next() {
        match word.as_str() {
            "--port" => {
                let given = words.next().unwrap_or_default();
                port = given
                    .parse()
                    .map_err(|_| Failure::new(format!("--port needs a number up to 65535, not `{given}`")))?;
            }
            "--no-open" => open = false,
            other => return Err(unknown(other)),
        }
    }
    Ok(Task::Serve { port, open })
}

fn testing(words: &mut impl Iterator<Item = String>) -> Outcome<Task> {
    let (mut only, mut quick) = (Vec::new(), false);
    while let Some(word) = words.next() {
        match word.as_str() {
            "--only" => only.push(words.next().ok_or_else(|| Failure::new("--only needs the name of a step"))?),
            "--quick" => quick = true,
            other => return Err(unknown(other)),
        }
    }
    Ok(Task::Test { only, quick })
}

fn unknown(word: &str) -> Failure {
    Failure::new(format!("`{word}` is not known here. What is:\n{HELP}"))
}

#[cfg(test)]
mod tests {
    use super::Task;

    fn read(line: &str) -> Option<Task> {
        Task::read(line.split_whitespace().map(str::to_owned)).ok()
    }

    #[test]
    fn tasks_and_their_options() {
        assert_eq!(read("build"), Some(Task::Build));
        assert_eq!(read("serve --port 0 --no-open"), Some(Task::Serve { port: 0, open: false }));
        let only = vec!["rust".to_owned(), "tidy".to_owned()];
        assert_eq!(read("test --only rust --only tidy"), Some(Task::Test { only, quick: false }));
        assert_eq!(read(""), Some(Task::Help));
    }

    #[test]
    fn unknown_words_are_refused() {
        for line in ["bild", "build now", "serve --port", "serve --port many", "test --only", "test --fast"] {
            assert_eq!(read(line), None, "{line}");
        }
    }
}
