//! Findings to a description of strips, then to any plotters backend.
//!
//! The way is: [`Source`] (what a figure needs of the findings) and [`Traces`]
//! (the subjects' own courses), seen through a [`View`], give a [`Figure`] in
//! data units; [`lay_out`] finds a place in pixels for everything in it;
//! [`draw`] puts it on a backend. The first two are tested without a backend,
//! and the last holds no statistics.

mod build;
mod draw;
mod figure;
#[cfg(test)]
mod fixture;
mod layout;
mod numbers;
mod palette;
mod pdf;
mod scale;
mod source;
mod svg;
#[cfg(test)]
mod testing;
mod text;
mod ticks;
mod view;
mod words;

pub use build::describe;
pub use draw::{Surface, draw};
pub use figure::*;
pub use layout::{Anchor, Arrow, End, Layout, Rect, StripBox, Text, TimeRange, lay_out};
pub use palette::{Palette, Rgb};
pub use pdf::to_pdf;
pub use scale::{Kind, Scale};
pub use source::*;
pub use svg::{FAMILY as SVG_FAMILY, to_svg};
pub use text::{Estimate, Measure};
pub use ticks::Tick;
pub use view::{OverLine, Panels, Theme, View};
