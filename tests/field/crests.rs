//! Linear dunes near the limit of resolution beside drainage and bedrock: the dunes are claimed, the rest is not.

use std::path::Path;

use ventifact::files::raster::Bands;
use ventifact::ground::{Axis, Point, Polygon, Work};
use ventifact::study::claim::bedforms;
use ventifact::study::run::{Memo, run};
use ventifact::study::{Findings, Id, ImageKind, Patch, Placement, RasterEntry, Sheet, Sources, Tone};

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

/// The corner of linear dunes gives their trend, 98–100° ± 4° in the list of field data, at a spacing near the limit
/// of resolution, and is claimed as bedforms. Of 36 tiles of drainage and bedrock at most one in twenty is: those
/// with a trend show no crests at the spacing of what repeats.
#[test]
fn linear_dunes_are_claimed_and_the_rest_of_their_picture_is_not() {
    let Some(data) = field_data("linear_dunes_are_claimed_and_the_rest_of_their_picture_is_not") else {
        return;
    };
    let path = data.join("linear-dunes/linear_dunes_and_drainage_landsat.jpg");
    let mut patches = vec![("dunes".to_owned(), rectangle([810.0, 958.0], [40.0, 180.0]))];
    for i in 0..6 {
        for j in 0..6 {
            let (col, row) = (120.0 * f64::from(i), 138.0 * f64::from(j));
            patches.push((format!("tile {i} {j}"), rectangle([col, col + 120.0], [row, row + 138.0])));
        }
    }
    let findings = measured(&sheet(&path, &patches));
    let (mut trends, mut claims) = (0, 0);
    for p in &findings.patches {
        let claim = bedforms(p);
        println!("{} — {claim:?}", p.sentence);
        if p.name == "dunes" {
            let axis = p.trend.axis.expect("a trend");
            assert!(axis.separation(Axis::from_deg(99.0)) <= 5.0, "{axis:?}");
            let spacing = p.spectrum.spacing.expect("a spacing");
            assert!((5.0..=6.0).contains(&spacing), "{spacing} px");
            assert_eq!(claim, Ok(()));
        } else {
            trends += usize::from(p.trend.defined);
            claims += usize::from(claim.is_ok());
            let says = p.cautions.iter().any(|c| c.code == "trend-only");
            assert_eq!(says, p.trend.defined && claim.is_err(), "{}", p.name);
        }
    }
    println!("of 36 tiles without dunes {trends} have a trend, {claims} are claimed as bedforms");
    assert!(claims <= 1, "{claims} claims of bedforms");
    assert!(trends <= 4, "{trends} trends");
}
