//! Where crests end and fork: the defects of a pattern.

use crate::ground::{Caution, Method, Read, Source, Symbol};

use super::{CrestLine, End, Junction};

/// The record of defect density.
pub static METHOD: Method = Method {
    id: "crest.defects",
    name: "Defect density",
    question: "How mature is the pattern?",
    formula: "ρ = N/ΣL or N/(2ΣL);  dimensionless N λ/ΣL;  N = N_ends, or N_ends + N_Y",
    symbols: &[
        Symbol { symbol: "N_ends", meaning: "free ends of crests inside the patch", unit: "1" },
        Symbol { symbol: "N_Y", meaning: "junctions of three arms", unit: "1" },
        Symbol { symbol: "ΣL", meaning: "length of all crests", unit: "m" },
        Symbol { symbol: "λ", meaning: "spacing", unit: "m" },
    ],
    assumptions: &["ends on the border of the patch or on missing ground are no defects"],
    limits: &[
        "published values count ends or pairs of ends, with or without junctions: compare like with like",
        "a crest that the tracing interrupts adds two ends",
    ],
    sources: &[
        Source {
            key: "werner1999",
            authors: "Werner, B. T.; Kocurek, G.",
            year: 1999,
            title: "Bedform spacing from defect dynamics",
            published: "Geology 27, 727",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ewing2006",
            authors: "Ewing, R. C.; Kocurek, G.; Lake, L. W.",
            year: 2006,
            title: "Pattern analysis of dune-field parameters",
            published: "Earth Surface Processes and Landforms 31, 1176",
            locator: "",
            read: Read::Abstract,
        },
    ],
};

/// Defects and their densities; lengths in the unit of `total_length`.
#[derive(Clone, Debug, PartialEq)]
pub struct Defects {
    /// Free ends.
    pub ends: usize,
    /// Junctions of three arms.
    pub forks: usize,
    /// Junctions of four and more arms; in none of the densities.
    pub crossings: usize,
    /// Ends at the border or at a gap: not counted.
    pub cut_ends: usize,
    pub total_length: f64,
    /// N_ends/ΣL and N_ends/(2ΣL), the two published conventions; `None` without crests.
    pub ends_per_length: Option<[f64; 2]>,
    /// The same with forks counted as ends.
    pub with_forks_per_length: Option<[f64; 2]>,
    /// N_ends λ/ΣL; `None` without crests or spacing.
    pub dimensionless: Option<f64>,
    pub cautions: Vec<Caution>,
}

/// Counts the defects of lines with a total length and a spacing in one unit.
pub fn defects(
    lines: &[CrestLine],
    junctions: &[Junction],
    total_length: f64,
    spacing: Option<f64>,
) -> Defects {
    let count =
        |wanted: &dyn Fn(End) -> bool| lines.iter().flat_map(|l| l.ends).filter(|end| wanted(*end)).count();
    let ends = count(&|end| end == End::Free);
    let cut_ends = count(&|end| matches!(end, End::Border | End::Gap));
    let forks = junctions.iter().filter(|j| j.branches.len() == 1).count();
    let crossings = junctions.iter().filter(|j| j.branches.len() > 1).count();
    let both =
        |n: usize| (total_length > 0.0).then(|| [n as f64 / total_length, n as f64 / (2.0 * total_length)]);
    let bridged = lines.iter().filter(|l| l.bridged_px > 0.25 * l.line.length()).count();
    let mut cautions = Vec::new();
    if bridged > 0 {
        cautions.push(Caution::new(
            "bridged-crests",
            format!("{bridged} of {} crests are bridged over more than a quarter of their length: ends may be missing.", lines.len()),
        ));
    }
    Defects {
        ends,
        forks,
        crossings,
        cut_ends,
        total_length,
        ends_per_length: both(ends),
        with_forks_per_length: both(ends + forks),
        dimensionless: spacing
            .filter(|s| *s > 0.0 && total_length > 0.0)
            .map(|s| ends as f64 * s / total_length),
        cautions,
    }
}
