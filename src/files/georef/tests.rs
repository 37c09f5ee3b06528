//! Keys that general writers seldom make: what is refused, what is cautioned, what is named.

use proptest::prelude::*;

use super::*;
use crate::assert_close;
use crate::ground::{LatitudeKind, LengthUnit};

/// Keys as (key, value): codes go into the directory, measures into the parameter list.
fn with_keys(keys: &[(u16, f64)], text: &[(u16, &str)]) -> GeoTags {
    let mut tags = GeoTags {
        pixel_scale: vec![100.0, 100.0, 0.0],
        tie_points: vec![0.0, 0.0, 0.0, 5000.0, 5000.0, 0.0],
        key_directory: vec![1, 1, 0, (keys.len() + text.len()) as u16],
        ..GeoTags::default()
    };
    for (key, value) in keys {
        if [2053, 2055, 2057, 2058, 2059, 2061, 3077].contains(key) || (3078..=3096).contains(key) {
            tags.key_directory.extend([*key, 34736, 1, tags.double_params.len() as u16]);
            tags.double_params.push(*value);
        } else {
            tags.key_directory.extend([*key, 0, 1, *value as u16]);
        }
    }
    for (key, words) in text {
        tags.key_directory.extend([*key, 34737, words.len() as u16 + 1, tags.ascii_params.len() as u16]);
        tags.ascii_params.push_str(words);
        tags.ascii_params.push('|');
    }
    tags
}

fn read(tags: &GeoTags) -> Georeference {
    from_tiff(tags, 50, 40).expect("sound").expect("something")
}

fn refused(tags: &GeoTags) -> String {
    from_tiff(tags, 50, 40).expect_err("broken").to_string()
}

fn codes(found: &Georeference) -> Vec<&str> {
    found.cautions.iter().map(|caution| caution.code).collect()
}

const SINUSOIDAL: [(u16, f64); 6] =
    [(1024, 1.0), (3072, 32767.0), (3075, 24.0), (2057, 1_420_000.0), (2058, 1_420_000.0), (3088, 10.0)];

#[test]
fn nothing_is_nothing() {
    assert_eq!(from_tiff(&GeoTags::default(), 5, 5), Ok(None));
    let empty = GeoTags { key_directory: vec![1, 1, 0, 0], ..GeoTags::default() };
    assert_eq!(from_tiff(&empty, 5, 5), Ok(None));
}

#[test]
fn bodies_are_known_by_their_size() {
    let found = read(&with_keys(&SINUSOIDAL, &[(1026, "Sorrel Reach")]));
    assert_eq!(found.label, "Sorrel Reach: sinusoidal, central meridian 10°, Halvane");
    assert_eq!((found.epsg, codes(&found)), (None, vec![]));
    let mut strange = SINUSOIDAL;
    strange[3].1 = 2e6;
    strange[4].1 = 2e6;
    let found = read(&with_keys(&strange, &[]));
    assert_eq!(found.place.body.name, "unnamed body");
    assert_eq!(codes(&found), ["unnamed-body"]);
}

#[test]
fn coded_zones_have_their_name() {
    let found = read(&with_keys(&[(1024, 1.0), (3072, 32623.0)], &[]));
    assert_eq!((found.label.as_str(), found.epsg), ("UTM zone 23N, WGS 84 (EPSG:32623)", Some(32623)));
    let by_conversion =
        read(&with_keys(&[(1024, 1.0), (2048, 4326.0), (3072, 32767.0), (3074, 16152.0)], &[]));
    assert_eq!(by_conversion.place.frame_in_words(), "UTM zone 52S");
}

#[test]
fn map_units() {
    let metres_per_col = |extra: &[(u16, f64)]| {
        let keys: Vec<_> = SINUSOIDAL.iter().chain(extra).copied().collect();
        let mut tags = with_keys(&keys, &[]);
        tags.pixel_scale = vec![1.0, 1.0, 0.0];
        tags.tie_points = vec![0.0; 6];
        read(&tags).place.local_frame(Point::new(0.0, 0.0)).expect("frame").length(1.0, 0.0)
    };
    for (code, metres) in [(9001.0, 1.0), (9002.0, 0.3048), (9003.0, 1200.0 / 3937.0), (9036.0, 1000.0)] {
        assert_close!(metres_per_col(&[(3076, code)]), metres, 1e-6 * metres, "unit {code}");
    }
    assert_close!(metres_per_col(&[(3076, 32767.0), (3077, 7.5)]), 7.5, 1e-5, "user-defined");
    let keys: Vec<_> = SINUSOIDAL.iter().copied().chain([(3076, 9999.0)]).collect();
    assert!(refused(&with_keys(&keys, &[])).contains("unit 9999"));
}

#[test]
fn an_affine_without_a_system_is_a_plane_in_metres_and_says_so() {
    let found = read(&with_keys(&[], &[]));
    assert_eq!(found.place.unit(), LengthUnit::Metre);
    assert!(!found.place.is_georeferenced());
    assert_eq!(codes(&found), ["no-reference-system"]);
    let mut degrees = with_keys(&[], &[]);
    degrees.pixel_scale = vec![0.01, 0.01, 0.0];
    degrees.tie_points = vec![0.0, 0.0, 0.0, -100.0, 40.0, 0.0];
    let found = read(&degrees);
    assert!(found.cautions[0].text.contains("look like degrees"));
    assert_eq!(found.place.unit(), LengthUnit::Pixel);
}

#[test]
fn a_system_without_an_affine_is_refused() {
    let mut tags = with_keys(&SINUSOIDAL, &[]);
    tags.pixel_scale.clear();
    tags.tie_points.clear();
    assert_eq!(from_tiff(&tags, 5, 5), Err(GeorefError::NoTransform));
}

