//! Sorrel Reach, a sand sea on the invented small world Halvane: a radar-like mosaic, a matching
//! elevation raster and two wind records, all made from a stated truth.
//!
//! North is up at the central meridian; pixels are 80 m. Upper left long dunes part round two
//! outcrops; upper right transverse dunes fill a corridor; lower left lies a bare plain; lower right
//! a dry channel branches.

mod channels;
mod dunes;
mod winds;

use rand_distr::{Distribution as _, Gamma, Normal};
use rayon::prelude::{IndexedParallelIterator as _, ParallelIterator as _, ParallelSliceMut as _};

use crate::ground::{Affine, Axis, Azimuth, Grid, Point, Polygon, Seed};

pub use channels::{Reach as ChannelReach, channel_ground, channels, network_truth};
pub use winds::{Season, corridor_record, reach_record};

use super::smooth::{SampledField, SmoothField};

/// Columns and rows of the mosaic.
pub const SIZE: (usize, usize) = (1200, 900);
/// Ground size of a mosaic pixel, m.
pub const PIXEL_M: f64 = 80.0;
/// Central meridian of the map, degrees east: sinusoidal on Halvane's sphere, so that true north
/// leans off the middle.
pub const CENTRE_LON: f64 = 64.0;
/// Upper left corner of the mosaic on that map, m.
pub const ORIGIN: (f64, f64) = (-31_000.0, 452_000.0);
/// Where the radar looks from.
pub const LOOK_FROM: f64 = 24.0;
/// The liquid that once ran there, kg m⁻³, and the grains of its bed.
pub const LIQUID_DENSITY: f64 = 680.0;
pub const BED_GRAIN_DENSITY: f64 = 1_900.0;
/// Looks of the speckle.
pub const LOOKS: f64 = 4.0;
/// Elevation cells per mosaic pixel side.
pub const ELEVATION_STEP: usize = 2;

/// Standard deviation of the roughness of the ground, m.
const ROUGHNESS_M: f64 = 0.4;
/// Distance from the middle of a bed at which the ground is as rough as elsewhere, mosaic pixels.
const BED_FREE_PX: f64 = 12.0;

/// Contributing area that makes a channel of the demo, m². At the heads the half cones above them have gathered it,
/// hillslopes stay below half of it, and up to twice of it the network is the same. The constant-drop test cannot
/// find it: these valleys were drawn, not carved.
pub const CHANNEL_THRESHOLD_M2: f64 = 25e6;

/// What is true of a demo patch.
#[derive(Clone, Debug)]
pub struct PatchTruth {
    pub name: &'static str,
    pub outline: Polygon,
    /// Trend on the map grid (clockwise from map north) and spacing in metres; `None` where the
    /// ground has no preferred trend.
    pub bedforms: Option<Bedforms>,
    /// Obliquity class that its record must give.
    pub class: Option<&'static str>,
}

/// Regular bedforms.
#[derive(Clone, Copy, Debug)]
pub struct Bedforms {
    pub grid_trend: Axis,
    pub spacing_m: f64,
}

/// The long dunes' trend on the map grid, degrees.
pub const LONG_TREND: f64 = 76.0;
/// Their spacing, m.
pub const LONG_SPACING: f64 = 1_760.0;
/// The corridor dunes' trend on the map grid, degrees.
pub const CORRIDOR_TREND: f64 = 158.0;
/// Their spacing, m.
pub const CORRIDOR_SPACING: f64 = 1_200.0;

/// The patches of the demo with their truth.
pub fn patches() -> Vec<PatchTruth> {
    let polygon = |points: &[(f64, f64)]| Polygon {
        outer: points.iter().map(|(x, y)| Point::new(*x, *y)).collect(),
        holes: Vec::new(),
    };
    let long = Polygon {
        outer: polygon(&[(40.0, 40.0), (640.0, 30.0), (655.0, 300.0), (630.0, 520.0), (50.0, 535.0)]).outer,
        holes: dunes::OUTCROPS.iter().map(|o| o.ring(1.35)).collect(),
    };
    vec![
        PatchTruth {
            name: "Long dunes",
            outline: long,
            bedforms: Some(Bedforms { grid_trend: Axis::from_deg(LONG_TREND), spacing_m: LONG_SPACING }),
            class: Some("longitudinal"),
        },
        PatchTruth {
            name: "Corridor dunes",
            outline: polygon(&[(775.0, 55.0), (1140.0, 45.0), (1150.0, 440.0), (770.0, 450.0)]),
            bedforms: Some(Bedforms {
                grid_trend: Axis::from_deg(CORRIDOR_TREND),
                spacing_m: CORRIDOR_SPACING,
            }),
            class: Some("transverse"),
        },
        PatchTruth {
            name: "Bare plain",
            outline: polygon(&[(50.0, 625.0), (520.0, 620.0), (530.0, 865.0), (45.0, 870.0)]),
            bedforms: None,
            class: None,
        },
    ]
}

