//! The wasm boundary of the page.
