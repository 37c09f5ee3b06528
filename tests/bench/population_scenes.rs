//! Fields of one and of two populations with everything about them known.

use std::f64::consts::TAU;

use rand::Rng as _;
use ventifact::ground::{Axis, Grid, Place, Point, Polygon, Seed, Work};
use ventifact::science::orientation::band::band_sweep;
use ventifact::science::orientation::populations::{Population, PopulationSettings, populations};
use ventifact::science::scene::{DuneTexture, speckle, speckled};

/// Where two populations lie.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Lie {
    /// Everywhere both.
    Superposed,
    /// The fine one on 0.65 of the ground, the coarse one on the rest, a wavy border between.
    Beside,
}

/// A fine population of 12 px and a coarse one of three times that spacing.
#[derive(Clone, Copy, Debug)]
pub struct Two {
    pub lie: Lie,
    /// Trend of the fine one, and how much further clockwise the coarse one runs, degrees.
    pub trend: f64,
    pub apart: f64,
    /// Amplitude of the coarse one over that of the fine one.
    pub coarse: f64,
    /// Looks of the speckle; none without.
    pub looks: Option<f64>,
    pub seed: u64,
}

/// What a field of two holds.
pub struct Truth {
    pub image: Grid<f32>,
    pub logarithm: bool,
    pub axes: [Axis; 2],
    /// Superposed: shares of the variance laid in; beside: of the ground.
    pub weights: [f64; 2],
}

const FINE_PX: f64 = 12.0;
const RATIO: f64 = 3.0;
const SHARE: f64 = 0.65;
/// Standard deviation of ln backscatter of a population of amplitude one.
const DEPTH: f64 = 0.5;

impl Two {
    pub fn draw(&self, size: usize) -> Truth {
        let seed = Seed(self.seed);
        let frame = Place::pixels(0.0).local_frame(Point::new(0.0, 0.0)).expect("pixels");
        let texture = |trend: f64, spacing: f64, label: &str| {
            DuneTexture { trend: Axis::from_deg(trend), spacing, spread_deg: 6.0, bandwidth: 0.08 }.draw(
                size,
                size,
                frame,
                &mut seed.stream(label, 0),
            )
        };
        let fine = texture(self.trend, FINE_PX, "fine");
        let coarse =
            texture(self.trend + self.apart, RATIO * FINE_PX, "coarse").map(|v| self.coarse as f32 * v);
        let border = |row: usize| SHARE * size as f64 + 20.0 * (row as f64 / 50.0).sin();
        let tone = |col: usize, row: usize| match self.lie {
            Lie::Superposed => fine.at(col, row) + coarse.at(col, row),
            Lie::Beside if (col as f64) < border(row) => fine.at(col, row),
            Lie::Beside => coarse.at(col, row),
        };
        let share = match self.lie {
            Lie::Superposed => variance(&fine) / (variance(&fine) + variance(&coarse)),
            Lie::Beside => SHARE,
        };
        let axes = [self.trend, self.trend + self.apart].map(Axis::from_deg);
        let image = picture(&Grid::from_fn(size, size, tone), self.looks, seed);
        Truth { image, logarithm: self.looks.is_some(), axes, weights: [share, 1.0 - share] }
    }
}

fn variance(grid: &Grid<f32>) -> f64 {
    let n = grid.len() as f64;
    let mean = grid.valid_values().map(f64::from).sum::<f64>() / n;
    grid.valid_values().map(|v| (f64::from(v) - mean).powi(2)).sum::<f64>() / n
}

/// As a camera sees relief, or as a radar with speckle.
fn picture(relief: &Grid<f32>, looks: Option<f64>, seed: Seed) -> Grid<f32> {
    let Some(looks) = looks else { return relief.clone() };
    let tone = relief.map(|v| (DEPTH * f64::from(v)).exp() as f32);
    let grain = speckle(relief.width(), relief.height(), looks, &mut seed.stream("speckle", 0));
    speckled(&tone, &grain)
}

/// What one population may be like.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Single {
    /// Trends spread by 20°, spacings by a quarter.
    Broad,
    /// Crests that swing by 30° and back.
    Wavy,
    /// Straight crests with a dislocation every ten spacings or so.
    Defects,
    /// Steep on one side: overtones of a half, a third … of the amplitude.
    Uneven,
    /// Swinging, with dislocations, steep on one side, spread by 8°.
    All,
}

