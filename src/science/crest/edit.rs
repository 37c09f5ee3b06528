//! The user's word on traced crests: lines taken out, let stand, cut, joined, lengthened, and drawn.

mod assemble;
mod clip;
mod contacts;
mod near;
mod pieces;

pub use clip::clip;

use serde::{Deserialize, Serialize};

use crate::ground::{Grid, Method, Point, Polygon, Polyline, Read, Source, Stopped, Symbol, Work};

use self::assemble::Line;
use self::near::Near;
use self::pieces::{Laid, Piece, Tip};
use super::{CrestLine, CrestOrigin, Crests, End, Junction};

/// The record of editing.
pub static METHOD: Method = Method {
    id: "crest.editing",
    name: "Crest lines edited by hand",
    question: "What do the crests come to once the user has had a word?",
    formula: "cuts, then lines taken out, then strokes: tips meet within r = max(4 px, 3σ), the closest pair first, each once;  a free end within t = max(2 px, 1.5σ) of another line runs onto it where either was laid by hand;  confidence = Σ c ℓ/ΣL, by hand c = 0",
    symbols: &[
        Symbol { symbol: "σ", meaning: "scale of the derivatives", unit: "px" },
        Symbol { symbol: "c, ℓ", meaning: "confidence and length of a traced part", unit: "1, px" },
        Symbol { symbol: "L", meaning: "length of the line", unit: "px" },
    ],
    assumptions: &["a line traced anew passes within r of where the user pointed at it"],
    limits: &[
        "an edit that finds no line any more is named, not applied; what was drawn stays as drawn",
        "where lines cross, the one laid by hand goes on and the other is two that end on it",
        "joining and lengthening look for ends, so a stroke to the middle of a line makes a fork",
    ],
    sources: &[Source {
        key: "ventifact-crest-editing",
        authors: "this program",
        year: 2026,
        title: "Greedy matching of line ends, independent of the order of edits",
        published: "definitions",
        locator: "",
        read: Read::Derived,
    }],
};

/// What a stroke does.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum StrokeKind {
    /// A crest of its own.
    Crest,
    /// From the end of one line to the end of another: the three become one.
    Join,
    /// From the end of a line outward: the two become one.
    Extend,
    /// A crest out of a file.
    Import,
}

/// A line laid by hand or out of a file, in pixels of the traced image.
#[derive(Clone, Debug, PartialEq)]
pub struct Stroke {
    pub kind: StrokeKind,
    pub line: Polyline,
}

/// What the user says of traced lines, in pixels of the traced image. The order within a list does not matter.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct CrestEdits {
    /// One point on each traced line to take out.
    pub rejected: Vec<Point>,
    /// One point on each line that was looked at and stands.
    pub accepted: Vec<Point>,
    /// Places where a line is cut in two.
    pub cuts: Vec<Point>,
    pub strokes: Vec<Stroke>,
}

/// The ground edits are made on.
#[derive(Clone, Copy, Debug)]
pub struct EditGround<'a> {
    /// The traced image: its missing pixels and its border cut lines.
    pub image: &'a Grid<f32>,
    pub outline: &'a Polygon,
    /// Ground that is no bedform.
    pub excluded: &'a [Polygon],
}

/// Edited crests.
#[derive(Clone, Debug, PartialEq)]
pub struct Edited {
    pub crests: Crests,
    /// Points of edits that found no line, each as it was given; of strokes the end that found none.
    pub lost: Vec<Point>,
}

