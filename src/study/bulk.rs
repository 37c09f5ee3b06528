//! Which of many stations or model cells to take: the nearest to the patches, or those inside a box.

use crate::files::wind_table::Stand;
use crate::ground::{BodyShape, LonLat};

/// Candidates looked at exactly for each one taken: on an ellipsoid the order by angle can differ.
const CANDIDATES: usize = 8;

/// The `each` stands nearest to every one of `centres` along the ground, by index in their order; the
/// first `each` when nothing has a place.
pub fn nearest(stands: &[Stand], centres: &[LonLat], shape: BodyShape, each: usize) -> Vec<usize> {
    let mut taken: Vec<usize> = Vec::new();
    for centre in centres {
        let up = direction(*centre);
        let mut near: Vec<(f64, usize, LonLat)> = stands
            .iter()
            .enumerate()
            .filter_map(|(i, stand)| {
                let at = stand.at?;
                let way = direction(at);
                Some((-(0..3).map(|k| up[k] * way[k]).sum::<f64>(), i, at))
            })
            .collect();
        let most = (CANDIDATES * each).min(near.len());
        if most < near.len() {
            near.select_nth_unstable_by(most, |a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
            near.truncate(most);
        }
        let mut exact: Vec<(f64, usize)> =
            near.into_iter().map(|(_, i, at)| (shape.geodesic(*centre, at).length_m, i)).collect();
        exact.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
        taken.extend(exact.into_iter().take(each).map(|(_, i)| i));
    }
    if taken.is_empty() {
        return (0..stands.len().min(each)).collect();
    }
    taken.sort_unstable();
    taken.dedup();
    taken
}

/// A box of longitude and latitude, degrees; it may cross the date line, then `west` > `east`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LonLatBox {
    pub west: f64,
    pub east: f64,
    pub south: f64,
    pub north: f64,
}

/// The stands inside a box, by index.
pub fn inside(stands: &[Stand], area: LonLatBox) -> Vec<usize> {
    let eastward = |lon: f64| (lon - area.west).rem_euclid(360.0);
    let holds = |at: LonLat| {
        (area.south..=area.north).contains(&at.lat)
            && eastward(at.lon) <= (area.east - area.west).rem_euclid(360.0)
    };
    stands.iter().enumerate().filter(|(_, s)| s.at.is_some_and(holds)).map(|(i, _)| i).collect()
}

fn direction(at: LonLat) -> [f64; 3] {
    let ((sin_lat, cos_lat), (sin_lon, cos_lon)) =
        (at.lat.to_radians().sin_cos(), at.lon.to_radians().sin_cos());
    [cos_lat * cos_lon, cos_lat * sin_lon, sin_lat]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Body;
    use crate::study::demo;

    /// A grid of whole degrees about the date line.
    fn grid() -> Vec<Stand> {
        let import = demo::sheet(std::path::Path::new("")).winds[0].import.clone();
        let cells = (-5..=5).flat_map(|lat| (175..=185).map(move |lon| (f64::from(lon), f64::from(lat))));
        cells
            .map(|(lon, lat)| Stand {
                name: format!("{lon} {lat}"),
                at: Some(LonLat { lon, lat }.folded()),
                import: import.clone(),
            })
            .collect()
    }

    #[test]
    fn the_nearest_are_found_across_the_date_line() {
        let (stands, earth) = (grid(), Body::earth().shape);
        let names = |taken: Vec<usize>| taken.iter().map(|i| stands[*i].name.clone()).collect::<Vec<_>>();
        let centres = [LonLat { lon: -179.9, lat: 0.2 }, LonLat { lon: 176.4, lat: -4.6 }];
        assert_eq!(names(nearest(&stands, &centres, earth, 1)), ["176 -5", "180 0"]);
        let four = nearest(&stands, &centres[..1], earth, 4);
        // Brute force over all.
        let mut all: Vec<(f64, usize)> = stands
            .iter()
            .enumerate()
            .filter_map(|(i, s)| Some((earth.geodesic(centres[0], s.at?).length_m, i)))
            .collect();
        all.sort_by(|a, b| a.0.total_cmp(&b.0));
        let mut want: Vec<usize> = all[..4].iter().map(|(_, i)| *i).collect();
        want.sort_unstable();
        assert_eq!(four, want);
        assert_eq!(nearest(&stands, &[], earth, 3), [0, 1, 2]);
    }

    #[test]
    fn a_box_may_cross_the_date_line() {
        let stands = grid();
        let area = LonLatBox { west: 179.0, east: -178.0, south: 1.0, north: 2.0 };
        let taken = inside(&stands, area);
        assert_eq!(taken.len(), 8);
        assert!(taken.iter().all(|i| stands[*i].at.is_some_and(|at| at.lon >= 179.0 || at.lon <= -178.0)));
    }
}
