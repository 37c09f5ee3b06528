//! From checked winds to sand flow: which way, how much, by sector and by season.

use std::collections::BTreeMap;

use crate::ground::{Azimuth, Method, Read, SandFlow, Source, Symbol, WindSample};

use super::coverage::season_of;

/// Resultant drift.
pub const METHOD: Method = Method {
    id: "wind.resultant-drift",
    name: "Resultant drift",
    question: "Where does the sand go on balance, and how much of its motion cancels?",
    formula: "Q = Σ qᵢ tᵢ;  R = |Σ qᵢ tᵢ e^{iθᵢ}|;  θ_R = arg Σ qᵢ tᵢ e^{iθᵢ};  ratio = R/Q",
    symbols: &[
        Symbol { symbol: "qᵢ", meaning: "flux of record i", unit: "vector units or kg m⁻¹ yr⁻¹" },
        Symbol { symbol: "tᵢ", meaning: "share of time of record i", unit: "1" },
        Symbol { symbol: "θᵢ", meaning: "azimuth the wind of record i blows toward", unit: "deg" },
    ],
    assumptions: &["Each record stands for an equal share of time, calms included"],
    limits: &["Sand supply, moisture and plants are not considered: potential drift"],
    sources: &[FRYBERGER],
};

/// The source of drift potentials and their resultant.
pub(super) const FRYBERGER: Source = Source {
    key: "fryberger1979",
    authors: "Fryberger, S. G.; Dean, G.",
    year: 1979,
    title: "Dune forms and wind regime",
    published: "A Study of Global Sand Seas, U.S. Geological Survey Professional Paper 1052, 137–169",
    locator: "",
    read: Read::Memory,
};

/// Totals of a list of flows. Without flow, `ratio` and `toward` are absent: no drift.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Drift {
    /// `"vector units (knots)"` or `"kg/m/yr"`.
    pub unit: &'static str,
    /// Sum over all directions.
    pub total: f64,
    /// Length of the vector sum.
    pub resultant: f64,
    pub ratio: Option<f64>,
    /// Where the sand goes.
    pub toward: Option<Azimuth>,
    /// Half width of the 95 % interval of `toward`, degrees; from the bootstrap.
    pub toward_ci95_half_deg: Option<f64>,
    pub ratio_ci95: Option<[f64; 2]>,
}

/// The drift of some months, as its part of the whole: the seasons add up to the total.
#[derive(Clone, Debug, PartialEq)]
pub struct Season {
    pub name: &'static str,
    pub drift: Drift,
}

/// Resultants shorter than this share of the total are rounding, not a direction.
const CANCELLED: f64 = 1e-9;

impl Drift {
    /// Sums flows in their order.
    pub fn of(flows: &[SandFlow], unit: &'static str) -> Self {
        let (mut total, mut east, mut north) = (0.0, 0.0, 0.0);
        for flow in flows {
            let (e, n) = flow.toward.east_north();
            total += flow.weight;
            east += flow.weight * e;
            north += flow.weight * n;
        }
        Self::of_sums([total, east, north], unit)
    }

    /// From the total and the vector sum, east and north.
    pub fn of_sums([total, east, north]: [f64; 3], unit: &'static str) -> Self {
        let resultant = f64::hypot(east, north);
        let moves = total > 0.0;
        Self {
            unit,
            total,
            resultant: if moves { resultant } else { 0.0 },
            ratio: moves.then(|| resultant / total),
            toward: (moves && resultant > CANCELLED * total).then(|| Azimuth::from_east_north(east, north)),
            ..Self::default()
        }
    }
}

/// The flow of each checked sample: `flux(speed)` times its share of time. Samples that would move
/// sand but have no direction are left out of both sums and returned by index.
pub fn flows(kept: &[WindSample], flux: impl Fn(f64) -> f64) -> (Vec<Option<SandFlow>>, Vec<usize>) {
    let mut lost = Vec::new();
    let mut time = 0.0;
    let mut flows: Vec<Option<SandFlow>> = kept
        .iter()
        .enumerate()
        .map(|(at, sample)| {
            let weight = flux(sample.speed.unwrap_or(0.0)) * sample.weight;
            if weight > 0.0 && sample.from.is_none() {
                lost.push(at);
                return None;
            }
            time += sample.weight;
            let toward = sample.from?.reversed();
            (weight > 0.0).then_some(SandFlow { toward, weight })
        })
        .collect();
    for flow in flows.iter_mut().flatten() {
        flow.weight /= time;
    }
    (flows, lost)
}

/// Flows gathered by equal direction, in order of azimuth: the exact regime of a record.
pub fn gathered(flows: &[Option<SandFlow>]) -> Vec<SandFlow> {
    // The bits of non-negative numbers sort as the numbers do.
    let mut by_direction: BTreeMap<u64, SandFlow> = BTreeMap::new();
    for flow in flows.iter().flatten() {
        by_direction
            .entry(flow.toward.deg().to_bits())
            .or_insert(SandFlow { toward: flow.toward, weight: 0.0 })
            .weight += flow.weight;
    }
    by_direction.into_values().collect()
}

/// Width of the sectors of roses and bootstrap draws, degrees.
pub const SECTOR_DEG: f64 = 5.0;
/// Number of sectors.
pub const SECTORS: usize = 72;

