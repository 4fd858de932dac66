//! The description of a figure: strips on one time axis, everything in data
//! units, without a backend and without a pixel decided.

use crate::scale::Scale;
use crate::ticks::Tick;
use crate::view::View;

/// Strips on one time axis.
#[derive(Debug, Clone)]
pub struct Figure {
    /// How it is to look.
    pub view: View,
    /// The shared axis.
    pub time: TimeAxis,
    /// Groups, in their order.
    pub groups: Vec<GroupLook>,
    /// How strongly bands and traces are drawn.
    pub strength: Strength,
    /// From the top.
    pub strips: Vec<Strip>,
}

/// Shares of the usual strength: less where many overlap.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Strength {
    /// Of bands' areas.
    pub bands: f64,
    /// Of traces.
    pub traces: f64,
}

/// The shared axis.
#[derive(Debug, Clone)]
pub struct TimeAxis {
    /// First time.
    pub start: f64,
    /// Last time.
    pub end: f64,
    /// Candidates for marks; those without room for a label get none.
    pub ticks: Vec<Tick>,
    /// Word for one time unit.
    pub word: String,
}

/// How a group is told apart.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct GroupLook {
    /// Whole name.
    pub name: String,
    /// Short label.
    pub letter: String,
    /// Index of its colour.
    pub colour: usize,
    /// Line style.
    pub dash: Dash,
}

/// Line styles, in the order in which groups take them.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dash {
    /// Unbroken.
    Solid,
    /// Long dashes.
    Long,
    /// Dots.
    Dots,
    /// Dash and dot.
    DashDot,
    /// Short dashes.
    Short,
    /// A dash and two dots.
    DashDotDot,
}

impl Dash {
    /// All styles.
    pub const ALL: [Dash; 6] = [Dash::Solid, Dash::Long, Dash::Dots, Dash::DashDot, Dash::Short, Dash::DashDotDot];

    /// Lengths of ink and gap in turn, in line widths; empty for an unbroken line.
    #[must_use]
    pub fn lengths(self) -> &'static [f64] {
        match self {
            Dash::Solid => &[],
            Dash::Long => &[5.5, 2.2],
            Dash::Dots => &[1.25, 1.5],
            Dash::DashDot => &[6.0, 1.8, 1.2, 1.8],
            Dash::Short => &[2.8, 1.7],
            Dash::DashDotDot => &[8.0, 1.8, 1.2, 1.5, 1.2, 1.8],
        }
    }
}

/// What a strip shows.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum StripKind {
    /// The groups' courses.
    Courses,
    /// How fast the courses change.
    Rates,
    /// One pair's gap over its lane.
    Gap,
    /// One pair as a row: its name and its lane.
    Row,
    /// How many are followed.
    Followed,
}

impl StripKind {
    /// The kind as the page knows it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            StripKind::Courses => "courses",
            StripKind::Rates => "rates",
            StripKind::Gap => "gap",
            StripKind::Row => "row",
            StripKind::Followed => "followed",
        }
    }
}

/// One strip.
#[derive(Debug, Clone)]
pub struct Strip {
    /// What it shows.
    pub kind: StripKind,
    /// The pair, as an index into the findings' differences.
    pub pair: Option<usize>,
    /// Bold word at the start of its caption.
    pub title: String,
    /// Name of what is drawn, in a colour of its own.
    pub subject: Vec<Words>,
    /// The rest of the caption.
    pub caption: String,
    /// Curves on a value axis; rows have none.
    pub plot: Option<Plot>,
    /// The pair's lane.
    pub lane: Option<Lane>,
}

/// A piece of text in one tone.
#[derive(Debug, Clone, PartialEq)]
pub struct Words {
    /// The text.
    pub text: String,
    /// Its colour.
    pub tone: Tone,
    /// Bold.
    pub bold: bool,
}

/// Colours by what they mean.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Tone {
    /// Main text and the zero line.
    Ink,
    /// Captions.
    Soft,
    /// Grid.
    Hair,
    /// Index into [`Figure::groups`].
    Group(usize),
}

