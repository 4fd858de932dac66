//! Texts compared with files.

/// Compares a text with `tests/cases/NAME.txt`; with `UPDATE_EXPECT=1` rewrites the file.
pub(crate) fn check(name: &str, text: &str) {
    let path = format!("{}/tests/cases/{name}.txt", env!("CARGO_MANIFEST_DIR"));
    if std::env::var_os("UPDATE_EXPECT").is_some() {
        std::fs::write(&path, text).expect("tests/cases can be written");
    }
    let expected = std::fs::read_to_string(&path).unwrap_or_default();
    assert!(text == expected, "{name} differs from {path}; UPDATE_EXPECT=1 rewrites it:\n{text}");
}
