//! Pieces put together end to end: which tips meet, and the lines they make.

use crate::ground::{Point, Stopped, Work};

use super::StrokeKind;
use super::clip::without_lead;
use super::pieces::{Laid, Piece, Tip};
use crate::science::crest::CrestModel;

/// Cosine of the greatest turn at which drawn lines that touch end to end are one.
const SMOOTH: f64 = 0.5;

/// An end of a piece: its number, and 0 for the first point, 1 for the last.
type End = (usize, usize);

/// Pieces end to end.
#[derive(Clone, Debug)]
pub(super) struct Line {
    pub points: Vec<Point>,
    /// Of each segment, whether it was laid by hand.
    pub hand: Vec<bool>,
    pub tips: [Tip; 2],
    /// The pieces it is made of.
    pub parts: Vec<usize>,
    pub closed: bool,
    /// Σ confidence × length of the traced pieces, and their bridged length.
    pub evidence: f64,
    pub bridged_px: f64,
    pub model: CrestModel,
    /// Whether traced, drawn and imported pieces take part, and whether the user cut one.
    pub traced: bool,
    pub drawn: bool,
    pub imported: bool,
    pub cut: bool,
}

impl Line {
    pub fn length(&self) -> f64 {
        self.points.windows(2).map(|w| w[0].distance(w[1])).sum()
    }

    /// Length laid by hand.
    pub fn by_hand(&self) -> f64 {
        let segments = self.points.windows(2).zip(&self.hand);
        segments.filter(|(_, hand)| **hand).map(|(w, _)| w[0].distance(w[1])).sum()
    }
}

/// Tips that meet, for each piece and end the other one.
pub(super) struct Matched(Vec<[Option<End>; 2]>);

impl Matched {
    fn is_taken(&self, (piece, end): End) -> bool {
        self.0[piece][end].is_some()
    }

    pub fn of(&self, piece: usize) -> [Option<End>; 2] {
        self.0[piece]
    }

    fn marry(&mut self, a: End, b: End) {
        self.0[a.0][a.1] = Some(b);
        self.0[b.0][b.1] = Some(a);
    }
}

fn place(pieces: &[Piece], (piece, end): End) -> Point {
    let points = &pieces[piece].points;
    if end == 0 { points[0] } else { points[points.len() - 1] }
}

/// Unit vector out of a piece at its end, over about `back` pixels; none for a point.
fn outward(pieces: &[Piece], tip: End, back: f64) -> Option<[f64; 2]> {
    let at = place(pieces, tip);
    let points = &pieces[tip.0].points;
    let far = |p: &&Point| p.distance(at) >= back;
    let inner = match tip.1 {
        0 => points.iter().find(far).or(points.last()),
        _ => points.iter().rev().find(far).or(points.first()),
    }?;
    let d = at.distance(*inner);
    (d > 0.0).then(|| [(at.x - inner.x) / d, (at.y - inner.y) / d])
}

/// A way a stroke may be joined on: which of its ends meet which others, and how far off these are together.
struct Offer {
    apart: f64,
    pairs: Vec<(End, End)>,
}

