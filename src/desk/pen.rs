//! The pen: a channel or a crest under way on an image. The ground is laid in the background, the way to the
//! pointer follows it live, and nothing waits for either.

use std::sync::Arc;

use crate::ground::{Bounds, Point, Polyline, Seed, Work};
use crate::science::crest::CrestModel;
use crate::study::pen::{Pen, PenWay, PenWays};
use crate::study::{
    ChannelSettings, CrestStroke, Id, OpenRaster, RasterEntry, StrokeKind, Tone, TracedChannel,
};

use super::crests::{self, EndNear};
use super::{Answer, Command, CrestCommand, Model, NetworkCommand, Post, Slot, Tool, apply};

/// A line under way.
#[derive(Debug)]
pub struct Tracing {
    pub subject: Subject,
    pub raster: Id,
    /// Full-resolution pixels, as clicked.
    pub picks: Vec<Point>,
    /// The ways between neighbouring picks; `None` while one is being found.
    pub legs: Vec<Option<Leg>>,
    /// From the last pick to where the pointer was last.
    pub live: Option<Leg>,
    /// Enter was pressed: the line is kept as soon as its last leg is there.
    finishing: bool,
    /// Ways from the last pick, once they are known.
    ways: Option<Arc<PenWays>>,
}

/// What a line under way will be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Subject {
    /// A channel of this network.
    Channel(Id),
    /// A crest of this patch.
    Crest {
        patch: Id,
        /// The ends of other crests at which it begins and, so far, ends.
        ends: [Option<EndNear>; 2],
        /// Whether it joins two crests and is whole with its second pick.
        joins: bool,
    },
}

/// The way between two places.
#[derive(Clone, Debug, PartialEq)]
pub struct Leg {
    pub from: Point,
    pub to: Point,
    /// As the pen takes it; `None` where it finds none, and the leg is straight.
    pub way: Option<PenWay>,
}

/// The ground of the pen, kept from line to line.
#[derive(Debug)]
pub struct PenGround {
    raster: RasterEntry,
    sort: Sort,
    /// What was asked for, full-resolution pixels.
    window: Bounds,
    /// The pen, or why there is none.
    pen: Result<Pen, String>,
}

/// What the pen follows.
#[derive(Clone, Debug, PartialEq)]
enum Sort {
    Channels(ChannelSettings),
    /// With a scale in full-resolution pixels, both of the patch where it is measured.
    Crests {
        model: Option<CrestModel>,
        scale_px: Option<f64>,
    },
}

/// What the pen's job sends back.
#[derive(Debug)]
pub enum PenAnswer {
    Laid(Box<PenGround>),
    Way {
        leg: Leg,
        /// Ways from where it begins, for the next one.
        ways: Option<Arc<PenWays>>,
    },
}

/// Share of the window that is added on each side, so that a pick near its edge has room.
const ROOM: f64 = 0.25;

impl Leg {
    /// Its line, straight where the pen found no way.
    pub fn line(&self) -> Vec<Point> {
        self.way.as_ref().map_or_else(|| vec![self.from, self.to], |way| way.line.0.clone())
    }
}

impl Tracing {
    /// The line, once all its legs are there.
    fn line(&self) -> Option<Polyline> {
        let legs: Option<Vec<&Leg>> = self.legs.iter().map(Option::as_ref).collect();
        let mut line: Vec<Point> = legs?.into_iter().flat_map(Leg::line).collect();
        line.dedup();
        (line.len() >= 2).then_some(Polyline(line))
    }

    /// Whether Enter may end it.
    pub fn is_whole(&self) -> bool {
        self.picks.len() >= 2
    }

    /// What keeps a finished line.
    fn kept(&self, line: Polyline) -> Command {
        let (mut picks, mut line) = (self.picks.clone(), line);
        match self.subject {
            Subject::Channel(id) => {
                Command::Network(NetworkCommand::Trace { id, channel: TracedChannel { picks, line } })
            }
            Subject::Crest { patch: id, ends, .. } => {
                let kind = match ends {
                    [Some(_), Some(_)] => StrokeKind::Join,
                    [None, None] => StrokeKind::Crest,
                    _ => StrokeKind::Extend,
                };
                // A line lengthened goes outward from its end.
                if ends[0].is_none() && ends[1].is_some() {
                    picks.reverse();
                    line.0.reverse();
                }
                Command::Crest(CrestCommand::Lay { id, stroke: CrestStroke { kind, picks, line } })
            }
        }
    }
}

