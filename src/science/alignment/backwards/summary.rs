//! What the posterior says and what it cannot say.

use crate::ground::Caution;

use super::evidence::{Cover, Observed};
use super::forks::fork_p;
use super::regimes::{BackwardsSettings, Regimes};

/// A run of whole degrees clockwise from `from_deg`, in [0, 360); `span_deg` in (0, 360].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Arc {
    pub from_deg: f64,
    pub span_deg: f64,
}

/// The shortest arcs that hold `mass` of a distribution over the whole degrees of the circle.
pub fn arcs(chances: &[f64], mass: f64) -> Vec<Arc> {
    let n = chances.len();
    let mut order: Vec<usize> = (0..n).collect();
    order.sort_by(|a, b| chances[*b].total_cmp(&chances[*a]).then(a.cmp(b)));
    let (mut inside, mut sum, mut level) = (vec![false; n], 0.0, f64::INFINITY);
    for k in order {
        // Degrees as likely as the last one taken come in together.
        if sum >= mass - 1e-9 && chances[k] < level * (1.0 - 1e-9) {
            break;
        }
        (inside[k], level) = (true, chances[k]);
        sum += chances[k];
    }
    let degree = 360.0 / n as f64;
    if inside.iter().all(|i| *i) {
        return vec![Arc { from_deg: 0.0, span_deg: 360.0 }];
    }
    let starts = (0..n).filter(|k| inside[*k] && !inside[(k + n - 1) % n]);
    starts
        .map(|k| {
            let length = (0..n).take_while(|m| inside[(k + m) % n]).count();
            // Each bin reaches half a degree to either side of its whole degree.
            Arc { from_deg: ((k as f64 - 0.5) * degree).rem_euclid(360.0), span_deg: length as f64 * degree }
        })
        .collect()
}

/// How far a distribution over equal bins is from an even one: Σ p log₂(p n), bits.
pub fn entropy_gain(chances: &[f64]) -> f64 {
    let n = chances.len() as f64;
    chances.iter().filter(|p| **p > 0.0).map(|p| p * (p * n).log2()).sum::<f64>().max(0.0)
}

/// Below this many bits the map has not moved.
const UNMOVED_BITS: f64 = 0.01;

/// ln of the likelihood lost against a perfect fit beyond which no regime counts as fitting: a miss of
/// about two and a half standard deviations.
const UNFIT: f64 = -3.0;

pub(super) fn cautions(observed: &[Observed], settings: &BackwardsSettings, found: &Regimes) -> Vec<Caution> {
    let mut said = Vec::new();
    let mut say = |code, text: String| said.push(Caution::new(code, text));
    if found.map_bits < UNMOVED_BITS {
        let why = match (observed.len(), settings.wind) {
            (0 | 1, None) => {
                "One trend with the wind's azimuth free says nothing about divergence and strength ratio: any regime can be turned to fit it. A wind azimuth, or a second population on other cover, would tell."
            }
            _ => "These trends say nothing about divergence and strength ratio beyond what was assumed.",
        };
        say("regimes-untold", why.into());
    }
    if observed.iter().all(|o| o.sense.is_none()) && settings.wind.is_none() {
        say(
            "sense-untold",
            "A trend has no sense: each drift and its opposite are equally likely until forks, tapering or obstacles tell them apart."
                .into(),
        );
    }
    if observed.iter().all(|o| o.cover == Cover::Unknown) {
        say(
            "cover-unknown",
            "Sand cover is not stated: growth on a bed and fingers on bare ground are held equally likely."
                .into(),
        );
    }
    if found.ln_fit < UNFIT {
        say(
            "no-regime-fits",
            "No regime of two winds makes all of this together: more winds, other cover or another time may have."
                .into(),
        );
    }
    for (sense, observed) in observed.iter().filter_map(|o| o.sense.map(|s| (s, o))) {
        let off = sense.toward.axis().separation(observed.axis);
        if off > 45.0 {
            say(
                "sense-across",
                format!(
                    "The stated sense toward {:.0}° lies {off:.0}° off the trend of {:.0}°: it says little about which way the crests grow.",
                    sense.toward.deg(),
                    observed.axis.deg()
                ),
            );
        }
        if let Some([with, against]) = sense.forks {
            let p = fork_p(with, against);
            if p > 0.05 || against >= with {
                say(
                    "forks-undecided",
                    format!(
                        "{with} forks for the stated sense and {against} against it are no sign of one (p = {p:.2})."
                    ),
                );
            }
        }
    }
    said
}
