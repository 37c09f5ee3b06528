//! What the user says and draws of the crests and populations of a patch.

use serde::{Deserialize, Serialize};

use crate::ground::{Axis, Point, Polygon, Polyline};
use crate::science::crest::CrestModel;
pub use crate::science::crest::StrokeKind;

/// Crests of a patch as far as they are the user's; all points are full-resolution pixels of its raster.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct CrestEntry {
    /// What a crest looks like here; that of the settings, or what fits best, when absent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub model: Option<CrestModel>,
    /// Only what is drawn counts: nothing is traced.
    #[serde(skip_serializing_if = "std::ops::Not::not")]
    pub drawn_only: bool,
    /// Ground that is no bedform: ponds, roads, seams.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub masks: Vec<Polygon>,
    /// Tones outside [least, most], in the raster's own numbers, are no ground to trace on.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tone_limits: Option<[f64; 2]>,
    /// One point on each traced line that is no crest.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub rejected: Vec<Point>,
    /// One point on each traced line that the user looked at and lets stand.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub accepted: Vec<Point>,
    /// Places where a line is cut in two.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub cuts: Vec<Point>,
    /// Lines drawn, joining, lengthening or imported.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub strokes: Vec<CrestStroke>,
}

/// A line laid by hand or out of a file.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CrestStroke {
    pub kind: StrokeKind,
    /// Where the user clicked; empty for an imported line.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub picks: Vec<Point>,
    /// The way along the ridge between them.
    pub line: Polyline,
}

/// A population of a patch with a name of its own: the one whose trend lies nearest, within 20°.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PopulationName {
    pub axis: Axis,
    pub name: String,
}

impl CrestEntry {
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_entry_comes_back_as_it_was_and_says_nothing_it_need_not() {
        assert_eq!(serde_json::to_string(&CrestEntry::default()).unwrap(), "{}");
        let line = Polyline(vec![Point::new(0.1, 1.0 / 3.0), Point::new(1e5 + 0.7, 2.0)]);
        let kinds = [StrokeKind::Crest, StrokeKind::Join, StrokeKind::Extend, StrokeKind::Import];
        let entry = CrestEntry {
            model: Some(CrestModel::SlipFace),
            drawn_only: true,
            masks: vec![Polygon { outer: line.0.clone(), holes: vec![line.0.clone()] }],
            tone_limits: Some([-1.5, 0.1]),
            rejected: vec![Point::new(0.3, 0.4)],
            accepted: vec![Point::new(7.0, 0.1)],
            cuts: vec![Point::new(1.1, 2.2)],
            strokes: kinds
                .map(|kind| CrestStroke { kind, picks: line.0.clone(), line: line.clone() })
                .to_vec(),
        };
        let text = serde_json::to_string(&entry).unwrap();
        assert_eq!(serde_json::from_str::<CrestEntry>(&text).unwrap(), entry);
        assert!(text.contains(r#""model":"slip-face""#) && text.contains(r#""kind":"join""#), "{text}");
        assert!(serde_json::from_str::<CrestEntry>(r#"{"cutts":[]}"#).is_err());
    }

    #[test]
    fn edits_stand_in_the_sheet_and_change_its_patch_alone() {
        use crate::study::sheet_file::SheetFile;
        use crate::study::{Id, Patch, Sheet, fingerprint};
        let mut sheet = Sheet::empty("t");
        for id in [1, 2] {
            sheet.patches.push(Patch::new(Id(id), format!("p{id}"), Id(9), Polygon::rectangle(9.0, 9.0)));
        }
        let made = |sheet: &Sheet| [0, 1].map(|n| fingerprint::of_patch(sheet, &sheet.patches[n]));
        let before = made(&sheet);
        sheet.patches[0].crests.cuts.push(Point::new(3.0, 4.0));
        assert_eq!([made(&sheet)[0] == before[0], made(&sheet)[1] == before[1]], [false, true]);
        let folder = std::path::Path::new("/nowhere");
        let text = SheetFile::new(sheet.clone(), serde_json::Value::Null).render(folder);
        assert_eq!(SheetFile::parse(&text, folder).unwrap().sheet.patches, sheet.patches);
    }
}
