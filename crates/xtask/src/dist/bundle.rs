//! The page's modules as one script.
//!
//! Each module becomes a function that is run once, after those that it imports; what it exports is
//! what the function returns. Only what the page uses is understood: named imports, imports of a whole
//! module, exported declarations. Anything else is refused, and so are circles.

use std::collections::BTreeMap;
use std::path::{Component, Path, PathBuf};

use crate::failure::{Failure, Outcome};

/// The modules that `entry` needs, as one script in strict mode. `read` gives a module's text by its path.
///
/// # Errors
/// When a module cannot be read, uses a form of import or export that is not understood, or imports itself in a circle.
pub(super) fn bundle(entry: &str, read: &dyn Fn(&Path) -> Outcome<String>) -> Outcome<String> {
    let mut bundler = Bundler { read, names: BTreeMap::new(), open: Vec::new(), out: String::from("'use strict';\n") };
    bundler.add(Path::new(entry))?;
    Ok(bundler.out)
}

struct Bundler<'a> {
    read: &'a dyn Fn(&Path) -> Outcome<String>,
    /// Name of each finished module's exports.
    names: BTreeMap<PathBuf, String>,
    /// Modules under way.
    open: Vec<PathBuf>,
    out: String,
}

impl Bundler<'_> {
    fn add(&mut self, path: &Path) -> Outcome<String> {
        if let Some(name) = self.names.get(path) {
            return Ok(name.clone());
        }
        if self.open.iter().any(|open| open == path) {
            return Err(Failure::new(format!("{} imports itself in a circle", path.display())));
        }
        self.open.push(path.to_path_buf());
        let text = (self.read)(path)?;
        let (head, body) = self.imports(path, &text)?;
        let (body, exports) = exported(path, &body)?;
        let name = format!("m{}", self.names.len());
        self.out += &format!("const {name} = (() => {{\n{head}{body}\nreturn {{ {} }};\n}})();\n", exports.join(", "));
        self.open.pop();
        self.names.insert(path.to_path_buf(), name.clone());
        Ok(name)
    }

    /// Declarations in place of the imports, and the text without them.
    fn imports(&mut self, path: &Path, text: &str) -> Outcome<(String, String)> {
        let (mut head, mut body) = (String::new(), String::new());
        let mut lines = text.lines();
        while let Some(line) = lines.next() {
            if !line.starts_with("import ") && !line.starts_with("import{") {
                body += line;
                body.push('\n');
                continue;
            }
            let mut statement = line.to_string();
            while !statement.trim_end().ends_with(';') {
                let Some(more) = lines.next() else {
                    return Err(not_understood(path, line));
                };
                statement += " ";
                statement += more.trim();
            }
            head += &self.declaration(path, &statement)?;
        }
        Ok((head, body))
    }

    fn declaration(&mut self, path: &Path, statement: &str) -> Outcome<String> {
        let parts = statement.strip_prefix("import").and_then(|rest| rest.trim_end_matches(';').rsplit_once(" from "));
        let (what, from) = parts.ok_or_else(|| not_understood(path, statement))?;
        let from = from.trim().trim_matches(['\'', '"']);
        if !from.starts_with('.') {
            return Err(not_understood(path, statement));
        }
        let name = self.add(&joined(path, from))?;
        let what = what.trim();
        if let Some(whole) = what.strip_prefix("* as ") {
            return Ok(format!("const {} = {name};\n", whole.trim()));
        }
        let list = what.strip_prefix('{').and_then(|rest| rest.strip_suffix('}'));
        let list = list.ok_or_else(|| not_understood(path, statement))?.replace(" as ", ": ");
        Ok(format!("const {{{list}}} = {name};\n"))
    }
}

/// The text with its exports as plain declarations, and their names.
fn exported(path: &Path, text: &str) -> Outcome<(String, Vec<String>)> {
    let mut names = Vec::new();
    let mut out = String::new();
    for line in text.lines() {
        let Some(rest) = line.strip_prefix("export ") else {
            out += line;
            out.push('\n');
            continue;
        };
        if rest.trim() == "{};" {
            continue;
        }
        let declared =
            ["async function ", "function ", "class ", "const "].iter().find_map(|word| rest.strip_prefix(word));
        let name: String = declared
            .unwrap_or_default()
            .chars()
            .take_while(|letter| letter.is_alphanumeric() || matches!(letter, '_' | '$'))
            .collect();
        if name.is_empty() {
            return Err(not_understood(path, line));
        }
        names.push(name);
        out += rest;
        out.push('\n');
    }
    Ok((out, names))
}

fn not_understood(path: &Path, line: &str) -> Failure {
    Failure::new(format!("{}: the single file does not understand `{}`", path.display(), line.trim()))
}

/// `from` as seen from the module `path`, without `.` and `..`.
fn joined(path: &Path, from: &str) -> PathBuf {
    let mut whole = path.parent().map(Path::to_path_buf).unwrap_or_default();
    for part in Path::new(from).components() {
        match part {
            Component::ParentDir => {
                whole.pop();
            }
            Component::Normal(name) => whole.push(name),
            _ => {}
        }
    }
    whole
}

#[cfg(test)]
mod tests {
    use super::*;

    fn of(files: &[(&str, &str)]) -> Outcome<String> {
        bundle("main.js", &|path| {
            let found = files.iter().find(|(name, _)| Path::new(name) == path);
            found.map(|(_, text)| (*text).to_string()).ok_or_else(|| Failure::new(format!("no {}", path.display())))
        })
    }

    #[test]
    fn modules_come_after_what_they_import_and_once() {
        let script = of(&[
            ("main.js", "import { a, b as c } from './one/a.js';\nimport * as d from './d.js';\na(c, d);\n"),
            ("one/a.js", "import {\n  d,\n} from '../d.js';\nexport function a() { return d; }\nexport const b = 1;\n"),
            ("d.js", "export class d {}\n"),
        ])
        .unwrap();
        assert_eq!(script.matches("class d").count(), 1);
        assert!(script.find("class d").unwrap() < script.find("function a").unwrap());
        assert!(script.contains("const { a, b: c } = m1;") && script.contains("const d = m0;"), "{script}");
        assert!(script.contains("return { a, b };"));
    }

    #[test]
    fn what_is_not_understood_is_refused() {
        for text in ["import x from './d.js';\n", "import { x } from 'far';\n", "export default 1;\n"] {
            let refused = of(&[("main.js", text), ("d.js", "")]).unwrap_err().to_string();
            assert!(refused.contains("does not understand"), "{refused}");
        }
        let circle = of(&[("main.js", "import { a } from './a.js';\n"), ("a.js", "import { b } from './main.js';\n")]);
        assert!(circle.unwrap_err().to_string().contains("circle"));
    }
}