/// Finds which tips meet: those of joining and lengthening strokes with ends within `reach`, each end once. Strokes that
/// find both their ends come first, then those that find one; among these the closest, so that the order in which
/// strokes were laid does not matter. Then ends of drawn and imported lines that touch (within `touch`) and go on
/// smoothly.
pub(super) fn meet(
    pieces: &mut [Piece],
    laid: &[Laid],
    reach: f64,
    touch: f64,
    work: &Work,
) -> Result<Matched, Stopped> {
    let mut matched = Matched(vec![[None; 2]; pieces.len()]);
    let tips = Tips::of(pieces, reach);
    let (mut whole, mut half): (Vec<Offer>, Vec<Offer>) = (Vec::new(), Vec::new());
    for stroke in laid {
        work.advance(0)?;
        for piece in stroke.pieces.iter().copied() {
            let of_end = |end: usize| -> Vec<(f64, End)> {
                let at = place(pieces, (piece, end));
                let others = tips.near(at).filter(|tip| tip.0 != piece && pieces[piece].seeks[end]);
                let others = others.map(|tip| (place(pieces, tip).distance(at), tip));
                others.filter(|(d, _)| *d <= reach).collect()
            };
            let [first, last] = [of_end(0), of_end(1)];
            for (d, tip) in &first {
                half.push(Offer { apart: *d, pairs: vec![((piece, 0), *tip)] });
                // A stroke goes on from both ends of one line only where that makes a ring worth the name.
                let ends = last.iter().filter(|(_, other)| {
                    other != tip && (other.0 != tip.0 || pieces[tip.0].length() >= 4.0 * reach)
                });
                whole.extend(ends.filter(|_| stroke.kind == StrokeKind::Join).map(|(e, other)| Offer {
                    apart: d + e,
                    pairs: vec![((piece, 0), *tip), ((piece, 1), *other)],
                }));
            }
            half.extend(last.iter().map(|(d, tip)| Offer { apart: *d, pairs: vec![((piece, 1), *tip)] }));
        }
    }
    let mut married: Vec<(End, End)> = Vec::new();
    for mut offers in [whole, half] {
        sort(pieces, &mut offers);
        for offer in offers {
            let taken = |(own, other): &(End, End)| matched.is_taken(*own) || matched.is_taken(*other);
            // A joining stroke that did not find both its ends may find them singly, a lengthening one but once.
            let content = offer.pairs.iter().any(|(own, other)| {
                let met = matched.of(own.0);
                let extends = pieces[own.0].stroke == Some(StrokeKind::Extend);
                met.iter().flatten().any(|met| extends || met.0 == other.0)
            });
            if !content && !offer.pairs.iter().any(taken) {
                offer.pairs.iter().for_each(|(own, other)| matched.marry(*own, *other));
                married.extend(offer.pairs);
            }
        }
    }
    for ((piece, end), other) in married {
        let target = place(pieces, other);
        let points = &mut pieces[piece].points;
        if end == 1 {
            points.reverse();
        }
        without_lead(points, target, 2.0 * reach);
        if end == 1 {
            points.reverse();
        }
    }
    touching(pieces, &mut matched, touch, work)?;
    Ok(matched)
}

/// The closest first; equally close ones by their places.
fn sort(pieces: &[Piece], offers: &mut [Offer]) {
    let key = |offer: &Offer| -> Vec<f64> {
        let ends = offer.pairs.iter().flat_map(|(own, other)| [*own, *other]);
        let places = ends.map(|tip| place(pieces, tip)).flat_map(|p| [p.x, p.y]);
        std::iter::once(offer.apart).chain(places).collect()
    };
    offers.sort_by(|a, b| {
        let by_place = key(a).iter().zip(&key(b)).map(|(a, b)| a.total_cmp(b)).find(|order| order.is_ne());
        by_place.unwrap_or_else(|| a.pairs.cmp(&b.pairs))
    });
}

/// Ends of drawn and imported lines that touch another end and go on smoothly are one line with it.
fn touching(pieces: &[Piece], matched: &mut Matched, touch: f64, work: &Work) -> Result<(), Stopped> {
    let tips = Tips::of(pieces, touch);
    let own = |kind| matches!(kind, Some(StrokeKind::Crest | StrokeKind::Import));
    let mut pairs: Vec<(f64, f64, End, End)> = Vec::new();
    for (piece, _) in pieces.iter().enumerate().filter(|(_, p)| p.kept && own(p.stroke)) {
        work.advance(0)?;
        for tip in [(piece, 0), (piece, 1)].into_iter().filter(|tip| pieces[piece].tips[tip.1].open) {
            let at = place(pieces, tip);
            for other in tips.near(at).filter(|other| other.0 != piece) {
                let d = place(pieces, other).distance(at);
                let (Some(a), Some(b)) =
                    (outward(pieces, tip, 2.0 * touch), outward(pieces, other, 2.0 * touch))
                else {
                    continue;
                };
                let turn = -(a[0] * b[0] + a[1] * b[1]);
                if d <= touch && turn > SMOOTH && !(matched.is_taken(tip) || matched.is_taken(other)) {
                    pairs.push((d.max(0.5), 1.0 - turn, tip, other));
                }
            }
        }
    }
    pairs.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1)).then((a.2, a.3).cmp(&(b.2, b.3))));
    for (_, _, a, b) in pairs {
        if !(matched.is_taken(a) || matched.is_taken(b)) {
            matched.marry(a, b);
        }
    }
    Ok(())
}

/// Ends of the kept, open pieces by square cells.
struct Tips {
    cells: std::collections::HashMap<(i64, i64), Vec<End>>,
    side: f64,
}

