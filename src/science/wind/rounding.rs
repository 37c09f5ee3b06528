//! The step directions and speeds were reported at, and what that does to the drift.

use crate::ground::{Method, Read, Source, Symbol, WindSample};

/// The correction for grouped directions.
pub const METHOD: Method = Method {
    id: "wind.direction-rounding",
    name: "Correction for rounded directions",
    question: "What does a compass of 16 points, or of tens of degrees, do to the drift?",
    formula: "R_c = R (δ/2)/sin(δ/2)",
    symbols: &[
        Symbol { symbol: "δ", meaning: "step of the reported directions", unit: "deg" },
        Symbol {
            symbol: "R, R_c",
            meaning: "resultant drift as reported, and corrected",
            unit: "vector units or kg m⁻¹ yr⁻¹",
        },
    ],
    assumptions: &["The true directions vary smoothly over a step, as weather does"],
    limits: &[
        "The direction of the resultant does not change; its length gains 0.1 % at 10°, 0.6 % at 22.5°, 2.6 % at 45°",
        "Spreading each flow over its step is no correction: grouping has widened the winds already, and spreading widens \
         them as much again (simulated: at 22.5° a ratio of 0.922 is reported as 0.916, corrected to 0.922, spread to 0.910)",
        "Winds held to one side of a step, as by a valley, stay off by up to δ/2",
    ],
    sources: &[
        Source {
            key: "batschelet1981",
            authors: "Batschelet, E.",
            year: 1981,
            title: "Circular Statistics in Biology (correction for grouping of the mean vector length)",
            published: "Academic Press, London",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-rounding",
            authors: "Ventifact",
            year: 2026,
            title: "Mean of e^{iθ} over a reporting step",
            published: "worked out for this program",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// How a record was rounded.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Rounding {
    /// Step of the directions, degrees; `None` when they lie on no grid.
    pub direction_deg: Option<f64>,
    /// Step of the speeds, m s⁻¹; `None` when they lie on no grid of half a metre per second or more.
    pub speed: Option<f64>,
    /// The unit the speeds are whole numbers of; empty without a step.
    pub speed_unit: &'static str,
    /// How much more sand the winds would move were their speeds spread evenly over their steps, as a
    /// share of the total.
    pub speed_gain: Option<f64>,
}

impl Rounding {
    /// Factor by which the resultant, and its ratio to the total, are too short; 1 where directions lie on
    /// no grid.
    pub fn grouping_factor(&self) -> f64 {
        self.direction_deg.map_or(1.0, grouping_factor)
    }
}

/// Steps in use, the coarsest first: a record in steps of 10° is in steps of 5° and 1° too.
const STEPS_DEG: [f64; 9] = [90.0, 45.0, 30.0, 22.5, 20.0, 10.0, 5.0, 2.0, 1.0];
/// Units whose whole numbers are coarse against a threshold, m s⁻¹.
const SPEED_STEPS: [(f64, &str); 3] = [(1.0, "m/s"), (1852.0 / 3600.0, "knots"), (0.447_04, "mph")];
/// Fewer values than this may lie on a grid by chance.
const FEWEST: usize = 50;
/// Share of values that must lie on it: a few corrections by hand are no refutation.
const ON_GRID: f64 = 0.995;
/// Points a speed is spread over.
const SPEED_POINTS: usize = 9;

/// Finds the steps of a checked record under `flux`, which turns a speed into sand.
pub fn rounding(kept: &[WindSample], flux: impl Fn(f64) -> f64) -> Rounding {
    let speeds = || kept.iter().filter_map(|s| s.speed).filter(|v| *v > 0.0);
    let found = SPEED_STEPS.into_iter().find(|(step, _)| {
        // A printed speed may be off by half its last place, and the factor of its unit is often cut.
        on_grid(speeds(), *step, 0.006, 2e-4)
    });
    let speed_gain = found.and_then(|(step, _)| {
        let plain: f64 = kept.iter().map(|s| flux(s.speed.unwrap_or(0.0)) * s.weight).sum();
        let spread = |v: f64| {
            let points = (0..SPEED_POINTS).map(|k| (k as f64 + 0.5) / SPEED_POINTS as f64 - 0.5);
            points.map(|at| flux((v + at * step).max(0.0))).sum::<f64>() / SPEED_POINTS as f64
        };
        let even: f64 = kept.iter().map(|s| spread(s.speed.unwrap_or(0.0)) * s.weight).sum();
        (plain > 0.0).then(|| even / plain - 1.0)
    });
    Rounding {
        direction_deg: direction_step(kept),
        speed: found.map(|(step, _)| step),
        speed_unit: found.map_or("", |(_, unit)| unit),
        speed_gain,
    }
}

/// The step the directions of the windy rows were reported at, degrees.
pub fn direction_step(kept: &[WindSample]) -> Option<f64> {
    let directions = || kept.iter().filter(|s| s.speed > Some(0.0)).filter_map(|s| s.from).map(|a| a.deg());
    STEPS_DEG.into_iter().find(|step| on_grid(directions(), *step, 0.01, 0.0))
}

fn on_grid(values: impl Iterator<Item = f64>, step: f64, slack: f64, relative: f64) -> bool {
    let (mut all, mut hits) = (0usize, 0usize);
    for value in values {
        all += 1;
        hits += usize::from((value - step * (value / step).round()).abs() <= slack + relative * value);
    }
    all >= FEWEST && hits as f64 >= ON_GRID * all as f64
}

/// Factor by which the resultant of directions in steps of `step_deg` was too short: R_c = R (δ/2)/sin(δ/2).
pub fn grouping_factor(step_deg: f64) -> f64 {
    let half = (0.5 * step_deg).to_radians();
    half / half.sin()
}

#[cfg(test)]
mod tests {
    use super::super::regime::Drift;
    use super::*;
    use crate::ground::{Azimuth, SandFlow, Seed};
    use rand::Rng as _;

    fn sample(line: u32, speed: f64, from: f64) -> WindSample {
        WindSample { line, time: None, speed: Some(speed), from: Some(Azimuth::from_deg(from)), weight: 1.0 }
    }

    /// Winds about a direction with a spread, and the same as an instrument of step `step` reports them.
    fn winds(step: f64) -> (Vec<WindSample>, Vec<WindSample>) {
        let mut stream = Seed(11).stream("rounding", 0);
        let plain: Vec<_> = (0..40_000)
            .map(|i| {
                // Four uniform numbers: smooth, so that nothing but the grouping shows.
                let swing = 40.0 * ((0..4).map(|_| stream.random::<f64>()).sum::<f64>() - 2.0);
                sample(i, 4.0 + 9.0 * stream.random::<f64>(), 203.0 + swing)
            })
            .collect();
        let reported = plain.iter().map(|s| {
            let deg = s.from.map_or(0.0, |a| a.deg());
            WindSample { from: Some(Azimuth::from_deg(step * (deg / step).round())), ..*s }
        });
        let reported = reported.collect();
        (plain, reported)
    }

    fn regime(winds: &[WindSample]) -> Vec<SandFlow> {
        let flow = |s: &WindSample| Some(SandFlow { toward: s.from?.reversed(), weight: 1.0 });
        winds.iter().filter_map(flow).collect()
    }

    /// The wrong way to mend it: each flow spread evenly over the step its direction stands for.
    fn spread(regime: &[SandFlow], step_deg: f64) -> Vec<SandFlow> {
        let m = step_deg.ceil().max(1.0) as usize;
        let parts = |flow: &SandFlow| {
            let (toward, weight) = (flow.toward, flow.weight / m as f64);
            (0..m).map(move |k| SandFlow {
                toward: toward.rotated(step_deg * ((k as f64 + 0.5) / m as f64 - 0.5)),
                weight,
            })
        };
        regime.iter().flat_map(parts).collect()
    }

    #[test]
    fn the_step_is_the_coarsest_that_fits() {
        for step in STEPS_DEG {
            assert_eq!(direction_step(&winds(step).1), Some(step), "{step}");
        }
        assert_eq!(direction_step(&winds(10.0).0), None);
        assert_eq!(direction_step(&winds(10.0).1[..FEWEST - 1]), None, "too few to tell");
    }

    /// The correction gives back the ratio of the winds before they were rounded; spreading does not.
    #[test]
    fn the_correction_undoes_the_rounding() {
        for step in [10.0, 22.5, 45.0] {
            let (plain, reported) = winds(step);
            let ratio = |flows: &[SandFlow]| Drift::of(flows, "u").ratio.unwrap_or(f64::NAN);
            let (truth, raw) = (ratio(&regime(&plain)), ratio(&regime(&reported)));
            let mended = grouping_factor(step) * raw;
            let spread = ratio(&spread(&regime(&reported), step));
            println!(
                "{step}°: true {truth:.5}, reported {raw:.5}, corrected {mended:.5}, spread {spread:.5}"
            );
            // The scatter of 40 000 rounding errors: δ/√12 · 0.4/√n, or 1.1e−5 for each degree.
            crate::assert_close!(mended, truth, 3e-5 * step, "corrected at {step}°");
            assert!((spread - truth).abs() > (raw - truth).abs(), "{step}°");
        }
    }

    #[test]
    fn whole_knots_are_seen_and_what_they_hide_is_counted() {
        let knot = 1852.0 / 3600.0;
        let winds: Vec<_> =
            (0..600).map(|i| sample(i, f64::from(i % 30) * knot, f64::from(i % 36) * 10.0)).collect();
        let cube = |v: f64| v.powi(3);
        let found = rounding(&winds, cube);
        assert_eq!((found.direction_deg, found.speed_unit), (Some(10.0), "knots"));
        // The mean of (v + x)³ over a step h is v³ + v h²/4 at midpoints of nine: h²/4 (1 − 1/81).
        let want = {
            let speeds = || (1..30).map(|k| f64::from(k) * knot);
            let gain: f64 = speeds().map(|v| 0.25 * v * knot * knot * (1.0 - 1.0 / 81.0)).sum();
            gain / speeds().map(|v| v.powi(3)).sum::<f64>()
        };
        crate::assert_close!(found.speed_gain.unwrap_or(f64::NAN), want, 2e-5, "gain");
        let fine: Vec<_> =
            winds.iter().map(|s| WindSample { speed: s.speed.map(|v| 0.37 * v + 0.013), ..*s }).collect();
        assert_eq!(rounding(&fine, cube).speed, None);
    }
}
