//! Plates of invented findings from Sorrel Reach: exact bytes twice, real text, no missing glyph,
//! nothing off the page. Set `VENTIFACT_PICTURES` to a folder to look at them.

mod bedforms;
mod networks;
mod patterns;
mod river_measures;
mod rivers;
mod sorrel;

use ventifact::ground::{Bounds, LengthUnit, Place, Point, Polygon};
use ventifact::plate::map::{MapView, Picture, surroundings};
use ventifact::plate::{Figure, Item, PngSize, TextAnchor, Theme, font};
use ventifact::plate::{OverviewPlate, PatchPlate, overview_plate, patch_plate};
use ventifact::plate::{
    dial, modes, pdf, png, posterior_bars, profile, rose, sand_rose, small_rose, spectrum,
};
use ventifact::plate::{svg, verdict_bar};
use ventifact::study::{CrestSettings, Findings, Id, PatchFinding, RasterFinding};

use sorrel::{
    Reach, drift, flow, no_trend, patch_finding, peak, plain_finding, raster_finding, reach, recipe,
};
use sorrel::{refused, trend, two_trends, verdict, wind_finding};

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

fn plate_of(patch: &PatchFinding, outline: &Polygon, reach: &Reach, theme: &Theme) -> Figure {
    let covers = surroundings(outline, reach.size);
    let picture = cut(&reach.picture, covers, 2);
    let view = MapView { picture: &picture, covers, place: &reach.place };
    let (raster, winds, recipe) = (raster_finding(), [wind_finding()], recipe());
    let neighbours = vec![("Bare plain", &reach.plain)];
    let plate = PatchPlate {
        patch,
        outline,
        neighbours,
        raster: &raster,
        view,
        winds: &winds,
        recipe: &recipe,
        annulus: [1.0, 3.0],
        bare: &picture,
        masks: &[],
        crests: &CrestSettings::default(),
        recovery: None,
        comparisons: &[],
        flow: false,
    };
    patch_plate(&plate, 180.0, theme)
}

/// The part of a picture that covers the bounds; one picture pixel is `factor` raster pixels.
fn cut(picture: &Picture, covers: Bounds, factor: usize) -> Picture {
    let (x0, y0) = (covers.min.x as usize / factor, covers.min.y as usize / factor);
    let (width, height) = (covers.width() as usize / factor, covers.height() as usize / factor);
    let rows = (y0..y0 + height).flat_map(|row| {
        let from = (row * picture.width + x0) * 4;
        picture.rgba[from..from + 4 * width].iter().copied()
    });
    Picture { width, height, rgba: rows.collect() }
}

fn overview(reach: &Reach, theme: &Theme) -> Figure {
    let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(reach.size[0], reach.size[1]) };
    let findings = Findings {
        networks: Vec::new(),
        recoveries: Vec::new(),
        comparisons: Vec::new(),
        sheet_fingerprint: recipe().sheet_fingerprint,
        rasters: vec![raster_finding()],
        winds: vec![wind_finding()],
        patches: vec![patch_finding(reach), plain_finding(reach)],
        together: Default::default(),
        failures: Vec::new(),
    };
    let view = MapView { picture: &reach.picture, covers, place: &reach.place };
    let (raster, recipe) = (raster_finding(), recipe());
    let outlines = vec![(Id(2), &reach.outline), (Id(3), &reach.plain)];
    overview_plate(
        &OverviewPlate {
            findings: &findings,
            raster: &raster,
            outlines,
            networks: Vec::new(),
            view,
            recipe: &recipe,
        },
        180.0,
        theme,
    )
}

#[test]
fn composed_plates_say_what_they_must_and_render_the_same_bytes_twice() {
    let reach = reach();
    let long = patch_finding(&reach);
    let plain = plain_finding(&reach);
    let print = Theme::print();
    let plates = [
        ("patch", plate_of(&long, &reach.outline, &reach, &print)),
        ("patch-dark", plate_of(&long, &reach.outline, &reach, &Theme::dark())),
        ("plain", plate_of(&plain, &reach.plain, &reach, &print)),
        ("overview", overview(&reach, &print)),
    ];
    for (name, plate) in &plates {
        keep(name, plate, 2126);
        for text in texts(&plate.items) {
            assert!(font::covers(&text), "{name}: no glyph for a character of {text:?}");
        }
        assert_inside(name, plate);
    }
    let said = |i: usize| texts(&plates[i].1.items).join(" ");
    for part in [
        "84.2° ± 3.4°",
        "650 m (618–689)",
        "along the resultant",
        "seed 1",
        "radar look",
        "two years",
        "local codes",
    ] {
        assert!(said(0).contains(part), "{part} in {}", said(0));
    }
    assert!(said(2).contains("no preferred trend") && said(2).contains("no verdict"), "{}", said(2));
    assert!(said(3).contains("Bare plain") && said(3).contains("longitudinal 96 %"), "{}", said(3));
    let again = plate_of(&long, &reach.outline, &reach, &print);
    assert!(svg(&again) == svg(&plates[0].1), "SVG bytes differ");
    assert!(pdf(&again) == pdf(&plates[0].1), "PDF bytes differ");
}

#[test]
fn a_raster_without_ground_size_has_its_plate_in_pixels_and_landscape() {
    let scene = reach();
    let scene = Reach { place: Place::pixels(35.0), ..scene };
    let mut finding = patch_finding(&scene);
    finding.unit = LengthUnit::Pixel;
    finding.area = 243_000.0;
    finding.spectrum.spacing = Some(26.0);
    finding.spectrum.spacing_ci95 = Some([24.9, 27.4]);
    finding.verdicts.clear();
    let covers = surroundings(&scene.outline, scene.size);
    let picture = cut(&scene.picture, covers, 2);
    let view = MapView { picture: &picture, covers, place: &scene.place };
    let raster = RasterFinding { pixel_m: None, projection: "no georeference".into(), ..raster_finding() };
    let recipe = recipe();
    let plate = PatchPlate {
        patch: &finding,
        outline: &scene.outline,
        neighbours: Vec::new(),
        raster: &raster,
        view,
        winds: &[],
        recipe: &recipe,
        annulus: [1.0, 3.0],
        bare: &picture,
        masks: &[],
        crests: &CrestSettings::default(),
        recovery: None,
        comparisons: &[],
        flow: false,
    };
    let figure = patch_plate(&plate, 277.0, &Theme::print());
    keep("pixels", &figure, 2400);
    assert_inside("pixels", &figure);
    let said = texts(&figure.items).join(" ");
    assert!(said.contains("26.0 px (24.9–27.4)") && said.contains("px along image rows"), "{said}");
    assert!(!said.contains("local codes"), "no sand is said to move: {said}");
}

/// No text leaves the page.
fn assert_inside(name: &str, plate: &Figure) {
    for item in &plate.items {
        let Item::Text { at, text, size_mm, bold, anchor, turn_deg, .. } = item else { continue };
        let width = font::text_width(text, *size_mm, *bold);
        let start = match anchor {
            TextAnchor::Start => 0.0,
            TextAnchor::Middle => -0.5 * width,
            TextAnchor::End => -width,
        };
        let (sin, cos) = turn_deg.to_radians().sin_cos();
        for along in [start, start + width] {
            let (x, y) = (at.x + along * cos, at.y + along * sin);
            let inside =
                (2.0..=plate.width_mm - 2.0).contains(&x) && (2.0..=plate.height_mm - 2.0).contains(&y);
            assert!(inside, "{name}: {text:?} reaches ({x:.1}, {y:.1})");
        }
    }
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
