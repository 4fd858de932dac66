//! Everything in one .html file that runs by double click.
//!
//! The wasm is packed with gzip and written as text; styles and the one script are bound by their
//! hashes in the page's policy, which forbids every connection from the first moment.

use std::fs;
use std::io::Write;
use std::path::Path;

use base64::Engine;
use base64::engine::general_purpose::STANDARD;
use flate2::{Compression, GzBuilder};
use sha2::{Digest, Sha256};

use super::bundle::bundle;
use crate::failure::{About, Failure, Outcome};
use crate::places::Places;

/// The page's text.
///
/// # Errors
/// When a part cannot be read, or holds what would end its element early.
pub(super) fn page(places: &Places, licences: &str, cases: &str) -> Outcome<String> {
    let www = places.www();
    let read = |path: &Path| fs::read_to_string(www.join(path)).about(path.display());
    let shell = read(Path::new("index.html"))?;
    let mut styles = String::new();
    for sheet in quoted(&shell, "<link rel=\"stylesheet\" href=\"./") {
        styles += &read(Path::new(&sheet))?;
    }
    let glue = read(Path::new("wasm/courseband.js"))?;
    let worker = read(Path::new("worker.js"))?;
    let script = format!("{glue}\n{}", bundle("main.js", &read)?);
    let wasm = packed(&fs::read(places.page_wasm().join("courseband_bg.wasm")).about("the wasm")?)?;
    let demos = demos(places)?;
    for (what, text) in [
        ("script", &script),
        ("glue", &glue),
        ("worker", &worker),
        ("demos", &demos),
        ("licences", &licences.to_string()),
        ("cases", &cases.to_string()),
    ] {
        if text.contains("</script") || text.contains("<!--") {
            return Err(Failure::new(format!("the {what} would end its element early")));
        }
    }
    Ok(format!(
        "<!doctype html>\n<html lang=\"en\" data-state=\"reading\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"{}\">\n\
         <meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <meta name=\"color-scheme\" content=\"light dark\">\n<meta name=\"referrer\" content=\"no-referrer\">\n\
         <title>Courseband</title>\n<link rel=\"icon\" href=\"data:,\">\n<style>{styles}</style>\n</head>\n<body>\n\
         <noscript>Courseband computes in the browser and needs JavaScript.</noscript>\n{}{}{}{}{}{}<script>{script}</script>\n</body>\n</html>\n",
        policy(&script, &styles),
        data("courseband-wasm", "text/plain", &wasm),
        data("courseband-glue", "text/plain", &glue),
        data("courseband-worker", "text/plain", &worker),
        data("courseband-demos", "application/json", &demos),
        data("courseband-licences", "text/plain", licences),
        data("courseband-cases", "application/json", cases),
    ))
}

fn policy(script: &str, styles: &str) -> String {
    let hash = |text: &str| format!("'sha256-{}'", STANDARD.encode(Sha256::digest(text.as_bytes())));
    format!(
        "default-src 'none'; script-src {} 'wasm-unsafe-eval'; worker-src blob:; style-src {}; style-src-attr 'unsafe-inline'; \
         img-src data: blob:; connect-src 'none'; form-action 'none'; base-uri 'none'; frame-src 'none'; object-src 'none'",
        hash(script),
        hash(styles)
    )
}

/// What stands between each occurrence of `before` and the next quotation mark.
fn quoted(text: &str, before: &str) -> Vec<String> {
    text.split(before).skip(1).filter_map(|rest| rest.split('"').next()).map(str::to_string).collect()
}

/// An element that holds a text as data: nothing in it is run.
pub(super) fn data(id: &str, kind: &str, text: &str) -> String {
    format!("<script type=\"{kind}\" id=\"{id}\">{text}</script>\n")
}

/// Packed as `DecompressionStream("gzip")` unpacks it; without name or time, so that the same bytes pack alike.
fn packed(bytes: &[u8]) -> Outcome<String> {
    let mut packer = GzBuilder::new().mtime(0).write(Vec::new(), Compression::best());
    packer.write_all(bytes).about("packing")?;
    Ok(STANDARD.encode(packer.finish().about("packing")?))
}

/// `{"demos": [...], "tables": {file: text}}`.
fn demos(places: &Places) -> Outcome<String> {
    let folder = places.demo_data();
    let list = fs::read_to_string(folder.join("demos.json")).about("demos.json")?;
    let mut tables = Vec::new();
    for file in quoted(&list, "\"file\": \"") {
        let text = fs::read_to_string(folder.join(&file)).about(&file)?;
        tables.push(format!("{}: {}", json(&file), json(&text)));
    }
    Ok(format!("{{\"demos\": {list}, \"tables\": {{{}}}}}", tables.join(", ")).replace("</", "<\\/"))
}

/// A text as JSON writes it.
fn json(text: &str) -> String {
    let mut out = String::from("\"");
    for letter in text.chars() {
        match letter {
            '"' => out += "\\\"",
            '\\' => out += "\\\\",
            '\n' => out += "\\n",
            '\r' => out += "\\r",
            '\t' => out += "\\t",
            control if (control as u32) < 0x20 => out += &format!("\\u{:04x}", control as u32),
            other => out.push(other),
        }
    }
    out + "\""
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_same_bytes_pack_alike_and_small() {
        let bytes = vec![7; 10_000];
        assert_eq!(packed(&bytes).unwrap(), packed(&bytes).unwrap());
        assert!(packed(&bytes).unwrap().len() < 200);
    }

    #[test]
    fn texts_are_written_as_json() {
        assert_eq!(json("a\"b\\\n\u{1}"), "\"a\\\"b\\\\\\n\\u0001\"");
        assert_eq!(quoted("x href=\"./a.css\" y href=\"./b.css\"", "href=\"./"), ["a.css", "b.css"]);
    }
}
