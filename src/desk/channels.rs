//! Networks without drawing: the ledger's entries, what is under the pointer, and the threshold in force.

use crate::ground::{Bounds, Point, Reach};
use crate::plate::numbers;
use crate::study::{Id, NetworkEntry, NetworkFinding};

use super::{Charted, Model, Standing};

/// How near the pointer must be to a channel, screen points.
const REACH: f64 = 9.0;

/// One network in the ledger.
#[derive(Debug)]
pub struct Entry<'a> {
    pub id: Id,
    pub name: &'a str,
    pub selected: bool,
    pub standing: Standing,
    pub finding: Option<&'a NetworkFinding>,
    /// `"order 4, 312 km"`, or why there is none.
    pub size: String,
    /// Density and the likeliest pattern, in few words.
    pub character: String,
}

/// The networks, in the order of the sheet.
pub fn entries(model: &Model) -> Vec<Entry<'_>> {
    model.sheet.networks.iter().map(|network| entry(model, network)).collect()
}

impl Entry<'_> {
    /// The entry in one line, for screen readers and tests.
    pub fn spoken(&self) -> String {
        let parts = [self.name, &self.size, &self.character, self.standing.remark()];
        parts.iter().filter(|part| !part.is_empty()).copied().collect::<Vec<_>>().join(", ")
    }
}

fn entry<'a>(model: &'a Model, network: &'a NetworkEntry) -> Entry<'a> {
    let results = &model.session.results;
    let finding = results.network(network.id).map(AsRef::as_ref);
    let failed = results.charted(network.id).and_then(|charted| charted.outcome.as_ref().err());
    Entry {
        id: network.id,
        name: &network.name,
        selected: model.view.network == Some(network.id),
        standing: results.network_standing(network.id),
        finding,
        size: finding.map(size_words).or(failed.cloned()).unwrap_or_default(),
        character: finding.map(character_words).unwrap_or_default(),
    }
}

/// Order and length.
fn size_words(finding: &NetworkFinding) -> String {
    let network = &finding.network;
    if network.reaches.is_empty() {
        return "no channel".into();
    }
    let length = numbers::length(network.length(), finding.unit, 3);
    match network.greatest_order() {
        Some(order) if network.loops() == 0 => format!("order {order}, {length}"),
        _ => format!("{} loops, {length}", network.loops()),
    }
}

fn character_words(finding: &NetworkFinding) -> String {
    let density = finding.density.map(|density| density_words(finding, density.density));
    let pattern = pattern_words(finding);
    density.into_iter().chain(pattern).collect::<Vec<_>>().join(" · ")
}

/// Drainage density with its unit.
pub fn density_words(finding: &NetworkFinding, density: f64) -> String {
    match finding.unit {
        crate::ground::LengthUnit::Metre => format!("{} km/km²", numbers::significant(1e3 * density, 3)),
        crate::ground::LengthUnit::Pixel => format!("{} a pixel", numbers::significant(density, 3)),
    }
}

/// The likeliest pattern with its probability; `None` with too few links.
pub fn pattern_words(finding: &NetworkFinding) -> Option<String> {
    let probabilities = finding.pattern.probabilities?;
    let names = crate::science::network::pattern::PATTERN_NAMES;
    let (name, p) = names.iter().zip(probabilities).max_by(|a, b| a.1.total_cmp(&b.1))?;
    Some(format!("{name} {}", numbers::percent(p)))
}

/// The threshold a network is measured with, m²: its own, that of the settings, or the one last used.
pub fn threshold(model: &Model, network: &NetworkEntry) -> Option<f64> {
    let own = network.elevation()?.threshold_m2;
    let used = || {
        let finding = model.session.results.network(network.id)?;
        Some(finding.drainage.as_ref()?.channels.threshold_m2)
    };
    own.or(model.sheet.settings.drainage.threshold_m2).or_else(used)
}

/// How far the pointer reaches, pixels of the raster on the table.
pub fn pointer_reach(model: &Model) -> f64 {
    model.camera().map_or(REACH, |(_, camera)| REACH / camera.scale)
}

/// The place on a network nearest to the pointer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Near {
    pub reach: usize,
    /// On its line.
    pub at: Point,
    pub distance: f64,
}

/// The nearest place on any reach within `reach` pixels of `at`.
pub fn reach_near(charted: &Charted, at: Point, reach: f64) -> Option<Near> {
    let finding = charted.outcome.as_ref().ok()?;
    let within = |b: &Bounds| {
        at.x >= b.min.x - reach
            && at.x <= b.max.x + reach
            && at.y >= b.min.y - reach
            && at.y <= b.max.y + reach
    };
    let mut best: Option<Near> = None;
    for (i, (line, _)) in
        finding.network.reaches.iter().zip(&charted.boxes).enumerate().filter(|(_, (_, b))| within(b))
    {
        for pair in line.line.0.windows(2) {
            let on = nearest_on(pair[0], pair[1], at);
            let distance = on.distance(at);
            if distance <= reach && best.is_none_or(|b| distance < b.distance) {
                best = Some(Near { reach: i, at: on, distance });
            }
        }
    }
    best
}

/// The point of a segment nearest to `p`.
fn nearest_on(a: Point, b: Point, p: Point) -> Point {
    let (dx, dy) = (b.x - a.x, b.y - a.y);
    let squared = dx * dx + dy * dy;
    let t = if squared > 0.0 { ((p.x - a.x) * dx + (p.y - a.y) * dy) / squared } else { 0.0 };
    let t = t.clamp(0.0, 1.0);
    Point::new(a.x + t * dx, a.y + t * dy)
}

/// The reach of the selected network under the pointer.
pub fn pointed_reach(model: &Model) -> Option<(&NetworkFinding, &Reach)> {
    let network = model.selected_network()?;
    let cursor = model.session.cursor.filter(|cursor| cursor.raster == network.raster)?;
    let charted = model.session.results.charted(network.id)?;
    let near = reach_near(charted, cursor.pixel, pointer_reach(model))?;
    let finding = charted.outcome.as_ref().ok()?;
    Some((finding, &finding.network.reaches[near.reach]))
}
