//! Labels beside points, put where they cover neither a point, nor a bar, nor one another.

use super::figure::{Anchor, Figure, Frame};

/// Height of a line of text.
const HEIGHT: f64 = 13.0;
/// Widest a character of a label is taken to be.
const CHARACTER: f64 = 6.6;
/// Distance from a point to its label.
const GAP: f64 = 9.0;
/// Vertical offsets to try, nearest first.
const OFFSETS: [f64; 7] = [0.0, -14.0, 14.0, -28.0, 28.0, -42.0, 42.0];

/// An upright rectangle.
#[derive(Debug, Clone, Copy)]
struct Area {
    left: f64,
    top: f64,
    right: f64,
    bottom: f64,
}

impl Area {
    fn meets(&self, other: &Self) -> bool {
        self.left < other.right && other.left < self.right && self.top < other.bottom && other.top < self.bottom
    }

    fn holds(&self, other: &Self) -> bool {
        self.left <= other.left && other.right <= self.right && self.top <= other.top && other.bottom <= self.bottom
    }
}

/// What labels in a frame have to keep clear of.
#[derive(Debug, Clone)]
pub struct Labels {
    frame: Area,
    /// Markers and labels, which must not be covered.
    taken: Vec<Area>,
    /// Bars and lines, which are covered only where nothing else is free.
    crossed: Vec<Area>,
}

impl Labels {
    /// Nothing taken yet.
    pub fn new(frame: &Frame) -> Self {
        let frame = Area { left: frame.left, top: frame.top - 2.0, right: frame.right, bottom: frame.bottom };
        Self { frame, taken: Vec::new(), crossed: Vec::new() }
    }

    /// Keeps clear of a marker; those on the frame's edge are chevrons that reach into it.
    pub fn avoid_marker(&mut self, (x, y): (f64, f64)) {
        let below = if y <= self.frame.top + 3.0 { 12.0 } else { 6.0 };
        let above = if y >= self.frame.bottom - 1.0 { 12.0 } else { 6.0 };
        self.taken.push(Area { left: x - 6.5, top: y - above, right: x + 6.5, bottom: y + below });
    }

    /// Keeps clear of a bar, or of a short piece of a line.
    pub fn avoid_bar(&mut self, from: (f64, f64), to: (f64, f64)) {
        let (left, right) = (from.0.min(to.0) - 2.0, from.0.max(to.0) + 2.0);
        let (top, bottom) = (from.1.min(to.1) - 2.0, from.1.max(to.1) + 2.0);
        self.crossed.push(Area { left, top, right, bottom });
    }

    /// Writes `text` beside the point at `at`, or nowhere when there is no room.
    pub fn write(&mut self, figure: &mut Figure, (x, y): (f64, f64), text: &str) {
        let width = CHARACTER * text.chars().count() as f64;
        let beside = |left: f64, dy: f64| {
            let top = y + dy - HEIGHT / 2.0;
            Area { left, top, right: left + width, bottom: top + HEIGHT }
        };
        let places = OFFSETS.iter().flat_map(|dy| [beside(x + GAP, *dy), beside(x - GAP - width, *dy)]);
        let free = |area: &Area| self.frame.holds(area) && !self.taken.iter().any(|other| area.meets(other));
        let free: Vec<Area> = places.filter(free).collect();
        let clear = free.iter().find(|area| !self.crossed.iter().any(|other| area.meets(other)));
        let Some(place) = clear.or(free.first()).copied() else { return };
        // The text keeps to the side of its point.
        let baseline = place.top + HEIGHT - 2.5;
        if place.left > x {
            figure.text((place.left, baseline), Anchor::Start, "note halo", text);
        } else {
            figure.text((place.right, baseline), Anchor::End, "note halo", text);
        }
        self.taken.push(place);
    }
}
