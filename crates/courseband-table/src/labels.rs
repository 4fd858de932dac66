//! Labels of a column as numbers, each distinct one once.

use crate::number::is_missing_label;
use std::collections::HashMap;

/// A column of labels: one number per row, and the labels in order of first appearance.
#[derive(Debug, Clone, Default)]
pub(crate) struct Labels {
    /// Index into `names`; [`Labels::NONE`] where missing.
    pub(crate) index: Vec<u32>,
    pub(crate) names: Vec<String>,
}

impl Labels {
    /// Stands for a missing label.
    pub(crate) const NONE: u32 = u32::MAX;

    /// Numbers the labels as written.
    pub(crate) fn as_written<'a>(cells: impl Iterator<Item = &'a str> + Clone) -> Labels {
        // Beside `+`, a `-` is a label and no missing one.
        let signs = cells.clone().any(|cell| cell.trim() == "+");
        Labels::read(cells, |cell| cell, |cell| is_missing_label(cell) && !(signs && cell.trim() == "-"))
    }

    /// Numbers the labels without white space around them.
    pub(crate) fn trimmed<'a>(cells: impl Iterator<Item = &'a str>) -> Labels {
        Labels::read(cells, str::trim, is_missing_label)
    }

    fn read<'a>(
        cells: impl Iterator<Item = &'a str>,
        tidy: fn(&'a str) -> &'a str,
        is_missing: impl Fn(&str) -> bool,
    ) -> Labels {
        let mut by_cell: HashMap<&str, u32> = HashMap::new();
        let mut by_name: HashMap<&str, u32> = HashMap::new();
        let mut labels = Labels::default();
        let mut last: Option<(&str, u32)> = None;
        for cell in cells {
            let code = match last {
                // Neighbouring rows mostly share their label.
                Some((before, code)) if before == cell => code,
                _ => *by_cell.entry(cell).or_insert_with(|| match is_missing(cell) {
                    true => Labels::NONE,
                    false => *by_name.entry(tidy(cell)).or_insert_with(|| {
                        labels.names.push(tidy(cell).to_string());
                        labels.names.len() as u32 - 1
                    }),
                }),
            };
            last = Some((cell, code));
            labels.index.push(code);
        }
        labels
    }
}