/// The sector of an azimuth; sector k is centred on 5k°.
pub(super) fn sector_of(toward: Azimuth) -> usize {
    (toward.deg() / SECTOR_DEG).round() as usize % SECTORS
}

/// Flow by sector, each at its centre; the weights add up to the total.
pub fn rose(regime: &[SandFlow]) -> Vec<SandFlow> {
    let mut rose: Vec<SandFlow> = (0..SECTORS)
        .map(|k| SandFlow { toward: Azimuth::from_deg(SECTOR_DEG * k as f64), weight: 0.0 })
        .collect();
    for flow in regime {
        rose[sector_of(flow.toward)].weight += flow.weight;
    }
    rose
}

/// The seasons by their months.
pub const SEASONS: [&str; 4] = ["Dec–Feb", "Mar–May", "Jun–Aug", "Sep–Nov"];

/// The four seasons of a record with a clock, by calendar months; empty without one.
pub fn seasons(kept: &[WindSample], flows: &[Option<SandFlow>], unit: &'static str) -> Vec<Season> {
    if kept.iter().any(|s| s.time.is_none()) {
        return Vec::new();
    }
    let mut parts: [Vec<Option<SandFlow>>; 4] = Default::default();
    for (sample, flow) in kept.iter().zip(flows) {
        if let Some(time) = sample.time {
            parts[usize::from(season_of(time))].push(*flow);
        }
    }
    SEASONS
        .into_iter()
        .zip(parts)
        .map(|(name, part)| Season { name, drift: Drift::of(&gathered(&part), unit) })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn sample(from: f64, speed: f64) -> WindSample {
        WindSample {
            line: 1,
            time: None,
            speed: Some(speed),
            from: Some(Azimuth::from_deg(from)),
            weight: 1.0,
        }
    }

    fn cube(speed: f64) -> f64 {
        (speed - 5.0).max(0.0).powi(3)
    }

    #[test]
    fn a_calm_record_has_no_drift() {
        let (flows, lost) = flows(&[sample(20.0, 1.0), sample(50.0, 0.0)], cube);
        let drift = Drift::of(&gathered(&flows), "u");
        assert!(lost.is_empty());
        assert_eq!((drift.total, drift.ratio, drift.toward), (0.0, None, None));
    }

    #[test]
    fn opposite_winds_move_sand_nowhere() {
        let (flows, _) = flows(&[sample(0.0, 9.0), sample(180.0, 9.0)], cube);
        let drift = Drift::of(&gathered(&flows), "u");
        assert!(drift.total > 0.0 && drift.toward.is_none());
    }

    #[test]
    fn a_strong_wind_without_direction_is_not_counted_as_calm() {
        let blind = WindSample { from: None, ..sample(0.0, 9.0) };
        let weak = WindSample { from: None, ..sample(0.0, 2.0) };
        let (flows, lost) = flows(&[sample(0.0, 9.0), blind, weak], cube);
        assert_eq!(lost, vec![1]);
        assert_eq!(flows[0].map(|f| f.weight), Some(cube(9.0) / 2.0));
    }

    proptest! {
        #[test]
        fn turning_all_winds_turns_the_drift(turn in 0.0..360.0f64, winds in prop::collection::vec((0.0..360.0f64, 0.0..20.0f64), 1..40)) {
            let plain: Vec<_> = winds.iter().map(|(d, v)| sample(*d, *v)).collect();
            let turned: Vec<_> = winds.iter().map(|(d, v)| sample(d + turn, *v)).collect();
            let a = Drift::of(&gathered(&flows(&plain, cube).0), "u");
            let b = Drift::of(&gathered(&flows(&turned, cube).0), "u");
            prop_assert!((a.total - b.total).abs() <= 1e-9 * a.total);
            if let (Some(p), Some(q)) = (a.toward, b.toward) && a.ratio > Some(1e-3) {
                prop_assert!(q.rotated(-turn).turn_from(p).abs() < 1e-6);
            }
        }

        #[test]
        fn weights_are_repeated_rows(winds in prop::collection::vec((0.0..360.0f64, 0.0..20.0f64, 1usize..4), 1..20)) {
            let weighted: Vec<_> = winds.iter().map(|(d, v, k)| WindSample { weight: *k as f64, ..sample(*d, *v) }).collect();
            let repeated: Vec<_> = winds.iter().flat_map(|(d, v, k)| std::iter::repeat_n(sample(*d, *v), *k)).collect();
            let a = Drift::of(&gathered(&flows(&weighted, cube).0), "u");
            let b = Drift::of(&gathered(&flows(&repeated, cube).0), "u");
            prop_assert!((a.total - b.total).abs() <= 1e-12 * a.total.max(1.0));
            prop_assert!((a.resultant - b.resultant).abs() <= 1e-12 * a.total.max(1.0));
        }

        #[test]
        fn sectors_keep_the_total(winds in prop::collection::vec((0.0..360.0f64, 0.0..20.0f64), 1..40)) {
            let samples: Vec<_> = winds.iter().map(|(d, v)| sample(*d, *v)).collect();
            let regime = gathered(&flows(&samples, cube).0);
            let total = Drift::of(&regime, "u").total;
            let sum: f64 = rose(&regime).iter().map(|f| f.weight).sum();
            prop_assert!((sum - total).abs() <= 1e-12 * total.max(1.0));
        }
    }
}
