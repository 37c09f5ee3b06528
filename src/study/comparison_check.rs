//! Problems of a sheet's comparisons.

use crate::ground::Point;

use super::{Sheet, Sources};

/// Comparisons of what is not there, of a raster with itself, of other bodies, or without common ground.
pub fn comparisons(sheet: &Sheet, sources: &Sources, say: &mut impl FnMut(String, String)) {
    for entry in &sheet.comparisons {
        let what = format!("comparison {}", entry.name);
        if entry.years.is_some_and(|y| !y.is_finite() || y == 0.0) {
            say(
                what.clone(),
                "no time passes between its pictures; leave the years out or state them".into(),
            );
        }
        let patch = sheet.patch(entry.patch);
        if patch.is_none() {
            say(what.clone(), format!("it holds patch {}, which the sheet does not have", entry.patch.0));
        }
        if sheet.raster(entry.raster).is_none() {
            say(what.clone(), format!("it names raster {}, which the sheet does not have", entry.raster.0));
        }
        let Some(patch) = patch else { continue };
        if patch.raster == entry.raster {
            say(what, "it holds a patch against its own raster".into());
            continue;
        }
        let (Some(first), Some(second)) =
            (sources.rasters.get(&patch.raster), sources.rasters.get(&entry.raster))
        else {
            continue;
        };
        match super::comparison::Crossing::new(first, second) {
            Err(why) => say(what, why),
            Ok(crossing) => {
                let outline = crossing.outline(&patch.outline);
                let info = second.raster.info();
                let (w, h) = (info.width as f64, info.height as f64);
                let off = |p: &Point| p.x <= 0.0 || p.y <= 0.0 || p.x >= w || p.y >= h;
                let around = outline
                    .bounds()
                    .is_some_and(|b| outline.contains(Point::new(0.5 * w, 0.5 * h)) && b.width() > w);
                if outline.outer.iter().all(off) && !around {
                    say(what, "its second raster does not show the ground of its patch".into());
                }
            }
        }
    }
}