#[test]
fn control_points_carry_their_misfit() {
    let mut tags = with_keys(&SINUSOIDAL, &[]);
    tags.pixel_scale.clear();
    tags.tie_points = [[0.0, 0.0], [50.0, 0.0], [50.0, 40.0], [0.0, 40.0]]
        .iter()
        .enumerate()
        .flat_map(|(i, [c, r])| {
            let bend = if i % 2 == 0 { 300.0 } else { -300.0 };
            [*c, *r, 0.0, c * 100.0 + bend, -r * 100.0, 0.0]
        })
        .collect();
    let found = read(&tags);
    // An affine can take nothing of a saddle: every point is off by 3 px.
    assert_close!(found.fit_residual_px.expect("fit"), 3.0, 1e-9, "misfit");
    assert_eq!(codes(&found), ["control-point-misfit"]);
}

#[test]
fn latitude_kinds_come_from_the_citation_only() {
    let keys = [(1024, 2.0), (2048, 32767.0), (2057, 3_396_190.0), (2058, 3_376_200.0)];
    let mut tags = with_keys(&keys, &[(2049, "Ocentric")]);
    tags.pixel_scale = vec![0.1, 0.1, 0.0];
    tags.tie_points = vec![0.0, 0.0, 0.0, 137.0, 44.661_768_05, 0.0];
    let found = read(&tags);
    assert!(matches!(found.place.frame, Frame::Geographic { latitude: LatitudeKind::Planetocentric, .. }));
    assert_eq!(codes(&found), ["latitude-kind"]);
    let at = found.place.lonlat_of(Point::new(0.0, 0.0)).expect("inside");
    assert_close!(at.lat, 45.0, 1e-5, "planetographic latitude");
    let mut silent = with_keys(&keys, &[]);
    (silent.pixel_scale, silent.tie_points) = (tags.pixel_scale, tags.tie_points);
    assert_close!(
        read(&silent).place.lonlat_of(Point::new(0.0, 0.0)).expect("inside").lat,
        44.661_768_05,
        1e-9,
        "as is"
    );
}

#[test]
fn west_longitudes_are_turned_where_the_citation_says_so() {
    let found = read(&with_keys(&SINUSOIDAL, &[(2049, "Halvane, longitudes positive west")]));
    assert!(codes(&found).contains(&"west-longitudes"));
    let Frame::Projected { projection, .. } = &found.place.frame else { panic!("projected") };
    assert_close!(projection.central_longitude(), -10.0, 1e-12, "centre");
}

#[test]
fn what_is_broken_says_what() {
    let method = |code: f64| {
        let mut keys = SINUSOIDAL;
        keys[2].1 = code;
        with_keys(&keys, &[])
    };
    assert!(refused(&method(25.0)).contains("Van der Grinten"));
    assert!(refused(&method(999.0)).contains("method 999"));
    assert!(refused(&with_keys(&[(1024, 3.0)], &[])).contains("geocentric"));
    assert!(refused(&with_keys(&[(1024, 1.0), (3072, 1.0)], &[])).contains("EPSG:1"));
    assert!(refused(&with_keys(&[(1024, 2.0), (2057, -5.0)], &[])).contains("axes -5 m"));
    let mut nan = with_keys(&SINUSOIDAL, &[]);
    nan.tie_points[3] = f64::NAN;
    assert!(refused(&nan).contains("33922"));
    let mut dangling = with_keys(&SINUSOIDAL, &[]);
    dangling.double_params.truncate(1);
    assert!(refused(&dangling).contains("outside the parameter list"));
}

#[test]
fn a_nil_scale_factor_is_one_with_a_caution() {
    let keys = [(1024, 1.0), (3072, 32767.0), (3075, 7.0), (2057, 1e6), (3092, 0.0), (3080, 3.0)];
    let found = read(&with_keys(&keys, &[]));
    assert!(codes(&found).contains(&"scale-factor"));
    let size = found.place.local_frame(Point::new(0.0, 50.0)).expect("frame").pixel_size();
    assert_close!(size[0], 100.0, 0.01, "pixel size at the equator");
}

proptest! {
    #[test]
    fn no_tags_make_it_panic(
        scale in prop::collection::vec(-1e3..1e3f64, 0..4), ties in prop::collection::vec(-1e6..1e6f64, 0..31),
        matrix in prop::collection::vec(-1e3..1e3f64, 0..17),
        keys in prop::collection::vec((
            prop::sample::select(vec![1024u16, 1025, 1026, 2048, 2049, 2050, 2051, 2054, 2056, 2057, 2058, 2059, 2061, 3072, 3074, 3075, 3076, 3078, 3080, 3081, 3088, 3092]),
            prop::sample::select(vec![0u16, 34736, 34737]), 0u16..6,
            prop_oneof![0u16..40, Just(32767), Just(4326), 2000u16..33000],
        ), 0..14),
        params in prop::collection::vec(prop_oneof![-1e7..1e7f64, Just(f64::NAN), Just(0.0)], 0..6),
        text in "[a-zA-Zµ|° =]{0,12}",
    ) {
        let mut directory = vec![1, 1, 0, keys.len() as u16];
        directory.extend(keys.iter().flat_map(|(k, t, n, v)| [*k, *t, *n, *v]));
        let tags = GeoTags {
            pixel_scale: scale, tie_points: ties, transformation: matrix, key_directory: directory,
            double_params: params, ascii_params: text,
        };
        if let Ok(Some(found)) = from_tiff(&tags, 50, 40) {
            prop_assert!(found.place.affine.inverse().is_some());
            let _ = (found.place.local_frame(Point::new(3.0, 3.0)), found.place.description(Point::new(25.0, 20.0)));
        }
    }
}