/// What the tool in hand would begin at this place, and the place itself, moved to the end of a crest beside it.
fn begun(model: &Model, at: Point) -> Result<(Subject, Point), &'static str> {
    if model.session.tool == Tool::Pen {
        let network = model.network_for(Tool::Pen).ok_or("the network of this tool is not on the table")?;
        return Ok((Subject::Channel(network.id), at));
    }
    let patch = model.crest_patch().ok_or("no patch on the raster on the table is selected")?.id;
    let joins = model.session.tool == Tool::Join;
    let end = crests::end_near(model, patch, at);
    if joins && end.is_none() {
        return Err(NO_END);
    }
    Ok((Subject::Crest { patch, ends: [end, None], joins }, end.map_or(at, |end| end.at)))
}

/// The next pick of a line under way: the end of another crest where one is beside it.
fn gone_on(model: &Model, tracing: &Tracing, at: Point) -> Result<(Subject, Point), &'static str> {
    let Subject::Crest { patch, ends, joins } = tracing.subject else { return Ok((tracing.subject, at)) };
    // A crest does not meet the end it began at.
    let end = crests::end_near(model, patch, at).filter(|end| ends[0].is_none_or(|first| first.at != end.at));
    if joins && end.is_none() {
        return Err(NO_END);
    }
    Ok((Subject::Crest { patch, ends: [ends[0], end], joins }, end.map_or(at, |end| end.at)))
}

const NO_END: &str = "No open end of a crest is so near.";

/// Lays a pick: the first begins a line, the others go on from the last one.
pub fn pick(model: &mut Model, at: Point) {
    let found = match &model.session.tracing {
        Some(tracing) => gone_on(model, tracing, at),
        None => begun(model, at),
    };
    let (subject, at) = match found {
        Ok(found) => found,
        Err(why) => return model.session.notices.problem(why),
    };
    let Some(raster) = model.shown_raster().map(|r| r.id) else { return };
    let tracing = model.session.tracing.get_or_insert_with(|| Tracing {
        subject,
        raster,
        picks: Vec::new(),
        legs: Vec::new(),
        live: None,
        finishing: false,
        ways: None,
    });
    if tracing.picks.last() == Some(&at) {
        return;
    }
    if let Some(last) = tracing.picks.last().copied() {
        let shown = tracing.live.take().filter(|leg| leg.from == last && leg.to == at);
        tracing.legs.push(shown);
    }
    tracing.picks.push(at);
    tracing.subject = subject;
    (tracing.live, tracing.ways) = (None, None);
    if tracing.is_whole() && matches!(subject, Subject::Crest { joins: true, .. }) {
        finish(model);
    }
}

/// Takes the last pick back, with the leg to it.
pub fn retract(model: &mut Model) {
    let Some(tracing) = &mut model.session.tracing else { return };
    tracing.picks.pop();
    tracing.legs.truncate(tracing.picks.len().saturating_sub(1));
    (tracing.live, tracing.ways, tracing.finishing) = (None, None, false);
    if let Subject::Crest { ends, .. } = &mut tracing.subject {
        ends[1] = None;
    }
    model.session.tracing.take_if(|tracing| tracing.picks.is_empty());
}

/// Ends the line; it is kept at once or when its last leg has come.
pub fn finish(model: &mut Model) {
    if let Some(tracing) = &mut model.session.tracing {
        tracing.finishing = true;
    }
    keep_finished(model);
}

fn keep_finished(model: &mut Model) {
    let Some(tracing) = model.session.tracing.as_ref().filter(|tracing| tracing.finishing) else { return };
    let Some(command) = tracing.line().map(|line| tracing.kept(line)) else { return };
    model.session.tracing = None;
    model.session.history.settle();
    apply(model, command);
}

