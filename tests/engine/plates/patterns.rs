//! Figures of the bedform pattern and the crest plate: the same bytes twice, real text, no label over another, words
//! where a part is missing, and nothing off the page.

use ventifact::ground::{Axis, Azimuth, Bounds, LengthUnit, Place, Point, Polygon, Work};
use ventifact::plate::map::{MapCrests, MapLayers, MapPatch, MapView, crest_key, map_of, surroundings};
use ventifact::plate::{
    CrestPlate, Figure, Item, OverviewPlate, PatchPlate, TextAnchor, Theme, comparison_figure, crest_lengths,
    crest_numbers, crest_plate, crest_rose, crests_on_map, defect_diagram, font, light_numbers,
    overview_plate, patch_plate, pdf, populations_figure, recovery_curve, recovery_ring, scale_sweep,
    spacing_survival, svg,
};
use ventifact::science::crest::{self, CrestLine};
use ventifact::study::{
    ComparisonFinding, CrestSettings, CrestsFinding, Findings, Id, PatchFinding, PatternFinding,
    RecoveryFinding, SpectrumFinding, TrendFinding,
};

use super::bedforms::{comparison, crests, pattern, recovery, spectrum};
use super::sorrel::{Reach, no_trend, patch_finding, plain_finding, raster_finding, reach, recipe, trend};
use super::sorrel::{points, wind_finding};
use super::{assert_inside, contact_sheet, cut, keep, texts};

const METRE: LengthUnit = LengthUnit::Metre;

/// All that the figures are drawn from.
struct Told {
    crests: CrestsFinding,
    trend: TrendFinding,
    spectrum: SpectrumFinding,
    pattern: PatternFinding,
    recovery: RecoveryFinding,
    comparison: ComparisonFinding,
    unit: LengthUnit,
}

fn told(reach: &Reach) -> Told {
    Told {
        crests: crests(reach),
        trend: trend(84.2, 14.0),
        spectrum: spectrum(),
        pattern: pattern(reach),
        recovery: recovery(),
        comparison: comparison(reach),
        unit: METRE,
    }
}

/// Nothing traced, no trend, no peak, one scale, no try that found anything.
fn nothing(reach: &Reach) -> Told {
    let frame = reach.place.local_frame(Point::new(600.0, 450.0)).expect("a frame");
    let outline = &reach.outline;
    let transects = crest::SpacingSettings { step: 1.0, longest: 1.0, own_beyond: 1.0 };
    let mut recovery = recovery();
    recovery.trends.iter_mut().for_each(|t| {
        (t.found, t.bias_deg, t.spread_deg, t.probability_ci95) = (0, None, None, [0.0, 0.32]);
    });
    recovery.missed = vec![[0.0, 180.0]];
    recovery.light_from = None;
    let mut comparison = comparison(reach);
    comparison.shift = Err("the pictures overlap nowhere".into());
    comparison.trends = [no_trend(), no_trend()];
    comparison.axes = Default::default();
    Told {
        crests: CrestsFinding {
            numbers: crest::numbers(&[], outline, frame),
            spacing: crest::spacing(&[], outline, frame, transects, &Work::quiet()).expect("spacing"),
            defects: crest::defects(&[], &[], 0.0, None),
            rose: Vec::new(),
            forks: None,
            forks_toward: None,
            lines: Vec::new(),
            junctions: Vec::new(),
            ..crests(reach)
        },
        trend: no_trend(),
        spectrum: SpectrumFinding::default(),
        pattern: PatternFinding::default(),
        recovery,
        comparison,
        unit: METRE,
    }
}

fn figures(t: &Told, width: f64, theme: &Theme) -> Vec<(&'static str, Figure)> {
    let (c, u) = (&t.crests, t.unit);
    let mut all = vec![
        ("rose", crest_rose(c, &t.trend, u, width, theme)),
        ("spacing", spacing_survival(c, &t.spectrum, u, width, theme)),
        ("lengths", crest_lengths(c, u, width, theme)),
        ("defects", defect_diagram(c, u, width, theme)),
        ("numbers", crest_numbers(c, u, width, theme)),
        ("recovery", recovery_curve(&t.recovery, &t.trend, width, theme)),
        ("ring", recovery_ring(&t.recovery, &t.trend, width, theme)),
        ("scales", scale_sweep(&t.pattern, u, width, theme)),
        ("populations", populations_figure(&t.pattern, u, width, theme)),
        ("comparison", comparison_figure(&t.comparison, width, theme)),
    ];
    if let Some(light) = &t.pattern.light {
        all.push(("light", light_numbers(light, &t.trend, width, theme)));
    }
    all
}

