//! An invented bedform pattern of Sorrel Reach: crests of the long dunes with ends, forks and gaps, its scales and
//! populations, what would have been seen, and a second picture of it.

use ventifact::ground::{Axis, Azimuth, Caution, LengthUnit, LocalFrame, Point, Polyline, Work};
use ventifact::science::axial::two_samples::{AxesCompared, AxesTest};
use ventifact::science::crest::{
    self, CrestLine, CrestModel, CrestOrigin, End, Fit, Junction, Shift, ShiftChance,
};
use ventifact::study::{
    ComparisonFinding, CrestsFinding, Id, LightFinding, PatternFinding, PlateauFinding, PopulationFinding,
    PopulationSource, RecoveredTrend, RecoveryFinding, RefitFinding, ScaleFinding, SpectrumFinding,
};

use super::sorrel::{Reach, peak, trend, verdict};

/// A number in [0, 1) that looks random and is the same each time.
fn chance(a: usize, b: usize) -> f64 {
    let mut h =
        (a as u64).wrapping_mul(0x9E37_79B9_7F4A_7C15) ^ (b as u64).wrapping_mul(0xD1B5_4A32_D192_ED03);
    h ^= h >> 29;
    h = h.wrapping_mul(0xBF58_476D_1CE4_E5B9);
    h ^= h >> 32;
    (h >> 11) as f64 / (1u64 << 53) as f64
}

fn frame(reach: &Reach) -> LocalFrame {
    reach.place.local_frame(Point::new(600.0, 450.0)).expect("a frame")
}

/// The place `along` metres along crest number `k` of the reach, in pixels.
fn on_crest(frame: &LocalFrame, k: f64, along: f64) -> Point {
    let trend = Axis::from_deg(84.0);
    let (t, n) = (trend.azimuth().east_north(), trend.perpendicular().azimuth().east_north());
    let across = 650.0 * (k - 0.35 * (along / 5100.0).sin()) + 40.0 * (along / 1900.0 + 2.1 * k).sin();
    let (x, y) = frame.pixel(along * t.0 + across * n.0, along * t.1 + across * n.1);
    Point::new(x, y)
}

fn line(points: Vec<Point>, ends: [End; 2], n: usize) -> CrestLine {
    let origin = match n % 11 {
        3 => CrestOrigin::Edited,
        6 => CrestOrigin::Drawn,
        9 => CrestOrigin::Imported,
        _ => CrestOrigin::Traced,
    };
    CrestLine {
        line: Polyline(points),
        confidence: 0.25 + 0.75 * chance(n, 17),
        ends,
        bridged_px: 6.0 * chance(n, 3),
        model: CrestModel::BrightRidge,
        origin,
        accepted: n.is_multiple_of(5),
        by_hand_px: if origin == CrestOrigin::Traced { 0.0 } else { 40.0 },
    }
}

/// Crests inside the outline, broken here and there; some ends run into the next crest.
fn lines(reach: &Reach) -> (Vec<CrestLine>, Vec<Junction>) {
    let frame = frame(reach);
    let (step, mut lines, mut joins) = (120.0, Vec::new(), Vec::new());
    for k in -60..60 {
        let mut run: Vec<Point> = Vec::new();
        let mut began = End::Border;
        for i in -400..400 {
            let (at, n) = (on_crest(&frame, f64::from(k), step * f64::from(i)), lines.len());
            let breaks = chance((k + 100) as usize, (i + 1000) as usize) < 0.012;
            let inside = reach.outline.contains(at);
            if inside && !breaks {
                run.push(at);
                continue;
            }
            if run.len() > 3 {
                let ends = [began, if inside { End::Free } else { End::Border }];
                if inside && chance(n, 5) < 0.55 {
                    joins.push((n, k, i));
                }
                lines.push(line(std::mem::take(&mut run), ends, n));
            }
            run.clear();
            began = if inside { End::Free } else { End::Border };
        }
    }
    let mut junctions = Vec::new();
    for (n, k, i) in joins {
        let toward = if chance(n, 8) < 0.8 { 1 } else { -1 };
        let at = on_crest(&frame, f64::from(k + toward), step * f64::from(i + 9));
        let through = lines.iter().position(|l| l.line.nearest(at).is_some_and(|p| p.distance < 4.0));
        let Some(through) = through.filter(|t| *t != n) else { continue };
        for j in 1..=9 {
            let share = f64::from(j) / 9.0;
            let across = f64::from(k) + f64::from(toward) * share.powf(1.4);
            lines[n].line.0.push(on_crest(&frame, across, step * f64::from(i + j)));
        }
        lines[n].ends[1] = End::Junction;
        junctions.push(Junction { at, through, branches: vec![(n, 1)] });
    }
    (lines, junctions)
}

