//! One trace at one scale: model, sense, thresholds, chains, and the lines made of them.

use crate::ground::{Point, Polyline, Stopped, Work};

use super::candidates::{Crossing, confirm, confirming_gain, crossings};
use super::decoy::{Chance, Shoulders};
use super::floor::{Thresholds, floor, thresholds};
use super::join::Joining;
use super::link::{Chain, Index, link};
use super::model::{CrestModel, Fit};
use super::tone::Ground;
use super::{CrestLine, CrestOrigin, CrestSettings, Crests, End, Junction, simplify};

/// No crest is sought within so many scales of missing ground.
const MARGIN: f64 = 2.0;

/// The next coarser scale that must show a crest too.
const NEIGHBOUR: f64 = 1.5;

/// Cosine to the sense of slip faces from which on a step counts as one.
pub(super) const FACING: f64 = 0.0;

/// Chains at one scale.
pub(super) struct Trace {
    pub model: CrestModel,
    pub fits: Vec<Fit>,
    pub sense: Option<f64>,
    pub thresholds: Thresholds,
    pub sigma: f64,
    /// Cells searched.
    pub cells: usize,
    /// Whether any model stands out.
    pub clear: bool,
    chance: Chance,
    chains: Vec<(Chain, CrestModel)>,
}

pub(super) fn margin(sigma: f64) -> usize {
    (MARGIN * sigma).ceil() as usize + 1
}

/// Whether a crest point has the sign or the sense of a model.
pub(super) fn is_right(p: &Crossing, model: CrestModel, sense: Option<f64>) -> bool {
    match (model, sense) {
        (CrestModel::SlipFace, Some(sense)) => p.normal[0] * sense.cos() + p.normal[1] * sense.sin() > FACING,
        (CrestModel::SlipFace, None) | (CrestModel::BothRidges, _) => true,
        (CrestModel::BrightRidge, _) => p.bright,
        (CrestModel::DarkRidge, _) => !p.bright,
    }
}

/// The model that fits best at a scale, and the sense of slip faces there, where it is clear.
pub(super) fn best_model(
    ground: &Ground<'_>,
    sigma: f64,
    work: &Work,
) -> Result<(CrestModel, Option<f64>), Stopped> {
    let tone = ground.prepared(sigma, true, work)?;
    let (_, moments) = crossings(&tone, &ground.open(margin(sigma)), true, sigma, work)?;
    let (sense, skewness) = moments.slip_sense();
    Ok((moments.fits(sigma)[0].model, (skewness >= moments.clear(sigma)).then_some(sense)))
}

/// Traces all crests at a scale. The sense of slip faces may be known from another scale, where it is clearer.
pub(super) fn trace(
    ground: &Ground<'_>,
    settings: &CrestSettings,
    sigma: f64,
    known_sense: Option<f64>,
    work: &Work,
) -> Result<Trace, Stopped> {
    let open = ground.open(margin(sigma));
    let cells = open.iter().filter(|o| **o).count();
    let calm = ground.prepared(sigma, true, work)?;
    let (steps, moments) = crossings(&calm, &open, true, sigma, work)?;
    let fits = moments.fits(sigma);
    let model = settings.model.unwrap_or(fits[0].model);
    let slip_face = model == CrestModel::SlipFace;
    let (sense, skewness) = moments.slip_sense();
    let own = (skewness >= moments.clear(sigma)).then_some(sense);
    let sense = own.or(known_sense).filter(|_| slip_face);
    let (mut found, tone) = match slip_face {
        true => (steps, calm),
        false => {
            drop((steps, calm));
            let tone = ground.prepared(sigma, false, work)?;
            (crossings(&tone, &open, false, sigma, work)?.0, tone)
        }
    };
    confirm(&mut found, &tone, slip_face, [sigma, NEIGHBOUR * sigma], work)?;
    let right = |p: &Crossing| is_right(p, model, sense);
    let strengths = |wanted: bool| -> Vec<f64> {
        found.iter().filter(|p| right(p) == wanted).map(|p| p.strength).collect()
    };
    // Both scales must show a crest: noise reaches the geometric mean of what it reaches at each, at most.
    let least = [sigma, NEIGHBOUR * sigma]
        .map(|scale| floor(ground.noise, cells, slip_face, scale, settings.significance))
        .into_iter()
        .product::<f64>();
    let least = (least * confirming_gain(slip_face, NEIGHBOUR)).sqrt();
    let thresholds = thresholds(least, &mut strengths(true), &mut strengths(false));
    let linking = Linking { ground, settings, sigma, thresholds, slip_face };
    let mut chains = Vec::new();
    let kinds: &[(bool, CrestModel)] = match model {
        CrestModel::SlipFace => &[(true, CrestModel::SlipFace)],
        CrestModel::BrightRidge => &[(true, CrestModel::BrightRidge)],
        CrestModel::DarkRidge => &[(false, CrestModel::DarkRidge)],
        CrestModel::BothRidges => &[(true, CrestModel::BrightRidge), (false, CrestModel::DarkRidge)],
    };
    for (bright, kind) in kinds {
        let offset = chains.len();
        let linked = linking.chains(&found, |p| right(p) && p.bright == *bright, work)?;
        for mut chain in linked {
            chain.hits.iter_mut().flatten().for_each(|hit| hit.chain += offset);
            chains.push((chain, *kind));
        }
    }
    // Lines of the wrong sense tell what texture makes of nothing, where the sense itself is told.
    let clear = moments.clear(sigma);
    let one_sided = match slip_face {
        true => sense.is_some(),
        false => fits.iter().any(|fit| fit.model == model && fit.skewness >= clear),
    };
    let points = chains.iter().flat_map(|(chain, _)| chain.points.iter().map(|v| v.at));
    let length = chains.iter().map(|(chain, _)| chain.length()).sum();
    let shoulders = Shoulders::of(points, length, sigma, slip_face, cells);
    let decoys = match one_sided {
        true => linking.chains(&found, |p| !right(p) && !shoulders.hold(p.at), work)?,
        false => Vec::new(),
    };
    let evidence = |chain: &Chain| evidence(chain, &thresholds, sigma);
    let real: Vec<f64> = chains.iter().map(|(chain, _)| evidence(chain)).collect();
    let wrong: Vec<f64> = decoys.iter().map(evidence).collect();
    let chance = Chance::of(&real, &wrong, shoulders.weight);
    let clear = fits[0].skewness >= clear || sense.is_some();
    Ok(Trace { model, fits, clear, sense, thresholds, sigma, cells, chance, chains })
}

