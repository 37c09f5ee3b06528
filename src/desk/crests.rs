//! Crests without drawing: what was last traced in a patch, kept while it is traced anew, and what lies under
//! the pointer.

use std::sync::Arc;

use crate::ground::{Bounds, LengthUnit, Point, Polyline};
use crate::science::crest::{CrestLine, CrestOrigin, End};
use crate::study::{CrestStroke, CrestsFinding, Id, Patch, PatchFinding};

use super::Model;
use super::channels::pointer_reach;

/// A mark so near to a line is on it, pixels: the line may have moved a little since it was laid.
const ON: f64 = 1.0;

/// The crests of a patch as last traced. They outlive the quick looks of an edit, which trace nothing.
#[derive(Debug)]
pub struct Crested {
    /// The finding, or why there is none.
    pub outcome: Result<Arc<CrestsFinding>, String>,
    /// Of the patch they were traced in.
    pub fingerprint: String,
    pub unit: LengthUnit,
    /// The box of each line, so that what is under the pointer is found at once.
    boxes: Vec<Bounds>,
}

/// The lines that were rejected since the sheet was opened, so that they can still be seen: by mark, as they
/// were when it was laid.
#[derive(Debug, Default)]
pub(super) struct Struck(Vec<(Point, Option<Polyline>)>);

/// The place on a crest nearest to the pointer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Near {
    pub line: usize,
    /// On it.
    pub at: Point,
    pub distance: f64,
}

/// An open end of a crest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EndNear {
    pub line: usize,
    /// 0: the first point of the line, 1: the last.
    pub end: usize,
    pub at: Point,
}

impl Crested {
    pub fn new(finding: &PatchFinding) -> Self {
        let outcome = finding.crests.clone().map(Arc::new);
        let lines = outcome.as_ref().map_or(&[][..], |crests| &crests.lines);
        let boxes = lines.iter().map(|line| bounds(&line.line)).collect();
        Self { outcome, fingerprint: finding.fingerprint.clone(), unit: finding.unit, boxes }
    }

    pub fn finding(&self) -> Option<&Arc<CrestsFinding>> {
        self.outcome.as_ref().ok()
    }

    pub fn lines(&self) -> &[CrestLine] {
        self.finding().map_or(&[], |crests| &crests.lines)
    }

    /// The boxes of the lines, in their order.
    pub fn boxes(&self) -> &[Bounds] {
        &self.boxes
    }

    /// The lines whose box comes within `reach` of a point.
    fn around(&self, at: Point, reach: f64) -> impl Iterator<Item = (usize, &CrestLine)> {
        let near = move |b: &Bounds| {
            at.x >= b.min.x - reach
                && at.x <= b.max.x + reach
                && at.y >= b.min.y - reach
                && at.y <= b.max.y + reach
        };
        let lines = self.lines().iter().zip(&self.boxes).enumerate();
        lines.filter(move |(_, (_, b))| near(b)).map(|(i, (line, _))| (i, line))
    }

    /// The nearest place on any line within `reach` pixels of `at`.
    pub fn near(&self, at: Point, reach: f64) -> Option<Near> {
        let places = self.around(at, reach).filter_map(|(line, crest)| {
            let nearest = crest.line.nearest(at)?;
            Some(Near { line, at: nearest.at, distance: nearest.distance })
        });
        let within = places.filter(|near| near.distance <= reach);
        within.min_by(|a, b| a.distance.total_cmp(&b.distance))
    }

    /// The line a mark lies on.
    pub fn line_at(&self, mark: Point) -> Option<&Polyline> {
        self.near(mark, ON).map(|near| &self.lines()[near.line].line)
    }

    /// The nearest end within `reach` pixels from which a crest may go on.
    pub fn end_near(&self, at: Point, reach: f64) -> Option<EndNear> {
        let ends = self.around(at, reach).flat_map(|(line, crest)| {
            let points = [crest.line.0.first(), crest.line.0.last()];
            let open = |end: &usize| !matches!(crest.ends[*end], End::Junction | End::Closed);
            (0..2).filter(open).filter_map(move |end| Some(EndNear { line, end, at: *points[end]? }))
        });
        let within = ends.filter(|end| end.at.distance(at) <= reach);
        within.min_by(|a, b| a.at.distance(at).total_cmp(&b.at.distance(at)))
    }

    /// Traced lines nobody has accepted yet, at least so sure.
    pub fn unaccepted_from(&self, confidence: f64) -> impl Iterator<Item = &CrestLine> {
        let lines = self.lines().iter();
        lines.filter(move |line| !line.accepted && is_traced(line) && line.confidence >= confidence)
    }
}

impl Struck {
    /// Looks up the lines of new marks and drops those of marks taken back.
    pub(super) fn follow(&mut self, marks: &[Point], crested: &Crested) {
        self.0.retain(|(mark, _)| marks.contains(mark));
        for mark in marks {
            if !self.0.iter().any(|(known, _)| known == mark) {
                self.0.push((*mark, crested.line_at(*mark).cloned()));
            }
        }
    }

    pub(super) fn line(&self, mark: Point) -> Option<&Polyline> {
        self.0.iter().find(|(known, _)| *known == mark).and_then(|(_, line)| line.as_ref())
    }
}

/// Whether the detector has a part in the line.
pub fn is_traced(line: &CrestLine) -> bool {
    matches!(line.origin, CrestOrigin::Traced | CrestOrigin::Edited)
}

/// Whether a mark lies on a line.
pub fn lies_on(mark: Point, line: &Polyline) -> bool {
    line.nearest(mark).is_some_and(|near| near.distance <= ON)
}

/// The place half way along a line.
pub fn middle(line: &Polyline) -> Option<Point> {
    let half = 0.5 * line.length();
    line.cut(&[half]).first().and_then(|piece| piece.0.last().copied())
}

/// The nearest line laid by hand within `reach` pixels, and how far it is.
pub fn stroke_near(strokes: &[CrestStroke], at: Point, reach: f64) -> Option<(usize, f64)> {
    let near = strokes.iter().enumerate().filter_map(|(i, s)| Some((i, s.line.nearest(at)?.distance)));
    near.filter(|(_, d)| *d <= reach).min_by(|a, b| a.1.total_cmp(&b.1))
}

/// The open end of a crest of the patch beside a place, within the pointer's reach.
pub fn end_near(model: &Model, patch: Id, at: Point) -> Option<EndNear> {
    model.session.results.crests(patch)?.end_near(at, pointer_reach(model))
}

/// The crest of the selected patch under the pointer.
pub fn pointed(model: &Model) -> Option<(&Patch, &Crested, Near)> {
    let patch = model.crest_patch()?;
    let cursor = model.session.cursor.filter(|cursor| cursor.raster == patch.raster)?;
    let crested = model.session.results.crests(patch.id)?;
    Some((patch, crested, crested.near(cursor.pixel, pointer_reach(model))?))
}

fn bounds(line: &Polyline) -> Bounds {
    let far = Point::new(f64::INFINITY, f64::INFINITY);
    Bounds::of(line.0.iter().copied()).unwrap_or(Bounds { min: far, max: far })
}
