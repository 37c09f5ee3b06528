//! Flow between the two neighbours that enclose the steepest facet.

use crate::ground::{Method, Read, Source, Symbol};

use super::cells::Cells;

/// The record of the steepest facet.
pub const METHOD: Method = Method {
    id: "drainage.d-infinity",
    name: "Steepest facet (D∞)",
    question: "Which way does the water of a cell go, to any angle?",
    formula: "s₁ = (e₀ − e₁)/d₁,  s₂ = (e₁ − e₂)/d₂,  r = atan2(s₂, s₁) held to 0 … α,  s = √(s₁² + s₂²), at the ends s₁ and (e₀ − e₂)/√(d₁² + d₂²);  greatest s of eight facets;  shares 1 − r/α and r/α",
    symbols: &[
        Symbol {
            symbol: "e₀, e₁, e₂",
            meaning: "elevation of the cell, of a side neighbour, of the corner beside it",
            unit: "m",
        },
        Symbol { symbol: "d₁, d₂", meaning: "ground distances 0–1 and 1–2", unit: "m" },
        Symbol {
            symbol: "α", meaning: "angle of the facet at the cell, 45° for square cells", unit: "deg"
        },
        Symbol {
            symbol: "r",
            meaning: "direction of descent from the side neighbour toward the corner",
            unit: "deg",
        },
    ],
    assumptions: &["the ground between three neighbouring centres is a plane"],
    limits: &[
        "equal descents go to the earlier facet, clockwise on the image from east",
        "directions are exact on planes, yet sharing by angle turns the mean way by atan(r/45°) − r, up to 4.07° at r = 23.5°",
        "where cells are sheared on the ground, s₁ and s₂ are taken in the facet's own oblique frame",
        "facets that reach missing ground count by their one known edge",
    ],
    sources: &[Source {
        key: "tarboton1997",
        authors: "Tarboton, D. G.",
        year: 1997,
        title: "A new method for the determination of flow directions and upslope areas in grid digital elevation models",
        published: "Water Resources Research 33, 309",
        locator: "",
        read: Read::Memory,
    }],
};

/// The eight facets around the cells of one row.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Facets([Facet; 8]);

/// A triangle of a cell, a side neighbour and a corner neighbour.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Facet {
    side: usize,
    corner: usize,
    /// Ground distances of both from the cell.
    to_side: f64,
    to_corner: f64,
    /// Angle between them.
    angle: f64,
    sin: f64,
    cos: f64,
}

/// The steepest way down.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Descent {
    /// Neighbours that share the flow, as indices into [`super::routing::STEPS`]: a side and a corner.
    pub side: usize,
    pub corner: usize,
    /// Share of the corner: the angle from the side over that of the facet.
    pub corner_share: f64,
    /// Fall over distance along the way.
    pub slope: f64,
}

impl Facets {
    pub fn of(cells: &Cells, row: usize) -> Self {
        let steps = cells.steps(row);
        let across = |row: usize| cells.across[row.min(cells.across.len() - 1)];
        Self(std::array::from_fn(|i| {
            let corner = i | 1;
            let side = if i % 2 == 0 { i } else { (i + 1) % 8 };
            // The third edge runs down beside the cell, or across in the row above or below.
            let third = match (side, corner) {
                (0 | 4, 1 | 3) => steps[2],
                (0 | 4, _) => steps[6],
                (2, _) => across(row + 1),
                _ => across(row.saturating_sub(1)),
            };
            let (to_side, to_corner) = (steps[side], steps[corner]);
            let cos =
                (to_side * to_side + to_corner * to_corner - third * third) / (2.0 * to_side * to_corner);
            let cos = cos.clamp(-0.999, 0.999);
            Facet { side, corner, to_side, to_corner, angle: cos.acos(), sin: (1.0 - cos * cos).sqrt(), cos }
        }))
    }

    /// The steepest descent from elevation `e0` among neighbours `around`, in the order of
    /// [`super::routing::STEPS`], missing ones at +∞. `None` where none is lower.
    pub fn steepest(&self, e0: f64, around: &[f64; 8]) -> Option<Descent> {
        let mut best: Option<(Descent, f64)> = None;
        for facet in &self.0 {
            // Slopes along both edges; toward missing ground there is none.
            let p = ((e0 - around[facet.side]) / facet.to_side).max(f64::NEG_INFINITY);
            let q = ((e0 - around[facet.corner]) / facet.to_corner).max(f64::NEG_INFINITY);
            // Down-slope along the side edge is p; square to it, toward the corner:
            let t = (q - p * facet.cos) / facet.sin;
            let (slope, ends) = if p > 0.0 && q > 0.0 && t > 0.0 && t * facet.cos < p * facet.sin {
                (p.hypot(t), None)
            } else if p >= q {
                (p, Some(0.0))
            } else {
                (q, Some(1.0))
            };
            if slope > best.map_or(0.0, |(b, _)| b.slope) {
                let Facet { side, corner, .. } = *facet;
                let corner_share = ends.unwrap_or_else(|| t.atan2(p) / facet.angle);
                best = Some((Descent { side, corner, corner_share, slope }, t));
            }
        }
        best.map(|(descent, _)| descent)
    }

    /// Shares of the eight neighbours; all 0 where none is lower.
    pub(super) fn shares(&self, e0: f64, around: &[f64; 8]) -> [f64; 8] {
        let mut shares = [0.0; 8];
        if let Some(Descent { side, corner, corner_share, .. }) = self.steepest(e0, around) {
            shares[side] = 1.0 - corner_share;
            shares[corner] = corner_share;
        }
        shares
    }
}
