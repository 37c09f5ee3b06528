//! The crests of both pictures, traced alike, and how far they moved.

use crate::ground::{Caution, Point, Polyline, Seed, Stopped, Work};
use crate::science::crest::{
    self, CrestLine, CrestModel, Crests, EditGround, Shift, ShiftSettings, SpacingSettings, detect, edit,
    shift, spacing,
};
use crate::study::ImageKind;
use crate::study::crest_edits::{self, Pixels};

use super::trends::Compared;
use super::{OTHER_LOOK_DEG, Picture, Scene};

/// Cells traced at the most in each picture.
const MOST_CELLS: usize = 1 << 24;
/// From this share of half a spacing on the next crest may be the same one.
const NEAR_HALF: f64 = 0.6;
/// Movements this close to even over a spacing (quartile distance over spacing; even is ½) tell nothing.
const EVEN: f64 = 0.4;
/// p above which crests laid elsewhere agree as well.
const BY_CHANCE: f64 = 0.05;

pub(super) struct Followed {
    /// Full-resolution pixels of the first raster.
    pub lines: [Vec<CrestLine>; 2],
    pub shift: Result<Shift, String>,
}

pub(super) fn follow(
    scene: &Scene<'_>,
    compared: &Compared,
    seed: Seed,
    cautions: &mut Vec<Caution>,
    work: &Work,
) -> Result<Followed, Stopped> {
    let nothing = |why: &str| Followed { lines: [Vec::new(), Vec::new()], shift: Err(why.to_owned()) };
    if compared.trends.iter().any(|t| !t.defined) {
        return Ok(nothing("no bedforms are claimed in both pictures"));
    }
    let [a, b] = &scene.pictures;
    if [a, b].iter().any(|p| p.pixels.image.len() > MOST_CELLS) {
        return Ok(nothing("the patch is too large to trace crests in; outline a smaller one"));
    }
    let known = compared.spectrum.spacing.filter(|_| compared.spectrum.defined);
    let said = scene.patch.crests.model.or(scene.sheet.settings.crest.model);
    let mut first = traced(scene, 0, said, None, known, work)?;
    let mut sigma = scale(&first) * a.fine;
    if sigma < b.fine {
        sigma = b.fine;
        first = traced(scene, 0, said, Some(sigma), known, work)?;
    }
    let other_look = scene.lights_apart().is_some_and(|deg| deg > OTHER_LOOK_DEG);
    let model = if other_look { said } else { Some(first.model) };
    let second = traced(scene, 1, model, Some(sigma), known, work)?;
    let on_first = |p: &Point| {
        let (pixels, by) = (&a.pixels, a.pixels.factor as f64);
        Some(Point::new(pixels.origin.x + by * p.x, pixels.origin.y + by * p.y))
    };
    let lines = [
        moved(&first, a.pixels.factor as f64, on_first),
        moved(&second, b.pixels.factor as f64 * b.fine / a.fine, |p| scene.on_first(*p)),
    ];
    if first.model != second.model {
        let why = format!(
            "crests show as {} in the first picture and as {} in the second: the lines are not the same part of a dune",
            first.model.name(),
            second.model.name()
        );
        return Ok(Followed { lines, shift: Err(why) });
    }
    let Some(crest_to_crest) =
        known.map_or_else(|| by_transects(scene, &lines[0], sigma, work), |s| Ok(Some(s)))?
    else {
        return Ok(Followed {
            lines,
            shift: Err("without a spacing there is no telling which crest became which".into()),
        });
    };
    let s = &scene.sheet.settings;
    let settings = ShiftSettings {
        spacing: crest_to_crest,
        reach: s.compare.reach_spacings * crest_to_crest,
        step: 2.0 * sigma,
        resamples: s.statistics.resamples,
        permutations: s.compare.permutations,
    };
    work.phase("following crests", 0);
    let found = shift(&lines[0], &lines[1], scene.frame, settings, seed, work)?;
    if let Ok(found) = &found {
        of_shift(scene, found, crest_to_crest, other_look, cautions);
    }
    Ok(Followed { lines, shift: found })
}

/// Crests of a picture at a scale in ground units, or at its own.
fn traced(
    scene: &Scene<'_>,
    which: usize,
    model: Option<CrestModel>,
    scale: Option<f64>,
    known: Option<f64>,
    work: &Work,
) -> Result<Crests, Stopped> {
    let Picture { entry, pixels, fine } = &scene.pictures[which];
    let (wanted, said) = (&scene.sheet.settings.crest, &scene.patch.crests);
    let by = pixels.factor as f64;
    let own = |p: Point| Point::new((p.x - pixels.origin.x) / by, (p.y - pixels.origin.y) / by);
    let masks =
        said.masks.iter().map(|mask| if which == 0 { mask.clone() } else { scene.crossing.outline(mask) });
    let settings = crest::CrestSettings {
        model,
        scale_px: scale.map(|s| s / fine).or(wanted.scale_px.map(|px| px / by)),
        spacing_px: known.map(|s| s / fine),
        logarithm: entry.kind == ImageKind::Radar,
        excluded: masks.map(|mask| mask.map(own)).collect(),
        // Limits of tone are said of the first picture alone.
        tone_limits: said.tone_limits.filter(|_| which == 0),
        significance: wanted.significance,
        bridge_scales: wanted.bridge_scales,
        least_length_scales: wanted.least_length_scales,
        tolerance_px: wanted.tolerance_px,
    };
    let mut found = detect(&pixels.image, &pixels.outline, &settings, work)?;
    if said.drawn_only && which == 0 {
        found.lines.clear();
        found.junctions.clear();
    }
    if which == 1 {
        return Ok(found);
    }
    // What the user said and drew of crests is said of the first picture.
    let ground = EditGround { image: &pixels.image, outline: &pixels.outline, excluded: &settings.excluded };
    let edits = crest_edits::reduced(said, Pixels { origin: pixels.origin, factor: by });
    Ok(edit(found, &edits, ground, work)?.crests)
}

