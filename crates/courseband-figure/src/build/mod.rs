//! From the findings to the description of a figure. All statistics of the
//! figure (percentile ranges, counts followed) are here, none in the drawing.

mod arrange;
mod axis;
mod courses;
mod followed;
mod gaps;
mod lane;
mod points;
mod range;
mod rates;

use crate::figure::{Dash, Figure, GroupLook, Mark, Strength, Strip, TimeAxis, Tone, Words};
use crate::source::{Source, Traces};
use crate::text::shortened;
use crate::view::View;

/// Describes the figure of an analysis.
#[must_use]
pub fn describe(source: &Source, traces: &Traces, view: &View) -> Figure {
    match arrange::arranged(source, traces, view) {
        Some((source, traces)) => as_arranged(&source, &traces, view),
        None => as_arranged(source, traces, view),
    }
}

fn as_arranged(source: &Source, traces: &Traces, view: &View) -> Figure {
    let builder = Builder { source, traces, view, time: axis::time_axis(source, view), looks: looks(source) };
    let mut strips: Vec<Strip> = Vec::new();
    let panels = view.panels;
    if !source.curves.is_empty() && source.curves.len() <= source.groups.len() {
        if panels.courses || !(panels.gaps || panels.followed) {
            strips.push(builder.courses());
            strips.extend(builder.rates());
        }
        if panels.gaps {
            strips.extend(builder.gaps());
        }
    }
    if panels.followed || strips.is_empty() {
        strips.push(builder.followed());
    }
    if !view.captions {
        strips.iter_mut().for_each(|strip| strip.caption.clear());
    }
    Figure {
        view: view.clone(),
        time: builder.time,
        strength: strength(source, &strips),
        groups: builder.looks,
        strips,
    }
}

/// What every strip is built from.
struct Builder<'a> {
    source: &'a Source,
    traces: &'a Traces,
    view: &'a View,
    time: TimeAxis,
    looks: Vec<GroupLook>,
}

impl Builder<'_> {
    /// Index of a group by its name.
    fn group(&self, name: &str) -> usize {
        self.source.groups.iter().position(|g| g.name == name).unwrap_or(0)
    }

    /// Tone and line of a gap: those of the group that is compared, plain ink where it is no group's alone.
    fn look_of(&self, gap: &crate::source::Gap) -> (Tone, Dash) {
        let own = self.source.groups.iter().position(|g| g.name == gap.to && matches!(gap.kind.as_str(), "" | "pair"));
        own.map_or((Tone::Ink, Dash::Solid), |g| (Tone::Group(g), self.looks[g].dash))
    }

    /// What several subjects are called.
    fn noun(&self) -> &str {
        self.view.noun.as_deref().filter(|n| !n.is_empty()).unwrap_or(&self.source.plan.words.subjects)
    }

    /// Length of the time axis that one pixel stands for, roughly.
    fn pixel(&self) -> f64 {
        (self.time.end - self.time.start) / self.view.safe_width()
    }

    /// Letters and names, where curves carry letters.
    fn key(&self) -> Vec<Words> {
        if !self.view.is_narrow() {
            return Vec::new();
        }
        let words = |(g, look): (usize, &GroupLook)| Words {
            text: format!("{}\u{a0}{}", look.letter, shortened(&look.name, 24).replace(' ', "\u{a0}")),
            tone: Tone::Group(g),
            bold: true,
        };
        self.looks.iter().enumerate().map(words).collect()
    }
}

/// Bands weaken from the fourth group on, traces also where more than forty are drawn.
fn strength(source: &Source, strips: &[Strip]) -> Strength {
    let marks = strips.iter().filter_map(|s| s.plot.as_ref()).flat_map(|p| &p.marks);
    let traces = marks.filter(|m| matches!(m, Mark::Trace { .. })).count();
    let bands = (3.0 / source.groups.len().max(3) as f64).max(0.4);
    Strength { bands, traces: bands.max(0.6) * libm::sqrt(40.0 / traces.max(40) as f64) }
}

/// Colour and line style by the groups' order; both differ as long as they can.
fn looks(source: &Source) -> Vec<GroupLook> {
    let look = |(k, group): (usize, &crate::source::Group)| GroupLook {
        name: group.name.clone(),
        letter: letter(k),
        colour: k % 6,
        dash: Dash::ALL[(k + k / 6) % 6],
    };
    source.groups.iter().enumerate().map(look).collect()
}

/// A, B ... Z, AA, AB ...
fn letter(k: usize) -> String {
    let last = char::from(b'A' + (k % 26) as u8);
    if k < 26 { last.to_string() } else { format!("{}{last}", letter(k / 26 - 1)) }
}

#[cfg(test)]
mod tests;