/// An outcrop round which the long dunes part: its ring, and the obliquity of the dunes to the wind that
/// parted there. They follow the flow's lines, so it is 0.
#[derive(Clone, Debug)]
pub struct OutcropTruth {
    pub name: &'static str,
    pub outline: Polygon,
    pub obliquity_deg: f64,
}

/// The outcrops of the demo with their truth.
pub fn outcrops() -> Vec<OutcropTruth> {
    ["Tall Stack", "Low Stack"]
        .into_iter()
        .zip(&dunes::OUTCROPS)
        .map(|(name, o)| OutcropTruth {
            name,
            outline: Polygon { outer: o.ring(1.0), holes: Vec::new() },
            obliquity_deg: 0.0,
        })
        .collect()
}

/// Pixel to map metres.
pub fn affine(step: usize) -> Affine {
    let size = PIXEL_M * step as f64;
    Affine { a: size, b: 0.0, c: ORIGIN.0, d: 0.0, e: -size, f: ORIGIN.1 }
}

/// The direction the radar looks from.
pub fn look_from() -> Azimuth {
    Azimuth::from_deg(LOOK_FROM)
}

/// The mosaic: radar amplitude as 8-bit numbers (0 is kept for "no data", a notch in the lower edge).
pub fn mosaic(seed: Seed) -> Grid<f32> {
    let (width, height) = SIZE;
    let ground = Ground::new(seed);
    // Intensity speckle of L looks: Gamma of shape L and mean 1 (Goodman).
    let speckle = Gamma::new(LOOKS, 1.0 / LOOKS).ok();
    let mut values = vec![0.0f32; width * height];
    values.par_chunks_mut(width).enumerate().for_each(|(row, line)| {
        let mut random = seed.stream("scene.reach.speckle", row as u64);
        for (col, value) in line.iter_mut().enumerate() {
            let p = pixel_centre(col, row);
            let grain = speckle.map_or(1.0, |s| s.sample(&mut random));
            if !is_gap(p) {
                let amplitude = 78.0 * (ground.backscatter(p) * grain).sqrt();
                *value = amplitude.round().clamp(1.0, 255.0) as f32;
            }
        }
    });
    let mut grid = Grid::from_parts(width, height, values, None);
    grid.mask_where(|col, row| !is_gap(pixel_centre(col, row)));
    grid
}

fn pixel_centre(col: usize, row: usize) -> Point {
    Point::new(col as f64 + 0.5, row as f64 + 0.5)
}

/// A smooth field over the mosaic.
fn sampled(length: f64, seed: Seed) -> SampledField {
    SmoothField::new(length, seed).sampled(SIZE.0 as f64, SIZE.1 as f64, 3.0)
}

/// The notch where a swath is missing.
fn is_gap(p: Point) -> bool {
    p.y > 872.0 + 0.06 * (p.x - 560.0).abs() && (p.x - 560.0).abs() < 130.0
}

/// Everything that shapes the mean backscatter (1 = plain ground).
struct Ground {
    tone: SampledField,
    dunes: dunes::Dunes,
    channels: Vec<ChannelReach>,
}

impl Ground {
    fn new(seed: Seed) -> Self {
        Self {
            tone: sampled(420.0, seed.child("tone")),
            dunes: dunes::Dunes::new(seed),
            channels: channels(),
        }
    }

    fn backscatter(&self, p: Point) -> f64 {
        let plain = 1.0 + 0.10 * self.tone.at(p);
        let dunes = self.dunes.contrast(p);
        let outcrop = self.dunes.outcrop(p);
        let channel = channels::cover(&self.channels, p);
        let rough = plain * (1.0 + dunes) + 1.6 * outcrop;
        (rough * (1.0 - 0.62 * channel)).max(0.05)
    }
}

