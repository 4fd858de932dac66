//! Rules for the repository's texts that no compiler knows.

use std::fs;
use std::path::{Path, PathBuf};

use crate::failure::{About, Failure, Outcome};
use crate::places::Places;
use crate::run;

/// Lines of a source file at most.
const LONGEST: usize = 600;

/// Checks that every module says what it is, that no file is too long, that DEVELOPERS.md
/// names every crate and no other, and that no text holds a path of one machine.
///
/// # Errors
/// Names everything that is found.
pub(crate) fn check(places: &Places) -> Outcome<()> {
    let listed = run::read(run::command("git").args(["ls-files"]).current_dir(places.root()))?;
    let mut found = Vec::new();
    for name in listed.lines() {
        let path = places.root().join(name);
        let Ok(text) = fs::read_to_string(&path) else { continue };
        one_file(name, &text, &mut found);
    }
    map_of_crates(places, &mut found)?;
    if found.is_empty() {
        return Ok(());
    }
    Err(Failure::new(format!("{} places to mend:\n  {}", found.len(), found.join("\n  "))))
}

fn one_file(name: &str, text: &str, found: &mut Vec<String>) {
    let ending = Path::new(name).extension().and_then(|e| e.to_str()).unwrap_or("");
    if ending == "rs" && !text.starts_with("//!") {
        found.push(format!("{name}: does not begin by saying what it is"));
    }
    if matches!(ending, "rs" | "js" | "mjs" | "css") && text.lines().count() > LONGEST {
        found.push(format!("{name}: over {LONGEST} lines"));
    }
    for folder in ["work", "root", "farm"] {
        let path = format!("/{folder}/");
        let starts =
            |at: usize| !text[..at].ends_with(|c: char| c.is_alphanumeric() || c == '.' || c == '_' || c == '-');
        if name != "crates/xtask/src/tidy.rs" && text.match_indices(&path).any(|(at, _)| starts(at)) {
            found.push(format!("{name}: holds a path of one machine, {path}"));
        }
    }
    if name.ends_with("package-lock.json") && text.contains("\"resolved\"") {
        found.push(format!("{name}: holds download addresses"));
    }
}

/// The code map names what is there.
fn map_of_crates(places: &Places, found: &mut Vec<String>) -> Outcome<()> {
    let map = fs::read_to_string(places.root().join("DEVELOPERS.md")).about("DEVELOPERS.md")?;
    let folder = places.root().join("crates");
    let crates: Vec<PathBuf> = fs::read_dir(&folder).about(folder.display())?.flatten().map(|e| e.path()).collect();
    let names: Vec<String> = crates.iter().filter_map(|p| Some(p.file_name()?.to_str()?.to_owned())).collect();
    for name in &names {
        if !map.contains(&format!("`{name}`")) {
            found.push(format!("DEVELOPERS.md does not name the crate {name}"));
        }
    }
    for word in map.split('`').filter(|word| word.starts_with("courseband-") && !word.contains([' ', '/', '.'])) {
        if word != "courseband-tests" && !names.iter().any(|name| name == word) {
            found.push(format!("DEVELOPERS.md names {word}, which is no crate"));
        }
    }
    Ok(())
}
