//! What is inside the page's computing module, and under which licence.

use crate::failure::{Failure, Outcome};
use crate::places::Places;
use crate::run;

/// One line per library of the wasm: name, version, licence; and that of the page itself.
///
/// # Errors
/// When cargo cannot tell, or a library names no licence.
pub(super) fn list(places: &Places) -> Outcome<String> {
    let mut command = run::command("cargo");
    command.args(["tree", "--locked", "--package", "courseband-web", "--edges", "normal", "--prefix", "none"]);
    command.args(["--target", "wasm32-unknown-unknown", "--format", "{p}\t{l}"]).current_dir(places.root());
    let output = command.output().map_err(|error| Failure::new(format!("cargo tree: {error}")))?;
    if !output.status.success() {
        return Err(Failure::new(format!("cargo tree: {}", String::from_utf8_lossy(&output.stderr))));
    }
    let text = String::from_utf8_lossy(&output.stdout);
    let mut lines: Vec<String> = text.lines().filter_map(line).collect();
    lines.sort();
    lines.dedup();
    if let Some(bare) = lines.iter().find(|line| line.ends_with('\t')) {
        return Err(Failure::new(format!("{} names no licence", bare.trim())));
    }
    let all = lines.iter().map(|line| line.replace('\t', "  ")).collect::<Vec<_>>().join("\n");
    Ok(format!("Courseband is under MIT or Apache-2.0. Its computing module holds these libraries:\n\n{all}\n"))
}

/// `name version` and the licence, tab between; paths and marks of cargo left out.
fn line(line: &str) -> Option<String> {
    let (package, licence) = line.split_once('\t')?;
    let mut words = package.split_whitespace();
    let (name, version) = (words.next()?, words.next()?);
    Some(format!("{name} {}\t{}", version.trim_start_matches('v'), licence.trim().trim_end_matches(" (*)")))
}