/// Crests of the long dunes with all numbers as the methods give them.
pub fn crests(reach: &Reach) -> CrestsFinding {
    let (lines, junctions) = lines(reach);
    let frame = frame(reach);
    let numbers = crest::numbers(&lines, &reach.outline, frame);
    let transects = crest::SpacingSettings { step: 400.0, longest: 30_000.0, own_beyond: 900.0 };
    let spacing = crest::spacing(&lines, &reach.outline, frame, transects, &Work::quiet()).expect("spacing");
    let defects = crest::defects(&lines, &junctions, numbers.total_length, spacing.quartiles[1]);
    let toward = Axis::from_deg(84.2).azimuth();
    let forks = crest::forks(&lines, &junctions, frame, toward, 900.0);
    CrestsFinding {
        model: CrestModel::BrightRidge,
        fits: vec![Fit { model: CrestModel::BrightRidge, skewness: 0.84 }],
        scale_px: 4.2,
        factor: 1.0,
        rose: crest::length_rose(&lines, frame, 10.0),
        rose_bin_deg: 10.0,
        forks: Some(forks),
        forks_toward: Some(toward),
        spacings: [Some(650.0), spacing.quartiles[1], spacing.stereology],
        lost_edits: Vec::new(),
        cautions: vec![Caution::new(
            "bridged-crests",
            "3 of 74 crests are bridged over more than a quarter of their length: ends may be missing.",
        )],
        lines,
        junctions,
        numbers,
        spacing,
        defects,
    }
}

/// Two populations, superposed: short crests of 172° on long ones of 84°.
pub fn pattern(reach: &Reach) -> PatternFinding {
    let scales: Vec<ScaleFinding> = (0..16)
        .map(|i| {
            let scale_px = 1.0 * 1.3f64.powi(i);
            let [fine, coarse] =
                [1.6, 18.0].map(|at: f64| (-0.5 * ((scale_px / at).ln() / 0.5).powi(2)).exp());
            let axis = if fine > coarse {
                172.0 + 14.0 * chance(i as usize, 2)
            } else {
                83.0 + 4.0 * chance(i as usize, 4)
            };
            ScaleFinding {
                scale_px,
                spacing: 6.0 * 25.0 * scale_px,
                coherence: 0.05 + 0.34 * fine + 0.62 * coarse,
                share: 0.1 + 0.8 * fine.max(coarse),
                axis: Some(Axis::from_deg(axis)),
                resultant_length: 0.15 + 0.75 * fine.max(coarse),
            }
        })
        .collect();
    let plateau = |scales, deg, resultant_length, scale_px| PlateauFinding {
        scales,
        axis: Axis::from_deg(deg),
        resultant_length,
        scale_px,
    };
    let population = |name: &str, weight, deg, spacing: Option<f64>| PopulationFinding {
        name: name.into(),
        source: PopulationSource::Scale,
        weight,
        trend: trend(deg, 11.0),
        spacing,
        spacing_ci95: spacing.map(|s| [0.94 * s, 1.07 * s]),
        crests: Ok(crests(reach)),
        verdicts: vec![verdict()],
        cautions: Vec::new(),
    };
    PatternFinding {
        plateaus: vec![plateau([0, 4], 178.0, 0.71, 1.7), plateau([8, 13], 84.6, 0.88, 17.9)],
        scales,
        populations: vec![
            population("Long dunes", 0.68, 84.2, Some(650.0)),
            PopulationFinding {
                verdicts: Vec::new(),
                spacing: None,
                spacing_ci95: None,
                crests: Err("no bedforms are claimed here".into()),
                ..population("Cross ripples on their flanks", 0.32, 176.4, Some(212.0))
            },
        ],
        light: Some(LightFinding {
            from: Azimuth::from_deg(352.0),
            from_bias_deg: Some(2.2),
            by_light: [1.0 / 3.0, 0.5],
            suspect: true,
            refit: Some(RefitFinding { axis: Axis::from_deg(86.0), resultant_length: 0.77, turn_deg: 1.8 }),
            near_light: [0.04, 0.22],
        }),
    }
}

