//! What the cells of each column look like.

use crate::long::{LongTable, Source};
use crate::number::{Decimal, MarkEvidence, NotNumber, is_missing, number};
use crate::time::{WrittenTime, read_time};
use std::collections::HashMap;

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

/// What one cell looks like.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Look {
    Missing,
    Number {
        whole: bool,
    },
    WordedTime,
    /// A number with a unit, by index into the units seen; `time`: the unit is one of time.
    Unit {
        index: usize,
        time: bool,
    },
    Text,
}

fn profile(table: &LongTable<'_>, column: usize) -> Profile {
    let mut profile = Profile { rows: table.rows(), ..Profile::default() };
    let mut known: HashMap<&str, Look> = HashMap::new();
    let mut units: Vec<(String, usize)> = Vec::new();
    let mut last: Option<(&str, Look)> = None;
    let is_label = matches!(table.columns[column].source, Source::Across(_) | Source::Line(_));
    for row in 0..table.rows() {
        let cell = table.cell(row, column);
        if !is_label {
            profile.marks.add(cell);
        }
        let look = match last {
            Some((before, look)) if before == cell => look,
            _ if known.len() >= MAX_DISTINCT => known.get(cell).copied().unwrap_or_else(|| look_at(cell, &mut units)),
            _ => *known.entry(cell).or_insert_with(|| look_at(cell, &mut units)),
        };
        last = Some((cell, look));
        profile.count(look, &mut units);
    }
    profile.distinct = known.len();
    profile.unit = units.into_iter().find(|(_, count)| *count * 10 >= profile.present() * 9).map(|(unit, _)| unit);
    profile
}

fn look_at(cell: &str, units: &mut Vec<(String, usize)>) -> Look {
    let read = number(cell, Decimal::Point).or_else(|other| match other {
        NotNumber::OtherMark => number(cell, Decimal::Comma),
        other => Err(other),
    });
    match read {
        Ok(value) => Look::Number { whole: value.fract() == 0.0 },
        Err(NotNumber::Missing) => Look::Missing,
        Err(NotNumber::Below | NotNumber::Above | NotNumber::Infinite) => Look::Number { whole: false },
        // More units than a column can sensibly have: told apart no further.
        Err(NotNumber::Unit(..)) if units.len() >= 64 => Look::Number { whole: false },
        Err(NotNumber::Unit(_, unit)) => {
            let index = units.iter().position(|(known, _)| *known == unit).unwrap_or_else(|| {
                units.push((unit, 0));
                units.len() - 1
            });
            Look::Unit {
                index,
                time: matches!(
                    read_time(cell, Decimal::Point),
                    Some(WrittenTime::WithUnit(..) | WrittenTime::Dashed(..))
                ),
            }
        }
        Err(_) if is_missing(cell) => Look::Missing,
        Err(_) if read_time(cell, Decimal::Point).is_some() => Look::WordedTime,
        Err(_) => Look::Text,
    }
}

impl Profile {
    fn count(&mut self, look: Look, units: &mut [(String, usize)]) {
        match look {
            Look::Missing => self.missing += 1,
            Look::Number { whole } => {
                self.numbers += 1;
                self.whole += usize::from(whole);
            }
            Look::WordedTime => self.worded_times += 1,
            Look::Unit { index, time } => {
                units[index].1 += 1;
                match time {
                    true => self.worded_times += 1,
                    false => self.numbers += 1,
                }
            }
            Look::Text => {}
        }
    }
}
