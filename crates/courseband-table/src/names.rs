//! What column names say: which part a column plays, its unit, summary words.

use crate::request::Role;
use crate::time::Unit;

/// Words that name a role by themselves, with how clearly (4 = the very word).
const SUBJECT: [(&str, u8); 46] = [
    ("subject", 4),
    ("subj", 4),
    ("animal", 4),
    ("mouse", 4),
    ("mice", 4),
    ("rat", 4),
    ("pig", 4),
    ("piglet", 4),
    ("patient", 4),
    ("participant", 4),
    ("person", 4),
    ("individual", 4),
    ("volunteer", 4),
    ("tree", 3),
    ("plant", 3),
    ("dog", 4),
    ("cat", 4),
    ("rabbit", 4),
    ("fish", 4),
    ("sheep", 4),
    ("lamb", 4),
    ("ewe", 4),
    ("goat", 4),
    ("cow", 4),
    ("calf", 4),
    ("horse", 4),
    ("hen", 4),
    ("chick", 4),
    ("bird", 4),
    ("hamster", 4),
    ("ferret", 4),
    ("monkey", 4),
    ("macaque", 4),
    ("frog", 4),
    ("child", 4),
    ("infant", 4),
    ("woman", 4),
    ("man", 3),
    ("student", 4),
    ("specimen", 3),
    ("eartag", 4),
    ("tag", 3),
    ("ear", 2),
    ("case", 3),
    ("pid", 4),
    ("unit", 2),
];

const TIME: [(&str, u8); 34] = [
    ("time", 4),
    ("timepoint", 4),
    ("day", 4),
    ("days", 4),
    ("week", 4),
    ("weeks", 4),
    ("wk", 4),
    ("wks", 4),
    ("hour", 4),
    ("hours", 4),
    ("hr", 4),
    ("hrs", 4),
    ("h", 3),
    ("minute", 4),
    ("minutes", 4),
    ("min", 3),
    ("mins", 4),
    ("sec", 3),
    ("second", 3),
    ("seconds", 4),
    ("month", 4),
    ("months", 4),
    ("year", 3),
    ("years", 3),
    ("date", 3),
    ("visit", 3),
    ("age", 3),
    ("t", 3),
    ("dpi", 4),
    ("occasion", 3),
    ("session", 2),
    ("wave", 3),
    ("d", 3),
    ("times", 4),
];

const GROUP: [(&str, u8); 26] = [
    ("group", 4),
    ("grp", 4),
    ("groups", 4),
    ("treatment", 4),
    ("treat", 4),
    ("trt", 4),
    ("tx", 3),
    ("arm", 4),
    ("dressing", 3),
    ("diet", 3),
    ("therapy", 3),
    ("drug", 3),
    ("intervention", 4),
    ("condition", 3),
    ("regimen", 3),
    ("dose", 3),
    ("formula", 2),
    ("vaccine", 3),
    ("genotype", 3),
    ("exposure", 3),
    ("allocation", 4),
    ("feed", 2),
    ("medication", 3),
    ("cohort", 2),
    ("strain", 2),
    ("variety", 2),
];

const RESPONSE: [(&str, u8); 51] = [
    ("y", 4),
    ("response", 4),
    ("value", 4),
    ("outcome", 4),
    ("result", 4),
    ("measurement", 4),
    ("measure", 3),
    ("reading", 3),
    ("weight", 3),
    ("wt", 3),
    ("bw", 3),
    ("mass", 3),
    ("size", 3),
    ("area", 3),
    ("volume", 3),
    ("vol", 3),
    ("length", 3),
    ("height", 3),
    ("width", 2),
    ("diameter", 3),
    ("concentration", 3),
    ("conc", 3),
    ("level", 2),
    ("score", 3),
    ("titre", 3),
    ("titer", 3),
    ("count", 3),
    ("counts", 3),
    ("load", 3),
    ("glucose", 3),
    ("pressure", 3),
    ("temperature", 3),
    ("temp", 3),
    ("rate", 2),
    ("reaction", 3),
    ("intensity", 3),
    ("signal", 3),
    ("marker", 3),
    ("activity", 3),
    ("distance", 3),
    ("wound", 3),
    ("tumor", 3),
    ("tumour", 3),
    ("growth", 3),
    ("percent", 2),
    ("yield", 3),
    ("biomass", 3),
    ("hba1c", 3),
    ("observed", 3),
    ("outcomes", 3),
    ("bmi", 3),
];

