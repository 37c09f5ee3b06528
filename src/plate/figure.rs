//! A figure: drawing items in millimetres, y down, from the upper left corner.

use std::sync::Arc;

use crate::ground::Point;

/// sRGB with straight alpha.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Rgba(pub [u8; 4]);

/// A line of `width_mm`, solid or dashed (on, off in mm).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stroke {
    pub color: Rgba,
    pub width_mm: f64,
    pub dash_mm: Option<[f64; 2]>,
}

pub type Fill = Rgba;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TextAnchor {
    Start,
    Middle,
    End,
}

/// Reach of a text halo beyond the letters, in text sizes.
pub const HALO: f64 = 0.14;

/// One thing to draw, in order.
#[derive(Clone, Debug, PartialEq)]
pub enum Item {
    /// Straight segments through the points.
    Path {
        points: Vec<Point>,
        closed: bool,
        fill: Option<Fill>,
        stroke: Option<Stroke>,
    },
    Circle {
        centre: Point,
        radius_mm: f64,
        fill: Option<Fill>,
        stroke: Option<Stroke>,
    },
    /// One line of text; `at` is the anchor on the baseline; `turn_deg` clockwise about it.
    /// `halo` is the colour of an outline under the letters, reaching [`HALO`] × `size_mm` beyond
    /// them on every side, so that they stay legible over an image.
    Text {
        at: Point,
        text: String,
        size_mm: f64,
        bold: bool,
        color: Rgba,
        anchor: TextAnchor,
        turn_deg: f64,
        halo: Option<Rgba>,
    },
    /// RGBA pixels, row by row, stretched over the box.
    Image {
        min: Point,
        max: Point,
        width: usize,
        height: usize,
        rgba: Arc<[u8]>,
    },
    /// Items clipped to a box.
    Clip {
        min: Point,
        max: Point,
        items: Vec<Item>,
    },
}

/// A page or a part of one.
#[derive(Clone, Debug, PartialEq)]
pub struct Figure {
    pub width_mm: f64,
    pub height_mm: f64,
    pub items: Vec<Item>,
}

impl Figure {
    /// An empty page of one colour.
    pub fn blank(width_mm: f64, height_mm: f64, paper: Rgba) -> Self {
        let corners = [(0.0, 0.0), (width_mm, 0.0), (width_mm, height_mm), (0.0, height_mm)];
        let points = corners.map(|(x, y)| Point::new(x, y)).to_vec();
        let page = Item::Path { points, closed: true, fill: Some(paper), stroke: None };
        Self { width_mm, height_mm, items: vec![page] }
    }

    /// Adds another figure's items, its upper left corner at `at`.
    pub fn place(&mut self, part: &Figure, at: Point) {
        self.items.extend(part.items.iter().map(|item| item.moved(at)));
    }
}

impl Item {
    /// The item moved by a vector.
    pub fn moved(&self, by: Point) -> Self {
        let shift = |p: &Point| Point::new(p.x + by.x, p.y + by.y);
        let mut item = self.clone();
        match &mut item {
            Self::Path { points, .. } => points.iter_mut().for_each(|p| *p = shift(p)),
            Self::Circle { centre, .. } => *centre = shift(centre),
            Self::Text { at, .. } => *at = shift(at),
            Self::Image { min, max, .. } => (*min, *max) = (shift(min), shift(max)),
            Self::Clip { min, max, items } => {
                (*min, *max) = (shift(min), shift(max));
                items.iter_mut().for_each(|inner| *inner = inner.moved(by));
            }
        }
        item
    }
}
