//! The key above a plot: signs and what they mean, wrapped to the width of the drawing.

use super::figure::{Anchor, Figure, Shape};

/// Widest a character of the figures' 12-unit text is taken to be.
const CHARACTER: f64 = 6.6;

/// A row of explained signs above a plot, wrapped to the width of the drawing.
#[derive(Debug, Clone)]
pub struct Key<'a> {
    items: Vec<(Sign, &'a str)>,
    width: f64,
}

/// What a key entry shows.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sign {
    /// A marker with an error bar.
    Marker(Shape),
    /// A line of this class.
    Line(&'static str),
    /// A filled area of this class.
    Area(&'static str),
}

impl<'a> Key<'a> {
    /// A key of these signs for a drawing of this width.
    pub fn new(items: Vec<(Sign, &'a str)>, width: f64) -> Self {
        Self { items, width }
    }

    /// Position of each item: across, and number of its row.
    fn places(&self) -> Vec<(f64, usize)> {
        let (mut x, mut row, mut places) = (2.0, 0, Vec::new());
        for (_, text) in &self.items {
            let width = 30.0 + CHARACTER * text.chars().count() as f64;
            if x > 2.0 && x + width > self.width {
                (x, row) = (2.0, row + 1);
            }
            places.push((x, row));
            x += width + 14.0;
        }
        places
    }

    /// Height the key takes.
    pub fn height(&self) -> f64 {
        self.places().last().map_or(0.0, |(_, row)| 20.0 * (*row as f64 + 1.0))
    }

    /// Draws the key at the top of the figure.
    pub fn draw(&self, figure: &mut Figure) {
        for ((sign, text), (x, row)) in self.items.iter().zip(self.places()) {
            let y = 12.0 + 20.0 * row as f64;
            match sign {
                Sign::Marker(shape) => {
                    figure.line((x + 11.0, y - 9.0), (x + 11.0, y + 9.0), "bar");
                    figure.marker(*shape, (x + 11.0, y), "");
                }
                Sign::Line(class) => figure.line((x, y), (x + 22.0, y), class),
                Sign::Area(class) => figure.rectangle((x, y - 6.0), (x + 22.0, y + 6.0), class),
            }
            figure.text((x + 28.0, y + 4.0), Anchor::Start, "note", text);
        }
    }
}
