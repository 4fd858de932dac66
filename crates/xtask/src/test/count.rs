//! How many tests a program says it passed.

use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use crate::failure::{About, Failure, Outcome};
use crate::run;

/// Runs a test program with its output shown, and adds up what its lines say was passed.
///
/// # Errors
/// When it cannot be started, ends with an error, or passed nothing.
pub(crate) fn of(command: &mut Command, passed: fn(&str) -> usize) -> Outcome<usize> {
    let shown = run::shown(command);
    let mut child = command.stdout(Stdio::piped()).spawn().about(format!("cannot start `{shown}`"))?;
    let mut count = 0;
    if let Some(output) = child.stdout.take() {
        for line in BufReader::new(output).lines().map_while(Result::ok) {
            println!("{line}");
            count += passed(&line);
        }
    }
    let status = child.wait().about(&shown)?;
    match (status.success(), count) {
        (false, _) => Err(Failure::new(format!("`{shown}` ended with {status}"))),
        (true, 0) => Err(Failure::new(format!("`{shown}` ran no test"))),
        (true, count) => Ok(count),
    }
}

/// `test result: ok. 12 passed; ...`
pub(crate) fn cargo(line: &str) -> usize {
    let rest = line.strip_prefix("test result: ok. ").and_then(|rest| rest.split_once(" passed"));
    rest.and_then(|(count, _)| count.parse().ok()).unwrap_or(0)
}

/// `# pass 12`, or the same with another sign before it.
pub(crate) fn node(line: &str) -> usize {
    let words: Vec<&str> = line.split_whitespace().collect();
    match words.as_slice() {
        [_, "pass", count] => count.parse().unwrap_or(0),
        _ => 0,
    }
}

/// Files of a folder with this ending, in order.
///
/// # Errors
/// When the folder cannot be read.
pub(crate) fn files(folder: &Path, ending: &str) -> Outcome<Vec<PathBuf>> {
    let entries = std::fs::read_dir(folder).about(folder.display())?;
    let mut found: Vec<PathBuf> =
        entries.flatten().map(|entry| entry.path()).filter(|path| path.to_string_lossy().ends_with(ending)).collect();
    found.sort();
    Ok(found)
}

#[cfg(test)]
mod tests {
    use super::{cargo, node};

    #[test]
    fn counts_are_read_from_closing_lines() {
        assert_eq!(cargo("test result: ok. 12 passed; 0 failed; 0 ignored"), 12);
        assert_eq!(cargo("test result: FAILED. 3 passed; 1 failed"), 0);
        assert_eq!((node("# pass 7"), node("ℹ pass 7"), node("# fail 7")), (7, 7, 0));
    }
}
