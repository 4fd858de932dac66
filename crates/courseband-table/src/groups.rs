//! Group labels: spellings of one group united, near misses named.

use crate::labels::Labels;
use crate::request::Merge;
use crate::text::{counted, folded, quoted};
use std::collections::HashMap;

/// Unites spellings that differ by case and white space, and those asked for.
///
/// The most frequent spelling is kept, the earlier one where two are equally frequent. A merge into a name that the table
/// does not have gives the group that name, so that names can be masked.
pub(crate) fn unite(labels: &mut Labels, merges: &[Merge], notes: &mut Vec<String>) {
    let rows = row_counts(labels);
    let mut by_key: HashMap<String, usize> = HashMap::new();
    let mut united: Vec<Vec<usize>> = Vec::new();
    for (index, name) in labels.names.iter().enumerate() {
        let slot = *by_key.entry(key(name, merges)).or_insert_with(|| {
            united.push(Vec::new());
            united.len() - 1
        });
        united[slot].push(index);
    }
    let mut code = vec![0; labels.names.len()];
    let mut names = Vec::with_capacity(united.len());
    for (slot, spellings) in united.iter().enumerate() {
        spellings.iter().for_each(|&spelling| code[spelling] = slot as u32);
        let name = chosen(&labels.names, &rows, spellings, merges, notes);
        names.push(new_name(&name, &labels.names, merges).unwrap_or(name));
    }
    labels.names = names;
    labels.index.iter_mut().filter(|index| **index != Labels::NONE).for_each(|index| *index = code[*index as usize]);
}

/// Equal for spellings of one group: folded, numbers by value, merges followed.
fn key(name: &str, merges: &[Merge]) -> String {
    let mut key = plain_key(name);
    // Each merge can be followed once, so that a circle of merges ends.
    for _ in 0..merges.len() {
        match merges.iter().find(|merge| plain_key(&merge.from) == key) {
            Some(merge) => key = plain_key(&merge.into),
            None => break,
        }
    }
    key
}

fn plain_key(name: &str) -> String {
    let folded = folded(name);
    match folded.parse::<f64>() {
        Ok(value) if value.is_finite() && !folded.starts_with('0') || folded == "0" => format!("{value}"),
        _ => folded,
    }
}

/// The name that merges give and no spelling has.
fn new_name(name: &str, names: &[String], merges: &[Merge]) -> Option<String> {
    let last = key(name, merges);
    let merge = merges.iter().find(|merge| plain_key(&merge.into) == last)?;
    let is_there = names.iter().any(|other| plain_key(other) == last);
    (!is_there && !merge.into.trim().is_empty()).then(|| merge.into.trim().to_string())
}

fn chosen(names: &[String], rows: &[usize], spellings: &[usize], merges: &[Merge], notes: &mut Vec<String>) -> String {
    let is_kept = |name: &str| merges.iter().any(|merge| merge.into == name);
    let best = spellings
        .iter()
        .copied()
        .max_by_key(|&index| (is_kept(&names[index]), rows[index], std::cmp::Reverse(index)))
        .unwrap_or(spellings[0]);
    let name = names[best].split_whitespace().collect::<Vec<_>>().join(" ");
    let others: Vec<String> = spellings
        .iter()
        .filter(|&&index| index != best)
        .take(6)
        .map(|&index| format!("{} ({})", quoted(&names[index]), counted(rows[index], "row")))
        .collect();
    if !others.is_empty() {
        notes.push(format!("Group {} is also written {}: taken for the same group.", quoted(&name), others.join(", ")));
    }
    name
}

/// Rows of each label.
pub(crate) fn row_counts(labels: &Labels) -> Vec<usize> {
    let mut rows = vec![0; labels.names.len()];
    labels.index.iter().filter(|&&index| index != Labels::NONE).for_each(|&index| rows[index as usize] += 1);
    rows
}

/// Pairs (rare, common) of groups whose names are one letter apart.
pub(crate) fn near_misses(labels: &Labels) -> Vec<(u32, u32)> {
    let rows = row_counts(labels);
    let mut found = Vec::new();
    for rare in 0..labels.names.len() {
        let common = (0..labels.names.len())
            .filter(|&common| common != rare && rows[rare] * 3 <= rows[common])
            .filter(|&common| is_near(&folded(&labels.names[rare]), &folded(&labels.names[common])))
            .max_by_key(|&common| (rows[common], std::cmp::Reverse(common)));
        if let Some(common) = common {
            found.push((rare as u32, common as u32));
        }
    }
    found
}

/// One letter added, left out, changed, or two swapped, in names of at least four letters.
/// Digits and letters on their own tell names apart: `Dose 1` and `Dose 2`, `Diet A` and `Diet B`.
pub(crate) fn is_near(a: &str, b: &str) -> bool {
    let (a, b): (Vec<char>, Vec<char>) = (a.chars().collect(), b.chars().collect());
    let (short, long) = if a.len() <= b.len() { (&a, &b) } else { (&b, &a) };
    if short.len() < 4 || long.len() > 200 || long.len() - short.len() > 1 {
        return false;
    }
    let start = short.iter().zip(long.iter()).take_while(|(x, y)| x == y).count();
    let end = short[start..].iter().rev().zip(long[start..].iter().rev()).take_while(|(x, y)| x == y).count();
    let (left_short, left_long) = (&short[start..short.len() - end], &long[start..long.len() - end]);
    let swapped = matches!((left_short, left_long), ([p, q], [r, s]) if p == s && q == r);
    let digits = left_short.iter().chain(left_long).any(char::is_ascii_digit);
    let edge = |c: Option<&char>| c.is_none_or(|c| !c.is_alphanumeric());
    let alone =
        left_long.len() == 1 && edge(start.checked_sub(1).and_then(|at| long.get(at))) && edge(long.get(start + 1));
    !digits && !alone && (swapped || (left_short.len() <= 1 && left_long.len() == 1))
}
