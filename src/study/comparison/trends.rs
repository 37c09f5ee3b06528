//! The trends of both pictures at one ground scale, paired place by place.

use std::collections::HashMap;

use crate::ground::{Axis, Caution, Point, Seed, Stopped, Work};
use crate::science::axial::two_samples::{AxesCompared, Pair, TwoSampleSettings, compare as compare_axes};
use crate::science::axial::{AxialSample, Nodes};
use crate::science::orientation::look::{refit, undo_contrast};
use crate::science::orientation::{NodeField, TensorSettings, trend_nodes};
use crate::study::patch::{choose_scale, measure_trend, spectrum_finding, summarise};
use crate::study::{ImageKind, LooksFinding, SpectrumFinding, TrendFinding};

use super::{OTHER_LOOK_DEG, Picture, Scene, axes_apart};

/// The trends of both, held against each other.
pub(super) struct Compared {
    pub trends: [TrendFinding; 2],
    pub axes: AxesCompared,
    pub looks: Option<LooksFinding>,
    /// Of the first picture.
    pub spectrum: SpectrumFinding,
}

pub(super) fn compare(
    scene: &Scene<'_>,
    seed: Seed,
    cautions: &mut Vec<Caution>,
    work: &Work,
) -> Result<Compared, Stopped> {
    let [a, b] = &scene.pictures;
    let sheet = scene.sheet;
    let (spectrum, scales) = choose_scale(sheet, a.entry, &a.pixels, work)?;
    let mut first = measure_trend(sheet, a.entry, &a.pixels, &scales, work)?;
    let (sigma, rho, step) = (first.gradient_scale_px, first.integration_scale_px, first.node_step_px);
    // No finer than a pixel of the coarser picture.
    let raised = (b.fine / (a.fine * sigma)).max(1.0);
    let ground = [sigma, rho, step].map(|px| px * raised * a.fine);
    if raised > 1.0 {
        first = at_scale(scene, a, ground, work)?;
    }
    let second = at_scale(scene, b, ground, work)?;
    let (on_first, mut said) = summarise(sheet, &a.pixels, &first, seed.child("first"), work)?;
    let (on_second, also) = summarise(sheet, &b.pixels, &second, seed.child("second"), work)?;
    said.retain(|c| also.iter().all(|d| d.code != c.code));
    cautions.extend(said.into_iter().chain(also));
    let axes = axes(scene, [&first, &second], seed, work)?;
    let trends = [on_first, on_second];
    let looks = looks(scene, &trends, &axes);
    Ok(Compared { looks, axes, trends, spectrum: spectrum_finding(&spectrum, &a.pixels) })
}

/// The trend field of a picture at scales in ground units.
fn at_scale(
    scene: &Scene<'_>,
    picture: &Picture<'_>,
    ground: [f64; 3],
    work: &Work,
) -> Result<NodeField, Stopped> {
    let [gradient_scale_px, integration_scale_px, node_step_px] = ground.map(|s| s / picture.fine);
    let settings = TensorSettings {
        gradient_scale_px,
        integration_scale_px,
        node_step_px,
        significance: scene.sheet.settings.trend.significance,
        logarithm: picture.entry.kind == ImageKind::Radar,
    };
    let pixels = &picture.pixels;
    trend_nodes(&pixels.image, &pixels.outline, &pixels.place, &settings, work)
}

fn axes(
    scene: &Scene<'_>,
    fields: [&NodeField; 2],
    seed: Seed,
    work: &Work,
) -> Result<AxesCompared, Stopped> {
    let first = &scene.pictures[0].pixels;
    let by = first.factor as f64;
    let place = |which: usize, at: Point| match which {
        0 => Some(Point::new(first.origin.x + by * at.x, first.origin.y + by * at.y)),
        _ => scene.on_first(at),
    };
    let passed = [0, 1].map(|which| -> (Vec<Axis>, Vec<Point>) {
        let nodes = fields[which].nodes.iter().filter(|n| n.significant);
        nodes.filter_map(|n| Some((n.axis, scene.on_plane(place(which, n.at)?)))).unzip()
    });
    let spacing = fields.map(|f| f.node_step_px * f.integration_scale_ground / f.integration_scale_px);
    let sample = |which: usize| AxialSample {
        axes: &passed[which].0,
        weights: None,
        nodes: Some(Nodes {
            at: &passed[which].1,
            spacing: spacing[which],
            kernel_sigma: fields[which].integration_scale_ground,
        }),
    };
    let pairs = pairs(&passed[0].1, &passed[1].1, 0.75 * spacing[0]);
    let s = &scene.sheet.settings;
    let settings = TwoSampleSettings {
        significance: s.compare.significance,
        resamples: s.statistics.resamples,
        permutations: s.compare.permutations,
    };
    work.phase("comparing trends", 0);
    compare_axes(&sample(0), &sample(1), &pairs, settings, seed, work)
}

/// For each of the first places the nearest of the second within `reach`.
fn pairs(first: &[Point], second: &[Point], reach: f64) -> Vec<Pair> {
    let cell = |p: Point| ((p.x / reach).floor() as i64, (p.y / reach).floor() as i64);
    let mut cells: HashMap<(i64, i64), Vec<usize>> = HashMap::new();
    for (j, p) in second.iter().enumerate() {
        cells.entry(cell(*p)).or_default().push(j);
    }
    let nearest = |p: Point| {
        let (x, y) = cell(p);
        let near = (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (x + dx, y + dy)));
        near.filter_map(|key| cells.get(&key))
            .flatten()
            .map(|j| (p.distance(second[*j]), *j))
            .filter(|(d, _)| *d <= reach)
            .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)))
    };
    first.iter().enumerate().filter_map(|(i, p)| Some([i, nearest(*p)?.1])).collect()
}

/// What the two looks may have to do with a difference; `None` while one is not known.
fn looks(scene: &Scene<'_>, trends: &[TrendFinding; 2], axes: &AxesCompared) -> Option<LooksFinding> {
    let lights = [scene.pictures[0].entry.light_from?, scene.pictures[1].entry.light_from?];
    let apart_deg = axes_apart(lights[0], lights[1]);
    let refitted = [0, 1].map(|i| {
        let passed: Vec<Axis> = trends[i].nodes.iter().filter(|n| n.significant).map(|n| n.axis).collect();
        refit(&passed, |axis| undo_contrast(axis, lights[i])).map(|(axis, _)| axis)
    });
    let refit_deg = match refitted {
        [Some(a), Some(b)] => Some(b.turn_from(a)),
        _ => None,
    };
    // A look draws what it shows toward its own right angle, so that two draw trends apart the way they stand.
    let pull = lights[1].axis().turn_from(lights[0].axis());
    let may_explain = axes.differ
        && apart_deg > OTHER_LOOK_DEG
        && axes.difference_deg.is_none_or(|d| {
            let half = axes.difference_ci95_deg.map_or(0.0, |[low, high]| 0.5 * (high - low));
            (d * pull > 0.0 || apart_deg > 80.0) && d.abs() <= apart_deg + half
        });
    Some(LooksFinding { apart_deg, refit_deg, may_explain })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_are_paired_with_the_nearest_within_reach() {
        let first = [Point::new(0.0, 0.0), Point::new(10.0, 0.0), Point::new(-30.0, 5.0)];
        let second = [Point::new(9.0, 0.5), Point::new(0.4, -0.6), Point::new(1.0, 1.0)];
        assert_eq!(pairs(&first, &second, 2.0), [[0, 1], [1, 0]]);
    }
}