impl Single {
    pub const ALL: [Self; 5] = [Self::Broad, Self::Wavy, Self::Defects, Self::Uneven, Self::All];

    /// A field of one population at a trend, spacing and phase of chance.
    pub fn draw(self, size: usize, looks: Option<f64>, seed: u64) -> Grid<f32> {
        let seed = Seed(seed);
        let mut random = seed.stream("single", 0);
        let trend = random.random_range(0.0..180.0);
        let spacing = random.random_range(10.0..22.0);
        let frame = Place::pixels(0.0).local_frame(Point::new(0.0, 0.0)).expect("pixels");
        if self == Self::Broad {
            let texture =
                DuneTexture { trend: Axis::from_deg(trend), spacing, spread_deg: 20.0, bandwidth: 0.25 };
            return picture(&texture.draw(size, size, frame, &mut random), looks, seed);
        }
        let wavy = matches!(self, Self::Wavy | Self::All);
        let uneven = matches!(self, Self::Uneven | Self::All);
        let defects = if matches!(self, Self::Defects | Self::All) {
            let count = (size as f64 / (10.0 * spacing)).powi(2).ceil() as usize;
            let place = |random: &mut rand_chacha::ChaCha8Rng| random.random_range(0.0..size as f64);
            (0..count)
                .map(|i| (place(&mut random), place(&mut random), if i % 2 == 0 { 1.0 } else { -1.0 }))
                .collect()
        } else {
            Vec::new()
        };
        let (east, north) = Axis::from_deg(trend).perpendicular().azimuth().east_north();
        // Slope 2π swing/length = tan 30°.
        let length = 8.0 * spacing;
        let swing = if wavy { 30f64.to_radians().tan() * length / TAU } else { 0.0 };
        let start = random.random_range(0.0..TAU);
        let relief = Grid::from_fn(size, size, |col, row| {
            let (x, y) = (col as f64, -(row as f64));
            let (across, along) = (x * east + y * north, x * north - y * east);
            let mut phase = TAU * (across + swing * (TAU * along / length).sin()) / spacing + start;
            for (dx, dy, sense) in &defects {
                phase += sense * (row as f64 - dy).atan2(col as f64 - dx);
            }
            let overtones = if uneven { 4 } else { 1 };
            (1..=overtones).map(|k| (f64::from(k) * phase).sin() / f64::from(k)).sum::<f64>() as f32
        });
        if self != Self::All {
            return picture(&relief, looks, seed);
        }
        let spread = DuneTexture { trend: Axis::from_deg(trend), spacing, spread_deg: 8.0, bandwidth: 0.1 };
        let spread = spread.draw(size, size, frame, &mut random);
        let both = Grid::from_fn(size, size, |c, r| relief.at(c, r) + 0.5 * spread.at(c, r));
        picture(&both, looks, seed)
    }
}

/// The populations found in a whole picture.
pub fn found(image: &Grid<f32>, logarithm: bool) -> Vec<Population> {
    let patch = Polygon::rectangle(image.width() as f64, image.height() as f64);
    let (place, work) = (Place::pixels(0.0), Work::quiet());
    let sweep = band_sweep(image, &patch, &place, 0.01, logarithm, &work).expect("not stopped");
    let settings = PopulationSettings { significance: 0.01, logarithm, most_modes: 4 };
    populations(image, &patch, &place, &sweep, &settings, Seed(7), &work).expect("not stopped")
}

/// Greatest error of axis (degrees) and weight of two found populations; `None` unless there are two.
pub fn errors(found: &[Population], truth: &Truth) -> Option<[f64; 2]> {
    let [a, b] = found else { return None };
    let off = |p: &Population, i: usize| p.axis.separation(truth.axes[i]);
    let (fine, coarse) = if off(a, 0) + off(b, 1) < off(a, 1) + off(b, 0) { (a, b) } else { (b, a) };
    let weight = (fine.weight - truth.weights[0]).abs().max((coarse.weight - truth.weights[1]).abs());
    Some([off(fine, 0).max(off(coarse, 1)), weight])
}
