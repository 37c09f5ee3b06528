//! The outcrops of a patch: its trend field set about them on the ground plane, tested one by one and
//! together.

use crate::ground::{Axis, Azimuth, Caution, LocalFrame, Place, Point, Seed, Stopped, Work};
use crate::science::obstacle::{
    Annulus, Combined, Dipole, Ellipse, Field, LEAST_NODES, Node, Outcome, TestSettings, combine, test,
    undecided,
};

use super::{Id, Obstacle, ObstacleGround, ObstacleSettings, Patch, Sheet, TrendFinding};

/// What the outcrops of a patch say about the wind that shaped its crests.
#[derive(Clone, Debug, PartialEq)]
pub struct ObstaclesFinding {
    /// In the order of the sheet.
    pub outcrops: Vec<ObstacleFinding>,
    /// Two or more together.
    pub combined: Option<Combined>,
    /// Why the outcrops together are no decision; `None` when they are one, or when there is one only.
    pub combined_undecided: Option<String>,
    /// Mean axis of the crests beyond every annulus, true at the middle of the patch; `None` when there is
    /// none to measure turns from.
    pub crest: Option<Axis>,
    /// Its standard error, degrees.
    pub crest_se_deg: f64,
    /// Nodes it rests on.
    pub regional: usize,
    pub cautions: Vec<Caution>,
}

/// One outcrop.
#[derive(Clone, Debug, PartialEq)]
pub struct ObstacleFinding {
    pub id: Id,
    pub name: String,
    /// Radius of the circle of equal area, in the patch's unit.
    pub radius: f64,
    /// Its shape in radii about its centre, x true east and y true north.
    pub shape: Ellipse,
    /// Its outline in the same plane.
    pub outline: Vec<Point>,
    /// The crest axis that turns are measured from, true at the outcrop.
    pub crest: Axis,
    /// The axis of the wind that the turns tell, true; `None` without a decision.
    pub wind: Option<Axis>,
    /// The side with more bedforms, true, where a dipole could be measured.
    pub more_toward: Option<Azimuth>,
    /// The test's numbers, or in words why there are none.
    pub outcome: Result<Outcome, String>,
    /// The significant nodes round it, for show.
    pub around: Vec<NodeAround>,
}

/// A node near an outcrop.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NodeAround {
    /// In radii about the centre, x true east and y true north.
    pub at: Point,
    /// Turn of the trend from the crest axis, counter-clockwise, degrees.
    pub residual_deg: f64,
    /// Within the annulus that was fitted.
    pub used: bool,
}

impl ObstacleFinding {
    pub fn dipole(&self) -> Option<Dipole> {
        self.outcome.as_ref().ok()?.dipole
    }
}

/// Tests every outcrop that belongs to the patch; `None` where there is none.
///
/// # Errors
/// [`Stopped`].
pub fn study(
    sheet: &Sheet,
    patch: &Patch,
    place: &Place,
    trend: &TrendFinding,
    seed: Seed,
    work: &Work,
) -> Result<Option<ObstaclesFinding>, Stopped> {
    let settings = &sheet.settings.obstacle;
    let on_raster: Vec<&Obstacle> = sheet.obstacles.iter().filter(|o| o.raster == patch.raster).collect();
    let here: Vec<usize> =
        (0..on_raster.len()).filter(|i| belongs(on_raster[*i], patch, place, settings)).collect();
    let plane = patch.outline.bounds().and_then(|b| Plane::at(place, b.centre()));
    let Some(plane) = plane.filter(|_| !here.is_empty()) else { return Ok(None) };
    work.phase(&format!("outcrops of {}", patch.name), u64::from(settings.virtual_count) * here.len() as u64);
    // Shapes of all, so that no virtual outcrop is set on another; an outline without area is left out.
    let shapes: Vec<Option<Ellipse>> = on_raster.iter().map(|o| plane.shape(&o.outline.outer)).collect();
    let known: Vec<Ellipse> = shapes.iter().flatten().copied().collect();
    let nodes = nodes(trend, &on_raster, &plane, place);
    let mut finding = ObstaclesFinding {
        outcrops: Vec::new(),
        combined: None,
        combined_undecided: None,
        crest: None,
        crest_se_deg: 0.0,
        regional: 0,
        cautions: Vec::new(),
    };
    let field = if trend.defined { Field::of(nodes, &known, settings.outer_radii) } else { None };
    if let Some(field) = &field {
        finding.crest = Some(field.crest);
        finding.crest_se_deg = field.crest_se_deg;
        finding.regional = field.regional;
    }
    let step = trend.node_step_px * plane.pixel;
    for i in here {
        let Some(shape) = shapes[i] else { continue };
        let which = shapes[..i].iter().flatten().count();
        let outcome = match &field {
            None => Err("the patch has no preferred trend whose turn could be measured".into()),
            Some(field) => {
                let seed = seed.child(&format!("outcrop {}", on_raster[i].id.0));
                test(field, &known, which, &test_settings(settings), step, seed, work)?
                    .ok_or_else(|| format!("fewer than {LEAST_NODES} nodes above the noise stand round it"))
            }
        };
        finding.outcrops.push(one(on_raster[i], shape, outcome, field.as_ref(), &plane, place, settings));
    }
    let estimates: Vec<_> =
        finding.outcrops.iter().filter_map(|o| Some(o.outcome.as_ref().ok()?.estimate)).collect();
    finding.combined = combine(&estimates, finding.crest_se_deg);
    finding.combined_undecided =
        finding.combined.and_then(|c| undecided(&c.obliquity, settings.least_amplitude));
    finding.cautions = cautions(&finding, field.as_ref(), settings);
    Ok((!finding.outcrops.is_empty()).then_some(finding))
}