const CLUSTER: [(&str, u8); 21] = [
    ("cage", 4),
    ("litter", 4),
    ("pen", 4),
    ("site", 4),
    ("centre", 4),
    ("center", 4),
    ("clinic", 4),
    ("hospital", 4),
    ("block", 4),
    ("batch", 3),
    ("family", 4),
    ("herd", 4),
    ("flock", 4),
    ("ward", 4),
    ("school", 4),
    ("plot", 4),
    ("tank", 4),
    ("barn", 4),
    ("farm", 4),
    ("dam", 3),
    ("cluster", 4),
];

/// Words that carry no meaning beside another word, and what they say alone.
const FILLER: [(&str, u8); 9] = [
    ("id", 4),
    ("no", 2),
    ("nr", 2),
    ("number", 2),
    ("num", 2),
    ("code", 2),
    ("name", 2),
    ("ids", 3),
    ("identifier", 3),
];

/// Names of columns that describe subjects but are seldom the groups to compare.
const BESIDE: [&str; 17] = [
    "sex",
    "gender",
    "age",
    "breed",
    "strain",
    "comment",
    "comments",
    "note",
    "notes",
    "remark",
    "remarks",
    "operator",
    "technician",
    "observer",
    "birth",
    "dob",
    "start",
];

/// Words of rows or columns that summarise others.
const SUMMARY: [&str; 16] = [
    "mean",
    "means",
    "average",
    "avg",
    "sem",
    "s.e.m.",
    "s.d.",
    "s.e.",
    "std",
    "stdev",
    "std dev",
    "std. dev.",
    "standard deviation",
    "standard error",
    "std error",
    "median",
];

/// Words that summarise beside such a word; alone they may be a name or initials.
const SUMMARY_BESIDE: [&str; 12] =
    ["sd", "se", "total", "sum", "min", "max", "minimum", "maximum", "cv", "n", "count", "variance"];

/// How clearly a name says a role: 4 the very word, 0 not at all.
pub(crate) fn clarity(name: &str, role: Role) -> u8 {
    let words = words(name);
    let meaning: Vec<&String> = words.iter().filter(|word| base(word, &FILLER) == 0).collect();
    let vocabulary: &[(&str, u8)] = match role {
        Role::Subject => &SUBJECT,
        Role::Time => &TIME,
        Role::Group => &GROUP,
        Role::Response => &RESPONSE,
        Role::Cluster => &CLUSTER,
    };
    match meaning.as_slice() {
        [] if role == Role::Subject => words.iter().map(|word| base(word, &FILLER)).max().unwrap_or(0),
        [] => 0,
        [one] => base(one, vocabulary),
        [first, .., last] => {
            let all = meaning.iter().all(|word| base(word, vocabulary) > 0);
            let whole = if all { base(last, vocabulary) } else { 0 };
            whole.max(base(last, vocabulary).saturating_sub(1)).max(base(first, vocabulary).saturating_sub(2))
        }
    }
}

fn base(word: &str, vocabulary: &[(&str, u8)]) -> u8 {
    vocabulary.iter().find(|(known, _)| *known == word).map_or(0, |(_, clarity)| *clarity)
}

/// True for names such as `sex` or `comment`.
pub(crate) fn is_beside(name: &str) -> bool {
    words(name).iter().any(|word| BESIDE.contains(&word.as_str()))
}

/// How surely a cell says that its row or column summarises others.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Summary {
    /// `Mean`, `SEM`, `Mean of Saline`.
    Sure,
    /// `SD`, `n`, `Max`: only beside a sure one.
    Beside,
    None,
}

