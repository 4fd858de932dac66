//! What the cells of each column look like.

use crate::long::{LongTable, Source};
use crate::number::{Decimal, MarkEvidence, NotNumber, is_missing, number};
use crate::time::{WrittenTime, read_time};
use std::collections::HashSet;

/// Distinct cells are counted up to this number.
const MAX_DISTINCT: usize = 50_000;

/// What the cells of a column look like.
#[derive(Debug, Clone, Default)]
pub(crate) struct Profile {
    pub(crate) rows: usize,
    pub(crate) missing: usize,
    /// Numbers, also with a unit or a limit mark.
    pub(crate) numbers: usize,
    /// Whole numbers.
    pub(crate) whole: usize,
    /// Times that are no plain numbers: dates, `day 7`.
    pub(crate) worded_times: usize,
    /// Distinct cells, up to a limit.
    pub(crate) distinct: usize,
    pub(crate) marks: MarkEvidence,
    pub(crate) decimal: Decimal,
    /// The unit of cells such as `5.1 mm` where nearly all cells have it.
    pub(crate) unit: Option<String>,
}

impl Profile {
    /// Cells that are not missing.
    pub(crate) fn present(&self) -> usize {
        self.rows - self.missing
    }

    /// At least this share of the cells present are numbers.
    pub(crate) fn is_numeric(&self, share: f64) -> bool {
        self.numbers > 0 && self.numbers as f64 >= share * self.present() as f64
    }

    /// Most cells can be read as times.
    pub(crate) fn is_timely(&self) -> bool {
        let times = self.numbers + self.worded_times;
        times > 0 && times as f64 >= 0.8 * self.present() as f64
    }
}

/// Profiles of all columns.
pub(crate) fn profile_all(table: &LongTable<'_>) -> Vec<Profile> {
    let mut profiles: Vec<Profile> = (0..table.columns.len()).map(|column| profile(table, column)).collect();
    let mut file = MarkEvidence::default();
    profiles.iter().for_each(|profile| file.join(&profile.marks));
    for profile in &mut profiles {
        profile.decimal = profile.marks.decide(&file, table.sheet.delimiter());
    }
    profiles
}

fn profile(table: &LongTable<'_>, column: usize) -> Profile {
    let mut profile = Profile { rows: table.rows(), ..Profile::default() };
    let mut seen: HashSet<&str> = HashSet::new();
    let mut units: Vec<(String, usize)> = Vec::new();
    let mut previous = None;
    let is_label = matches!(table.columns[column].source, Source::Across(_) | Source::Line(_));
    for row in 0..table.rows() {
        let cell = table.cell(row, column);
        if previous != Some(cell) && seen.len() < MAX_DISTINCT {
            seen.insert(cell);
        }
        previous = Some(cell);
        if !is_label {
            profile.marks.add(cell);
        }
        profile.count(cell, &mut units);
    }
    profile.distinct = seen.len();
    profile.unit = units.into_iter().find(|(_, count)| *count * 10 >= profile.present() * 9).map(|(unit, _)| unit);
    profile
}

impl Profile {
    fn count(&mut self, cell: &str, units: &mut Vec<(String, usize)>) {
        let read = number(cell, Decimal::Point).or_else(|other| match other {
            NotNumber::OtherMark => number(cell, Decimal::Comma),
            other => Err(other),
        });
        match read {
            Ok(value) => {
                self.numbers += 1;
                self.whole += usize::from(value.fract() == 0.0);
            }
            Err(NotNumber::Missing) => self.missing += 1,
            Err(NotNumber::Below | NotNumber::Above | NotNumber::Infinite) => self.numbers += 1,
            Err(NotNumber::Unit(_, unit)) => self.count_unit(cell, unit, units),
            Err(_) if is_missing(cell) => self.missing += 1,
            Err(_) => self.worded_times += usize::from(read_time(cell, Decimal::Point).is_some()),
        }
    }

    fn count_unit(&mut self, cell: &str, unit: String, units: &mut Vec<(String, usize)>) {
        match read_time(cell, Decimal::Point) {
            Some(WrittenTime::WithUnit(..)) => self.worded_times += 1,
            _ => self.numbers += 1,
        }
        match units.iter().position(|(known, _)| *known == unit) {
            Some(at) => units[at].1 += 1,
            None if units.len() < 8 => units.push((unit, 1)),
            None => {}
        }
    }
}