/// Whether a patch holds half or more of the ground round an outcrop.
pub fn belongs(obstacle: &Obstacle, patch: &Patch, place: &Place, s: &ObstacleSettings) -> bool {
    const RINGS: usize = 6;
    const BEARINGS: usize = 24;
    let Some(middle) = Ellipse::of_ring(&obstacle.outline.outer).map(|e| e.centre) else { return false };
    let Some(plane) = Plane::at(place, middle).filter(|_| patch.raster == obstacle.raster) else {
        return false;
    };
    let Some(shape) = plane.shape(&obstacle.outline.outer) else { return false };
    let (from, to) = (s.inner_radii.powi(2), s.outer_radii.powi(2));
    let held = |k: usize| {
        // Rings of equal area.
        let share = ((k / BEARINGS) as f64 + 0.5) / RINGS as f64;
        let r = shape.radius() * (from + share * (to - from)).sqrt();
        let (sin, cos) = (std::f64::consts::TAU * (k % BEARINGS) as f64 / BEARINGS as f64).sin_cos();
        patch.outline.contains(plane.pixel_of(Point::new(shape.centre.x + r * cos, shape.centre.y + r * sin)))
    };
    2 * (0..RINGS * BEARINGS).filter(|k| held(*k)).count() >= RINGS * BEARINGS
}

/// What the sentence of a patch says about its outcrops; empty without one.
pub fn clauses(finding: &ObstaclesFinding) -> Vec<String> {
    if let (Some(c), None) = (&finding.combined, &finding.combined_undecided) {
        let [low, high] = c.obliquity.interval_deg().unwrap_or([0.0, 90.0]);
        return vec![format!(
            "the turn of the crests round {} outcrops tells {:.0}° ({low:.0}° to {high:.0}°) between crests and wind",
            c.count,
            c.obliquity.folded_deg()
        )];
    }
    let of = |o: &ObstacleFinding| match &o.outcome {
        Err(why) => format!("no obstacle test at {}: {why}", o.name),
        Ok(Outcome { undecided: Some(why), .. }) => format!("no decision at {}: {why}", o.name),
        Ok(outcome) => {
            let [low, high] = outcome.obliquity.interval_deg().unwrap_or([0.0, 90.0]);
            format!(
                "the turn of the crests round {} tells {:.0}° ({low:.0}° to {high:.0}°) between crests and wind",
                o.name,
                outcome.obliquity.folded_deg()
            )
        }
    };
    finding.outcrops.iter().map(of).collect()
}

fn test_settings(s: &ObstacleSettings) -> TestSettings {
    TestSettings {
        annulus: Annulus { inner: s.inner_radii, outer: s.outer_radii, radius_doubt: s.radius_doubt },
        virtual_count: s.virtual_count as usize,
        homogeneous: s.ground == ObstacleGround::Homogeneous,
        least_amplitude: s.least_amplitude,
    }
}

/// A plane that touches the ground at one pixel; x true east, y true north there.
struct Plane {
    middle: Point,
    frame: LocalFrame,
    /// Ground size of a pixel, the finer direction.
    pixel: f64,
}

impl Plane {
    fn at(place: &Place, middle: Point) -> Option<Self> {
        let frame = place.local_frame(middle)?;
        let pixel = frame.pixel_size().into_iter().fold(f64::INFINITY, f64::min);
        Some(Self { middle, frame, pixel })
    }

    fn of_pixel(&self, p: Point) -> Point {
        let (east, north) = self.frame.ground(p.x - self.middle.x, p.y - self.middle.y);
        Point::new(east, north)
    }

    fn pixel_of(&self, p: Point) -> Point {
        let (dcol, drow) = self.frame.pixel(p.x, p.y);
        Point::new(self.middle.x + dcol, self.middle.y + drow)
    }

    fn shape(&self, ring: &[Point]) -> Option<Ellipse> {
        let ring: Vec<Point> = ring.iter().map(|p| self.of_pixel(*p)).collect();
        Ellipse::of_ring(&ring)
    }

    /// A true axis at a place with its own frame as it lies in this plane: north turns over a map.
    fn axis_of(&self, axis: Axis, there: &LocalFrame) -> Axis {
        let (east, north) = axis.azimuth().east_north();
        let (dcol, drow) = there.pixel(east, north);
        self.frame.azimuth(dcol, drow).axis()
    }