fn said(figure: &Figure) -> String {
    texts(&figure.items).join(" ").replace('\n', " ")
}

/// Boxes of all level texts of a figure.
fn labels(items: &[Item]) -> Vec<(String, Bounds)> {
    let mut all = Vec::new();
    for item in items {
        match item {
            Item::Clip { items, .. } => all.extend(labels(items)),
            Item::Text { at, text, size_mm, bold, anchor, turn_deg: 0.0, .. } => {
                let width = font::text_width(text, *size_mm, *bold);
                let left = at.x
                    - match anchor {
                        TextAnchor::Start => 0.0,
                        TextAnchor::Middle => 0.5 * width,
                        TextAnchor::End => width,
                    };
                let (min, max) =
                    (Point::new(left, at.y - 0.7 * size_mm), Point::new(left + width, at.y + 0.05 * size_mm));
                all.push((text.clone(), Bounds { min, max }));
            }
            _ => {}
        }
    }
    all
}

/// No label lies over another, and none leaves the figure by more than the gap between columns.
fn assert_apart(name: &str, figure: &Figure) {
    let all = labels(&figure.items);
    for (i, (text, a)) in all.iter().enumerate() {
        assert!(
            a.min.x > -1.0 && a.max.x < figure.width_mm + 1.0 && a.max.y < figure.height_mm + 0.5,
            "{name}: {text:?} leaves the figure: {a:?} of {} × {}",
            figure.width_mm,
            figure.height_mm
        );
        for (other, b) in &all[..i] {
            let apart = a.min.x >= b.max.x || b.min.x >= a.max.x || a.min.y >= b.max.y || b.min.y >= a.max.y;
            assert!(apart, "{name}: {text:?} lies over {other:?}");
        }
    }
}

#[test]
fn figures_of_the_pattern_are_the_same_twice_with_every_glyph_and_no_label_over_another() {
    let reach = reach();
    let (full, empty) = (told(&reach), nothing(&reach));
    let in_pixels = Told { unit: LengthUnit::Pixel, ..told(&reach) };
    for (kind, told) in [("full", &full), ("pixels", &in_pixels), ("empty", &empty)] {
        for (look, theme) in [("light", Theme::light()), ("dark", Theme::dark()), ("print", Theme::print())] {
            for width in [46.0, 54.0, 80.0] {
                for (name, figure) in figures(told, width, &theme) {
                    assert_apart(&format!("{kind} {name} at {width}"), &figure);
                    assert!(figure.height_mm > 0.0 && figure.height_mm.is_finite(), "{kind} {name}");
                }
            }
            let all = || -> Vec<Figure> { figures(told, 54.0, &theme).into_iter().map(|f| f.1).collect() };
            let page = contact_sheet(&all(), 4, &theme);
            keep(&format!("pattern-{kind}-{look}"), &page, 2000);
            assert!(svg(&page) == svg(&contact_sheet(&all(), 4, &theme)), "SVG bytes differ");
            for text in texts(&page.items) {
                assert!(font::covers(&text), "no glyph for a character of {text:?}");
            }
        }
    }
}

#[test]
fn figures_of_the_pattern_state_their_numbers() {
    let told = told(&reach());
    let theme = Theme::print();
    let figures = figures(&told, 54.0, &theme);
    let count = told.crests.numbers.count.to_string();
    let median = told.crests.spacing.quartiles[1].expect("a median");
    let median = format!("median {median:.0} m");
    let wanted: [(&str, &[&str]); 11] = [
        ("ring", &["84.2° ± 3.4°", "light from 352°", "less its bias"]),
        ("rose", &["length of crest", "84.2° ± 3.4°", &count, "effective n 38.2", "drawn both ways"]),
        ("spacing", &[&median, "spectrum", "650 m (618–689)", "area over length", "cut by border or gap"]),
        ("lengths", &["mean", "seen whole", "if exponential"]),
        (
            "defects",
            &["free ends", "forks", "crossings", "per km, pairs", "A clue, not proof", "two-sided p"],
        ),
        ("numbers", &["km/km²", "edited", "drawn", "imported", "bright ridges, skewness 0.84", "4.2 px"]),
        ("recovery", &["would have been missed here", "light + 90°", "trend 84°", "256 px", "R\u{304} 0.38"]),
        ("scales", &["2 plateaus: 178°, 85°", "gradient scale, px", "coherence"]),
        (
            "populations",
            &["Long dunes", "68 %", "650 m (611–696)", "longitudinal 96 %", "no crests: no bedforms"],
        ),
        ("comparison", &["−4.6° (−9.4 to 0.3°)", "p = 0.19", "14.0 m (9.10 to 18.7)", "1.2 m a year"]),
        ("light", &["352°", "0.33 by contrast, 0.50 by energy", "4 %, 22 % expected"]),
    ];
    for (name, parts) in wanted {
        let figure = figures.iter().find(|f| f.0 == name).expect(name);
        for part in parts {
            assert!(said(&figure.1).contains(part), "{name}: {part} in {}", said(&figure.1));
        }
    }
}