/// Whether a cell says that its row or column summarises others.
pub(crate) fn summary(cell: &str) -> Summary {
    // Ids have digits, summary words have none: settle most cells without allocating.
    if cell.len() > 60 || cell.bytes().any(|byte| byte.is_ascii_digit()) {
        return Summary::None;
    }
    let cell = cell.trim().trim_end_matches([':', '=']).trim().to_lowercase();
    let first = cell.split([' ', '±', '(', '_', '/']).next().unwrap_or("");
    let starts = matches!(first, "mean" | "average" | "sem" | "s.e.m." | "s.d." | "median" | "stdev" | "std");
    if SUMMARY.contains(&cell.as_str()) || (starts && cell.len() <= 40) {
        Summary::Sure
    } else if SUMMARY_BESIDE.contains(&cell.as_str()) || first == "sd" {
        Summary::Beside
    } else {
        Summary::None
    }
}

/// True for each entry that summarises: sure ones, and the others next to one.
pub(crate) fn summarises(entries: &[Summary]) -> Vec<bool> {
    let mut found: Vec<bool> = entries.iter().map(|entry| *entry == Summary::Sure).collect();
    for at in 1..found.len() {
        found[at] |= found[at - 1] && entries[at] == Summary::Beside;
    }
    for at in (1..found.len()).rev() {
        found[at - 1] |= found[at] && entries[at - 1] == Summary::Beside;
    }
    found
}

/// The name without its unit in brackets, and the unit: `weight (g)` gives `weight` and `g`.
pub(crate) fn split_unit(name: &str) -> (&str, Option<&str>) {
    let name = name.trim();
    for (open, close) in [('(', ')'), ('[', ']')] {
        if let (Some(start), true) = (name.rfind(open), name.ends_with(close)) {
            let unit = name[start + 1..name.len() - 1].trim();
            let before = name[..start].trim();
            if !before.is_empty() && !unit.is_empty() && unit.chars().count() <= 16 {
                return (before, Some(unit));
            }
        }
    }
    (name, None)
}

/// The time unit that a column name gives: `time (h)`, `day`, `weeks since dose`.
pub(crate) fn time_unit(name: &str) -> Option<Unit> {
    let (bare, unit) = split_unit(name);
    if let Some(unit) = unit.and_then(|unit| words(unit).iter().find_map(|word| Unit::from_word(word))) {
        return Some(unit);
    }
    let words = words(bare);
    let mut units =
        words.iter().filter(|word| word.len() > 1 || words.len() == 1).filter_map(|word| Unit::from_word(word));
    let first = units.next()?;
    // `visit day` counts days.
    Some(if first == Unit::Visit { units.next().unwrap_or(first) } else { first })
}

/// Lower-case words of a name without its unit: `AnimalID`, `animal_id` and `Animal ID (tag)` give `animal`, `id`.
pub(crate) fn words(name: &str) -> Vec<String> {
    let (bare, _) = split_unit(name);
    let mut words: Vec<String> = Vec::new();
    let mut previous = ' ';
    for c in bare.chars().take(200) {
        let begins = !previous.is_alphanumeric()
            || (previous.is_lowercase() && c.is_uppercase())
            || (previous.is_alphabetic() && c.is_ascii_digit() && !bare.eq_ignore_ascii_case("hba1c"));
        if c.is_alphanumeric() {
            if begins || words.is_empty() {
                words.push(String::new());
            }
            if let Some(word) = words.last_mut() {
                word.extend(c.to_lowercase());
            }
        }
        previous = c;
    }
    words
}

/// Units of measurement as they stand in a row below the header.
pub(crate) fn is_unit(cell: &str) -> bool {
    const UNITS: [&str; 46] = [
        "g", "kg", "mg", "µg", "ug", "ng", "pg", "mm", "cm", "m", "µm", "um", "nm", "mm2", "mm²", "cm2", "cm²", "mm3",
        "mm³", "cm3", "cm³", "l", "ml", "µl", "ul", "%", "d", "h", "s", "ms", "min", "days", "day", "weeks", "hours",
        "mmol/l", "mg/dl", "mg/l", "g/l", "iu/l", "u/l", "ng/ml", "pg/ml", "mmhg", "°c", "bpm",
    ];
    let cell = cell.trim();
    let bracketed = cell.len() > 2
        && (cell.starts_with('(') && cell.ends_with(')') || cell.starts_with('[') && cell.ends_with(']'));
    bracketed || UNITS.contains(&cell.to_lowercase().as_str())
}
