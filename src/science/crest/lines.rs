//! One trace at one scale: model, sense, thresholds, chains, and the lines made of them.

use crate::ground::{Point, Polyline, Stopped, Work};

use super::candidates::{Crossing, confirm, crossings};
use super::floor::{Thresholds, floor, thresholds};
use super::join::Joining;
use super::link::{Chain, Index, link};
use super::model::{CLEAR, CrestModel, Fit};
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

/// The model that fits best at a scale.
pub(super) fn best_model(ground: &Ground<'_>, sigma: f64, work: &Work) -> Result<CrestModel, Stopped> {
    let tone = ground.prepared(sigma, true, work)?;
    let (_, moments) = crossings(&tone, &ground.open(margin(sigma)), true, sigma, work)?;
    Ok(moments.fits()[0].model)
}

/// Traces all crests at a scale.
pub(super) fn trace(
    ground: &Ground<'_>,
    settings: &CrestSettings,
    sigma: f64,
    work: &Work,
) -> Result<Trace, Stopped> {
    let open = ground.open(margin(sigma));
    let cells = open.iter().filter(|o| **o).count();
    let calm = ground.prepared(sigma, true, work)?;
    let (steps, moments) = crossings(&calm, &open, true, sigma, work)?;
    let fits = moments.fits();
    let model = settings.model.unwrap_or(fits[0].model);
    let slip_face = model == CrestModel::SlipFace;
    let (sense, skewness) = moments.slip_sense();
    let sense = (slip_face && skewness >= CLEAR).then_some(sense);
    let (mut found, tone) = match slip_face {
        true => (steps, calm),
        false => {
            let tone = ground.prepared(sigma, false, work)?;
            (crossings(&tone, &open, false, sigma, work)?.0, tone)
        }
    };
    confirm(&mut found, &tone, slip_face, [sigma, NEIGHBOUR * sigma], work)?;
    let right = |p: &Crossing| is_right(p, model, sense);
    let strengths = |wanted: bool| -> Vec<f64> {
        found.iter().filter(|p| right(p) == wanted).map(|p| p.strength).collect()
    };
    let least = floor(ground.noise, cells, slip_face, sigma, settings.significance);
    let thresholds = thresholds(least, &mut strengths(true), &mut strengths(false));
    let mut chains = Vec::new();
    let kinds: &[(bool, CrestModel)] = match model {
        CrestModel::SlipFace => &[(true, CrestModel::SlipFace)],
        CrestModel::BrightRidge => &[(true, CrestModel::BrightRidge)],
        CrestModel::DarkRidge => &[(false, CrestModel::DarkRidge)],
        CrestModel::BothRidges => &[(true, CrestModel::BrightRidge), (false, CrestModel::DarkRidge)],
    };
    for (bright, kind) in kinds {
        let points: Vec<Crossing> = found
            .iter()
            .filter(|p| right(p) && p.bright == *bright && p.strength >= thresholds.low)
            .copied()
            .collect();
        let index = Index::new(&points, ground.tone.height());
        let linked = link(&points, &index, &thresholds, slip_face, work)?;
        let joining = Joining {
            sigma,
            bridge: settings.bridge_scales.max(0.1) * sigma,
            least_length: settings.least_length_scales * sigma,
            slip_face,
        };
        let offset = chains.len();
        for mut chain in joining.run(linked, &points, &index, work)? {
            chain.hits.iter_mut().flatten().for_each(|hit| hit.chain += offset);
            chains.push((chain, *kind));
        }
    }
    Ok(Trace { model, fits, sense, thresholds, sigma, cells, chains })
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
            let (confidence, bridged_px) = self.evidence(chain);
            lines.push(CrestLine {
                line: Polyline(kept.into_iter().map(|i| calm[i]).collect()),
                confidence,
                ends,
                bridged_px,
                model: *model,
                origin: CrestOrigin::Traced,
                accepted: false,
                by_hand_px: 0.0,
            });
        }
        let Thresholds { floor, high, low, .. } = self.thresholds;
        Crests {
            lines,
            junctions,
            model: self.model,
            fits: self.fits,
            sense: self.sense,
            floor,
            thresholds: [high, low],
            scales_px: vec![self.sigma, NEIGHBOUR * self.sigma],
        }
    }

    /// Mean share of (response − low)/(high − low) over the length, and the bridged length.
    fn evidence(&self, chain: &Chain) -> (f64, f64) {
        let Thresholds { high, low, .. } = self.thresholds;
        let share = |s: f64| if high > low { ((s - low) / (high - low)).clamp(0.0, 1.0) } else { 1.0 };
        let (mut sum, mut length, mut bridged) = (0.0, 0.0, 0.0);
        for w in chain.points.windows(2) {
            let d = w[0].at.distance(w[1].at);
            length += d;
            if w[1].bridged {
                bridged += d;
            } else {
                sum += d * 0.5 * (share(w[0].strength) + share(w[1].strength));
            }
        }
        (if length > 0.0 { sum / length } else { 0.0 }, bridged)
    }
}