/// Takes in what the pen's job found; what the hand has left behind is dropped.
pub(super) fn take(model: &mut Model, answer: PenAnswer) {
    let session = &mut model.session;
    match answer {
        PenAnswer::Laid(ground) => {
            if let Err(why) = &ground.pen {
                session
                    .notices
                    .problem(format!("The pen has no ground here and draws straight lines: {why}."));
            }
            let pen = ground.pen.as_ref().ok().cloned();
            let is_channels = matches!(ground.sort, Sort::Channels(_));
            session.pen_ground = Some(*ground);
            if let Some(pen) = pen.filter(|_| is_channels) {
                let seed = model.sheet.seed;
                session.jobs.start(Slot::Chance, "Learning what chance ways cost", move |work, _| {
                    learn(&pen, seed, work);
                });
            }
        }
        PenAnswer::Way { leg, ways } => {
            let Some(tracing) = &mut session.tracing else { return };
            let gap = tracing.legs.iter().position(Option::is_none);
            let fits = |i: &usize| tracing.picks[*i] == leg.from && tracing.picks[*i + 1] == leg.to;
            if let Some(i) = gap.filter(fits) {
                tracing.legs[i] = Some(leg);
            } else if tracing.picks.last() == Some(&leg.from) {
                tracing.live = Some(leg);
                tracing.ways = ways.or(tracing.ways.take());
            }
            keep_finished(model);
        }
    }
}

/// What ways cost by chance has become known: the way to the pointer is asked for once more, with it.
pub(super) fn judge_again(model: &mut Model) {
    if let Some(tracing) = &mut model.session.tracing {
        tracing.live = None;
    }
}

/// Stopped: ways then tell no chance.
fn learn(pen: &Pen, seed: Seed, work: &Work) {
    let _ = pen.learn_chance(seed, work);
}

/// Starts what the pen needs next: ground, a leg that is wanting, or the way to the pointer. A job that runs is
/// let finish, so that the pointer never starves it; the latest pointer comes next.
pub fn follow(model: &mut Model) {
    let there = model.session.tracing.as_ref().is_some_and(|tracing| is_on_table(model, tracing));
    model.session.tracing.take_if(|_| !there);
    if model.session.tracing.is_none() || model.session.jobs.is_running(Slot::Pen) {
        return;
    }
    let Some((from, to)) = wanted(model) else { return };
    match ground(model, [from, to]) {
        Some(Ok(pen)) => {
            let ways = model.session.tracing.as_ref().and_then(|tracing| tracing.ways.clone());
            let known = ways.filter(|ways| near(ways.from(), from));
            let live = model.session.tracing.as_ref().is_some_and(|t| t.legs.iter().all(Option::is_some));
            let job = Follow { pen, from, to, ways: known, live };
            model.session.jobs.start(Slot::Pen, "Following the line", move |work, post| job.run(work, post));
        }
        Some(Err(())) => take(model, PenAnswer::Way { leg: Leg { from, to, way: None }, ways: None }),
        None => lay(model, [from, to]),
    }
}

/// Whether the tool in hand and what it works on are still those of the line under way.
fn is_on_table(model: &Model, tracing: &Tracing) -> bool {
    match (tracing.subject, model.session.tool) {
        (Subject::Channel(id), Tool::Pen) => model.network_for(Tool::Pen).is_some_and(|n| n.id == id),
        (Subject::Crest { patch, joins, .. }, Tool::Ridge | Tool::Join) => {
            joins == (model.session.tool == Tool::Join) && model.crest_patch().is_some_and(|p| p.id == patch)
        }
        _ => false,
    }
}

/// What the pen follows for the line under way.
fn sort(model: &Model) -> Option<Sort> {
    let settings = &model.sheet.settings;
    let id = match model.session.tracing.as_ref()?.subject {
        Subject::Channel(_) => return Some(Sort::Channels(settings.channel.clone())),
        Subject::Crest { patch, .. } => patch,
    };
    let found = model.session.results.crests(id).and_then(|crested| crested.finding());
    let wanted = model.sheet.patch(id).and_then(|patch| patch.crests.model).or(settings.crest.model);
    Some(Sort::Crests {
        model: wanted.or(found.map(|found| found.model)),
        scale_px: found.map(|found| found.full_scale_px()).or(settings.crest.scale_px),
    })
}

/// Ends of the way that is wanting: the first leg not yet found, or from the last pick to the pointer.
fn wanted(model: &Model) -> Option<(Point, Point)> {
    let tracing = model.session.tracing.as_ref()?;
    if let Some(i) = tracing.legs.iter().position(Option::is_none) {
        return Some((tracing.picks[i], tracing.picks[i + 1]));
    }
    let cursor = model.session.cursor.filter(|cursor| cursor.raster == tracing.raster)?;
    let last = *tracing.picks.last()?;
    let known = tracing.live.as_ref().is_some_and(|leg| leg.to == cursor.pixel);
    (!known && last != cursor.pixel).then_some((last, cursor.pixel))
}