impl Tips {
    fn of(pieces: &[Piece], reach: f64) -> Self {
        let side = reach.max(1.0);
        let mut tips = Self { cells: std::collections::HashMap::new(), side };
        for (n, piece) in pieces.iter().enumerate().filter(|(_, p)| p.kept && !p.closed) {
            // What was cut off at the outline goes on outside.
            for end in (0..2).filter(|end| piece.stroke.is_none() || piece.tips[*end].open) {
                let cell = tips.cell(place(pieces, (n, end)));
                tips.cells.entry(cell).or_default().push((n, end));
            }
        }
        tips
    }

    fn cell(&self, p: Point) -> (i64, i64) {
        ((p.x / self.side).floor() as i64, (p.y / self.side).floor() as i64)
    }

    /// Those in the cell of a point and those about it, which hold all within reach.
    fn near(&self, p: Point) -> impl Iterator<Item = End> + '_ {
        let (x, y) = self.cell(p);
        (-1..=1)
            .flat_map(move |dx| (-1..=1).map(move |dy| (x + dx, y + dy)))
            .filter_map(|cell| self.cells.get(&cell))
            .flatten()
            .copied()
    }
}

/// The lines that pieces make where their tips meet. A line runs as its longest traced piece does.
pub(super) fn lines(pieces: &[Piece], matched: &Matched) -> Vec<Line> {
    let mut seen = vec![false; pieces.len()];
    let mut lines = Vec::new();
    for n in 0..pieces.len() {
        if seen[n] || !pieces[n].kept {
            continue;
        }
        // Back to the first piece, or round a ring to this one again.
        let (mut first, mut entry) = (n, 0);
        while let Some((before, end)) = matched.of(first)[entry] {
            (first, entry) = (before, 1 - end);
            if first == n {
                break;
            }
        }
        let start = (first, entry);
        let mut chain = vec![start];
        seen[first] = true;
        let mut ring = false;
        let (mut here, mut enter) = start;
        while let Some((next, end)) = matched.of(here)[1 - enter] {
            if seen[next] {
                ring = next == first;
                break;
            }
            seen[next] = true;
            (here, enter) = (next, end);
            chain.push((here, enter));
        }
        lines.push(chained(pieces, &chain, ring));
    }
    lines
}

/// One line of pieces, each with the end it is entered by.
fn chained(pieces: &[Piece], chain: &[End], ring: bool) -> Line {
    let first = &pieces[chain[0].0];
    let mut line = Line {
        points: Vec::new(),
        hand: Vec::new(),
        tips: first.tips,
        parts: chain.iter().map(|(piece, _)| *piece).collect(),
        closed: ring || (chain.len() == 1 && first.closed),
        evidence: 0.0,
        bridged_px: 0.0,
        model: first.model,
        traced: false,
        drawn: false,
        imported: false,
        cut: false,
    };
    let mut longest: Option<(f64, bool)> = None;
    for (n, entry) in chain {
        let piece = &pieces[*n];
        let length = piece.length();
        let hand = piece.stroke.is_some();
        let mut points = piece.points.clone();
        if *entry == 1 {
            points.reverse();
        }
        for (i, p) in points.into_iter().enumerate() {
            if line.points.last() == Some(&p) {
                continue;
            }
            if !line.points.is_empty() {
                // The way from one piece to the next is the hand's.
                line.hand.push(hand || i == 0);
            }
            line.points.push(p);
        }
        match piece.stroke {
            None => {
                line.traced = true;
                line.evidence += piece.confidence * length;
                line.bridged_px += piece.bridged_px;
                if longest.is_none_or(|(most, _)| length > most) {
                    longest = Some((length, *entry == 1));
                    line.model = piece.model;
                }
            }
            Some(StrokeKind::Import) => line.imported = true,
            Some(_) => line.drawn = true,
        }
        line.cut |= piece.cut;
    }
    if let (Some((head, entry)), Some((tail, enter))) = (chain.first(), chain.last()) {
        line.tips = [pieces[*head].tips[*entry], pieces[*tail].tips[1 - *enter]];
    }
    if ring && line.points.first() != line.points.last() {
        line.points.extend(line.points.first().copied());
        line.hand.push(true);
    }
    if longest.is_some_and(|(_, reversed)| reversed) {
        line.points.reverse();
        line.hand.reverse();
        line.tips.swap(0, 1);
    }
    line
}
