//! Which toolchain builds the wasm.
//!
//! In this order: the active toolchain, when it has the wasm32 library; rustup,
//! when it may add that library (`RUSTUP_AUTO_INSTALL` is not 0); Debian's
//! packages, which hold the source of the standard library, so that it is
//! built along; else the remedies are named.

use std::path::{Path, PathBuf};
use std::process::Command;
use std::{env, fs};

use crate::failure::{Failure, Outcome};
use crate::{debian, run};

pub(crate) const TARGET: &str = "wasm32-unknown-unknown";

/// Debian's own compiler, its cargo, the standard library's source, a linker.
const PACKAGES: [&str; 4] = ["rustc-web", "cargo-web", "rust-web-src", "lld-22"];

/// The oldest minor version of Rust 1 that builds this workspace.
const OLDEST_MINOR: u32 = 89;

/// A toolchain that builds wasm here.
pub(crate) enum Route {
    /// The active toolchain with its wasm32 library.
    Active { version: String },
    /// Debian's compiler, which builds the standard library from source.
    Debian { version: String, linker: PathBuf },
}

impl Route {
    /// The first route that works here.
    ///
    /// # Errors
    /// When none does; the message names the remedies.
    pub(crate) fn find() -> Outcome<Self> {
        if let Some(active) = active() {
            return Ok(active);
        }
        let mut tried = Vec::new();
        match added() {
            Ok(active) => return Ok(active),
            Err(failure) => tried.push(failure.to_string()),
        }
        match debians_own() {
            Ok(debian) => Ok(debian),
            Err(failure) => {
                tried.push(failure.to_string());
                Err(Failure::new(remedies(&tried)))
            }
        }
    }

    /// For people: which toolchain, by which route.
    pub(crate) fn said(&self) -> String {
        match self {
            Self::Active { version } => format!("{version}, with its own {TARGET} library"),
            Self::Debian { version, .. } => {
                format!("{version} of Debian (rustc-web), standard library built from source")
            }
        }
    }

    /// A folder name of its own for each toolchain.
    pub(crate) fn folder(&self) -> String {
        let (kind, version) = match self {
            Self::Active { version } => ("active", version),
            Self::Debian { version, .. } => ("debian", version),
        };
        format!("wasm-{kind}-{}", number_of(version).unwrap_or("unknown"))
    }

    /// `cargo build` for this target with this toolchain, package and flags to come.
    pub(crate) fn cargo_build(&self) -> Command {
        let mut cargo = match self {
            Self::Active { .. } => run::command("cargo"),
            Self::Debian { .. } => run::command("/usr/bin/cargo"),
        };
        cargo.args(["build", "--target", TARGET]);
        if let Self::Debian { linker, .. } = self {
            as_debian(&mut cargo);
            cargo.env("RUSTC", "/usr/bin/rustc").env("RUSTC_BOOTSTRAP", "1");
            cargo.env("CARGO_TARGET_WASM32_UNKNOWN_UNKNOWN_LINKER", linker);
            cargo.arg("-Zbuild-std=std,panic_abort");
        }
        cargo
    }

    /// Where this toolchain keeps its own files, which panic texts would name.
    pub(crate) fn sysroots(&self) -> Vec<PathBuf> {
        let mut rustc = match self {
            Self::Active { .. } => run::command("rustc"),
            Self::Debian { .. } => run::command("/usr/bin/rustc"),
        };
        if matches!(self, Self::Debian { .. }) {
            as_debian(&mut rustc);
        }
        let root = run::read(rustc.args(["--print", "sysroot"])).unwrap_or_default();
        let root = PathBuf::from(root.trim());
        let source = root.join("lib/rustlib/src/rust");
        let mut roots: Vec<PathBuf> = fs::canonicalize(&source).into_iter().collect();
        roots.push(source);
        roots.push(root);
        roots
    }
}

/// Takes away what points at another toolchain than Debian's.
fn as_debian(command: &mut Command) {
    for name in ["RUSTUP_TOOLCHAIN", "RUSTUP_HOME", "CARGO", "RUSTC", "RUSTDOC", "LD_LIBRARY_PATH"] {
        command.env_remove(name);
    }
    let path = env::var_os("PATH").unwrap_or_default();
    let first = [PathBuf::from("/usr/bin")].into_iter().chain(env::split_paths(&path));
    if let Ok(joined) = env::join_paths(first) {
        command.env("PATH", joined);
    }
}