#[test]
fn what_is_missing_is_said_in_words() {
    let told = nothing(&reach());
    let figures = figures(&told, 54.0, &Theme::print());
    for (name, part) in [
        ("rose", "no crests"),
        ("spacing", "No spacing by transects"),
        ("lengths", "No crest lengths"),
        ("defects", "No defects to count"),
        ("recovery", "no light or look is stated"),
        ("scales", "No sweep of scales"),
        ("populations", "One population"),
        ("comparison", "No movement of crests: the pictures overlap nowhere."),
    ] {
        let figure = figures.iter().find(|f| f.0 == name).expect(name);
        assert!(said(&figure.1).contains(part), "{name}: {part} in {}", said(&figure.1));
    }
}

#[test]
fn marks_of_light_and_trend_never_meet_whatever_their_angles() {
    for light in (0..180).step_by(15) {
        for own in (0..180).step_by(9) {
            let recovery =
                RecoveryFinding { light_from: Some(Azimuth::from_deg(f64::from(light))), ..recovery() };
            let trend = TrendFinding { axis: Some(Axis::from_deg(f64::from(own))), ..trend(84.2, 14.0) };
            let figure = recovery_curve(&recovery, &trend, 46.0, &Theme::print());
            assert_apart(&format!("light {light}, trend {own}"), &figure);
        }
    }
}

#[test]
fn spacings_that_are_all_cut_still_make_a_curve() {
    let mut told = told(&reach());
    let spacing = &mut told.crests.spacing;
    spacing.transects = crest::kaplan_meier(&[(300.0, false), (800.0, false)]);
    (spacing.quartiles, spacing.uncensored_median) = ([None; 3], None);
    let figure = spacing_survival(&told.crests, &told.spectrum, METRE, 54.0, &Theme::print());
    assert_apart("all cut", &figure);
    assert!(said(&figure).contains("no median: too many transects are cut"), "{}", said(&figure));
}

/// The long dunes with all that is known of their pattern.
fn full_patch(reach: &Reach) -> PatchFinding {
    PatchFinding { crests: Ok(crests(reach)), pattern: pattern(reach), ..patch_finding(reach) }
}

fn masks() -> [Polygon; 1] {
    let outer = points(&[(430.0, 300.0), (520.0, 290.0), (530.0, 370.0), (440.0, 360.0)]);
    [Polygon { outer, holes: Vec::new() }]
}

fn crest_plate_of(patch: &PatchFinding, reach: &Reach, width: f64, theme: &Theme) -> Figure {
    let covers = surroundings(&reach.outline, reach.size);
    let picture = cut(&reach.picture, covers, 2);
    let plate = CrestPlate {
        patch,
        outline: &reach.outline,
        masks: &masks(),
        settings: &CrestSettings::default(),
        raster: &raster_finding(),
        view: MapView { picture: &picture, covers, place: &reach.place },
        recipe: &recipe(),
    };
    crest_plate(&plate, width, theme)
}

fn patch_plate_of(patch: &PatchFinding, reach: &Reach, theme: &Theme) -> Figure {
    let covers = surroundings(&reach.outline, reach.size);
    let picture = cut(&reach.picture, covers, 2);
    let plate = PatchPlate {
        patch,
        outline: &reach.outline,
        neighbours: vec![("Bare plain", &reach.plain)],
        raster: &raster_finding(),
        view: MapView { picture: &picture, covers, place: &reach.place },
        winds: &[wind_finding()],
        recipe: &recipe(),
        annulus: [1.0, 3.0],
        bare: &picture,
        flow: false,
        masks: &masks(),
        crests: &CrestSettings::default(),
        recovery: Some(&recovery()),
        comparisons: &[comparison(reach)],
    };
    patch_plate(&plate, 180.0, theme)
}

