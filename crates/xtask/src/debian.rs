//! System packages, where they may be installed: as root on Debian.

use std::path::Path;
use std::sync::OnceLock;

use crate::failure::{Failure, Outcome};
use crate::run;

/// Whether `install` can work here.
pub(crate) fn may_install() -> bool {
    static ANSWER: OnceLock<bool> = OnceLock::new();
    *ANSWER.get_or_init(|| Path::new("/etc/debian_version").is_file() && run::is_there("apt-get") && is_root())
}

fn is_root() -> bool {
    run::read(run::command("id").arg("-u")).is_ok_and(|id| id.trim() == "0")
}

/// Installs Debian packages. The lists are brought up to date once.
///
/// # Errors
/// When not root on Debian, or apt-get fails.
pub(crate) fn install(packages: &[&str]) -> Outcome<()> {
    if !may_install() {
        return Err(Failure::new(format!("not root on Debian, so not installed: {}", packages.join(" "))));
    }
    println!("Installing with apt-get: {}", packages.join(" "));
    update_once()?;
    run::show(
        run::command("apt-get")
            .args(["install", "-y", "-qq", "--no-install-recommends"])
            .args(packages)
            .env("DEBIAN_FRONTEND", "noninteractive"),
    )
}

fn update_once() -> Outcome<()> {
    static DONE: OnceLock<()> = OnceLock::new();
    if DONE.get().is_none() {
        run::show(run::command("apt-get").args(["update", "-qq"]))?;
        let _ = DONE.set(());
    }
    Ok(())
}
