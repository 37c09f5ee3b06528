//! What is under the pointer, in words.

use crate::ground::{Frame, LonLat};
use crate::plate::numbers;

use super::{Model, Opened};

/// Pixel, map coordinates, longitude and latitude, value; `None` off the raster.
pub fn of_cursor(model: &Model) -> Option<String> {
    let cursor = model.session.cursor?;
    let laid = model.session.rasters.get(&cursor.raster).and_then(Opened::laid)?;
    let (x, y) = (cursor.pixel.x.floor(), cursor.pixel.y.floor());
    let mut parts = vec![format!("column {}, row {}", numbers::fixed(x, 0), numbers::fixed(y, 0))];
    let map = laid.place.map_of(cursor.pixel);
    match laid.place.frame {
        Frame::Projected { .. } | Frame::Plane { .. } => {
            parts.push(format!("x {}, y {}", numbers::fixed(map.x, 0), numbers::fixed(map.y, 0)));
        }
        Frame::Geographic { .. } | Frame::Pixels { .. } => {}
    }
    parts.extend(laid.place.lonlat_of(cursor.pixel).map(lonlat));
    let [width, height] = laid.size.map(|side| side as f64);
    if (0.0..width).contains(&x) && (0.0..height).contains(&y) {
        parts.push(match laid.tiles.value_at(x as usize, y as usize) {
            Some((value, 1)) => format!("value {}", numbers::significant(f64::from(value), 5)),
            Some((value, texel)) => {
                let value = numbers::significant(f64::from(value), 4);
                format!("about {value} over {texel} × {texel} pixels")
            }
            None => "no value".into(),
        });
    }
    Some(parts.join("    "))
}

/// `"12.3456° E, 4.5678° S"`: a ten-thousandth of a degree is some metres on any body.
pub fn lonlat(at: LonLat) -> String {
    let side = |value: f64, plus: &'static str, minus: &'static str| {
        format!("{}° {}", numbers::fixed(value.abs(), 4), if value < 0.0 { minus } else { plus })
    };
    format!("{}, {}", side(at.lon, "E", "W"), side(at.lat, "N", "S"))
}

#[cfg(test)]
mod tests {
    use super::lonlat;
    use crate::ground::LonLat;

    #[test]
    fn west_and_south_are_named_not_signed() {
        assert_eq!(lonlat(LonLat { lon: -12.5, lat: 3.25 }), "12.5000° W, 3.2500° N");
    }
}
