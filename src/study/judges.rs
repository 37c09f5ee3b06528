//! Which wind records judge a patch: all of the sheet, the one that stands nearest, or chosen ones.

use crate::ground::{Body, Caution, LonLat, Place};

use super::{Id, Patch, Sheet, WindChoice, WindEntry};

/// The records that judge a patch, in the order of the sheet.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Judges {
    pub records: Vec<Id>,
    /// Why none was found, or that they stand far away.
    pub cautions: Vec<Caution>,
}

/// A record that stands farther from the patch than this, metres, is named: weather systems are some
/// hundred kilometres wide, and winds over ground so far apart may have little in common.
const FAR_M: f64 = 100_000.0;

/// The judges of `patch`; `place` is its raster's, once open.
pub fn of_patch(sheet: &Sheet, patch: &Patch, place: Option<&Place>) -> Judges {
    let centre = centre(patch, place);
    let records: Vec<Id> = match &patch.winds {
        WindChoice::All => sheet.winds.iter().map(|w| w.id).collect(),
        WindChoice::Chosen(ids) => sheet.winds.iter().map(|w| w.id).filter(|id| ids.contains(id)).collect(),
        WindChoice::Nearest => match nearest(sheet, centre.zip(place)) {
            Ok(id) => vec![id],
            Err(why) => {
                let text = format!("No wind record judges the patch: {why}.");
                return Judges {
                    records: Vec::new(),
                    cautions: vec![Caution::new("no-nearest-record", text)],
                };
            }
        },
    };
    let far = centre.zip(place).into_iter().flat_map(|(centre, place)| {
        let judges = sheet.winds.iter().filter(|w| records.contains(&w.id));
        judges.filter_map(move |w| far_caution(w, distance(w, centre, &place.body)?))
    });
    let cautions = far.collect();
    Judges { records, cautions }
}

/// Longitude and latitude of the middle of a patch's outline; `None` while its raster is closed or has
/// no place on a body.
pub fn centre(patch: &Patch, place: Option<&Place>) -> Option<LonLat> {
    place?.lonlat_of(patch.outline.bounds()?.centre())
}

/// Metres along the ground from `centre` to where the record stands; `None` when it has no place or
/// stands on another body.
pub fn distance(wind: &WindEntry, centre: LonLat, body: &Body) -> Option<f64> {
    let own = wind.body.as_ref().map_or("Earth", |b| b.name.as_str());
    let at = wind.at.filter(|_| own == body.name)?;
    Some(body.shape.geodesic(centre, at).length_m)
}

fn nearest(sheet: &Sheet, stand: Option<(LonLat, &Place)>) -> Result<Id, String> {
    let Some((centre, place)) = stand else {
        return Err("the nearest one is asked for, but the raster has no longitude and latitude".into());
    };
    let reached = sheet.winds.iter().filter_map(|w| Some((distance(w, centre, &place.body)?, w.id)));
    reached.min_by(|a, b| a.0.total_cmp(&b.0)).map(|(_, id)| id).ok_or_else(|| {
        format!(
            "the nearest one is asked for, but no record has a longitude and latitude on {}; give it one on the \
             winds page",
            place.body.name
        )
    })
}

fn far_caution(wind: &WindEntry, distance_m: f64) -> Option<Caution> {
    (distance_m > FAR_M).then(|| {
        Caution::new(
            "far-record",
            format!("The record “{}” stands {:.0} km from the patch.", wind.name, distance_m / 1000.0),
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Affine, Frame, Polygon, Projection};
    use crate::study::demo;

    /// The demo's sheet and a place of 1 km pixels about 64° E on the equator of its world.
    fn scene() -> (Sheet, Place) {
        let sheet = demo::sheet(std::path::Path::new(""));
        let body = Body::halvane();
        let projection =
            Projection::new(&format!("+proj=sinu +lon_0=64 +R={}", body.shape.equatorial_m), body.shape);
        let frame = Frame::Projected { projection: projection.expect("a projection"), unit_m: 1.0 };
        let affine = Affine { a: 1000.0, b: 0.0, c: 0.0, d: 0.0, e: -1000.0, f: 0.0 };
        (sheet, Place { affine, frame, body })
    }

    #[test]
    fn the_nearest_is_nearest_along_the_ground_and_on_the_same_body() {
        let (mut sheet, place) = scene();
        let mut patch = sheet.patches[0].clone();
        patch.outline = Polygon::rectangle(10.0, 10.0);
        patch.winds = WindChoice::Nearest;
        let [first, second] = [sheet.winds[0].id, sheet.winds[1].id];
        let judges = |sheet: &Sheet| of_patch(sheet, &patch, Some(&place));
        let none = judges(&sheet);
        assert!(none.records.is_empty());
        assert_eq!(none.cautions[0].code, "no-nearest-record");
        assert!(none.cautions[0].text.contains("on Halvane"), "{}", none.cautions[0].text);
        sheet.winds[0].at = Some(LonLat { lon: 66.0, lat: 0.0 });
        assert_eq!(judges(&sheet).records, [first]);
        // A longitude of 424° is 64° once round.
        sheet.winds[1].at = Some(LonLat { lon: 424.0, lat: 1.0 });
        assert_eq!(judges(&sheet).records, [second]);
        sheet.winds[1].body = None;
        assert_eq!(judges(&sheet).records, [first], "a record on Earth is not near");
        sheet.winds[0].at = Some(LonLat { lon: 84.0, lat: 0.0 });
        let far = judges(&sheet);
        // 20° less half a patch of a sphere of 1 420 km: 491 km.
        assert!(far.cautions[0].text.contains("491 km"), "{}", far.cautions[0].text);
        assert_eq!(of_patch(&sheet, &patch, None).cautions[0].code, "no-nearest-record");
    }

    #[test]
    fn chosen_records_come_in_the_order_of_the_sheet() {
        let (sheet, place) = scene();
        let mut patch = sheet.patches[0].clone();
        let [first, second] = [sheet.winds[0].id, sheet.winds[1].id];
        patch.winds = WindChoice::Chosen(vec![second, first, Id(99)]);
        assert_eq!(of_patch(&sheet, &patch, Some(&place)).records, [first, second]);
        patch.winds = WindChoice::All;
        assert_eq!(of_patch(&sheet, &patch, None).records, [first, second]);
    }
}
