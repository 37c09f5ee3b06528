//! Where lines laid by hand meet others: ends led onto them, and crossings.

use crate::ground::{Point, Stopped, Work};

use super::assemble::Line;
use super::clip::cut_flagged;
use super::near::{Near, crossing, length_to};
use super::pieces::{Onto, Tip};
use crate::science::crest::End;

/// Free ends within `touch` of another line run onto it, where either was laid by hand; what overshoots is cut off.
/// An end at another line's end is left alone.
pub(super) fn run_onto(lines: &mut [Line], touch: f64, work: &Work) -> Result<(), Stopped> {
    let before: Vec<Line> = lines.to_vec();
    let near = Near::new(before.iter().map(|line| line.points.as_slice()), touch);
    let lengths: Vec<f64> = before.iter().map(Line::length).collect();
    for (n, line) in lines.iter_mut().enumerate() {
        work.advance(0)?;
        if line.closed {
            continue;
        }
        for end in 0..2 {
            let tip = line.tips[end];
            let at = if end == 0 { line.points[0] } else { line.points[line.points.len() - 1] };
            if tip.end != End::Free || tip.onto.is_some() {
                continue;
            }
            let counts =
                |other: usize, segment: usize| other != n && (tip.open || before[other].hand[segment]);
            let Some(place) = near.nearest(at, touch, counts) else { continue };
            let along = near.along(place.line, place.segment, place.at);
            let inner = along >= touch && along <= lengths[place.line] - touch;
            if !(inner || before[place.line].closed) {
                continue;
            }
            if end == 0 {
                turn(line);
            }
            onto(line, &before[place.line].points, place.at, touch);
            line.tips[1] =
                Tip { end: End::Junction, onto: before_onto(&before[place.line], place.at), open: false };
            if end == 0 {
                turn(line);
            }
        }
    }
    Ok(())
}

fn before_onto(line: &Line, at: Point) -> Option<Onto> {
    line.parts.first().map(|piece| Onto { at, piece: *piece })
}

fn turn(line: &mut Line) {
    line.points.reverse();
    line.hand.reverse();
    line.tips.swap(0, 1);
}

/// Leads the last point of a line to `at` on another: what lies beyond a crossing within the last three `touch`
/// is cut off.
fn onto(line: &mut Line, other: &[Point], at: Point, touch: f64) {
    let mut back = 0.0;
    let mut crossed = None;
    for i in (1..line.points.len()).rev() {
        let (a, b) = (line.points[i - 1], line.points[i]);
        if other.windows(2).any(|w| crossing(a, b, w[0], w[1]).is_some()) {
            crossed = Some(i);
        }
        back += a.distance(b);
        if back > 3.0 * touch {
            break;
        }
    }
    if let Some(i) = crossed.filter(|i| *i >= 1) {
        line.points.truncate(i);
        line.hand.truncate(i - 1);
    }
    if line.points.last() != Some(&at) {
        line.points.push(at);
        line.hand.push(true);
    }
}

/// Whether a line that crosses one laid by hand is the one to be parted there: traced lines give way, of two laid
/// by hand the shorter one.
struct Crossing {
    /// The line to part, and the length up to the place.
    parted: usize,
    along: f64,
    onto: Onto,
}

/// Parts lines where they cross one laid by hand, so that the place becomes a junction of four arms.
pub(super) fn part_at_crossings(lines: Vec<Line>, touch: f64, work: &Work) -> Result<Vec<Line>, Stopped> {
    let lengths: Vec<f64> = lines.iter().map(Line::length).collect();
    let mut found: Vec<Crossing> = Vec::new();
    {
        let near = Near::new(lines.iter().map(|line| line.points.as_slice()), touch);
        for (n, line) in lines.iter().enumerate() {
            for (i, w) in line.points.windows(2).enumerate().filter(|(i, _)| line.hand[*i]) {
                work.advance(0)?;
                for met in near.crossings(w[0], w[1], |other, _| other != n) {
                    let by_hand = lines[met.line].hand[met.segment];
                    let gives_way = !by_hand || (lengths[met.line], n) < (lengths[n], met.line);
                    let along = near.along(met.line, met.segment, met.at);
                    let own = length_to(&line.points, i, met.at);
                    let inner = |s: f64, whole: f64| s >= touch && s <= whole - touch;
                    if gives_way && inner(along, lengths[met.line]) && inner(own, lengths[n]) {
                        let onto = Onto { at: met.at, piece: line.parts[0] };
                        found.push(Crossing { parted: met.line, along, onto });
                    }
                }
            }
        }
    }
    found.sort_by(|a, b| a.parted.cmp(&b.parted).then(a.along.total_cmp(&b.along)));
    found.dedup_by(|b, a| a.parted == b.parted && b.along - a.along < touch);
    let mut out = Vec::with_capacity(lines.len() + found.len());
    let mut rest = found.as_slice();
    for (n, line) in lines.into_iter().enumerate() {
        let count = rest.iter().take_while(|crossing| crossing.parted == n).count();
        let (own, others) = rest.split_at(count);
        rest = others;
        let places: Vec<(f64, Tip)> = own
            .iter()
            .map(|c| (c.along, Tip { end: End::Junction, onto: Some(c.onto), open: false }))
            .collect();
        out.extend(parted(line, &places));
    }
    Ok(out)
}

/// A line parted at lengths along it, which must rise; both ends made at a place are as said. A ring opens at the
/// first place.
pub(super) fn parted(line: Line, places: &[(f64, Tip)]) -> Vec<Line> {
    if places.is_empty() {
        return vec![line];
    }
    let at: Vec<f64> = places.iter().map(|(along, _)| *along).collect();
    let mut parts = cut_flagged(&line.points, &line.hand, &at);
    let mut tips: Vec<[Tip; 2]> = (0..parts.len())
        .map(|i| {
            let first = if i == 0 { line.tips[0] } else { places[(i - 1).min(places.len() - 1)].1 };
            let last = places.get(i).map_or(line.tips[1], |place| place.1);
            [first, last]
        })
        .collect();
    if line.closed
        && parts.len() > 1
        && let (Some((points, hand)), Some([from, _])) = (parts.pop(), tips.pop())
    {
        let (head, flags) = (std::mem::take(&mut parts[0].0), std::mem::take(&mut parts[0].1));
        parts[0] = (points.into_iter().chain(head.into_iter().skip(1)).collect(), [hand, flags].concat());
        tips[0][0] = from;
    }
    let traced = (line.length() - line.by_hand()).max(f64::MIN_POSITIVE);
    parts
        .into_iter()
        .zip(tips)
        .map(|((points, hand), tips)| {
            let mut part = Line { points, hand, tips, closed: false, ..line.clone() };
            let share = ((part.length() - part.by_hand()) / traced).clamp(0.0, 1.0);
            (part.evidence, part.bridged_px) = (line.evidence * share, line.bridged_px * share);
            part
        })
        .collect()
}