/// The elevation raster in metres, at [`ELEVATION_STEP`] mosaic pixels a cell: a plane that falls to
/// the south-east, dunes left out, with the channel valleys cut into it and the roughness of real ground, which
/// the beds have not.
pub fn elevation(seed: Seed) -> Grid<f32> {
    let (width, height) = (SIZE.0 / ELEVATION_STEP, SIZE.1 / ELEVATION_STEP);
    let swell = sampled(300.0, seed.child("swell"));
    let reaches = channels();
    let normal = Normal::new(0.0, ROUGHNESS_M).ok();
    let mut values = vec![0.0f32; width * height];
    values.par_chunks_mut(width).enumerate().for_each(|(row, line)| {
        let mut random = seed.stream("scene.reach.roughness", row as u64);
        for (col, value) in line.iter_mut().enumerate() {
            let p = Point::new(
                (col as f64 + 0.5) * ELEVATION_STEP as f64,
                (row as f64 + 0.5) * ELEVATION_STEP as f64,
            );
            let rough = normal.map_or(0.0, |n| n.sample(&mut random));
            let plane = 960.0 - 0.16 * p.x - 0.20 * p.y + 6.0 * swell.at(p);
            let (valley, distance) = channels::valley(&reaches, p).unwrap_or((plane, f64::INFINITY));
            let height = valley.min(plane) + rough * (distance / BED_FREE_PX).min(1.0);
            *value = (height * 10.0).round() as f32 / 10.0;
        }
    });
    Grid::from_parts(width, height, values, None)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_mosaic_is_the_same_twice_and_has_its_gap() {
        let (a, b) = (mosaic(Seed(1)), mosaic(Seed(1)));
        assert_eq!(a, b);
        assert_ne!(a, mosaic(Seed(2)));
        assert!(!a.is_valid(560, 899));
        assert!(a.valid_count() > a.len() * 98 / 100);
    }

    #[test]
    fn beds_fall_downstream_and_valley_sides_slope_to_them() {
        let dem = elevation(Seed(1));
        let cell = |p: Point| f64::from(dem.at((p.x / 2.0) as usize, (p.y / 2.0) as usize));
        for reach in channels() {
            let line = &reach.line.0;
            // Beds fall from point to point by more than the steps of 0.1 m hide.
            for pair in line.windows(2).filter(|w| w[0].distance(w[1]) > 4.0) {
                assert!(cell(pair[0]) > cell(pair[1]), "{reach:?} at {pair:?}");
            }
            let middle = line[line.len() / 2];
            let ahead = line[line.len() / 2 + 1];
            let (dx, dy) = (ahead.x - middle.x, ahead.y - middle.y);
            let side = |n: f64| {
                let step = n / dx.hypot(dy);
                cell(Point::new(middle.x - dy * step, middle.y + dx * step))
            };
            for n in [1.0, -1.0] {
                let heights = [4.0, 9.0, 14.0].map(|d| side(n * d));
                assert!(heights.is_sorted() && heights[0] > cell(middle), "{reach:?}: {heights:?}");
            }
        }
    }

    #[test]
    fn the_true_network_has_the_orders_said() {
        let truth = network_truth();
        let orders: Vec<_> = truth.reaches.iter().map(|r| r.order.map_or(0, |o| o.strahler)).collect();
        assert_eq!(orders, channels().iter().map(|r| r.order).collect::<Vec<_>>());
        assert_eq!((truth.heads().len(), truth.junctions().len(), truth.outlets().len()), (5, 4, 1));
        assert_eq!((truth.nodes.len(), truth.loops()), (10, 0));
        for reach in &truth.reaches {
            assert!(truth.nodes[reach.from].elevation_m > truth.nodes[reach.to].elevation_m);
            assert!(reach.stations.is_sorted_by(|a, b| a.elevation_m > b.elevation_m && a.along < b.along));
        }
    }

    #[test]
    fn the_ground_of_the_channels_holds_them_and_their_valleys() {
        let ground = channel_ground();
        let reaches = channels();
        for reach in &reaches {
            assert!(reach.line.0.iter().all(|p| ground.contains(*p)), "{reach:?}");
        }
        for p in &ground.outer {
            assert!(channels::valley(&reaches, *p).is_some_and(|(_, d)| d > 30.0 || p.x > 1190.0), "{p:?}");
        }
    }
}
