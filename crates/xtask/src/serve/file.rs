//! Which file stands behind a path, and what kind it is.

use std::fs;
use std::path::{Path, PathBuf};

use crate::places::Places;

/// The folders that are given out.
pub(crate) struct Site {
    page: PathBuf,
    demos: PathBuf,
}

impl Site {
    pub(crate) fn of(places: &Places) -> Self {
        Self { page: places.www(), demos: places.demo_data() }
    }

    #[cfg(test)]
    pub(crate) fn new(page: PathBuf, demos: PathBuf) -> Self {
        Self { page, demos }
    }

    /// The kind and the bytes, or nothing.
    pub(crate) fn file(&self, path: &str) -> Option<(&'static str, Vec<u8>)> {
        let path = path.strip_prefix('/')?;
        let (folder, rest) = match path.strip_prefix("demo-data/") {
            Some(rest) => (&self.demos, rest),
            None => (&self.page, if path.is_empty() { "index.html" } else { path }),
        };
        if !is_plain(rest) {
            return None;
        }
        let file = folder.join(rest);
        let bytes = fs::read(&file).ok()?;
        Some((kind_of(&file), bytes))
    }
}

/// Only letters, digits and a few signs, no part that starts with a dot: a
/// path that cannot leave its folder.
fn is_plain(path: &str) -> bool {
    path.split('/').all(|part| {
        !part.is_empty()
            && !part.starts_with('.')
            && part.bytes().all(|byte| byte.is_ascii_alphanumeric() || b"-_.".contains(&byte))
    })
}

fn kind_of(file: &Path) -> &'static str {
    match file.extension().and_then(|extension| extension.to_str()).unwrap_or_default() {
        "html" => "text/html; charset=utf-8",
        "js" | "mjs" => "text/javascript; charset=utf-8",
        "css" => "text/css; charset=utf-8",
        "wasm" => "application/wasm",
        "json" => "application/json; charset=utf-8",
        "csv" => "text/csv; charset=utf-8",
        "tsv" => "text/tab-separated-values; charset=utf-8",
        "svg" => "image/svg+xml",
        "png" => "image/png",
        "md" | "txt" | "ts" => "text/plain; charset=utf-8",
        _ => "application/octet-stream",
    }
}
