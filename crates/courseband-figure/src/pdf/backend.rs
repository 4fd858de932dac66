//! Draws into the content of a PDF page.

use super::letters::{Letter, letter};
use plotters::style::text_anchor::HPos;
use plotters_backend::{
    BackendColor, BackendCoord, BackendStyle, BackendTextStyle, DrawingBackend, DrawingErrorKind, FontStyle,
};
use std::collections::BTreeSet;
use std::convert::Infallible;
use std::fmt::Write;

/// From the middle of a line of text down to its base, as a share of the size: half of the letter x.
const BASE: f64 = 0.26;

type Drawn = Result<(), DrawingErrorKind<Infallible>>;

/// A page in the making. Writing to memory does not fail.
pub(super) struct PdfBackend {
    size: (u32, u32),
    content: String,
    /// Opacities that were used, in percent.
    opacities: BTreeSet<u32>,
    missing: BTreeSet<char>,
    /// What stands, for areas, for lines and for both.
    fill: Option<(u8, u8, u8)>,
    stroke: Option<((u8, u8, u8), u32)>,
    opacity: Option<u32>,
}

impl PdfBackend {
    pub(super) fn new(width: u32, height: u32) -> Self {
        PdfBackend {
            size: (width, height),
            content: String::new(),
            opacities: BTreeSet::new(),
            missing: BTreeSet::new(),
            fill: None,
            stroke: None,
            opacity: None,
        }
    }

    fn put(&mut self, text: std::fmt::Arguments<'_>) {
        // Writing to a string does not fail.
        let _ = self.content.write_fmt(text);
        self.content.push('\n');
    }

    fn set_opacity(&mut self, alpha: f64) {
        let percent = libm::round(alpha.clamp(0.0, 1.0) * 100.0) as u32;
        if self.opacity != Some(percent) {
            self.opacities.insert(percent);
            self.opacity = Some(percent);
            self.put(format_args!("/A{percent} gs"));
        }
    }

    fn set_fill(&mut self, colour: BackendColor) {
        self.set_opacity(colour.alpha);
        if self.fill != Some(colour.rgb) {
            self.fill = Some(colour.rgb);
            self.put(format_args!("{} rg", shares(colour.rgb)));
        }
    }

    fn set_stroke(&mut self, colour: BackendColor, width: u32) {
        self.set_opacity(colour.alpha);
        if self.stroke != Some((colour.rgb, width)) {
            self.stroke = Some((colour.rgb, width));
            self.put(format_args!("{} RG {width} w", shares(colour.rgb)));
        }
    }

    fn set<S: BackendStyle>(&mut self, style: &S, fill: bool) {
        if fill {
            self.set_fill(style.color());
        } else {
            self.set_stroke(style.color(), style.stroke_width());
        }
    }

    fn path(&mut self, points: impl Iterator<Item = BackendCoord>) {
        for (k, (x, y)) in points.enumerate() {
            self.put(format_args!("{x} {y} {}", if k == 0 { 'm' } else { 'l' }));
        }
    }

    /// The file. `page`: its size in points; `unit`: points per unit of the drawing.
    pub(super) fn finish(self, page: [f64; 2], unit: f64, title: &str) -> Result<Vec<u8>, String> {
        if !self.missing.is_empty() {
            let list: Vec<String> = self.missing.iter().take(8).map(|c| format!("‘{c}’")).collect();
            return Err(format!(
                "The figure holds letters that the fonts of a PDF reader do not have: {}. Save it as SVG, or give groups \
                 and axes other names.",
                list.join(", ")
            ));
        }
        let [width, height] = page;
        let content = format!("{unit:.4} 0 0 -{unit:.4} 0 {height:.2} cm\n{}", self.content);
        let state = |a: &u32| format!("/A{a} << /ca {0:.2} /CA {0:.2} >> ", f64::from(*a) / 100.0);
        let states: String = self.opacities.iter().map(state).collect();
        let font =
            |name: &str, encoding: &str| format!("<< /Type /Font /Subtype /Type1 /BaseFont /{name}{encoding} >>");
        let latin = " /Encoding /WinAnsiEncoding";
        let objects = [
            "<< /Type /Catalog /Pages 2 0 R >>".to_string(),
            "<< /Type /Pages /Kids [3 0 R] /Count 1 >>".to_string(),
            format!(
                "<< /Type /Page /Parent 2 0 R /MediaBox [0 0 {width:.2} {height:.2}] /Contents 4 0 R /Resources << /Font << \
                 /F1 5 0 R /F2 6 0 R /F3 7 0 R >> /ExtGState << {states}>> >> >>"
            ),
            format!("<< /Length {} >>\nstream\n{content}endstream", content.len()),
            font("Helvetica", latin),
            font("Helvetica-Bold", latin),
            font("Symbol", ""),
            format!("<< /Title <{}> /Producer (Courseband) >>", wide(title)),
        ];
        Ok(written(&objects))
    }
}

