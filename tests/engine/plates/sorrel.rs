//! Invented findings from Sorrel Reach on Halvane, as a run would return them.

use ventifact::ground::{Affine, Axis, Azimuth, Body, Caution, Frame, Grid, LengthUnit, Place};
use ventifact::ground::{Point, Polygon, Projection, SandFlow};
use ventifact::plate::Recipe;
use ventifact::plate::map::{Picture, toned};
use ventifact::study::{
    BuildingFinding, SpectrumPicture, TheoryFinding, Tone, TrendFinding, VerdictFinding, WindFinding,
};
use ventifact::study::{
    DriftFinding, Id, ModeFinding, Node, PatchFinding, PatternFinding, RasterFinding, SpectrumFinding,
};

/// A trend about `axis` with the given spread of the rose.
pub fn trend(axis: f64, spread: f64) -> TrendFinding {
    let density: Vec<f64> = (0..180)
        .map(|deg| {
            let d = Axis::from_deg(f64::from(deg)).separation(Axis::from_deg(axis));
            (-0.5 * (d / spread).powi(2)).exp() + 0.02
        })
        .collect();
    let total: f64 = density.iter().sum();
    let density: Vec<f64> = density.iter().map(|d| d / total).collect();
    TrendFinding {
        defined: true,
        axis: Some(Axis::from_deg(axis)),
        ci95_half_deg: Some(3.4),
        ci95_source: "block bootstrap",
        resultant_length: 0.83,
        resultant_length_all: 0.79,
        kappa_doubled: Some(3.3),
        spread_deg: Some(spread),
        n: 412,
        n_all: 520,
        n_eff: 38.2,
        correlation_length: Some(910.0),
        rayleigh_p: Some(2e-12),
        modes: vec![ModeFinding { axis: Axis::from_deg(axis), weight: 1.0, kappa_doubled: 3.3 }],
        rose: density.chunks(10).map(|bin| bin.iter().sum()).collect(),
        rose_bin_deg: 10.0,
        density,
        gradient_scale_px: 1.5,
        integration_scale_px: 6.0,
        node_step_px: 6.0,
        coherence_floor: 0.31,
        ..TrendFinding::default()
    }
}

/// No claim: a nearly flat rose.
pub fn no_trend() -> TrendFinding {
    TrendFinding {
        defined: false,
        axis: None,
        ci95_half_deg: None,
        resultant_length: 0.07,
        resultant_length_all: 0.03,
        n_eff: 29.0,
        rayleigh_p: Some(0.61),
        ..trend(40.0, 60.0)
    }
}

pub fn flow() -> Vec<SandFlow> {
    (0..72)
        .map(|i| {
            let toward = Azimuth::from_deg(f64::from(i) * 5.0);
            let lobe = |at: f64, width: f64| {
                (-0.5 * (toward.turn_from(Azimuth::from_deg(at)) / width).powi(2)).exp()
            };
            SandFlow { toward, weight: 3.0 * lobe(48.0, 14.0) + 1.9 * lobe(131.0, 18.0) + 0.03 }
        })
        .collect()
}

pub fn drift() -> DriftFinding {
    DriftFinding {
        unit: "kg/m/yr",
        total: 5120.0,
        resultant: 3230.0,
        ratio: Some(0.63),
        toward: Some(Azimuth::from_deg(79.0)),
        toward_ci95_half_deg: Some(7.0),
        ratio_ci95: Some([0.57, 0.69]),
    }
}

pub fn cloud(centre: f64, spread: f64) -> Vec<f32> {
    (0..200)
        .map(|i| {
            let u = (f64::from(i) + 0.5) / 200.0;
            (centre + spread * (u / (1.0 - u)).ln() * 0.55) as f32
        })
        .collect()
}

pub fn verdict() -> VerdictFinding {
    let theory = |name, method, axis: Option<f64>, spread, prior, posterior, ln| TheoryFinding {
        name,
        method,
        extends: method == "alignment.along",
        toward: None,
        strength: axis.map(|_| 0.5),
        equivalence: None,
        axis: axis.map(Axis::from_deg),
        ties: Vec::new(),
        spread_deg: axis.map(|_| spread),
        prior,
        posterior,
        ln_bayes_factor: ln,
        cloud_deg: axis
            .map_or(Vec::new(), |a| cloud(Axis::from_deg(a).separation(Axis::from_deg(79.0)), spread)),
    };
    VerdictFinding {
        winds: Id(4),
        winds_name: "Sorrel mast".into(),
        refused: None,
        toward: Some(Azimuth::from_deg(79.0)),
        ratio: Some(0.63),
        obliquity_deg: Some(5.2),
        obliquity_ci95_deg: Some([0.9, 12.8]),
        probabilities: Some([0.957, 0.043, 0.0]),
        class_priors: [1.0 / 6.0, 2.0 / 3.0, 1.0 / 6.0],
        theories: vec![
            theory("along the resultant", "alignment.along", Some(79.0), 4.0, 0.25, 0.82, 2.6),
            theory(
                "transverse to the resultant",
                "alignment.transverse",
                Some(169.0),
                4.0,
                0.25,
                0.006,
                -2.3,
            ),
            theory(
                "gross bedform-normal transport",
                "alignment.gross-normal",
                Some(141.0),
                9.0,
                0.25,
                0.03,
                -0.7,
            ),
            theory("random axis", "", None, 0.0, 0.25, 0.144, 0.0),
        ],
        elongation: None,
        building: BuildingFinding { extended: 0.82, crossed: 0.036, random: 0.144, stated: 0.0 },
        supply_ln: None,
        growth_ratio: None,
        migration: Vec::new(),
        flips: Vec::new(),
        alignment_strength: Some(0.29),
        cautions: Vec::new(),
    }
}

