//! How a figure is to look: size, colours, what is opened.

use serde::Deserialize;

/// For which surface colours are chosen.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Theme {
    /// Light page.
    #[default]
    Light,
    /// Dark page.
    Dark,
    /// White paper.
    Print,
}

/// How a figure is to look. Lengths are in CSS pixels.
#[derive(Debug, Clone, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct View {
    /// Width of the whole figure, at least 240.
    pub width: f64,
    /// Device pixels per CSS pixel.
    pub ratio: f64,
    /// For which surface.
    pub theme: Theme,
    /// Short for the dark theme.
    pub dark: bool,
    /// Size of the text.
    pub font: f64,
    /// Room kept free on all sides.
    pub margin: f64,
    /// Room kept free at the top, for the cursor's flag.
    pub head_room: f64,
    /// Stretches the strips' heights.
    pub tall: f64,
    /// Gaps whose strips are open, where there are more pairs than [`View::FEW_PAIRS`].
    pub open_pairs: Vec<usize>,
    /// Draws the courses on a logarithmic axis or not; `None`: where gaps are ratios.
    pub log: Option<bool>,
    /// A group whose traces are shown and whose course stands out.
    pub focus: Option<usize>,
    /// A subject whose trace stands out.
    pub pointed: Option<usize>,
    /// What several subjects are called; `None`: as in the plan.
    pub noun: Option<String>,
    /// Draws no more points than the pixels can show.
    pub decimate: bool,
    /// Groups are labelled by letters at their curves; `None`: on narrow figures.
    pub letters: Option<bool>,
    /// Lines of another model, laid over the courses.
    pub over: Vec<OverLine>,
    /// Which strips are drawn.
    pub panels: Panels,
    /// Draws the bands of the courses. Those of the gaps are always drawn: they carry the finding.
    pub bands: bool,
    /// Draws the subjects.
    pub points: bool,
    /// Draws the lines of explanation over the strips.
    pub captions: bool,
    /// Groups from the first to the last, by index into the findings; empty: as they are.
    pub order: Vec<usize>,
    /// Names of the groups by index into the findings; empty ones: as they are.
    pub names: Vec<String>,
    /// What the value axis is called, with its unit; `None`: as the response.
    pub value_title: Option<String>,
    /// What the time axis is called; `None`: as the time unit.
    pub time_title: Option<String>,
}

/// Which strips are drawn. Without any the courses are.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Panels {
    /// The groups' courses.
    pub courses: bool,
    /// Gaps and their lanes.
    pub gaps: bool,
    /// Who is still followed.
    pub followed: bool,
}

impl Default for Panels {
    fn default() -> Self {
        Panels { courses: true, gaps: true, followed: true }
    }
}

/// A group's line under another model.
#[derive(Debug, Clone, Default, Deserialize)]
#[serde(default)]
pub struct OverLine {
    /// Whose; a name that no group has is passed over.
    pub group: String,
    /// Times.
    pub time: Vec<f64>,
    /// Its mean.
    pub response_mean: Vec<Option<f64>>,
}

impl Default for View {
    fn default() -> Self {
        View {
            width: 900.0,
            ratio: 1.0,
            theme: Theme::Light,
            dark: false,
            font: 12.0,
            margin: 0.0,
            head_room: 0.0,
            tall: 1.0,
            open_pairs: Vec::new(),
            log: None,
            focus: None,
            pointed: None,
            noun: None,
            decimate: true,
            letters: None,
            over: Vec::new(),
            panels: Panels::default(),
            bands: true,
            points: true,
            captions: true,
            order: Vec::new(),
            names: Vec::new(),
            value_title: None,
            time_title: None,
        }
    }
}

impl View {
    /// Up to so many pairs each has its own strip.
    pub const FEW_PAIRS: usize = 3;

    /// The theme, `dark` considered.
    #[must_use]
    pub fn surface(&self) -> Theme {
        if self.dark { Theme::Dark } else { self.theme }
    }

    /// Width that can be worked with.
    pub(crate) fn safe_width(&self) -> f64 {
        if self.width.is_finite() { self.width.clamp(240.0, 4000.0) } else { 900.0 }
    }

    /// Text size that can be worked with.
    pub(crate) fn safe_font(&self) -> f64 {
        if self.font.is_finite() { self.font.clamp(6.0, 40.0) } else { 12.0 }
    }

    /// Too narrow for names at the curves' ends.
    pub(crate) fn is_narrow(&self) -> bool {
        self.letters.unwrap_or(self.safe_width() < 46.0 * self.safe_font())
    }
}
