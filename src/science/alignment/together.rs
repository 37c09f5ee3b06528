//! Several trends judged together: the same theory, under the same winds, made them all.

use crate::ground::{Method, Read, Source, Symbol};

use super::foresight::Foresight;
use super::judge::{TrendEvidence, VerdictSettings};
use super::likelihood::{Weighing, ln_bayes_factor, posteriors};
use super::theory::Theory;

/// The joint weighing.
pub const METHOD: Method = Method {
    id: "alignment.together",
    name: "Patches judged together",
    question: "Which one theory do all trends under the same winds speak for?",
    formula: "BF = mean_d Π_j 2π [(1 − ε) f(D_jd) + ε/(2π)];  supply: ln BF(bed instability) − ln BF(fingering), by patch",
    symbols: &[
        Symbol { symbol: "d", meaning: "draw of the wind record, the same for all trends", unit: "1" },
        Symbol { symbol: "j", meaning: "trend: a patch, or one population of it", unit: "1" },
        Symbol { symbol: "f, ε, D", meaning: "as in the Bayes factor of one trend", unit: "1" },
    ],
    assumptions: &[
        "The trends err independently once the winds are given",
        "All were made by the winds of the record",
    ],
    limits: &[
        "Patches with much sand and patches with little may follow different theories: read the supply column",
    ],
    sources: &[Source {
        key: "ventifact-together",
        authors: "Ventifact",
        year: 2026,
        title: "Bayes factor of several axes under shared draws",
        published: "derived here",
        locator: "",
        read: Read::Derived,
    }],
};

/// The joint weights.
#[derive(Clone, Debug, PartialEq)]
pub struct Joint {
    /// ln of the Bayes factor of each theory against random axes, in the order of [`Theory::ALL`], then
    /// the random axes.
    pub ln_bayes_factors: Vec<f64>,
    pub posteriors: Vec<f64>,
    /// For each trend, ln of the factor by which bed instability is better than fingering: above 0 for
    /// full cover, below for starved ground.
    pub supply: Vec<f64>,
}

/// Weighs the theories by several trends under one record.
pub fn together(trends: &[TrendEvidence], foresight: &Foresight, settings: &VerdictSettings) -> Joint {
    let weighings: Vec<Weighing> = trends.iter().map(|t| t.weighing(settings)).collect();
    let mut factors: Vec<f64> =
        foresight.clouds.iter().map(|cloud| ln_bayes_factor(&weighings, cloud)).collect();
    factors.push(0.0);
    let weighed = foresight.clouds.iter().map(|cloud| cloud.iter().any(Option::is_some)).chain([true]);
    let priors: Vec<f64> =
        settings.priors.iter().zip(weighed).map(|(prior, any)| if any { *prior } else { 0.0 }).collect();
    let cloud = |theory| {
        let at = Theory::ALL.iter().position(|t| *t == theory).unwrap_or_default();
        &foresight.clouds[at]
    };
    let (full, starved) = (cloud(Theory::BedInstability), cloud(Theory::Fingering));
    let supply = |w: &Weighing| ln_bayes_factor(&[*w], full) - ln_bayes_factor(&[*w], starved);
    Joint {
        posteriors: posteriors(&priors, &factors),
        ln_bayes_factors: factors,
        supply: weighings.iter().map(supply).collect(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Axis, Azimuth, Regime, SandFlow, Seed, Work};
    use crate::science::alignment::foresight::{FluxUp, foresee};

    /// Two winds 110° apart: fingers lie near 42°, bed instability near 66°.
    fn foreseen() -> Foresight {
        let flow = |deg, weight| SandFlow { toward: Azimuth::from_deg(deg), weight };
        let regime = Regime { all: vec![flow(0.0, 1.6), flow(110.0, 1.0)], ..Regime::default() };
        foresee(&regime, &[], FluxUp { ratio: 1.6, doubt: 1.0 }, Seed(1), &Work::quiet())
            .expect("not stopped")
    }

    fn trend(deg: f64) -> TrendEvidence {
        TrendEvidence { axis: Axis::from_deg(deg), kappa_mean: 400.0, half_ci: 3.0 }
    }

    #[test]
    fn two_trends_that_agree_say_it_louder_than_one() {
        let at = Theory::ALL.iter().position(|t| *t == Theory::Fingering).expect("listed");
        let one = together(&[trend(43.0)], &foreseen(), &VerdictSettings::default());
        let two = together(&[trend(43.0), trend(41.0)], &foreseen(), &VerdictSettings::default());
        assert!(two.ln_bayes_factors[at] > one.ln_bayes_factors[at] + 1.0);
        assert!(two.posteriors[at] > one.posteriors[at]);
    }

    #[test]
    fn the_supply_tells_covered_from_starved_ground() {
        let joint = together(&[trend(43.0), trend(66.0)], &foreseen(), &VerdictSettings::default());
        assert!(joint.supply[0] < -1.5 && joint.supply[1] > 1.5, "{:?}", joint.supply);
        crate::assert_close!(joint.posteriors.iter().sum::<f64>(), 1.0, 1e-12, "posteriors");
    }
}