/// A peak across an axis of 84° at `spacing` metres, on 25 m pixels.
pub fn peak(spacing: f64) -> SpectrumFinding {
    let (size, edge) = (129usize, 0.02);
    let normal = Axis::from_deg(84.0).perpendicular().azimuth();
    let (e, n) = normal.east_north();
    let log_ratio = Grid::from_fn(size, size, |col, row| {
        let f = |i: usize| (i as f64 - 64.0) / 64.0 * edge;
        let (x, y) = (f(col), -f(row));
        let bump = |sign: f64| {
            let (dx, dy) = (x - sign * e / spacing, y - sign * n / spacing);
            let (across, along) = (dx * e + dy * n, dx * n - dy * e);
            1.6 * (-0.5 * ((across / 0.0005).powi(2) + (along / 0.0007).powi(2))).exp()
        };
        let ripple = 0.12 * ((col * 37 + row * 91) % 17) as f64 / 17.0;
        (bump(1.0) + bump(-1.0) + ripple) as f32
    });
    let profile = (0..60)
        .map(|i| {
            let wavelength = 100.0 * 40f64.powf(f64::from(i) / 59.0);
            let bump = 34.0 * (-0.5 * ((wavelength / spacing).ln() / 0.12).powi(2)).exp();
            [wavelength, bump + 0.8 + 0.3 * f64::from(i * 7 % 5) / 5.0]
        })
        .collect();
    SpectrumFinding {
        defined: true,
        axis: Some(Axis::from_deg(84.0)),
        axis_ci95_half_deg: Some(2.2),
        spacing: Some(spacing),
        spacing_ci95: Some([0.95 * spacing, 1.06 * spacing]),
        p: Some(3e-9),
        spread_deg: Some(7.0),
        windows: 14,
        windows_with_peak: 12,
        window_px: 256,
        cycles: Some(9.8),
        picture: Some(SpectrumPicture { log_ratio, edge_frequency: edge }),
        profile,
    }
}

pub fn refused() -> VerdictFinding {
    VerdictFinding {
        refused: Some(
            "The record holds no wind above the threshold, so there is no drift to compare with.".into(),
        ),
        theories: Vec::new(),
        probabilities: None,
        obliquity_deg: None,
        obliquity_ci95_deg: None,
        ..verdict()
    }
}

pub fn two_trends() -> TrendFinding {
    let mode = |deg, weight| ModeFinding { axis: Axis::from_deg(deg), weight, kappa_doubled: 7.2 };
    TrendFinding { modes: vec![mode(12.0, 0.31), mode(96.0, 0.69)], ..trend(96.0, 20.0) }
}

/// The plain of Sorrel Reach on Halvane: long dunes that part round an outcrop, 25 m pixels, a
/// raster turned by its projection, a gap in the upper left corner.
pub struct Reach {
    pub place: Place,
    pub picture: Picture,
    pub outline: Polygon,
    pub plain: Polygon,
    pub size: [f64; 2],
}

pub fn points(list: &[(f64, f64)]) -> Vec<Point> {
    list.iter().map(|(x, y)| Point::new(*x, *y)).collect()
}

pub fn reach() -> Reach {
    let body = Body::halvane();
    let projection =
        Projection::new("+proj=stere +lat_0=12 +lon_0=40 +R=1420000", body.shape).expect("stere");
    let (sin, cos) = 20f64.to_radians().sin_cos();
    let affine =
        Affine { a: 25.0 * cos, b: 25.0 * sin, c: 90_000.0, d: 25.0 * sin, e: -25.0 * cos, f: 60_000.0 };
    let place = Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, body).expect("a place");
    let frame = place.local_frame(Point::new(600.0, 450.0)).expect("a frame");
    let mut grid = Grid::from_fn(600, 450, |col, row| {
        let (east, north) = frame.ground(2.0 * col as f64, 2.0 * row as f64);
        let across = Axis::from_deg(84.0).perpendicular().azimuth().east_north();
        let phase = (east * across.0 + north * across.1) / 650.0 + 0.35 * (east / 5100.0).sin();
        let speckle = ((col * 7919 + row * 104_729) % 1013) as f64 / 1013.0;
        ((std::f64::consts::TAU * phase).cos() + 1.6 * speckle) as f32
    });
    grid.mask_where(|col, row| col + 2 * row > 130);
    let picture = toned(&grid, &Tone::default());
    let outline = Polygon {
        outer: points(&[(300.0, 260.0), (820.0, 200.0), (940.0, 480.0), (700.0, 700.0), (330.0, 620.0)]),
        holes: vec![points(&[(560.0, 400.0), (660.0, 400.0), (670.0, 490.0), (570.0, 500.0)])],
    };
    let plain = Polygon {
        outer: points(&[(980.0, 560.0), (1160.0, 540.0), (1170.0, 840.0), (960.0, 820.0)]),
        holes: vec![],
    };
    Reach { place, picture, outline, plain, size: [1200.0, 900.0] }
}

