//! The glue loses its two ways of finding the module by itself.
//!
//! The page hands the compiled module over. The glue's own address lookup
//! fails where a script has no address (a page given as text, a worker made
//! from text), and its `fetch` would be a way out of a page that has none.

use crate::failure::{Failure, Outcome};

/// What is replaced, and by what. Both stand in wasm-bindgen 0.2.130's glue
/// of the kind without modules.
const REPLACED: [(&str, &str); 2] = [
    ("new URL(document.currentScript.src, location.href).toString()", "undefined"),
    ("module_or_path = fetch(module_or_path)", "throw new TypeError('hand over the compiled module, not an address')"),
];

/// What may not be left over.
const FORBIDDEN: [&str; 2] = ["new URL(", "fetch("];

/// The glue as the page gets it.
///
/// # Errors
/// When the glue does not hold exactly one of each: the library that writes it
/// has changed, and this treatment must be looked at again.
pub(crate) fn without_ways_out(glue: &str) -> Outcome<String> {
    let mut text = glue.to_owned();
    for (from, to) in REPLACED {
        expect(&text, from, 1)?;
        text = text.replace(from, to);
    }
    for word in FORBIDDEN {
        expect(&text, word, 0)?;
    }
    Ok(text)
}

fn expect(text: &str, word: &str, times: usize) -> Outcome<()> {
    let found = text.matches(word).count();
    if found == times {
        return Ok(());
    }
    Err(Failure::new(format!("the glue holds `{word}` {found} times, expected {times}: wasm-bindgen has changed")))
}

#[cfg(test)]
mod tests {
    use super::{REPLACED, without_ways_out};

    fn glue() -> String {
        format!("let a = {};\n{};\nlet b = 1;", REPLACED[0].0, REPLACED[1].0)
    }

    #[test]
    fn both_are_taken_out_and_the_rest_stays() {
        let clean = without_ways_out(&glue()).expect("one of each");
        assert!(!clean.contains("fetch(") && !clean.contains("new URL("));
        assert!(clean.starts_with("let a = undefined;") && clean.ends_with("let b = 1;"));
    }

    #[test]
    fn a_second_one_is_refused() {
        assert!(without_ways_out(&format!("{} fetch('x')", glue())).is_err());
        assert!(without_ways_out(&glue().repeat(2)).is_err());
    }

    #[test]
    fn a_missing_one_is_refused() {
        assert!(without_ways_out("let b = 1;").is_err());
    }
}