fn scale(crests: &Crests) -> f64 {
    crests.scales_px.first().copied().unwrap_or(1.0)
}

/// Lines with their points moved; those without a place there are left out. Lengths are `by` times as long.
fn moved(crests: &Crests, by: f64, to: impl Fn(&Point) -> Option<Point>) -> Vec<CrestLine> {
    let line = |l: &CrestLine| {
        let line = Polyline(l.line.0.iter().map(&to).collect::<Option<_>>()?);
        Some(CrestLine { line, bridged_px: by * l.bridged_px, by_hand_px: by * l.by_hand_px, ..l.clone() })
    };
    crests.lines.iter().filter_map(line).collect()
}

fn by_transects(
    scene: &Scene<'_>,
    lines: &[CrestLine],
    sigma: f64,
    work: &Work,
) -> Result<Option<f64>, Stopped> {
    let frame = scene.frame;
    let longest = scene.patch.outline.bounds().map_or(0.0, |b| frame.length(b.width(), b.height()));
    let settings = SpacingSettings { step: 4.0 * sigma, longest, own_beyond: 8.0 * sigma };
    Ok(spacing(lines, &scene.patch.outline, frame, settings, work)?.quartiles[1])
}

/// What stands against a movement.
fn of_shift(scene: &Scene<'_>, found: &Shift, spacing: f64, other_look: bool, cautions: &mut Vec<Caution>) {
    let symbol = scene.pictures[0].pixels.place.unit().symbol();
    let mut say = |code, text: String| cautions.push(Caution::new(code, text));
    let pixel = scene.frame.pixel_size().into_iter().fold(0.0, f64::max);
    say(
        "registration",
        format!(
            "Whatever the two rasters are off against each other counts as movement in full: one pixel is {pixel:.3} {symbol}. Hold the movement against ground that cannot move."
        ),
    );
    if other_look {
        say("shift-look", "The light stands elsewhere in the second picture, and the line a crest shows lies elsewhere on its dune: part of the movement may be that.".into());
    }
    let near_half = found.median.abs() > NEAR_HALF * 0.5 * spacing;
    let others: Vec<String> = match (near_half, found.alternatives.as_slice()) {
        (_, [_, ..]) => found.alternatives.iter().map(|m| format!("{m:+.1} {symbol}")).collect(),
        (true, []) => vec![format!("{:+.1} {symbol}", found.median - spacing * found.median.signum())],
        (false, []) => Vec::new(),
    };
    if !others.is_empty() {
        say(
            "aliasing",
            format!(
                "Crests look so much alike that the next one may be the same: with a spacing of {spacing:.1} {symbol} the movement may as well be {}.",
                others.join(" or ")
            ),
        );
    }
    let [low, high] = found.quartiles;
    if high - low > EVEN * spacing {
        say("shift-even", "Single movements are spread nearly evenly over a spacing, as those of crests that have nothing to do with each other.".into());
    }
    if let Some(chance) = found.chance.filter(|c| c.p > BY_CHANCE) {
        say(
            "shift-chance",
            format!(
                "Crests laid elsewhere at random are met by {:.0} % of the points (here {:.0} %) and agree as closely in {:.0} % of trials: the pattern does not say which crest became which.",
                100.0 * chance.share,
                100.0 * found.share,
                100.0 * chance.p
            ),
        );
    }
    if let Some(along) = found.vector.map(|v| along_crests(found, &v)).filter(|[low, high]| low * high > 0.0)
    {
        say(
            "shift-along",
            format!(
                "As one movement of all crests, the pattern went {:.1} to {:.1} {symbol} along its crests too, which dunes hardly do: the rasters may be off against each other.",
                along[0].abs().min(along[1].abs()),
                along[0].abs().max(along[1].abs())
            ),
        );
    }
}

/// The 95 % interval of the one movement along the mean crest, toward forward + 90°.
fn along_crests(found: &Shift, vector: &crest::ShiftVector) -> [f64; 2] {
    let (e, n) = found.toward.rotated(90.0).east_north();
    let [east, north] = vector.east_north;
    let middle = east * e + north * n;
    let half = |i: usize, by: f64| 0.5 * (vector.ci95[i][1] - vector.ci95[i][0]) * by;
    let half = half(0, e).hypot(half(1, n));
    [middle - half, middle + half]
}
