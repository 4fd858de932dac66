//! What crosses the boundary, as plain structures written to JSON.

mod calibration;
mod description;
mod layout;
mod preview;

pub(crate) use calibration::{Refits, all_refits};
pub(crate) use description::Description;
pub(crate) use layout::Layout;
pub(crate) use preview::Preview;

use crate::refused::Refused;
use serde::Serialize;
use serde::de::DeserializeOwned;

/// JSON text of a value.
pub(crate) fn text<T: Serialize>(value: &T) -> Result<String, Refused> {
    serde_json::to_string(value).map_err(|error| Refused::page(format!("The answer cannot be written: {error}.")))
}

/// A value from JSON text of the page's own making.
pub(crate) fn parsed<T: DeserializeOwned>(text: &str, what: &str) -> Result<T, Refused> {
    serde_json::from_str(text).map_err(|error| Refused::page(format!("The {what} cannot be read: {error}.")))
}
