//! Linear dunes near the limit of resolution beside drainage and bedrock: the dunes are claimed, the rest is not.

use std::path::Path;

use ventifact::files::raster::Bands;
use ventifact::ground::{Axis, Point, Polygon, Work};
use ventifact::study::run::{Memo, run};
use ventifact::study::{
    Findings, Id, ImageKind, Patch, Placement, RasterEntry, Sheet, Sources, Tone,
};

use crate::field_data;

fn sheet(path: &Path, patches: &[(String, Polygon)]) -> Sheet {
    let mut sheet = Sheet::empty("field");
    sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: "raster".into(),
        path: path.to_owned(),
        bands: Bands::default(),
        kind: ImageKind::Optical,
        placement: Placement::default(),
        tone: Tone::default(),
        light_from: None,
    });
    for (name, outline) in patches {
        let id = sheet.fresh_id();
        sheet.patches.push(Patch::new(id, name.clone(), Id(1), outline.clone()));
    }
    sheet
}

fn measured(sheet: &Sheet) -> Findings {
    let sources = Sources::open(sheet);
    let findings = run(sheet, &sources, &Memo::default(), &Work::quiet()).unwrap();
    assert_eq!(findings.failures, vec![]);
    findings
}

fn rectangle(cols: [f64; 2], rows: [f64; 2]) -> Polygon {
    Polygon::rectangle(cols[1] - cols[0], rows[1] - rows[0]).map(|p| Point::new(p.x + cols[0], p.y + rows[0]))
}

#[test]
fn linear_dunes_are_claimed_and_the_rest_of_their_picture_is_not() {
    let Some(data) = field_data("linear_dunes_are_claimed_and_the_rest_of_their_picture_is_not") else { return };
    let path = data.join("linear-dunes/linear_dunes_and_drainage_landsat.jpg");
    let dunes = [("dunes".to_owned(), rectangle([810.0, 958.0], [40.0, 180.0])), ("corner".to_owned(), rectangle([780.0, 962.0], [0.0, 200.0]))];
    let show = |findings: &Findings| {
        for p in &findings.patches {
            let c = p.crests.as_ref().ok();
            println!(
                "{} | def {} spec {:?} {:?} p {:?} peak {}/{} axis {:?} spread {:?} R {:.2}/{:.2} n_eff {:.0} | crests {:?} conf {:?} sp {:?} R {:?}",
                p.sentence, p.trend.defined, p.spectrum.defined, p.spectrum.spacing, p.spectrum.p, p.spectrum.windows_with_peak, p.spectrum.windows,
                p.spectrum.axis.map(|a| a.deg().round()), p.spectrum.spread_deg.map(f64::round), p.trend.resultant_length, p.trend.resultant_length_all, p.trend.n_eff,
                c.map(|c| (c.numbers.count, c.model.name(), (c.numbers.density * 1000.0).round())), c.map(|c| (c.fits[0].skewness * 100.0).round()), c.map(|c| c.spacings.map(|s| s.map(|s| (s * 10.0).round() / 10.0))), c.and_then(|c| c.numbers.azimuth).map(|(a, r)| (a.deg().round(), (r * 100.0).round()))
            );
        }
    };
    let found = measured(&sheet(&path, &dunes));
    show(&found);
    for p in &found.patches {
        let axis = p.trend.axis.expect("a trend");
        assert!(axis.separation(Axis::from_deg(99.0)) <= 5.0, "{axis:?}");
    }
    // Tiles that hold no sand sea.
    let mut rest = Vec::new();
    for (i, col) in (0..6).map(|i| (i, 120.0 * f64::from(i))) {
        for (j, row) in (0..6).map(|j| (j, 138.0 * f64::from(j))) {
            rest.push((format!("t{i}{j}"), rectangle([col, col + 120.0], [row, row + 138.0])));
        }
    }
    show(&measured(&sheet(&path, &rest)));
}
