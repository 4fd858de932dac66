//! What went wrong, in words for the person at the terminal.

use std::fmt;

/// One message that says what failed and what to do about it.
#[derive(Debug)]
pub(crate) struct Failure(String);

/// The outcome of everything here.
pub(crate) type Outcome<T> = Result<T, Failure>;

impl Failure {
    pub(crate) fn new(message: impl Into<String>) -> Self {
        Self(message.into())
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.0)
    }
}

/// Names the thing that an error is about.
pub(crate) trait About<T> {
    /// `about` becomes the start of the message, the error its end.
    fn about(self, about: impl fmt::Display) -> Outcome<T>;
}

impl<T, E: fmt::Display> About<T> for Result<T, E> {
    fn about(self, about: impl fmt::Display) -> Outcome<T> {
        self.map_err(|error| Failure::new(format!("{about}: {error:#}")))
    }
}
