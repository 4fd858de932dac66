//! Where things are: the repository and its folders.

use std::env;
use std::path::{Path, PathBuf};

/// The repository's root and what lies below it.
#[derive(Debug, Clone)]
pub(crate) struct Places {
    root: PathBuf,
}

impl Places {
    /// Found from this crate's own folder, two levels below the root.
    pub(crate) fn find() -> Self {
        let own =
            env::var_os("CARGO_MANIFEST_DIR").map_or_else(|| PathBuf::from(env!("CARGO_MANIFEST_DIR")), PathBuf::from);
        let root = own.ancestors().nth(2).unwrap_or(&own).to_path_buf();
        Self { root }
    }

    pub(crate) fn root(&self) -> &Path {
        &self.root
    }

    pub(crate) fn www(&self) -> PathBuf {
        self.root.join("www")
    }

    /// The glue and the wasm, as the page loads them. Not tracked.
    pub(crate) fn page_wasm(&self) -> PathBuf {
        self.root.join("www/wasm")
    }

    pub(crate) fn demo_data(&self) -> PathBuf {
        self.root.join("demo-data")
    }

    /// The browser tests and the Node packages that they need.
    pub(crate) fn browser(&self) -> PathBuf {
        self.root.join("tests/browser")
    }

    /// Where cargo builds, honouring `CARGO_TARGET_DIR`.
    pub(crate) fn target(&self) -> PathBuf {
        match env::var_os("CARGO_TARGET_DIR") {
            Some(dir) => self.root.join(dir),
            None => self.root.join("target"),
        }
    }
}
