//! Plates of invented findings from Sorrel Reach: exact bytes twice, real text, no tofu. Set
//! `VENTIFACT_PICTURES` to a folder to look at them.

use ventifact::ground::{Axis, Azimuth, Grid, LengthUnit, Point, SandFlow};
use ventifact::plate::{Figure, Item, PngSize, Theme, font};
use ventifact::plate::{
    dial, modes, pdf, png, posterior_bars, profile, rose, sand_rose, small_rose, spectrum,
};
use ventifact::plate::{svg, verdict_bar};
use ventifact::study::{DriftFinding, Id, ModeFinding, SpectrumFinding, SpectrumPicture};
use ventifact::study::{TheoryFinding, TrendFinding, VerdictFinding};

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

fn cloud(centre: f64, spread: f64) -> Vec<f32> {
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
            theory("along the resultant", "alignment.resultant", Some(79.0), 4.0, 0.25, 0.82, 2.6),
            theory("transverse to the resultant", "alignment.resultant", Some(169.0), 4.0, 0.25, 0.006, -2.3),
            theory("gross bedform-normal transport", "alignment.gbnt", Some(141.0), 9.0, 0.25, 0.03, -0.7),
            theory("random axis", "alignment.weighing", None, 0.0, 0.25, 0.144, 0.0),
        ],
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

fn refused() -> VerdictFinding {
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

fn two_trends() -> TrendFinding {
    let mode = |deg, weight| ModeFinding { axis: Axis::from_deg(deg), weight, kappa_doubled: 7.2 };
    TrendFinding { modes: vec![mode(12.0, 0.31), mode(96.0, 0.69)], ..trend(96.0, 20.0) }
}

/// Figures in rows on one page, for looking at.
fn contact_sheet(figures: &[Figure], columns: usize, theme: &Theme) -> Figure {
    let (gap, cell) = (6.0, figures.iter().map(|f| f.width_mm).fold(0.0, f64::max));
    let rows: Vec<&[Figure]> = figures.chunks(columns).collect();
    let (mut y, mut items) = (gap, Vec::new());
    for row in &rows {
        for (i, figure) in row.iter().enumerate() {
            items.push((gap + i as f64 * (cell + gap), y, figure));
        }
        y += row.iter().map(|f| f.height_mm).fold(0.0, f64::max) + gap;
    }
    let width = gap + columns as f64 * (cell + gap);
    let mut page = Figure::blank(width, y, theme.paper);
    for (x, y, figure) in items {
        page.place(figure, Point::new(x, y));
    }
    page
}

fn keep(name: &str, figure: &Figure, width: u32) {
    let Some(folder) = std::env::var_os("VENTIFACT_PICTURES") else { return };
    let path = std::path::Path::new(&folder).join(name);
    std::fs::write(path.with_extension("png"), png(figure, PngSize::WidthPx(width)).expect("PNG"))
        .expect("written");
    std::fs::write(path.with_extension("svg"), svg(figure)).expect("written");
    std::fs::write(path.with_extension("pdf"), pdf(figure).expect("PDF")).expect("written");
}

fn texts(items: &[Item]) -> Vec<String> {
    items
        .iter()
        .flat_map(|item| match item {
            Item::Text { text, .. } => vec![text.clone()],
            Item::Clip { items, .. } => texts(items),
            _ => Vec::new(),
        })
        .collect()
}

fn small_figures(theme: &Theme) -> Vec<Figure> {
    vec![
        rose(&trend(84.2, 14.0), 56.0, theme),
        rose(&no_trend(), 56.0, theme),
        sand_rose(&flow(), &drift(), 56.0, theme),
        dial(&verdict(), 56.0, theme),
        dial(&refused(), 56.0, theme),
        posterior_bars(&verdict(), 56.0, theme),
        spectrum(&peak(650.0), LengthUnit::Metre, 56.0, theme),
        profile(&peak(650.0), LengthUnit::Metre, 56.0, theme),
        modes(&two_trends(), 56.0, theme),
        small_rose(&trend(84.2, 14.0), 12.0, theme),
        small_rose(&no_trend(), 12.0, theme),
        verdict_bar(Some(&verdict()), [30.0, 2.4], theme),
    ]
}

#[test]
fn small_figures_render_the_same_bytes_twice_and_have_every_glyph() {
    for (name, theme) in [("small-light", Theme::light()), ("small-dark", Theme::dark())] {
        let page = contact_sheet(&small_figures(&theme), 3, &theme);
        keep(name, &page, 1600);
        assert_eq!(svg(&page), svg(&contact_sheet(&small_figures(&theme), 3, &theme)));
        let size = PngSize::WidthPx(500);
        assert!(png(&page, size) == png(&page, size), "PNG bytes differ");
        assert!(pdf(&page) == pdf(&page), "PDF bytes differ");
        for text in texts(&page.items) {
            assert!(font::covers(&text), "no glyph for a character of {text:?}");
        }
    }
}
