//! Measuring networks in the background, beside the patches: whatever is out of date, the selected one first.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::ground::{Bounds, Network, Point, Reach, Stopped, Work};
use crate::study::run::run_network;
use crate::study::{Id, NetworkFinding, OpenRaster, Sheet, Sources, fingerprint};

use super::measuring::{self, Kept};
use super::{Answer, Charted, Model, Post, Slot, Stick};

/// Starts what should run now; called after each command and each answer.
///
/// While a threshold is dragged a running measurement is let finish, so that the numbers follow the hand;
/// whatever the hand came to meanwhile is measured next.
pub fn follow(model: &mut Model) {
    if !model.session.measures || measuring::still_opening(model) {
        return;
    }
    let wanting = model.session.results.networks_wanting(&model.sheet);
    let now: Vec<String> = wanting.iter().map(|(_, fingerprint)| fingerprint.clone()).collect();
    let all_in = |list: &[String]| now.iter().all(|fingerprint| list.contains(fingerprint));
    if wanting.is_empty() || model.session.charts_stopped_at.as_deref().is_some_and(all_in) {
        return;
    }
    if model.session.jobs.is_running(Slot::Networks)
        && (all_in(&model.session.charting) || model.session.history.is_sliding())
    {
        return;
    }
    let selected = model.view.network;
    let (first, rest): (Vec<_>, Vec<_>) = wanting.into_iter().partition(|(id, _)| Some(*id) == selected);
    start(model, first.into_iter().chain(rest).map(|(id, _)| id).collect(), now);
}

fn start(model: &mut Model, networks: Vec<Id>, fingerprints: Vec<String>) {
    let session = &mut model.session;
    let label = match networks.as_slice() {
        [one] => format!("Measuring {}", model.sheet.network(*one).map_or("", |n| n.name.as_str())),
        many => format!("Measuring {} networks", many.len()),
    };
    let round = Round {
        sheet: model.sheet.clone(),
        rasters: session.sources.clone(),
        kept: Arc::clone(&session.kept),
        networks,
    };
    session.charting = fingerprints;
    session.charts_stopped_at = None;
    session.jobs.start(Slot::Networks, label, move |work, post| {
        // Stopped: what was sent stays, the rest is still wanting.
        let _ = round.run(work, post);
    });
}

/// One job's view of the study.
struct Round {
    sheet: Sheet,
    rasters: BTreeMap<Id, OpenRaster>,
    kept: Arc<Kept>,
    networks: Vec<Id>,
}

impl Round {
    fn run(&self, work: &Work, post: &Post<Answer>) -> Result<(), Stopped> {
        let sources = Sources { rasters: self.rasters.clone(), ..Sources::default() };
        for id in &self.networks {
            let Some(entry) = self.sheet.network(*id) else { continue };
            let outcome = run_network(&self.sheet, &sources, *id, &self.kept.memo, work)?;
            let charted = Charted::new(outcome, fingerprint::of_network(&self.sheet, entry));
            post.answer(Answer::Network(*id, Box::new(charted)));
        }
        Ok(())
    }
}

/// Most reaches of a sketch, and most points of one of them.
const STICKS: usize = 160;
const STICK_POINTS: usize = 14;

impl Charted {
    /// With what the table and the ledger need beside the finding.
    pub fn new(outcome: Result<Arc<NetworkFinding>, String>, fingerprint: String) -> Self {
        let network = outcome.as_ref().ok().map(|finding| &finding.network);
        let boxes = network.map(|n| n.reaches.iter().map(|r| bounds(&r.line.0)).collect());
        let sketch = network.map(sketch);
        Self { boxes: boxes.unwrap_or_default(), sketch: sketch.unwrap_or_default(), outcome, fingerprint }
    }
}

/// The box of a line; empty, far away, without points.
fn bounds(line: &[Point]) -> Bounds {
    let (high, low) =
        (Point::new(f64::INFINITY, f64::INFINITY), Point::new(f64::NEG_INFINITY, f64::NEG_INFINITY));
    Bounds::of(line.iter().copied()).unwrap_or(Bounds { min: high, max: low })
}

/// The reaches of the highest orders, the longest first, thinned and fitted into a unit square.
fn sketch(network: &Network) -> Vec<Stick> {
    let mut reaches: Vec<&Reach> = network.reaches.iter().collect();
    let order = |r: &Reach| r.order.map_or(1, |o| o.strahler);
    reaches.sort_by(|a, b| order(b).cmp(&order(a)).then(b.length.total_cmp(&a.length)));
    reaches.truncate(STICKS);
    let Some(frame) = Bounds::of(reaches.iter().flat_map(|r| r.line.0.iter().copied())) else {
        return Vec::new();
    };
    let size = frame.width().max(frame.height()).max(f64::MIN_POSITIVE);
    let (left, top) = (0.5 * (1.0 - frame.width() / size), 0.5 * (1.0 - frame.height() / size));
    let small =
        |p: &Point| [(left + (p.x - frame.min.x) / size) as f32, (top + (p.y - frame.min.y) / size) as f32];
    let stick = |r: &&Reach| {
        let (points, last) = (&r.line.0, r.line.0.len().saturating_sub(1));
        let kept = points.len().min(STICK_POINTS);
        let line = (0..kept).map(|i| small(&points[i * last / (kept - 1).max(1)])).collect();
        Stick { order: order(r), line }
    };
    reaches.iter().map(stick).collect()
}
