//! The page's types, and the page in a real browser.

use std::env;
use std::path::Path;

use super::count;
use crate::failure::{Failure, Outcome};
use crate::places::Places;
use crate::serve::Server;
use crate::{debian, dist, run};

/// Checks the JSDoc types of the page.
pub(crate) fn types(places: &Places) -> Outcome<usize> {
    packages(places)?;
    let compiler = places.browser().join("node_modules/.bin/tsc");
    run::show(
        run::command(&compiler.to_string_lossy())
            .args(["--project", "tests/page/tsconfig.json"])
            .current_dir(places.root()),
    )
    .map(|()| 1)
}

/// Serves the built page and drives it; compares wasm and native findings.
pub(crate) fn tests(places: &Places) -> Outcome<usize> {
    packages(places)?;
    let chromium = browser()?;
    run::show(
        run::command("cargo")
            .args(["build", "--release", "--locked", "--package", "courseband-cli"])
            .current_dir(places.root()),
    )?;
    let given = dist::write(places)?;
    let server = Server::on(0, places)?;
    let address = server.address()?;
    std::thread::spawn(move || server.answer());
    let mut command = run::command("node");
    // Firefox is driven over a WebSocket, which Node.js 20 has behind this word only.
    let behind = ["--experimental-websocket"];
    if run::command("node").args(behind).args(["--eval", "0"]).output().is_ok_and(|out| out.status.success()) {
        command.args(behind);
    }
    command
        .args(["--test", "--test-concurrency=1"])
        .args(count::files(&places.browser(), ".test.mjs")?)
        .current_dir(places.root())
        .env("COURSEBAND_PAGE", address)
        .env("COURSEBAND_NATIVE", places.target().join("release/courseband"))
        .env("COURSEBAND_FILE", given.file)
        .env("COURSEBAND_FOLDER", given.folder)
        .env("CHROMIUM", chromium);
    count::of(&mut command, count::node)
}

/// Node packages below tests/browser, from the lock file.
fn packages(places: &Places) -> Outcome<()> {
    let folder = places.browser();
    if !run::is_there("node") {
        debian::install(&["nodejs", "npm"])?;
    }
    if folder.join("node_modules/.package-lock.json").is_file() {
        return Ok(());
    }
    run::show(run::command("npm").args(["ci", "--ignore-scripts", "--no-audit", "--no-fund"]).current_dir(folder))
}

/// The browser: `CHROMIUM`, one that is installed, or Debian's.
fn browser() -> Outcome<String> {
    if let Ok(given) = env::var("CHROMIUM") {
        return Ok(given);
    }
    let known = ["/usr/bin/chromium", "/usr/bin/chromium-browser", "/usr/bin/google-chrome"];
    let installed = || known.iter().find(|path| Path::new(path).is_file()).map(|path| (*path).to_owned());
    if let Some(path) = installed() {
        return Ok(path);
    }
    debian::install(&["chromium", "fonts-dejavu-core"])?;
    installed().ok_or_else(|| Failure::new("there is no Chromium; install one or name it in CHROMIUM"))
}
