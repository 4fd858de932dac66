//! Helpers shared by the checks against the outside.

pub mod evidence;
pub mod rates;