/// Curves on a value axis.
#[derive(Debug, Clone)]
pub struct Plot {
    /// Height in CSS pixels at text size 12.
    pub height: f64,
    /// The value axis.
    pub scale: Scale,
    /// Its marks.
    pub ticks: Vec<Tick>,
    /// Lines across.
    pub rules: Vec<Rule>,
    /// From the back to the front.
    pub marks: Vec<Mark>,
    /// Labels at the curves' ends.
    pub ends: Vec<EndLabel>,
    /// Least height in lines of text, so that the end labels fit.
    pub least_lines: usize,
}

/// A line across a strip.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Rule {
    /// At which value.
    pub value: f64,
    /// What it means.
    pub kind: RuleKind,
}

/// What a line across means.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RuleKind {
    /// No difference.
    Zero,
    /// The margin: dotted.
    Margin,
}

/// Something drawn over time. Points are (time, value), ascending in time.
#[derive(Debug, Clone, PartialEq)]
pub enum Mark {
    /// One subject's course.
    Trace {
        /// Whose.
        tone: Tone,
        /// Its points.
        points: Vec<(f64, f64)>,
        /// Stands out.
        strong: bool,
    },
    /// A line of another model.
    Over {
        /// Whose.
        tone: Tone,
        /// Its points.
        points: Vec<(f64, f64)>,
    },
    /// Range of the subjects: (time, low, high).
    Range {
        /// Whose.
        tone: Tone,
        /// Its points.
        points: Vec<(f64, f64, f64)>,
    },
    /// A band: (time, low, high).
    Band {
        /// Whose.
        tone: Tone,
        /// Its points.
        points: Vec<(f64, f64, f64)>,
        /// Steps back behind a group in focus.
        faded: bool,
    },
    /// Where a band rests on few: hatched.
    Hatch {
        /// Whose.
        tone: Tone,
        /// The part of the band.
        points: Vec<(f64, f64, f64)>,
    },
    /// A curve.
    Curve {
        /// Whose.
        tone: Tone,
        /// Line style.
        dash: Dash,
        /// Its points.
        points: Vec<(f64, f64)>,
        /// Steps back behind a group in focus.
        faded: bool,
    },
    /// Estimates at visits, with their intervals where there is no band: (time, value, low, high).
    Dots {
        /// Whose.
        tone: Tone,
        /// Draws the intervals, this many dot widths beside the visit so that groups do not hide each other.
        beside: Option<f64>,
        /// Its points.
        points: Vec<(f64, f64, f64, f64)>,
    },
    /// A line that keeps its value until the next point.
    Steps {
        /// Whose.
        tone: Tone,
        /// Line style.
        dash: Dash,
        /// Its points.
        points: Vec<(f64, f64)>,
    },
}

/// A label at a curve's end.
#[derive(Debug, Clone, PartialEq)]
pub struct EndLabel {
    /// Where the curve ends.
    pub time: f64,
    /// At which value.
    pub value: f64,
    /// One or two lines.
    pub lines: Vec<String>,
    /// Whose.
    pub tone: Tone,
    /// Stands where the curve ends, also inside the plot; otherwise beside the plot, with a leader.
    pub inside: bool,
}

/// What the data say about a gap, over all time.
#[derive(Debug, Clone, PartialEq)]
pub struct Lane {
    /// The pair's colour.
    pub tone: Tone,
    /// Where both were observed, without holes, ascending.
    pub segments: Vec<Segment>,
}

/// A run of one state.
#[derive(Debug, Clone, PartialEq)]
pub struct Segment {
    /// Where it begins.
    pub start: f64,
    /// Where it ends.
    pub end: f64,
    /// What the data say.
    pub state: LaneState,
    /// Its label, at its start.
    pub label: String,
    /// Points up or down, before the label.
    pub up: Option<bool>,
}

/// What the data say about a gap.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LaneState {
    /// Beyond the margin: tall, solid.
    Beyond,
    /// Apart: half height.
    Apart,
    /// Inside the margin: outlined.
    Inside,
    /// Neither shown nor ruled out: dotted.
    Undecided,
    /// Only one of the groups was observed: nothing to compare.
    OnlyOne,
    /// Nothing to compare for another reason, such as that neither group was observed.
    NotCompared,
}
