//! What lines are put together from: traced lines, cut where the user says, and strokes.

use crate::ground::{Point, Polygon, Polyline};

use super::clip::{clip, cut_flagged};
use super::near::Near;
use super::{CrestEdits, StrokeKind};
use crate::science::crest::{CrestModel, Crests, End};

/// Where an end has run onto a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Onto {
    pub at: Point,
    /// The piece it runs onto.
    pub piece: usize,
}

/// An end of a piece or a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Tip {
    pub end: End,
    pub onto: Option<Onto>,
    /// Whether what the end is must be told anew: it was laid by hand.
    pub open: bool,
}

/// A part of a line.
#[derive(Clone, Debug)]
pub(super) struct Piece {
    pub points: Vec<Point>,
    pub tips: [Tip; 2],
    /// How it was laid by hand; `None` for a traced one.
    pub stroke: Option<StrokeKind>,
    /// Which of its tips look for an end to go on from.
    pub seeks: [bool; 2],
    pub confidence: f64,
    pub bridged_px: f64,
    pub model: CrestModel,
    /// Whether the user cut it.
    pub cut: bool,
    pub closed: bool,
    /// Whether it is still there.
    pub kept: bool,
}

impl Piece {
    pub fn length(&self) -> f64 {
        self.points.windows(2).map(|w| w[0].distance(w[1])).sum()
    }
}

/// The traced lines as pieces, each with where its ends run onto others.
pub(super) fn traced(crests: &Crests) -> Vec<Piece> {
    let mut pieces: Vec<Piece> = crests
        .lines
        .iter()
        .map(|line| Piece {
            points: line.line.0.clone(),
            tips: line.ends.map(|end| Tip { end, onto: None, open: false }),
            stroke: None,
            seeks: [false; 2],
            confidence: line.confidence,
            bridged_px: line.bridged_px,
            model: line.model,
            cut: false,
            closed: line.ends[0] == End::Closed,
            kept: line.line.0.len() >= 2,
        })
        .collect();
    for junction in &crests.junctions {
        for (line, end) in &junction.branches {
            if let Some(tip) = pieces.get_mut(*line).and_then(|piece| piece.tips.get_mut(*end)) {
                tip.onto = Some(Onto { at: junction.at, piece: junction.through });
            }
        }
    }
    pieces
}

/// Cuts nearer than so many pixels to an end or to one another are one.
const SAME_CUT: f64 = 0.5;

/// Cuts traced pieces. Cuts that lie nearer to a stroke are handed back for later; those that find no line are
/// lost.
pub(super) fn cut(
    pieces: &mut Vec<Piece>,
    edits: &CrestEdits,
    reach: f64,
    lost: &mut Vec<Point>,
) -> Vec<Point> {
    let mut later = Vec::new();
    let mut places: Vec<Vec<f64>> = vec![Vec::new(); pieces.len()];
    {
        let near = Near::new(pieces.iter().map(|piece| piece.points.as_slice()), reach);
        let strokes = Near::new(edits.strokes.iter().map(|stroke| finite(&stroke.line)), reach);
        for at in &edits.cuts {
            let on_stroke = strokes.nearest(*at, reach, |_, _| true);
            match (near.nearest(*at, reach, |line, _| pieces[line].kept), on_stroke) {
                (Some(line), stroke) if stroke.is_none_or(|s| line.distance <= s.distance + SAME_CUT) => {
                    places[line.line].push(near.along(line.line, line.segment, line.at));
                }
                (_, Some(_)) => later.push(*at),
                (Some(_), None) | (None, None) => lost.push(*at),
            }
        }
    }
    let first_new = pieces.len();
    // Which pieces a cut line has become.
    let mut into: Vec<Vec<usize>> = (0..first_new).map(|n| vec![n]).collect();
    for (n, places) in places.into_iter().enumerate().filter(|(_, places)| !places.is_empty()) {
        let parts = cut_piece(&pieces[n], places);
        let mut parts = parts.into_iter();
        if let Some(first) = parts.next() {
            pieces[n] = first;
        }
        for part in parts {
            into[n].push(pieces.len());
            pieces.push(part);
        }
    }
    for n in 0..pieces.len() {
        for end in 0..2 {
            let Some(onto) = pieces[n].tips[end].onto else { continue };
            let of = into.get(onto.piece).map_or(&[][..], Vec::as_slice);
            let far = |p: &usize| distance(&pieces[*p].points, onto.at);
            let piece = of.iter().copied().min_by(|a, b| far(a).total_cmp(&far(b)));
            pieces[n].tips[end].onto = piece.map(|piece| Onto { piece, ..onto });
        }
    }
    later
}

/// The line's points when all of them are numbers; none otherwise.
fn finite(line: &Polyline) -> &[Point] {
    let sound = line.0.iter().all(|p| p.x.is_finite() && p.y.is_finite());
    if sound { &line.0 } else { &[] }
}

