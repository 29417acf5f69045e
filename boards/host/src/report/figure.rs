//! The few drawing primitives the report's figures need, as inline SVG.
//!
//! Written here rather than taken from a plotting crate: the page needs three small figures whose type is the page's own
//! and whose lines stay crisp in print, and that is less code than configuring a general plotter.

use super::axis::Axis;
use std::fmt::Write;

/// More points than this make a crowd.
const CROWD: usize = 100;

/// Which rendition of a figure: one for a page, one for a narrow window, so that text keeps its size in both.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rendition {
    /// For a page or a wide window.
    Wide,
    /// For a narrow window.
    Narrow,
    /// One of several panels side by side; the same for every window.
    Panel,
}

impl Rendition {
    /// Width of the drawing in its own units, which are CSS pixels at nominal size.
    pub fn width(self) -> f64 {
        match self {
            Self::Wide => 720.0,
            Self::Narrow | Self::Panel => 352.0,
        }
    }

    /// Class of the drawing, which the style sheet shows or hides.
    pub fn class(self) -> &'static str {
        match self {
            Self::Wide => "wide",
            Self::Narrow => "narrow",
            Self::Panel => "panel",
        }
    }
}

/// Shapes of the markers. Each meaning has its own shape, so that none rests on colour.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Shape {
    /// A filled disc: a point the fit used.
    Disc,
    /// An open diamond: a point the fit did not use.
    Diamond,
    /// A chevron pointing up: a point above the frame.
    Above,
    /// A chevron pointing down: a point below the frame.
    Below,
}

/// Where a text hangs on its position.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Anchor {
    /// Text begins there.
    Start,
    /// Text is centred there.
    Middle,
    /// Text ends there.
    End,
}

/// A drawing being made.
#[derive(Debug, Clone)]
pub struct Figure {
    width: f64,
    height: f64,
    head: String,
    body: String,
    /// Whether there are so many points that they are drawn small and their bars faint.
    dense: bool,
}

impl Figure {
    /// An empty drawing; `id` must be unique on the page, `title` and `description` speak for it where it is not seen.
    pub fn new(id: &str, rendition: Rendition, height: f64, title: &str, description: &str) -> Self {
        let width = rendition.width();
        let head = format!(
            "<svg class=\"{class}\" viewBox=\"0 0 {width} {height}\" role=\"img\" aria-labelledby=\"{id}-t {id}-d\">\n\
             <title id=\"{id}-t\">{}</title>\n<desc id=\"{id}-d\">{}</desc>\n",
            escape(title),
            escape(description),
            class = rendition.class(),
        );
        Self { width, height, head, body: String::new(), dense: false }
    }

    /// Draws small markers and faint bars when there are many points.
    pub fn crowd(&mut self, points: usize) {
        self.dense = points > CROWD;
    }

    /// Whether there are many points.
    pub fn is_crowded(&self) -> bool {
        self.dense
    }

    /// A straight line.
    pub fn line(&mut self, from: (f64, f64), to: (f64, f64), class: &str) {
        self.path(&[from, to], false, class);
    }

    /// A line through `points`, or the area they enclose when `closed`. Fewer than two points draw nothing.
    pub fn path(&mut self, points: &[(f64, f64)], closed: bool, class: &str) {
        if points.len() < 2 {
            return;
        }
        self.push(format_args!("<path class=\"{class}\" d=\""));
        for (i, point) in points.iter().enumerate() {
            let (x, y) = self.inside(*point);
            self.push(format_args!("{}{x:.1} {y:.1}", if i == 0 { "M" } else { "L" }));
        }
        self.push(format_args!("{}\"/>\n", if closed { "Z" } else { "" }));
    }

    /// A filled rectangle between two corners.
    pub fn rectangle(&mut self, from: (f64, f64), to: (f64, f64), class: &str) {
        self.path(&[from, (to.0, from.1), to, (from.0, to.1)], true, class);
    }