/// Objects one after the other, and where each begins.
fn written(objects: &[String]) -> Vec<u8> {
    let mut file = String::from("%PDF-1.4\n");
    let mut places = Vec::new();
    for (k, object) in objects.iter().enumerate() {
        places.push(file.len());
        file += &format!("{} 0 obj\n{object}\nendobj\n", k + 1);
    }
    let start = file.len();
    let count = objects.len();
    file += &format!("xref\n0 {}\n0000000000 65535 f \n", count + 1);
    for place in places {
        file += &format!("{place:010} 00000 n \n");
    }
    file += &format!("trailer\n<< /Size {} /Root 1 0 R /Info {count} 0 R >>\nstartxref\n{start}\n%%EOF\n", count + 1);
    file.into_bytes()
}

/// A text of any letters, as hexadecimal UTF-16.
fn wide(text: &str) -> String {
    ["FEFF".to_string()].into_iter().chain(text.encode_utf16().map(|unit| format!("{unit:04X}"))).collect()
}

fn shares((r, g, b): (u8, u8, u8)) -> String {
    let share = |v: u8| f64::from(v) / 255.0;
    format!("{:.3} {:.3} {:.3}", share(r), share(g), share(b))
}

impl DrawingBackend for PdfBackend {
    type ErrorType = Infallible;

    fn get_size(&self) -> (u32, u32) {
        self.size
    }

    fn ensure_prepared(&mut self) -> Drawn {
        Ok(())
    }

    fn present(&mut self) -> Drawn {
        Ok(())
    }

    fn draw_pixel(&mut self, point: BackendCoord, colour: BackendColor) -> Drawn {
        self.draw_rect(point, (point.0 + 1, point.1 + 1), &colour, true)
    }

    fn draw_line<S: BackendStyle>(&mut self, from: BackendCoord, to: BackendCoord, style: &S) -> Drawn {
        self.draw_path([from, to], style)
    }

    fn draw_rect<S: BackendStyle>(&mut self, a: BackendCoord, b: BackendCoord, style: &S, fill: bool) -> Drawn {
        if style.color().alpha > 0.0 {
            self.set(style, fill);
            self.put(format_args!("{} {} {} {} re {}", a.0, a.1, b.0 - a.0, b.1 - a.1, if fill { 'f' } else { 'S' }));
        }
        Ok(())
    }

    fn draw_path<S: BackendStyle, I: IntoIterator<Item = BackendCoord>>(&mut self, path: I, style: &S) -> Drawn {
        if style.color().alpha > 0.0 {
            self.set(style, false);
            self.path(path.into_iter());
            self.put(format_args!("S"));
        }
        Ok(())
    }

    /// Four cubic arcs.
    fn draw_circle<S: BackendStyle>(&mut self, centre: BackendCoord, radius: u32, style: &S, fill: bool) -> Drawn {
        if style.color().alpha == 0.0 {
            return Ok(());
        }
        self.set(style, fill);
        let (x, y, r) = (f64::from(centre.0), f64::from(centre.1), f64::from(radius));
        // 4 (√2 − 1) / 3: the arcs touch the circle in their middles.
        let k = 0.552_285 * r;
        self.put(format_args!("{:.1} {y:.1} m", x + r));
        // From (cos, sin) a quarter further.
        for (c, s) in [(1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0)] {
            let at = |along: f64, across: f64| (x + c * along - s * across, y + s * along + c * across);
            let (from, to, end) = (at(r, k), at(k, r), at(0.0, r));
            self.put(format_args!("{:.1} {:.1} {:.1} {:.1} {:.1} {:.1} c", from.0, from.1, to.0, to.1, end.0, end.1));
        }
        self.put(format_args!("{}", if fill { 'f' } else { 's' }));
        Ok(())
    }

    fn fill_polygon<S: BackendStyle, I: IntoIterator<Item = BackendCoord>>(&mut self, corners: I, style: &S) -> Drawn {
        if style.color().alpha > 0.0 {
            self.set(style, true);
            self.path(corners.into_iter());
            self.put(format_args!("f"));
        }
        Ok(())
    }

    fn draw_text<S: BackendTextStyle>(&mut self, text: &str, style: &S, at: BackendCoord) -> Drawn {
        let bold = matches!(style.style(), FontStyle::Bold);
        let mut letters: Vec<Letter> = Vec::new();
        for c in text.chars() {
            match letter(c, bold) {
                Some(letter) => letters.push(letter),
                None => {
                    self.missing.insert(c);
                }
            }
        }
        let size = style.size();
        let width = letters.iter().map(|l| f64::from(l.width)).sum::<f64>() * size / 1000.0;
        let before = match style.anchor().h_pos {
            HPos::Left => 0.0,
            HPos::Center => 0.5 * width,
            HPos::Right => width,
        };
        self.set_fill(style.color());
        let (left, base) = (f64::from(at.0) - before, f64::from(at.1) + BASE * size);
        self.put(format_args!("BT 1 0 0 -1 {left:.1} {base:.1} Tm"));
        for run in letters.chunk_by(|a, b| a.symbol == b.symbol) {
            let font = if run[0].symbol { 3 } else { 1 + usize::from(bold) };
            let codes: String = run.iter().map(|l| format!("{:02X}", l.code)).collect();
            self.put(format_args!("/F{font} {size:.1} Tf <{codes}> Tj"));
        }
        self.put(format_args!("ET"));
        Ok(())
    }
}
