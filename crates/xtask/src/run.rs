//! Running other programs: with their output shown, or read.

use std::process::{Command, Stdio};

use crate::failure::{About, Failure, Outcome};

/// What cargo sets for the program it runs, and a program run from here must
/// not take for its own.
const CARGOS_OWN: [&str; 6] = [
    "CARGO_MANIFEST_DIR",
    "CARGO_MANIFEST_PATH",
    "CARGO_PKG_",
    "CARGO_CRATE_NAME",
    "CARGO_BIN_NAME",
    "CARGO_PRIMARY_PACKAGE",
];

/// A command without the variables that cargo set for this program alone.
pub(crate) fn command(program: &str) -> Command {
    let mut command = Command::new(program);
    for (name, _) in std::env::vars_os() {
        if CARGOS_OWN.iter().any(|own| name.to_string_lossy().starts_with(own)) {
            command.env_remove(name);
        }
    }
    command
}

/// The command as one would type it, for messages.
pub(crate) fn shown(command: &Command) -> String {
    let mut words = vec![command.get_program().to_string_lossy().into_owned()];
    words.extend(command.get_args().map(|word| word.to_string_lossy().into_owned()));
    words.join(" ")
}

/// Runs it with its output shown.
///
/// # Errors
/// When it cannot be started or ends with an error.
pub(crate) fn show(command: &mut Command) -> Outcome<()> {
    let status = command.status().about(format!("cannot start `{}`", shown(command)))?;
    if status.success() { Ok(()) } else { Err(Failure::new(format!("`{}` ended with {status}", shown(command)))) }
}

/// Runs it and gives what it wrote to standard output.
///
/// # Errors
/// When it cannot be started or ends with an error; the message holds what it
/// wrote to standard error.
pub(crate) fn read(command: &mut Command) -> Outcome<String> {
    let output = command.stdin(Stdio::null()).output().about(format!("cannot start `{}`", shown(command)))?;
    if output.status.success() {
        return Ok(String::from_utf8_lossy(&output.stdout).into_owned());
    }
    let said = String::from_utf8_lossy(&output.stderr);
    Err(Failure::new(format!("`{}` ended with {}: {}", shown(command), output.status, said.trim())))
}

/// Whether this program can be started.
pub(crate) fn is_there(program: &str) -> bool {
    command(program)
        .arg("--version")
        .stdin(Stdio::null())
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .status()
        .is_ok_and(|status| status.success())
}