    /// A line of text; `^{…}` is raised and `_{…}` lowered.
    pub fn text(&mut self, at: (f64, f64), anchor: Anchor, class: &str, text: &str) {
        let (x, y) = self.inside(at);
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
            Anchor::End => "end",
        };
        self.push(format_args!("<text class=\"{class}\" x=\"{x:.1}\" y=\"{y:.1}\" text-anchor=\"{anchor}\">"));
        let spans = spans(text);
        self.push(format_args!("{spans}</text>\n"));
    }

    /// A marker; `label` shows where a pointer rests on it.
    pub fn marker(&mut self, shape: Shape, at: (f64, f64), label: &str) {
        let (x, y) = self.inside(at);
        let outline = |offsets: &[(f64, f64)]| -> String {
            let corner = |(i, (dx, dy)): (usize, &(f64, f64))| {
                let (x, y) = self.inside((x + dx, y + dy));
                format!("{}{x:.1} {y:.1}", if i == 0 { "M" } else { "L" })
            };
            offsets.iter().enumerate().map(corner).collect()
        };
        let title = if label.is_empty() { String::new() } else { format!("<title>{}</title>", escape(label)) };
        let element = match shape {
            Shape::Disc => {
                let r = if self.dense { 1.7 } else { 3.4 };
                format!("<circle class=\"used\" cx=\"{x:.1}\" cy=\"{y:.1}\" r=\"{r}\">{title}</circle>\n")
            }
            Shape::Diamond => {
                let d = outline(&[(0.0, -5.2), (5.2, 0.0), (0.0, 5.2), (-5.2, 0.0)]);
                format!("<path class=\"unused\" d=\"{d}Z\">{title}</path>\n")
            }
            Shape::Above => {
                let d = outline(&[(-5.5, 9.0), (0.0, 3.0), (5.5, 9.0)]);
                format!("<path class=\"beyond\" d=\"{d}\">{title}</path>\n")
            }
            Shape::Below => {
                let d = outline(&[(-5.5, -9.0), (0.0, -3.0), (5.5, -9.0)]);
                format!("<path class=\"beyond\" d=\"{d}\">{title}</path>\n")
            }
        };
        self.body.push_str(&element);
    }

    /// The finished SVG element.
    pub fn finish(self) -> String {
        let class = if self.dense { "dense" } else { "sparse" };
        format!("{}<g class=\"{class}\">\n{}</g>\n</svg>", self.head, self.body)
    }

    /// The finished drawing as a file of its own, with the style it needs.
    pub fn finish_alone(self, style: &str) -> String {
        let (width, height) = (self.width, self.height);
        let root = format!("<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{width}\" height=\"{height}\" ");
        let ground = format!(
            "<style>\n{style}</style>\n<rect width=\"{width}\" height=\"{height}\" fill=\"#fff\"/>\n<g class=\""
        );
        self.finish().replacen("<svg ", &root, 1).replacen("<g class=\"", &ground, 1)
    }

    /// A position brought inside the drawing.
    fn inside(&self, (x, y): (f64, f64)) -> (f64, f64) {
        let bounded = |v: f64, limit: f64| if v.is_nan() { 0.0 } else { v.clamp(0.0, limit) };
        (bounded(x, self.width), bounded(y, self.height))
    }

    fn push(&mut self, text: std::fmt::Arguments<'_>) {
        // Writing to a string cannot fail.
        let _ = self.body.write_fmt(text);
    }
}

/// A plotting area with its two axes.
#[derive(Debug, Clone)]
pub struct Frame {
    /// Left edge.
    pub left: f64,
    /// Upper edge.
    pub top: f64,
    /// Right edge.
    pub right: f64,
    /// Lower edge.
    pub bottom: f64,
    /// Axis along the lower edge.
    pub x: Axis,
    /// Axis along the left edge.
    pub y: Axis,
}

impl Frame {
    /// Where a pair of values lies in the drawing; what is outside lands on the frame.
    pub fn at(&self, x: f64, y: f64) -> (f64, f64) {
        let across = self.left + self.x.fraction(x) * (self.right - self.left);
        let down = self.bottom - self.y.fraction(y) * (self.bottom - self.top);
        (across, down)
    }

    /// Grid, tick labels and titles; goes under the data.
    pub fn draw(&self, figure: &mut Figure, x_title: &str, y_title: &str) {
        for tick in &self.y.ticks {
            let (_, y) = self.at(0.0, tick.value);
            let class = if tick.label.is_empty() { "grid minor" } else { "grid" };
            figure.line((self.left, y), (self.right, y), class);
            figure.text((self.left - 7.0, y + 4.0), Anchor::End, "tick", &tick.label);
        }
        for tick in &self.x.ticks {
            let (x, _) = self.at(tick.value, 0.0);
            let length = if tick.label.is_empty() { 3.0 } else { 6.0 };
            figure.line((x, self.bottom), (x, self.bottom + length), "axis");
            figure.text((x, self.bottom + 19.0), Anchor::Middle, "tick", &tick.label);
        }
        figure.line((self.left, self.bottom), (self.right, self.bottom), "axis");
        figure.text((self.right, self.bottom + 37.0), Anchor::End, "title", x_title);
        figure.text((2.0, self.top - 14.0), Anchor::Start, "title", y_title);
    }

    /// A marker for a point: on the spot inside the frame, a chevron at the edge outside it.
    pub fn point(&self, figure: &mut Figure, (x, y): (f64, f64), used: bool, label: &str) {
        let inside = if used { Shape::Disc } else { Shape::Diamond };
        let middle = self.y.at(0.5);
        let shape = match y {
            y if self.y.contains(y) => inside,
            y if y > middle => Shape::Above,
            _ => Shape::Below,
        };
        figure.marker(shape, self.at(x, y), label);
    }
}

/// Text made safe inside an element or a quoted attribute.
pub fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;").replace('\'', "&#x27;")
}

/// Escapes `text` and turns `^{…}` and `_{…}` into raised and lowered spans.
fn spans(text: &str) -> String {
    let (mut out, mut rest) = (String::new(), text);
    while let Some(start) = rest.find(['^', '_']).filter(|i| rest[i + 1..].starts_with('{')) {
        let Some(length) = rest[start..].find('}') else { break };
        let (shift, class) = if rest[start..].starts_with('^') { (-4, "sup") } else { (3, "sub") };
        let inner = escape(&rest[start + 2..start + length]);
        out.push_str(&escape(&rest[..start]));
        let _ = write!(
            out,
            "<tspan class=\"{class}\" dy=\"{shift}\">{inner}</tspan><tspan dy=\"{}\">\u{200b}</tspan>",
            -shift
        );
        rest = &rest[start + length + 1..];
    }
    out + &escape(rest)
}
