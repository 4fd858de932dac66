//! Labels of a column as numbers, each distinct one once.

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

    /// Numbers the labels; `None` is a missing one.
    pub(crate) fn read<'a>(cells: impl Iterator<Item = Option<&'a str>>) -> Labels {
        let mut known: HashMap<&str, u32> = HashMap::new();
        let mut labels = Labels::default();
        let mut last = (None, Labels::NONE);
        for cell in cells {
            // Neighbouring rows mostly share their label.
            if cell != last.0 {
                let code = match cell {
                    None => Labels::NONE,
                    Some(text) => *known.entry(text).or_insert_with(|| {
                        labels.names.push(text.to_string());
                        labels.names.len() as u32 - 1
                    }),
                };
                last = (cell, code);
            }
            labels.index.push(last.1);
        }
        labels
    }
}
