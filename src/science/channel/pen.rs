//! The pen: the cheapest way along a channel between two picks.

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::least_path::CostField;
use crate::science::axial::sources::{DERIVED, at};

use super::cost;
use super::detect::ChannelTone;

pub static METHOD: Method = Method {
    id: "channel.pen",
    name: "Minimal path by fast marching",
    question: "Which way does the channel take between two picks?",
    formula: "|∇T| = c, T(from) = 0; the way runs from `to` down ∇T; its cost is ∫ c ds",
    symbols: &[
        Symbol { symbol: "T", meaning: "least cost from the first pick", unit: "px" },
        Symbol { symbol: "c", meaning: "cost of a pixel", unit: "1" },
    ],
    assumptions: &[
        "The channel is the cheapest connection of its picks; where another is cheaper, a pick between settles it.",
    ],
    limits: &[
        "The course is chosen on squares of up to a few pixels, then found anew pixel by pixel near it: of two courses whose costs differ by a few percent the other may be taken.",
        "A way exists between any two picks; its cost against that of ways between random places tells whether there is a channel.",
        "Inside a bend wide against its radius the cheapest line runs inward of the middle.",
    ],
    sources: &[
        Source {
            key: "sethian1996",
            authors: "Sethian, J. A.",
            year: 1996,
            title: "A fast marching level set method for monotonically advancing fronts",
            published: "Proceedings of the National Academy of Sciences 93, 1591–1595",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "cohen1997",
            authors: "Cohen, L. D.; Kimmel, R.",
            year: 1997,
            title: "Global minimum for active contour models: a minimal path approach",
            published: "International Journal of Computer Vision 24, 57–78",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "yatziv2006",
            authors: "Yatziv, L.; Bartesaghi, A.; Sapiro, G.",
            year: 2006,
            title: "O(N) implementation of the fast marching algorithm",
            published: "Journal of Computational Physics 212, 393–399",
            locator: "",
            read: Read::Memory,
        },
        at(
            DERIVED,
            "choice of the course on squares whose cost is the least mean along short lines in four directions",
        ),
    ],
};

/// The ground of a picture on which channels of `tone`, between two widths in pixels, are cheap. Missing pixels
/// and those that are no numbers are impassable.
///
/// # Errors
/// [`Stopped`].
pub fn ground(
    image: &Grid<f32>,
    tone: ChannelTone,
    widths_px: [f64; 2],
    work: &Work,
) -> Result<CostField, Stopped> {
    let costs = cost::costs(image, tone, widths_px, work)?;
    Ok(CostField::new(image.width(), image.height(), &costs))
}
