//! The wasm boundary of the page: a session that computes, and drawing.
//!
//! A [`Session`] holds one table and lives in a worker, so that fits never
//! stop the page. [`draw_strips`] and [`strips_svg`] live on the page's own
//! thread. Everything crosses as JSON text, errors as `Error` objects with a
//! message in plain words and an `about` that says what they are about.
//!
//! A panic reaches the page as a `WebAssembly.RuntimeError` with its message:
//! the module must then be replaced.

mod drawing;
mod files;
mod panic;
mod refused;
mod rooms;
mod session;
mod wire;

pub use drawing::{draw_strips, strips_pdf, strips_svg};
pub use files::{markers_answer, report_docx, tables_xlsx};
pub use refused::Refused;
pub use rooms::{size_answer, size_run};
pub use session::Session;

use wasm_bindgen::prelude::wasm_bindgen;

/// Runs once, when the module is instantiated.
#[wasm_bindgen(start)]
pub fn start() {
    panic::say_in_words();
}