    /// An azimuth of this plane as the true one at a place with its own frame.
    fn true_there(&self, azimuth: Azimuth, there: &LocalFrame) -> Azimuth {
        let (east, north) = azimuth.east_north();
        let (dcol, drow) = self.frame.pixel(east, north);
        there.azimuth(dcol, drow)
    }
}

/// The trend's nodes on the plane, without those in or at the edge of an outcrop: within one smoothing length
/// they read the outcrop itself.
fn nodes(trend: &TrendFinding, outcrops: &[&Obstacle], plane: &Plane, place: &Place) -> Vec<Node> {
    let reads_outcrop = |p: Point| {
        outcrops
            .iter()
            .any(|o| o.outline.contains(p) || o.outline.distance_to_edge(p) < trend.integration_scale_px)
    };
    trend
        .nodes
        .iter()
        .filter(|n| !reads_outcrop(n.at))
        .filter_map(|n| {
            Some(Node {
                at: plane.of_pixel(n.at),
                axis: plane.axis_of(n.axis, &place.local_frame(n.at)?),
                significant: n.significant,
                presence: if n.significant { n.coherence } else { 0.0 },
            })
        })
        .collect()
}

/// The finding of one outcrop, turned into true directions where it stands.
fn one(
    obstacle: &Obstacle,
    shape: Ellipse,
    outcome: Result<Outcome, String>,
    field: Option<&Field>,
    plane: &Plane,
    place: &Place,
    settings: &ObstacleSettings,
) -> ObstacleFinding {
    let middle = plane.pixel_of(shape.centre);
    let there = Plane::at(place, middle).map_or(plane.frame, |p| p.frame);
    let radius = shape.radius();
    let local = |pixel: Point| {
        let (east, north) = there.ground(pixel.x - middle.x, pixel.y - middle.y);
        Point::new(east / radius, north / radius)
    };
    let outline: Vec<Point> = obstacle.outline.outer.iter().map(|p| local(*p)).collect();
    let shown = Ellipse::of_ring(&outline).unwrap_or(Ellipse::circle(Point::default(), 1.0));
    let crest = field.map_or(Axis::from_deg(0.0), |f| plane.true_there(f.crest.azimuth(), &there).axis());
    let decided = outcome.as_ref().ok().filter(|o| o.undecided.is_none());
    let wind = decided.map(|o| crest.rotated(o.obliquity.signed_deg));
    let more_toward =
        outcome.as_ref().ok().and_then(|o| o.dipole).map(|d| plane.true_there(d.toward, &there));
    let around = field.map_or(Vec::new(), |f| around(f, &shape, plane, &local, settings));
    ObstacleFinding {
        id: obstacle.id,
        name: obstacle.name.clone(),
        radius,
        shape: shown,
        outline,
        crest,
        wind,
        more_toward,
        outcome,
        around,
    }
}

fn around(
    field: &Field,
    shape: &Ellipse,
    plane: &Plane,
    local: &impl Fn(Point) -> Point,
    s: &ObstacleSettings,
) -> Vec<NodeAround> {
    let flow = crate::science::obstacle::Flow::round(*shape);
    field
        .nodes
        .iter()
        .filter(|n| n.significant && flow.radii(n.at) <= 1.4 * s.outer_radii)
        .map(|n| NodeAround {
            at: local(plane.pixel_of(n.at)),
            residual_deg: crate::science::obstacle::residual(n.axis, field.crest).to_degrees(),
            used: (s.inner_radii..=s.outer_radii).contains(&flow.radii(n.at)),
        })
        .collect()
}

fn cautions(finding: &ObstaclesFinding, field: Option<&Field>, s: &ObstacleSettings) -> Vec<Caution> {
    let mut found = Vec::new();
    let mut say = |code, text: String| found.push(Caution::new(code, text));
    if field.is_some_and(|f| f.crowded) {
        say(
            "outcrops-crowded",
            "Too little ground lies beyond the outcrops: the crest axis that turns are measured from is taken near them too.".into(),
        );
    }
    for outcrop in &finding.outcrops {
        let Ok(outcome) = &outcrop.outcome else { continue };
        let name = &outcrop.name;
        if let Some(factor) = outcome.best_radius.filter(|f| (f - 1.0).abs() > 1e-9) {
            say(
                "outcrop-radius",
                format!(
                    "The turn of the crests round {name} fits best with {factor:.2} of its outlined radius."
                ),
            );
        }
        if let Some(null) = outcome.null.as_ref().filter(|n| n.p.is_none()) {
            let text = if null.count < (s.virtual_count as usize) || s.virtual_count >= 999 {
                format!(
                    "The patch has room for {} virtual outcrops like {name}, worth {:.0} independent ones: too few for a p.",
                    null.count, null.independent
                )
            } else {
                format!("Fewer than 999 virtual outcrops were asked for: no p at {name}.")
            };
            say("outcrop-places", text);
        }
    }
    found
}
