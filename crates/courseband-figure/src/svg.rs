//! A figure as the text of an SVG file.

use crate::draw::{Surface, draw};
use crate::figure::Figure;
use crate::layout::lay_out;
use crate::text::Measure;
use plotters::prelude::{DrawingBackend, SVGBackend};

/// Units of the file per CSS pixel: the backend writes whole numbers.
const GRID: u32 = 10;
/// The backend divides text sizes by this.
const TEXT_DIVISOR: f64 = 1.24;
/// Fonts that are widely there, by their generic kin last.
pub const FAMILY: &str = "Helvetica, Arial, sans-serif";

/// Draws a figure into the text of an SVG file.
///
/// # Errors
/// The backend's message; writing to memory gives none.
pub fn to_svg(figure: &Figure, measure: &dyn Measure) -> Result<String, String> {
    let layout = lay_out(figure, measure);
    let (width, height) = (libm::ceil(layout.width) as u32, libm::ceil(layout.height) as u32);
    let mut text = String::new();
    {
        let mut backend = SVGBackend::with_string(&mut text, (width * GRID, height * GRID));
        let surface = Surface { grid: f64::from(GRID), ratio: 1.0, family: FAMILY, text: TEXT_DIVISOR };
        draw(figure, &layout, &mut backend, surface).map_err(|error| error.to_string())?;
        backend.present().map_err(|error| error.to_string())?;
    }
    let enlarged = format!("width=\"{}\" height=\"{}\"", width * GRID, height * GRID);
    Ok(text.replacen(&enlarged, &format!("width=\"{width}\" height=\"{height}\""), 1))
}