/// What linking needs beside the points.
struct Linking<'a> {
    ground: &'a Ground<'a>,
    settings: &'a CrestSettings,
    sigma: f64,
    thresholds: Thresholds,
    slip_face: bool,
}

impl Linking<'_> {
    /// Chains of the points that count.
    fn chains(
        &self,
        found: &[Crossing],
        counts: impl Fn(&Crossing) -> bool,
        work: &Work,
    ) -> Result<Vec<Chain>, Stopped> {
        let points: Vec<Crossing> =
            found.iter().filter(|p| p.strength >= self.thresholds.low && counts(p)).copied().collect();
        let index = Index::new(&points, self.ground.tone.height());
        let linked = link(&points, &index, &self.thresholds, self.slip_face, work)?;
        let joining = Joining {
            sigma: self.sigma,
            bridge: self.settings.bridge_scales.max(0.1) * self.sigma,
            least_length: self.settings.least_length_scales * self.sigma,
            slip_face: self.slip_face,
        };
        joining.run(linked, &points, &index, work)
    }
}

/// ∫ s dl/(high σ) of a chain; bridges count nothing.
fn evidence(chain: &Chain, thresholds: &Thresholds, sigma: f64) -> f64 {
    let way = chain.points.windows(2).filter(|w| !w[1].bridged);
    let sum: f64 = way.map(|w| 0.5 * (w[0].strength + w[1].strength) * w[0].at.distance(w[1].at)).sum();
    if thresholds.high > 0.0 { sum / thresholds.high / sigma } else { 0.0 }
}

impl Trace {
    /// Length of all lines, pixels.
    pub fn length(&self) -> f64 {
        self.chains.iter().map(|(chain, _)| chain.length()).sum()
    }

    /// Lines with their ends told, simplified; junctions gathered.
    pub fn finished(self, ground: &Ground<'_>, settings: &CrestSettings) -> Crests {
        let reach = margin(self.sigma) as f64 + 2.0;
        let mut junctions: Vec<Junction> = Vec::new();
        let mut lines = Vec::new();
        for (n, (chain, model)) in self.chains.iter().enumerate() {
            for (end, hit) in chain.hits.iter().enumerate() {
                let Some(hit) = hit else { continue };
                let near = junctions
                    .iter_mut()
                    .find(|j| j.through == hit.chain && j.at.distance(hit.at) <= 2.0 * self.sigma);
                match near {
                    Some(junction) => junction.branches.push((n, end)),
                    None => {
                        junctions.push(Junction { at: hit.at, through: hit.chain, branches: vec![(n, end)] })
                    }
                }
            }
            let points: Vec<Point> = chain.points.iter().map(|v| v.at).collect();
            let ends = [0, 1].map(|end| {
                let at = if end == 0 { points[0] } else { points[points.len() - 1] };
                if chain.closed {
                    End::Closed
                } else if chain.hits[end].is_some() {
                    End::Junction
                } else if ground.near_gap(at, reach) {
                    End::Gap
                } else if ground.near_border(at, reach, self.sigma) {
                    End::Border
                } else {
                    End::Free
                }
            });
            // Points along a crest share their noise over about a scale; so much is evened out.
            let calm = simplify::calmed(&points, self.sigma.round() as usize);
            let kept = simplify::keep(&calm, settings.tolerance_px.max(0.0));
            let bridged = chain.points.windows(2).filter(|w| w[1].bridged);
            let bridged_px = bridged.map(|w| w[0].at.distance(w[1].at)).sum();
            lines.push(CrestLine {
                line: Polyline(kept.into_iter().map(|i| calm[i]).collect()),
                confidence: self.chance.at(evidence(chain, &self.thresholds, self.sigma)),
                ends,
                bridged_px,
                model: *model,
                origin: CrestOrigin::Traced,
                accepted: false,
                by_hand_px: 0.0,
            });
        }
        let Thresholds { floor, high, low, strong } = self.thresholds;
        Crests {
            lines,
            junctions,
            model: self.model,
            fits: self.fits,
            clear: self.clear,
            sense: self.sense,
            floor,
            strong,
            thresholds: [high, low],
            scales_px: vec![self.sigma, NEIGHBOUR * self.sigma],
            side_px: 1.0,
        }
    }
}
