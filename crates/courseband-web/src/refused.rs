//! Refusals as JavaScript errors.

use courseband_study::Refusal;
use js_sys::{Error, Reflect};
use wasm_bindgen::JsValue;

/// What a refused call throws: an `Error` whose `about` is `plan`, `table`, `question` or `page`.
#[derive(Debug)]
pub struct Refused {
    about: &'static str,
    message: String,
}

impl Refused {
    /// The page asked for something that does not fit; never the user's doing.
    pub(crate) fn page(message: impl Into<String>) -> Self {
        Refused { about: "page", message: message.into() }
    }
}

impl From<Refusal> for Refused {
    fn from(refusal: Refusal) -> Self {
        Refused { about: refusal.about, message: refusal.message }
    }
}

impl From<Refused> for JsValue {
    fn from(refused: Refused) -> Self {
        let error = Error::new(&refused.message);
        // Setting a property of a fresh object does not fail.
        let _ = Reflect::set(&error, &"about".into(), &refused.about.into());
        error.into()
    }
}
