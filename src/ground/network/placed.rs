//! From pixels to the ground: lengths, distances and widths of a network in the unit of its place.

use crate::ground::{Place, Point};

use super::Network;

impl Network {
    /// The same network with every point mapped by `to_pixel` to full-resolution pixels of `place`, lengths and
    /// distances measured along the ground. Widths, in pixels of the old frame before, become ground widths
    /// across each channel. `scale` is full-resolution pixels per pixel of the old frame.
    pub fn on_ground(mut self, place: &Place, scale: f64, to_pixel: impl Fn(Point) -> Point) -> Self {
        for node in &mut self.nodes {
            node.at = to_pixel(node.at);
        }
        for reach in &mut self.reaches {
            reach.line.0.iter_mut().for_each(|p| *p = to_pixel(*p));
            reach.length = reach.line.0.windows(2).map(|w| ground_distance(place, w[0], w[1])).sum();
            let mut along = 0.0;
            for i in 0..reach.stations.len() {
                let at = to_pixel(reach.stations[i].at);
                along += if i > 0 { ground_distance(place, reach.stations[i - 1].at, at) } else { 0.0 };
                let station = &mut reach.stations[i];
                station.at = at;
                station.along = along;
                station.banks = station.banks.map(|banks| banks.map(&to_pixel));
                station.width = match station.banks {
                    Some([left, right]) => Some(ground_distance(place, left, right)),
                    None => station.width.map(|w| w * scale * pixel_size(place, at)),
                };
            }
            let size = reach.line.0.get(reach.line.0.len() / 2).map_or(1.0, |p| pixel_size(place, *p));
            if let Some(width) = &mut reach.width {
                width.mean *= scale * size;
                width.se *= scale * size;
            }
        }
        self
    }
}

/// Ground distance of two near points, in the unit of the place: by the local frame at their middle.
pub fn ground_distance(place: &Place, a: Point, b: Point) -> f64 {
    let middle = Point::new(0.5 * (a.x + b.x), 0.5 * (a.y + b.y));
    place.local_frame(middle).map_or(0.0, |frame| frame.length(b.x - a.x, b.y - a.y))
}

/// Root of the ground area of a pixel.
fn pixel_size(place: &Place, at: Point) -> f64 {
    place.local_frame(at).map_or(0.0, |frame| frame.pixel_area().sqrt())
}