/// Distance of a point from a line, infinite for none.
pub(super) fn distance(points: &[Point], p: Point) -> f64 {
    points
        .windows(2)
        .filter_map(|w| Polyline(w.to_vec()).nearest(p))
        .map(|foot| foot.distance)
        .fold(f64::INFINITY, f64::min)
}

/// A piece cut at lengths along it; a ring opens at its first cut.
fn cut_piece(piece: &Piece, mut at: Vec<f64>) -> Vec<Piece> {
    let whole = piece.length();
    at.sort_by(f64::total_cmp);
    at.dedup_by(|b, a| *b - *a < SAME_CUT);
    let inner: Vec<f64> = at.iter().copied().filter(|s| *s >= SAME_CUT && *s <= whole - SAME_CUT).collect();
    // A ring cut at its seam opens there.
    let at_seam = inner.len() < at.len();
    if inner.is_empty() && !(piece.closed && at_seam) {
        return vec![piece.clone()];
    }
    let flags = vec![false; piece.points.len() - 1];
    let mut parts: Vec<Vec<Point>> =
        cut_flagged(&piece.points, &flags, &inner).into_iter().map(|(points, _)| points).collect();
    if piece.closed
        && !at_seam
        && parts.len() > 1
        && let Some(mut last) = parts.pop()
    {
        last.extend(parts[0].drain(..).skip(1));
        parts[0] = last;
    }
    let free = Tip { end: End::Free, onto: None, open: false };
    let count = parts.len();
    parts
        .into_iter()
        .enumerate()
        .map(|(i, points)| {
            let mut part = Piece { points, cut: true, closed: false, ..piece.clone() };
            part.bridged_px = if whole > 0.0 { piece.bridged_px * part.length() / whole } else { 0.0 };
            if i > 0 || piece.closed {
                part.tips[0] = free;
            }
            if i + 1 < count || piece.closed {
                part.tips[1] = free;
            }
            part
        })
        .collect()
}

/// Takes rejected pieces out; what ran onto them has a free end.
pub(super) fn reject(pieces: &mut [Piece], edits: &CrestEdits, reach: f64, lost: &mut Vec<Point>) {
    let near = Near::new(pieces.iter().map(|piece| piece.points.as_slice()), reach);
    let found: Vec<Option<usize>> = edits
        .rejected
        .iter()
        .map(|at| near.nearest(*at, reach, |line, _| pieces[line].kept).map(|place| place.line))
        .collect();
    for (at, found) in edits.rejected.iter().zip(found) {
        match found {
            Some(line) => pieces[line].kept = false,
            None => lost.push(*at),
        }
    }
    let kept: Vec<bool> = pieces.iter().map(|piece| piece.kept).collect();
    for tip in pieces.iter_mut().flat_map(|piece| &mut piece.tips) {
        if tip.onto.is_some_and(|onto| !kept.get(onto.piece).copied().unwrap_or(false)) {
            (tip.onto, tip.end) = (None, End::Free);
        }
    }
}

/// A stroke that is looked after: its pieces, and where it begins and ends.
pub(super) struct Laid {
    pub kind: StrokeKind,
    pub pieces: Vec<usize>,
    pub ends: [Point; 2],
}

/// Adds the strokes, each clipped to the outline and once however often it was laid.
pub(super) fn lay(
    pieces: &mut Vec<Piece>,
    edits: &CrestEdits,
    outline: &Polygon,
    model: CrestModel,
    lost: &mut Vec<Point>,
) -> Vec<Laid> {
    let mut laid: Vec<Laid> = Vec::new();
    for (n, stroke) in edits.strokes.iter().enumerate() {
        let again = edits.strokes[..n].iter().any(|other| {
            let line = &stroke.line.0;
            let same = line.iter().eq(other.line.0.iter()) || line.iter().eq(other.line.0.iter().rev());
            stroke.kind == other.kind && same
        });
        if again {
            continue;
        }
        let (Some(first), Some(last)) = (stroke.line.0.first(), stroke.line.0.last()) else { continue };
        let mut own = Vec::new();
        for (mut points, cut) in clip(&stroke.line.0, outline) {
            points.dedup();
            if points.len() < 2 && stroke.kind != StrokeKind::Join {
                continue;
            }
            let tip =
                |cut: bool| Tip { end: if cut { End::Border } else { End::Free }, onto: None, open: !cut };
            let seeks = match stroke.kind {
                StrokeKind::Join | StrokeKind::Extend => cut.map(|cut| !cut),
                StrokeKind::Crest | StrokeKind::Import => [false; 2],
            };
            own.push(pieces.len());
            pieces.push(Piece {
                points,
                tips: cut.map(tip),
                stroke: Some(stroke.kind),
                seeks,
                confidence: 0.0,
                bridged_px: 0.0,
                model,
                cut: false,
                closed: false,
                kept: true,
            });
        }
        if own.is_empty() {
            lost.push(*first);
        } else {
            laid.push(Laid { kind: stroke.kind, pieces: own, ends: [*first, *last] });
        }
    }
    laid
}