/// The pen for these places: `None` when its ground must be laid (anew), `Err` where it has none.
fn ground(model: &Model, places: [Point; 2]) -> Option<Result<Pen, ()>> {
    let entry = model.shown_raster()?;
    let ground = model.session.pen_ground.as_ref()?;
    if ground.raster != plain(entry) || Some(&ground.sort) != sort(model).as_ref() {
        return None;
    }
    let Ok(pen) = &ground.pen else { return Some(Err(())) };
    if places.iter().all(|p| pen.covers(*p)) {
        // The view has come much closer: finer ground is there to be had.
        let area = |b: &Bounds| b.width() * b.height();
        let closer = pen.factor() > 1.0 && seen(model).is_some_and(|b| 6.0 * area(&b) < area(&ground.window));
        return (!closer).then(|| Ok(pen.clone()));
    }
    // What was asked for and is not covered lies off the raster.
    let asked = |p: &Point| {
        let Bounds { min, max } = ground.window;
        p.x >= min.x && p.x <= max.x && p.y >= min.y && p.y <= max.y
    };
    places.iter().all(asked).then_some(Err(()))
}

/// The pixels in sight, with some room round them.
fn seen(model: &Model) -> Option<Bounds> {
    let (_, camera) = model.camera()?;
    let half = |points: f64| (0.5 + ROOM) * points.max(1.0) / camera.scale;
    let [w, h] = model.session.viewport.map(half);
    let Point { x, y } = camera.centre;
    Some(Bounds { min: Point::new(x - w, y - h), max: Point::new(x + w, y + h) })
}

fn lay(model: &mut Model, places: [Point; 2]) {
    let Some(entry) = model.shown_raster().cloned() else { return };
    let Some(seen) = seen(model) else { return };
    let corners = [seen.min, seen.max];
    let window = Bounds::of(corners.into_iter().chain(places)).unwrap_or(seen);
    let Some(sort) = sort(model) else { return };
    let open = model.session.sources.get(&entry.id).cloned();
    if let Some(tracing) = &mut model.session.tracing {
        tracing.ways = None;
    }
    model.session.jobs.abandon(Slot::Chance);
    model.session.jobs.start(Slot::Pen, "Laying the ground of the pen", move |work, post| {
        let pen = laid(open.as_ref(), &entry, window, &sort, work);
        if !work.is_stopped() {
            let ground = PenGround { raster: plain(&entry), sort, window, pen };
            post.answer(Answer::Pen(PenAnswer::Laid(Box::new(ground))));
        }
    });
}

fn laid(
    open: Option<&OpenRaster>,
    entry: &RasterEntry,
    window: Bounds,
    sort: &Sort,
    work: &Work,
) -> Result<Pen, String> {
    let open = open.ok_or("the raster is not open")?;
    match sort {
        Sort::Channels(settings) => Pen::lay(open, entry, window, settings, work),
        Sort::Crests { model, scale_px } => Pen::lay_crests(open, entry, window, *model, *scale_px, work),
    }
}

/// The entry without what changes no pixel.
fn plain(entry: &RasterEntry) -> RasterEntry {
    RasterEntry { name: String::new(), tone: Tone::default(), light_from: None, ..entry.clone() }
}

/// The pen keeps places in its own pixels, so they come back with a last bit lost.
fn near(a: Point, b: Point) -> bool {
    a.distance(b) < 1e-6 * (1.0 + a.x.abs() + a.y.abs())
}

/// One way to be found.
struct Follow {
    pen: Pen,
    from: Point,
    to: Point,
    ways: Option<Arc<PenWays>>,
    /// Whether more ways from here will be asked for.
    live: bool,
}

impl Follow {
    fn run(self, work: &Work, post: &Post<Answer>) {
        let Self { pen, from, to, ways, live } = self;
        let found = match ways {
            Some(ways) => ways.to(to, work).map(|way| (way, Some(ways))),
            None if live => pen.ways_from(from, work).and_then(|ways| match ways.map(Arc::new) {
                Some(ways) => ways.to(to, work).map(|way| (way, Some(ways))),
                None => Ok((None, None)),
            }),
            None => pen.way(from, to, work).map(|way| (way, None)),
        };
        // Stopped: nobody waits for it.
        let Ok((way, ways)) = found else { return };
        post.answer(Answer::Pen(PenAnswer::Way { leg: Leg { from, to, way }, ways }));
    }
}
