//! Drawing on the page's own thread.

use crate::refused::Refused;
use crate::wire;
use courseband_figure::{
    Estimate, Figure, Measure, SVG_FAMILY, Source, Surface, Traces, View, describe, draw, lay_out, to_pdf, to_svg,
};
use plotters_canvas::CanvasBackend;
use serde::Serialize;
use wasm_bindgen::prelude::wasm_bindgen;
use wasm_bindgen::{JsCast, JsValue};
use web_sys::{CanvasRenderingContext2d, HtmlCanvasElement};

/// The system's own font, as the page uses it.
const FAMILY: &str = "system-ui, -apple-system, \"Segoe UI\", Roboto, \"Helvetica Neue\", Arial, sans-serif";
/// Room for the cursor's flag above the first strip.
const FLAG: f64 = 24.0;
/// Units of the drawing per device pixel: curves do not step from pixel to pixel.
const FINE: f64 = 8.0;

/// Draws all strips on a canvas, which gets the size they need, and says where they are in an object.
///
/// `findings` and `traces` are what a session's `run` and `traces` returned, `view` is JSON: see
/// the figure crate's `View`. The canvas's own transformation is left as it was found at first.
///
/// # Errors
/// Text that does not fit, and a canvas that cannot be drawn on.
#[wasm_bindgen]
pub fn draw_strips(canvas: &HtmlCanvasElement, findings: &str, traces: &str, view: &str) -> Result<JsValue, Refused> {
    let figure = figure(findings, traces, view, FLAG)?;
    let ratio = if figure.view.ratio.is_finite() { figure.view.ratio.clamp(0.5, 8.0) } else { 1.0 };
    let context = context_of(canvas).ok_or_else(|| Refused::page("This browser gives no canvas to draw on."))?;
    let layout = lay_out(&figure, &Pencil { context: &context, family: FAMILY });
    canvas.set_width((layout.width * ratio).round() as u32);
    canvas.set_height((layout.height * ratio).round() as u32);
    let scaled = context.set_transform(1.0 / FINE, 0.0, 0.0, 1.0 / FINE, 0.0, 0.0);
    scaled.map_err(|_| Refused::page("The canvas cannot be scaled."))?;
    let mut backend = CanvasBackend::with_canvas_object(canvas.clone())
        .ok_or_else(|| Refused::page("This browser gives no canvas to draw on."))?;
    let surface = Surface { grid: FINE * ratio, ratio, family: FAMILY, text: 1.0 };
    draw(&figure, &layout, &mut backend, surface).map_err(|error| Refused::page(error.to_string()))?;
    let serializer = serde_wasm_bindgen::Serializer::json_compatible();
    wire::Layout::from(&layout).serialize(&serializer).map_err(|error| Refused::page(error.to_string()))
}

/// The same figure as the text of an SVG file.
///
/// # Errors
/// Text that does not fit.
#[wasm_bindgen]
pub fn strips_svg(findings: &str, traces: &str, view: &str) -> Result<String, Refused> {
    let figure = figure(findings, traces, view, 0.0)?;
    // Measured as this browser will show it, where it has a canvas.
    let canvas = web_sys::window().and_then(|window| window.document()?.create_element("canvas").ok());
    let context = canvas.and_then(|canvas| context_of(canvas.dyn_ref::<HtmlCanvasElement>()?));
    match &context {
        Some(context) => to_svg(&figure, &Pencil { context, family: SVG_FAMILY }),
        None => to_svg(&figure, &Estimate),
    }
    .map_err(Refused::page)
}

/// The same figure as the bytes of a PDF file.
///
/// # Errors
/// Text that does not fit, and letters that a PDF reader's own fonts do not have.
#[wasm_bindgen]
pub fn strips_pdf(findings: &str, traces: &str, view: &str, title: &str) -> Result<Vec<u8>, Refused> {
    to_pdf(&figure(findings, traces, view, 0.0)?, title).map_err(Refused::page)
}

fn figure(findings: &str, traces: &str, view: &str, head_room: f64) -> Result<Figure, Refused> {
    let source: Source = wire::parsed(findings, "findings")?;
    let traces: Traces = wire::parsed(traces, "courses")?;
    let mut view: View = wire::parsed(view, "view")?;
    view.head_room = view.head_room.max(head_room);
    Ok(describe(&source, &traces, &view))
}

fn context_of(canvas: &HtmlCanvasElement) -> Option<CanvasRenderingContext2d> {
    canvas.get_context("2d").ok()??.dyn_into().ok()
}

/// Measures with the canvas that is drawn on.
struct Pencil<'a> {
    context: &'a CanvasRenderingContext2d,
    family: &'a str,
}

impl Measure for Pencil<'_> {
    fn width(&self, text: &str, size: f64, bold: bool) -> f64 {
        let weight = if bold { "bold" } else { "normal" };
        self.context.set_font(&format!("{weight} {size}px {}", self.family));
        match self.context.measure_text(text) {
            Ok(metrics) => metrics.width(),
            Err(_) => Estimate.width(text, size, bold),
        }
    }
}