#[test]
fn the_plates_of_a_pattern_say_what_they_must_and_are_the_same_twice() {
    let reach = reach();
    let patch = full_patch(&reach);
    let print = Theme::print();
    let plates = [
        ("crests", crest_plate_of(&patch, &reach, 180.0, &print)),
        ("crests-dark", crest_plate_of(&patch, &reach, 180.0, &Theme::dark())),
        ("crests-wide", crest_plate_of(&patch, &reach, 277.0, &print)),
        ("pattern-patch", patch_plate_of(&patch, &reach, &print)),
        ("pattern-patch-dark", patch_plate_of(&patch, &reach, &Theme::dark())),
    ];
    for (name, plate) in &plates {
        keep(name, plate, 2126);
        assert_inside(name, plate);
        for text in texts(&plate.items) {
            assert!(font::covers(&text), "{name}: no glyph for a character of {text:?}");
        }
    }
    let of_crests = said(&plates[0].1);
    for part in [
        "Long dunes: crests",
        "apart at the median",
        "drawn by hand",
        "imported",
        "no bedforms, by hand",
        "the chance that a line is a crest",
        "noise alone would start one in 5 %",
        "Kaplan & Meier 1958",
        "Steger 1998",
        "Crests by population",
        "bridged over more than a quarter",
    ] {
        assert!(of_crests.contains(part), "{part} in {of_crests}");
    }
    let whole = said(&plates[3].1);
    for part in
        ["What would have been seen", "Trend by scale", "Populations", "Ends and forks", "then and now"]
    {
        assert!(whole.contains(part), "{part} in {whole}");
    }
    let again = crest_plate_of(&patch, &reach, 180.0, &print);
    assert!(svg(&again) == svg(&plates[0].1), "SVG bytes differ");
    assert!(pdf(&again) == pdf(&plates[0].1), "PDF bytes differ");
}

#[test]
fn a_patch_without_crests_has_a_plate_that_says_why() {
    let reach = reach();
    let plate = crest_plate_of(&plain_finding(&reach), &reach, 180.0, &Theme::print());
    assert_inside("no crests", &plate);
    let text = said(&plate);
    assert!(text.contains("No crests of Bare plain: not traced."), "{text}");
    assert!(!text.contains("free end"), "{text}");
}

#[test]
fn an_overview_shows_the_crests_of_its_patches() {
    let reach = reach();
    let findings = Findings {
        rasters: vec![raster_finding()],
        patches: vec![full_patch(&reach), plain_finding(&reach)],
        ..Findings::default()
    };
    let covers = Bounds { min: Point::default(), max: Point::new(reach.size[0], reach.size[1]) };
    let plate = OverviewPlate {
        findings: &findings,
        raster: &raster_finding(),
        outlines: vec![(Id(2), &reach.outline), (Id(3), &reach.plain)],
        networks: Vec::new(),
        view: MapView { picture: &reach.picture, covers, place: &reach.place },
        recipe: &recipe(),
    };
    let figure = overview_plate(&plate, 180.0, &Theme::print());
    keep("overview-crests", &figure, 2126);
    assert_inside("overview", &figure);
    assert!(said(&figure).contains("free end"), "{}", said(&figure));
}

#[test]
fn ten_thousands_of_crests_stay_thin_enough_to_print() {
    let reach = reach();
    let few = crests(&reach);
    let mut lines: Vec<CrestLine> = Vec::new();
    for i in 0..400 {
        lines.extend(few.lines.iter().cloned().map(|mut line| {
            let by = f64::from(i) * 1.7;
            line.line.0.iter_mut().for_each(|p| p.y += by);
            line
        }));
    }
    assert!(lines.len() > 10_000);
    let covers = Bounds { min: Point::default(), max: Point::new(reach.size[0], reach.size[1]) };
    let place = Place::pixels(0.0);
    let view = MapView { picture: &reach.picture, covers, place: &place };
    let of = [MapCrests { lines: &lines, ..MapCrests::default() }];
    let patch = MapPatch { name: "", outline: &reach.outline, nodes: &[], rose: None, is_subject: true };
    let layers = MapLayers { patches: &[patch], crests: &of, ..MapLayers::default() };
    let theme = Theme::print();
    let figure = map_of(&view, &layers, [166.0, 140.0], &theme);
    let bytes = svg(&figure).len() as f64 - 4.0 / 3.0 * reach.picture.rgba.len() as f64;
    assert!(bytes < 6e6, "{bytes} bytes of vectors");
    let key = crest_key(&view, &of, [166.0, 140.0], &theme);
    assert!(said(&key).contains("shorter ones too dense to draw"), "{}", said(&key));
    let some = crests_on_map(&full_patch(&reach), &[]).lines.len();
    assert_eq!(some, few.lines.len());
}