pub fn nodes(outline: &Polygon) -> Vec<Node> {
    let mut nodes = Vec::new();
    for row in 0..60 {
        for col in 0..80 {
            let at = Point::new(col as f64 * 15.0 + 7.0, row as f64 * 15.0 + 7.0);
            if outline.contains(at) {
                let wobble = 9.0 * ((at.x / 90.0).sin() + (at.y / 70.0).cos());
                let coherence = 0.35 + 0.6 * ((col * 13 + row * 7) % 11) as f64 / 11.0;
                let significant = (col + row) % 7 != 0;
                nodes.push(Node { at, axis: Axis::from_deg(84.0 + wobble), coherence, significant });
            }
        }
    }
    nodes
}

pub fn raster_finding() -> RasterFinding {
    RasterFinding {
        id: Id(1),
        name: "Sorrel Reach mosaic".into(),
        path: "sorrel.tif".into(),
        width: 1200,
        height: 900,
        bands: 1,
        sample: "u8".into(),
        pixel_m: Some([25.1, 25.1]),
        body: "Halvane".into(),
        projection: "+proj=stere +lat_0=12 +lon_0=40 +R=1420000".into(),
        nodata: None,
        valid_fraction: Some(0.98),
        cautions: Vec::new(),
    }
}

pub fn wind_finding() -> WindFinding {
    WindFinding {
        id: Id(4),
        name: "Sorrel mast".into(),
        rows: 17_520,
        used: 17_388,
        calm: 611,
        set_aside: Vec::new(),
        span: Some([0, 63_072_000]),
        interval_s: Some(3600.0),
        fryberger: None,
        flux: drift(),
        law: "Kok et al. 2012".into(),
        threshold_ustar: 0.19,
        threshold_speed_at_height: 4.4,
        rose: flow(),
        seasons: Vec::new(),
        storm_speed: Some(9.1),
        season: None,
        sensitivity: Vec::new(),
        cautions: vec![Caution::new(
            "short-record",
            "The wind record spans two years; the dunes may be older than its winds.",
        )],
        sand: None,
        calendar: None,
        thinning: None,
        rounding: Default::default(),
        gusts: None,
    }
}

pub fn patch_finding(reach: &Reach) -> PatchFinding {
    let mut trend = trend(84.2, 14.0);
    trend.nodes = nodes(&reach.outline);
    PatchFinding {
        id: Id(2),
        name: "Long dunes".into(),
        raster: Id(1),
        fingerprint: "9b1d0c44e2f7a6".into(),
        unit: LengthUnit::Metre,
        area: 152.4e6,
        valid_fraction: 0.998,
        centre: reach.place.lonlat_of(Point::new(620.0, 450.0)),
        trend,
        spectrum: peak(650.0),
        verdicts: vec![verdict()],
        backwards: None,
        sentence: "Long dunes trend 84.2° ± 3.4° with crests 650 m apart (618–689 m). They lie along the resultant \
                   sand flow of Sorrel mast (79°): longitudinal with 96 % probability against 17 % before the data."
            .into(),
        cautions: vec![
            Caution::new("look-bias", "The trend lies within 12° of the direction that the radar look favours; part of the alignment may be the look’s."),
            Caution::new("tensor-spectrum", "Tensor and spectrum agree within their intervals, but the spectrum rests on 12 windows only."),
        ],
        birth: Vec::new(),
            crests: Err("not traced".into()),
            pattern: PatternFinding::default(),
            obstacles: None,
    }
}

pub fn plain_finding(reach: &Reach) -> PatchFinding {
    PatchFinding {
        id: Id(3),
        name: "Bare plain".into(),
        fingerprint: "04c1".into(),
        area: 31.0e6,
        trend: no_trend(),
        spectrum: SpectrumFinding { defined: false, spacing: None, axis: None, p: Some(0.41), ..peak(650.0) },
        verdicts: vec![refused()],
        backwards: None,
        sentence: "Bare plain shows no preferred trend (p = 0.61, effective n 29).".into(),
        cautions: Vec::new(),
        ..patch_finding(reach)
    }
}

pub fn recipe() -> Recipe {
    Recipe {
        program: "Ventifact 0.1.0".into(),
        sheet_title: "Sorrel Reach".into(),
        sheet_fingerprint: "1f3a9c2e04b77d".into(),
        seed: 1,
    }
}
