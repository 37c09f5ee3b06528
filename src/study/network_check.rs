//! Problems of a sheet's channel networks.

use crate::ground::{Bounds, Point};

use super::{ImageKind, NetworkEntry, NetworkSource, Sheet, Sources};

/// Networks on rasters that are not there, ground without area, marks off the raster, ranges turned round.
pub fn networks(sheet: &Sheet, sources: &Sources, say: &mut impl FnMut(String, String)) {
    ranges(sheet, say);
    for entry in &sheet.networks {
        let what = format!("network {}", entry.name);
        let Some(raster) = sheet.raster(entry.raster) else {
            say(what, format!("it lies on raster {}, which the sheet does not have", entry.raster.0));
            continue;
        };
        if entry.elevation().is_some() && raster.kind != ImageKind::Elevation {
            say(
                what.clone(),
                format!("it is routed over “{}”, which is not marked as elevation", raster.name),
            );
        }
        if entry.within.as_ref().is_some_and(|w| w.outer.len() < 3 || w.area() <= 0.0) {
            say(what.clone(), "its ground has no area; outline it again".into());
        }
        if let Some(id) = entry.image().and_then(|image| image.elevation) {
            match sheet.raster(id) {
                None => say(
                    what.clone(),
                    format!("it names elevation raster {}, which the sheet does not have", id.0),
                ),
                Some(named) if named.kind != ImageKind::Elevation => {
                    say(
                        what.clone(),
                        format!("it takes heights from “{}”, which is not marked as elevation", named.name),
                    );
                }
                Some(_) => {}
            }
        }
        if let Some(threshold) =
            entry.elevation().and_then(|e| e.threshold_m2).filter(|t| t.is_nan() || *t <= 0.0)
        {
            say(what.clone(), format!("its threshold is {threshold} m²; it must be above 0"));
        }
        if let Some(open) = sources.rasters.get(&entry.raster) {
            let info = open.raster.info();
            let size = [info.width as f64, info.height as f64];
            marks(entry, size, &what, say);
        }
    }
}

/// Outlets, drawn channels and marks must lie on the raster.
fn marks(entry: &NetworkEntry, [width, height]: [f64; 2], what: &str, say: &mut impl FnMut(String, String)) {
    let off = |p: &&Point| !(p.x >= 0.0 && p.y >= 0.0 && p.x <= width && p.y <= height);
    let mut named = |kind: &str, points: &[Point]| {
        if let Some(p) = points.iter().find(off) {
            say(
                what.to_owned(),
                format!(
                    "{kind} at pixel ({}, {}) lies off its raster of {width} × {height} pixels",
                    p.x, p.y
                ),
            );
        }
    };
    match &entry.source {
        NetworkSource::Elevation(it) => named("an outlet", &it.outlets),
        NetworkSource::Image(it) => {
            let drawn: Vec<Point> = it.traced.iter().flat_map(|t| t.line.0.iter().copied()).collect();
            named("a traced channel", &drawn);
            named("a struck reach", &it.struck);
            named("an arrow", &it.flows.concat());
        }
    }
    if let Some(bounds) = entry.within.as_ref().and_then(|w| Bounds::of(w.outer.iter().copied()))
        && (bounds.max.x <= 0.0 || bounds.max.y <= 0.0 || bounds.min.x >= width || bounds.min.y >= height)
    {
        say(what.to_owned(), format!("its ground lies outside its raster of {width} × {height} pixels"));
    }
}

/// Pairs of settings of which the first must not pass the second.
fn ranges(sheet: &Sheet, say: &mut impl FnMut(String, String)) {
    let (c, f) = (&sheet.settings.channel, &sheet.settings.flow);
    let slope = f.least_slope.zip(f.greatest_slope).unwrap_or((0.0, 1.0));
    for (least, greatest, [low, high]) in [
        ("channel.narrowest_px", "channel.widest_px", [c.narrowest_px, c.widest_px]),
        (
            "flow.least_width_to_depth",
            "flow.greatest_width_to_depth",
            [f.least_width_to_depth, f.greatest_width_to_depth],
        ),
        ("flow.least_slope", "flow.greatest_slope", [slope.0, slope.1]),
        ("flow.least_friction", "flow.greatest_friction", [f.least_friction, f.greatest_friction]),
        ("flow.least_shields", "flow.greatest_shields", [f.least_shields, f.greatest_shields]),
        ("flow.least_manning", "flow.greatest_manning", [f.least_manning, f.greatest_manning]),
        ("flow.liquid_density", "flow.grain_density", [f.liquid_density, f.grain_density]),
    ] {
        if low > high {
            say("settings".into(), format!("{least} is {low}, above {greatest} of {high}"));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Polygon;
    use crate::study::{FromImage, Id};

    #[test]
    fn a_network_that_cannot_be_is_named_with_the_reason() {
        let mut sheet = Sheet::empty("t");
        sheet.networks.push(NetworkEntry::from_elevation(Id(1), "lost", Id(9)));
        let mut said = Vec::new();
        networks(&sheet, &Sources::default(), &mut |what, why| said.push((what, why)));
        assert_eq!(said.len(), 1);
        assert!(said[0].0 == "network lost" && said[0].1.contains("raster 9"), "{said:?}");
    }

    #[test]
    fn marks_off_the_raster_and_turned_ranges_are_named() {
        let mut entry = NetworkEntry::from_image(Id(1), "n", Id(2));
        entry.source = NetworkSource::Image(FromImage {
            struck: vec![Point::new(101.0, 5.0)],
            flows: vec![[Point::new(1.0, 1.0), Point::new(f64::NAN, 1.0)]],
            ..FromImage::default()
        });
        entry.within = Some(Polygon::rectangle(10.0, 10.0).map(|p| Point::new(p.x + 200.0, p.y)));
        let mut said = Vec::new();
        marks(&entry, [100.0, 50.0], "n", &mut |_, why| said.push(why));
        assert_eq!(said.len(), 3, "{said:?}");
        let mut sheet = Sheet::empty("t");
        sheet.settings.channel.narrowest_px = 50.0;
        let mut said = Vec::new();
        ranges(&sheet, &mut |_, why| said.push(why));
        assert_eq!(said, ["channel.narrowest_px is 50, above channel.widest_px of 40"]);
    }
}
