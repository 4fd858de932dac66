//! Where the drawing put things, in CSS pixels.

use courseband_figure as figure;
use courseband_figure::Kind;
use serde::Serialize;

/// Where the drawing put things.
#[derive(Debug, Serialize)]
pub(crate) struct Layout {
    width: f64,
    height: f64,
    x: TimeRange,
    strips: Vec<Strip>,
}

/// Pixels `left` and `right` are times `start` and `end`.
#[derive(Debug, Serialize)]
struct TimeRange {
    left: f64,
    right: f64,
    start: f64,
    end: f64,
}

/// One strip: the whole of it, its curves and its lane.
#[derive(Debug, Serialize)]
struct Strip {
    kind: &'static str,
    pair: Option<usize>,
    left: f64,
    right: f64,
    top: f64,
    bottom: f64,
    plot: Option<Span>,
    y: Option<Values>,
    lane: Option<Span>,
}

#[derive(Debug, Serialize)]
struct Span {
    top: f64,
    bottom: f64,
}

/// `low` stands at the lower edge of `plot`, `high` at the upper.
#[derive(Debug, Serialize)]
struct Values {
    kind: &'static str,
    low: f64,
    high: f64,
}

impl From<&figure::Layout> for Layout {
    fn from(layout: &figure::Layout) -> Self {
        let figure::TimeRange { left, right, start, end } = layout.x;
        Layout {
            width: layout.width,
            height: layout.height,
            x: TimeRange { left, right, start, end },
            strips: layout.strips.iter().map(strip).collect(),
        }
    }
}

fn strip(strip: &figure::StripBox) -> Strip {
    let span = |rect: figure::Rect| Span { top: rect.top, bottom: rect.bottom };
    let values = |scale: figure::Scale| Values {
        kind: if scale.kind() == Kind::Log { "log" } else { "linear" },
        low: scale.low(),
        high: scale.high(),
    };
    Strip {
        kind: strip.kind.word(),
        pair: strip.pair,
        left: strip.outer.left,
        right: strip.outer.right,
        top: strip.outer.top,
        bottom: strip.outer.bottom,
        plot: strip.plot.map(span),
        y: strip.scale.map(values),
        lane: strip.lane.map(span),
    }
}
