//! A figure as a PDF file: lines, areas and text, nothing rasterised.
//!
//! The file is PDF 1.4 (ISO 32000-1, from memory) with the fonts that every reader has, so nothing is embedded, and no
//! date, so that the same figure gives the same bytes.

mod backend;
mod letters;

use crate::draw::{Surface, draw};
use crate::figure::Figure;
use crate::layout::lay_out;
use backend::PdfBackend;
use letters::Helvetica;

/// Units of the drawing per CSS pixel.
const GRID: f64 = 10.0;
/// Points per CSS pixel.
const POINTS: f64 = 0.75;

/// Draws a figure into the bytes of a PDF file of its size, with a title.
///
/// # Errors
/// Names the letters that the fonts of every reader do not have.
pub fn to_pdf(figure: &Figure, title: &str) -> Result<Vec<u8>, String> {
    let layout = lay_out(figure, &Helvetica);
    let size = [layout.width, layout.height].map(|length| (libm::ceil(length) * GRID) as u32);
    let mut backend = PdfBackend::new(size[0], size[1]);
    let surface = Surface { grid: GRID, ratio: 1.0, family: "Helvetica", text: 1.0 };
    draw(figure, &layout, &mut backend, surface).map_err(|error| error.to_string())?;
    let page = size.map(|length| f64::from(length) / GRID * POINTS);
    backend.finish(page, POINTS / GRID, title)
}

#[cfg(test)]
mod tests;
