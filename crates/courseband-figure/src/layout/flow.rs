//! Text that runs on over lines, in several tones.

use super::{Anchor, Text};
use crate::figure::Tone;
use crate::text::Measure;

/// Text that runs on, breaking at spaces.
pub(super) struct Flow<'a> {
    measure: &'a dyn Measure,
    start: f64,
    right: f64,
    x: f64,
    /// Top of the current line.
    y: f64,
    line: f64,
    texts: Vec<Text>,
}

impl<'a> Flow<'a> {
    pub(super) fn new(measure: &'a dyn Measure, start: f64, top: f64, right: f64, line: f64) -> Self {
        Flow { measure, start, right, x: start, y: top, line, texts: Vec::new() }
    }

    /// Leaves room before what follows, unless a line begins.
    pub(super) fn skip(&mut self, room: f64) {
        if self.x > self.start {
            self.x += room;
        }
    }

    /// Adds words; pieces on one line stay one text.
    pub(super) fn words(&mut self, text: &str, size: f64, bold: bool, tone: Tone) {
        let mut piece = String::new();
        for word in text.split(' ').filter(|w| !w.is_empty()) {
            let longer = if piece.is_empty() { word.to_string() } else { format!("{piece} {word}") };
            let fits = self.x + self.measure.width(&longer, size, bold) <= self.right;
            if fits || (piece.is_empty() && self.x <= self.start) {
                piece = longer;
                continue;
            }
            self.set(&piece, size, bold, tone);
            self.x = self.start;
            self.y += self.line;
            piece = word.to_string();
        }
        self.set(&piece, size, bold, tone);
    }

    fn set(&mut self, piece: &str, size: f64, bold: bool, tone: Tone) {
        if piece.is_empty() {
            return;
        }
        let y = self.y + 0.5 * self.line;
        self.texts.push(Text { x: self.x, y, text: piece.to_string(), size, bold, tone, anchor: Anchor::Start });
        self.x += self.measure.width(piece, size, bold);
    }

    /// Hands the texts over; returns where the last line ends, down and across.
    pub(super) fn finish(self, texts: &mut Vec<Text>) -> (f64, f64) {
        texts.extend(self.texts);
        (self.y + self.line, self.x)
    }
}
