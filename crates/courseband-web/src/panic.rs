//! A panic said in words: it would otherwise reach the page as `unreachable`.

use js_sys::WebAssembly::RuntimeError;
use std::panic::PanicHookInfo;

/// From here on a panic throws a `WebAssembly.RuntimeError` with its message and place.
pub(crate) fn say_in_words() {
    std::panic::set_hook(Box::new(|info| {
        wasm_bindgen::throw_val(RuntimeError::new(&words(info)).into());
    }));
}

fn words(info: &PanicHookInfo<'_>) -> String {
    let payload = info.payload();
    let text = payload.downcast_ref::<&str>().copied().or_else(|| payload.downcast_ref::<String>().map(String::as_str));
    let message = text.unwrap_or("no message");
    let place = info.location().map(|at| format!(" ({}:{})", at.file(), at.line())).unwrap_or_default();
    format!("The computation stopped: {message}{place}")
}