impl CrestEdits {
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

/// Ends meet, and points find their line, within so many scales, but at least so many pixels.
const REACH: [f64; 2] = [3.0, 4.0];
/// Lines touch within so many scales, but at least so many pixels.
const TOUCH: [f64; 2] = [1.5, 2.0];

/// Applies edits. Lines no edit touches stay as they are.
///
/// # Errors
/// [`Stopped`].
pub fn edit(
    crests: Crests,
    edits: &CrestEdits,
    ground: EditGround<'_>,
    work: &Work,
) -> Result<Edited, Stopped> {
    if edits.is_empty() {
        return Ok(Edited { crests, lost: Vec::new() });
    }
    work.phase("edits", 0);
    let sigma = crests.scales_px.first().copied().filter(|s| s.is_finite()).unwrap_or(2.0);
    let reach = (REACH[0] * sigma).max(REACH[1]);
    let touch = (TOUCH[0] * sigma).max(TOUCH[1]);
    let mut lost = Vec::new();
    let mut pieces = pieces::traced(&crests);
    let later = pieces::cut(&mut pieces, edits, reach, &mut lost);
    work.advance(0)?;
    pieces::reject(&mut pieces, edits, reach, &mut lost);
    let laid = pieces::lay(&mut pieces, edits, ground.outline, crests.model, &mut lost);
    work.advance(0)?;
    let matched = assemble::meet(&mut pieces, &laid, reach, touch, work)?;
    let unmet = |piece: usize, end: usize| pieces[piece].seeks[end] && matched.of(piece)[end].is_none();
    let mut lines = assemble::lines(&pieces, &matched);
    let repeated = repeated(&pieces, &lines, &laid, &unmet, touch);
    lines.retain(|line| line.points.len() >= 2 && !line.parts.iter().all(|part| repeated.contains(part)));
    cut_joined(&mut lines, &later, reach, &mut lost);
    contacts::run_onto(&mut lines, touch, work)?;
    for stroke in laid.iter().filter(|stroke| !stroke.pieces.iter().all(|piece| repeated.contains(piece))) {
        lost.extend(strays(stroke, &lines, &pieces, &unmet));
    }
    let lines = contacts::part_at_crossings(lines, touch, work)?;
    let mut edited = finished(crests, lines, ground, sigma, work)?;
    accept(&mut edited, edits, reach, &mut lost);
    Ok(Edited { crests: edited, lost })
}

/// Pieces of joining and lengthening strokes that met no end and run along a line that is there already: the same
/// thing done twice. The shortest are looked at first, so that of two alike the longer stays.
fn repeated(
    pieces: &[Piece],
    lines: &[Line],
    laid: &[Laid],
    unmet: &dyn Fn(usize, usize) -> bool,
    touch: f64,
) -> Vec<usize> {
    let near = Near::new(lines.iter().map(|line| line.points.as_slice()), touch);
    let alone = |piece: &usize| unmet(*piece, 0) && unmet(*piece, 1);
    let strokes = laid.iter().filter(|stroke| matches!(stroke.kind, StrokeKind::Join | StrokeKind::Extend));
    let mut alone: Vec<usize> =
        strokes.flat_map(|stroke| stroke.pieces.iter().copied()).filter(alone).collect();
    let key = |piece: &usize| {
        let p = pieces[*piece].points[0];
        [pieces[*piece].length(), p.x, p.y]
    };
    alone.sort_by(|a, b| {
        let (a, b) = (key(a), key(b));
        a[0].total_cmp(&b[0]).then(a[1].total_cmp(&b[1])).then(a[2].total_cmp(&b[2]))
    });
    let mut gone: Vec<usize> = Vec::new();
    for piece in alone {
        let others =
            |line: usize, _| !lines[line].parts.iter().all(|part| *part == piece || gone.contains(part));
        if pieces[piece].points.iter().all(|p| near.nearest(*p, touch, others).is_some()) {
            gone.push(piece);
        }
    }
    gone
}

/// Ends of a stroke that should have met another and did not: neither an end nor the side of a line.
fn strays(
    stroke: &Laid,
    lines: &[Line],
    pieces: &[Piece],
    unmet: &dyn Fn(usize, usize) -> bool,
) -> Vec<Point> {
    let mut stray = Vec::new();
    let mut met = false;
    for piece in &stroke.pieces {
        for end in (0..2).filter(|end| pieces[*piece].seeks[*end]) {
            let ends = lines.iter().filter(|line| line.parts.contains(piece)).flat_map(|line| line.tips);
            let at = stroke.ends[end];
            // A single stroke's ends that ran onto a line are no free ends any more.
            let onto = ends.filter(|tip| tip.end == End::Junction).any(|tip| {
                tip.onto.is_some_and(|onto| onto.at.distance(at) < onto.at.distance(stroke.ends[1 - end]))
            });
            if unmet(*piece, end) && !onto {
                stray.push(at);
            } else {
                met = true;
            }
        }
    }
    match stroke.kind {
        // One end is enough.
        StrokeKind::Extend if met => Vec::new(),
        StrokeKind::Extend => stray.into_iter().take(1).collect(),
        _ => stray,
    }
}

/// Cuts that lie on strokes, made once these are part of a line.
fn cut_joined(lines: &mut Vec<Line>, cuts: &[Point], reach: f64, lost: &mut Vec<Point>) {
    let mut places: Vec<Vec<f64>> = vec![Vec::new(); lines.len()];
    {
        let near = Near::new(lines.iter().map(|line| line.points.as_slice()), reach);
        for at in cuts {
            match near.nearest(*at, reach, |_, _| true) {
                Some(place) => places[place.line].push(near.along(place.line, place.segment, place.at)),
                None => lost.push(*at),
            }
        }
    }
    let free = Tip { end: End::Free, onto: None, open: false };
    *lines = std::mem::take(lines)
        .into_iter()
        .zip(places)
        .flat_map(|(line, mut places)| {
            let whole = line.length();
            places.sort_by(f64::total_cmp);
            places.dedup_by(|b, a| *b - *a < 0.5);
            places.retain(|s| *s >= 0.5 && *s <= whole - 0.5);
            let places: Vec<(f64, Tip)> = places.into_iter().map(|s| (s, free)).collect();
            contacts::parted(line, &places)
        })
        .collect();
}

/// Lines with their ends told, junctions gathered anew.
fn finished(
    crests: Crests,
    mut lines: Vec<Line>,
    ground: EditGround<'_>,
    sigma: f64,
    work: &Work,
) -> Result<Crests, Stopped> {
    // Points led onto a place may have come to lie on one another.
    lines.retain(|line| line.length() > 0.0);
    let mut of_piece: Vec<Vec<usize>> = Vec::new();
    for (n, line) in lines.iter().enumerate() {
        for part in &line.parts {
            if of_piece.len() <= *part {
                of_piece.resize(*part + 1, Vec::new());
            }
            of_piece[*part].push(n);
        }
    }
    let mut junctions: Vec<Junction> = Vec::new();
    let mut out = Vec::with_capacity(lines.len());
    for (n, line) in lines.iter().enumerate() {
        work.advance(0)?;
        let mut ends = [End::Closed; 2];
        for (end, tip) in line.tips.iter().enumerate().filter(|_| !line.closed) {
            let at = if end == 0 { line.points[0] } else { line.points[line.points.len() - 1] };
            let through = tip.onto.and_then(|onto| {
                let held = of_piece.get(onto.piece)?;
                let far = |line: &usize| pieces::distance(&lines[*line].points, onto.at);
                let through = match held.as_slice() {
                    [one] => Some(*one),
                    many => many.iter().copied().min_by(|a, b| far(a).total_cmp(&far(b))),
                };
                Some((onto.at, through?))
            });
            ends[end] = match through {
                Some((place, through)) => {
                    let near = junctions
                        .iter_mut()
                        .find(|j| j.through == through && j.at.distance(place) <= 2.0 * sigma);
                    match near {
                        Some(junction) => junction.branches.push((n, end)),
                        None => junctions.push(Junction { at: place, through, branches: vec![(n, end)] }),
                    }
                    End::Junction
                }
                None if tip.open => ground.end_at(at, sigma),
                // What it ran onto is gone.
                None if matches!(tip.end, End::Junction | End::Closed) => End::Free,
                None => tip.end,
            };
        }
        out.push(finished_line(line, ends));
    }
    Ok(Crests { lines: out, junctions, ..crests })
}

fn finished_line(line: &Line, ends: [End; 2]) -> CrestLine {
    let (length, by_hand_px) = (line.length(), line.by_hand());
    let origin = match (line.traced, line.drawn, line.imported) {
        (true, false, false) if !line.cut && by_hand_px == 0.0 => CrestOrigin::Traced,
        (true, ..) => CrestOrigin::Edited,
        (false, false, true) => CrestOrigin::Imported,
        (false, ..) => CrestOrigin::Drawn,
    };
    CrestLine {
        confidence: if length > 0.0 { (line.evidence / length).clamp(0.0, 1.0) } else { 0.0 },
        line: Polyline(line.points.clone()),
        ends,
        bridged_px: line.bridged_px,
        model: line.model,
        origin,
        accepted: origin == CrestOrigin::Drawn,
        by_hand_px,
    }
}

impl EditGround<'_> {
    /// What an end laid by hand is where it meets no line.
    fn end_at(&self, p: Point, sigma: f64) -> End {
        const CLOSE: f64 = 2.0;
        let (width, height) = (self.image.width() as f64, self.image.height() as f64);
        let missing = |x: f64, y: f64| {
            let inside = x >= 0.0 && y >= 0.0 && x < width && y < height;
            inside && self.image.get(x as usize, y as usize).is_none_or(f32::is_nan)
        };
        let around = [-CLOSE, 0.0, CLOSE];
        if around.iter().any(|dx| around.iter().any(|dy| missing(p.x + dx, p.y + dy)))
            || self.excluded.iter().any(|mask| mask.contains(p) || mask.distance_to_edge(p) <= CLOSE)
        {
            End::Gap
        } else if p.x.min(p.y).min(width - p.x).min(height - p.y) <= CLOSE
            || self.outline.distance_to_edge(p) <= sigma
        {
            End::Border
        } else {
            End::Free
        }
    }
}

/// Lines the user looked at and lets stand.
fn accept(crests: &mut Crests, edits: &CrestEdits, reach: f64, lost: &mut Vec<Point>) {
    let near = Near::new(crests.lines.iter().map(|line| line.line.0.as_slice()), reach);
    let found: Vec<Option<usize>> = edits
        .accepted
        .iter()
        .map(|at| near.nearest(*at, reach, |_, _| true).map(|place| place.line))
        .collect();
    for (at, found) in edits.accepted.iter().zip(found) {
        match found {
            Some(line) => crests.lines[line].accepted = true,
            None => lost.push(*at),
        }
    }
}