/// The active toolchain, when its wasm32 library is really there: rustc names
/// the folder without looking whether it exists.
fn active() -> Option<Route> {
    let folder = run::read(run::command("rustc").args(["--print", "target-libdir", "--target", TARGET])).ok()?;
    let has_core = fs::read_dir(folder.trim()).ok()?.flatten().any(|entry| {
        let name = entry.file_name().to_string_lossy().into_owned();
        name.starts_with("libcore-") && name.ends_with(".rlib")
    });
    let version = run::read(run::command("rustc").arg("--version")).ok()?.trim().to_owned();
    has_core.then_some(Route::Active { version })
}

/// The active toolchain after rustup has added the library.
fn added() -> Outcome<Route> {
    if !run::is_there("rustup") {
        return Err(Failure::new("rustup is not installed"));
    }
    if env::var("RUSTUP_AUTO_INSTALL").is_ok_and(|value| value == "0") {
        return Err(Failure::new("RUSTUP_AUTO_INSTALL=0 says that rustup is to fetch nothing"));
    }
    println!("Adding {TARGET} with rustup");
    run::show(run::command("rustup").args(["target", "add", TARGET]))?;
    active().ok_or_else(|| Failure::new(format!("rustup added {TARGET}, yet rustc does not find it")))
}

/// Debian's compiler, installed first where that is possible.
fn debians_own() -> Outcome<Route> {
    if let Some(route) = debian_installed() {
        return Ok(route);
    }
    debian::install(&PACKAGES)?;
    debian_installed()
        .ok_or_else(|| Failure::new(format!("Debian's {} are installed but do not fit", PACKAGES.join(" "))))
}

fn debian_installed() -> Option<Route> {
    if !Path::new("/usr/lib/rustlib/src/rust/library/std/Cargo.toml").is_file()
        || !Path::new("/usr/bin/cargo").is_file()
    {
        return None;
    }
    let mut rustc = run::command("/usr/bin/rustc");
    as_debian(&mut rustc);
    let version = run::read(rustc.arg("--version")).ok()?.trim().to_owned();
    let new_enough = minor_of(number_of(&version)?)? >= OLDEST_MINOR;
    let linker = newest_linker()?;
    new_enough.then_some(Route::Debian { version, linker })
}

/// `/usr/bin/wasm-ld-N` with the highest N.
fn newest_linker() -> Option<PathBuf> {
    let numbered = fs::read_dir("/usr/bin").ok()?.flatten().filter_map(|entry| {
        let name = entry.file_name().to_string_lossy().into_owned();
        let number: u32 = name.strip_prefix("wasm-ld-")?.parse().ok()?;
        Some((number, entry.path()))
    });
    numbered.max().map(|(_, path)| path)
}

/// `1.96.0` out of `rustc 1.96.0 (… )`.
fn number_of(version: &str) -> Option<&str> {
    version.split_whitespace().nth(1)
}

fn minor_of(number: &str) -> Option<u32> {
    number.strip_prefix("1.")?.split('.').next()?.parse().ok()
}

fn remedies(tried: &[String]) -> String {
    format!(
        "no toolchain here builds {TARGET}.\n  {}\nRemedies, any one of them:\n  \
         rustup target add {TARGET}\n  \
         unset RUSTUP_AUTO_INSTALL, so that this command may do it\n  \
         on Debian, as root: apt-get install {}",
        tried.join("\n  "),
        PACKAGES.join(" "),
    )
}

#[cfg(test)]
mod tests {
    use super::{minor_of, number_of, remedies};

    #[test]
    fn versions_are_read() {
        let number = number_of("rustc 1.96.0 (ac68faa20 2026-05-25) (built from a source tarball)");
        assert_eq!(number, Some("1.96.0"));
        assert_eq!(number.and_then(minor_of), Some(96));
        assert_eq!(minor_of("1.95.0-nightly"), Some(95));
        assert_eq!(minor_of("2.0.0"), None);
    }

    #[test]
    fn remedies_name_what_was_tried() {
        let text = remedies(&["rustup is not installed".into()]);
        assert!(text.contains("rustup is not installed"));
        assert!(text.contains("rustup target add"));
    }
}