/// Trends near the light are missed, the others drawn toward light + 90°.
pub fn recovery() -> RecoveryFinding {
    let trends = (0..18)
        .map(|i| {
            let deg = 10.0 * f64::from(i);
            let off = Axis::from_deg(deg).turn_from(Axis::from_deg(172.0)).to_radians();
            let found = (8.0 * (1.35 * off.sin().abs() - 0.2).clamp(0.0, 1.0)).round() as u32;
            let p = f64::from(found) / 8.0;
            RecoveredTrend {
                trend: Axis::from_deg(deg),
                tries: 8,
                found,
                probability_ci95: wilson(p, 8.0),
                bias_deg: (found > 0).then(|| 4.0 * (2.0 * off).sin()),
                spread_deg: (found > 1).then_some(2.5 + 3.0 * (1.0 - p)),
                share: 0.7 * p,
                resultant_length: 0.2 + 0.6 * p,
            }
        })
        .collect();
    RecoveryFinding {
        patch: Id(2),
        name: "Long dunes".into(),
        fingerprint: "c2a7".into(),
        unit: LengthUnit::Metre,
        light_from: Some(Azimuth::from_deg(352.0)),
        spacing: 650.0,
        height: 32.0,
        tone_per_slope: 1.4,
        defects: 0.1,
        spread_deg: 7.0,
        window_px: 256,
        trends,
        uniform_resultant: 0.38,
        uniform_weighted: [0.33, 0.49],
        uniform_axis: Some(Axis::from_deg(82.0)),
        missed: vec![[146.0, 201.0]],
        corrected: Some(RefitFinding { axis: Axis::from_deg(85.1), resultant_length: 0.74, turn_deg: 0.9 }),
        sentence: "Trends between 146° and 21° would have been missed here.".into(),
        cautions: Vec::new(),
    }
}

fn wilson(p: f64, n: f64) -> [f64; 2] {
    let z = 1.96f64;
    let middle = (p + z * z / (2.0 * n)) / (1.0 + z * z / n);
    let half = z / (1.0 + z * z / n) * (p * (1.0 - p) / n + z * z / (4.0 * n * n)).sqrt();
    [middle - half, middle + half]
}

/// The same dunes eleven years later under another look.
pub fn comparison(reach: &Reach) -> ComparisonFinding {
    let (lines, _) = lines(reach);
    let moves: Vec<f32> = (0..900)
        .map(|i| {
            let u = (f64::from(i) + 0.5) / 900.0;
            (14.0 + 9.0 * (u / (1.0 - u)).ln()) as f32
        })
        .collect();
    let test = |name, statistic, p, remark: &str| AxesTest {
        method: "axial.watson-two",
        name,
        statistic,
        p,
        remark: remark.into(),
    };
    ComparisonFinding {
        id: Id(21),
        name: "Long dunes, then and now".into(),
        fingerprint: "77aa".into(),
        patch: Id(2),
        patch_name: "Long dunes".into(),
        rasters: [Id(1), Id(9)],
        raster_names: ["Sorrel Reach mosaic".into(), "Sorrel Reach, second look".into()],
        unit: LengthUnit::Metre,
        overlap: 0.93,
        light_from: [Some(Azimuth::from_deg(352.0)), Some(Azimuth::from_deg(48.0))],
        years: Some(11.3),
        trends: [trend(84.2, 14.0), trend(79.6, 16.0)],
        looks: None,
        axes: AxesCompared {
            pairs: Some((351, 33.4)),
            n: [412, 388],
            n_eff: [38.2, 35.7],
            means: [Some(Axis::from_deg(84.2)), Some(Axis::from_deg(79.6))],
            difference_deg: Some(-4.6),
            difference_ci95_deg: Some([-9.4, 0.3]),
            tests: vec![
                test("Watson’s two-sample U²", 0.121, 0.19, "spreads differ, so means alone are not compared"),
                test("Watson–Williams F", 3.4, 0.069, "needs equal concentrations"),
                test("Mardia–Watson–Wheeler W", 3.1, 0.21, ""),
            ],
            differ: false,
        },
        crests: [lines.clone(), lines],
        shift: Ok(Shift {
            matched: 1840,
            share: 0.81,
            toward: Azimuth::from_deg(174.0),
            median: 14.0,
            ci95: [9.1, 18.7],
            quartiles: [4.0, 24.0],
            crests: 61,
            arrows: Vec::new(),
            vector: None,
            alternatives: vec![-631.0],
            chance: Some(ShiftChance { share: 0.34, p: 0.002 }),
            moves,
        }),
        sentence: "The trends do not differ (Watson’s U², p = 0.19); crests moved 14 m (9–19) toward 174° in 11.3 years."
            .into(),
        cautions: Vec::new(),
    }
}

/// A peak that agrees with the crests.
pub fn spectrum() -> SpectrumFinding {
    peak(650.0)
}
