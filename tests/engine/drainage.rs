//! Properties of drainage: what filling and routing must keep on any raster.


use rand::{Rng as _, SeedableRng as _};
use rand_chacha::ChaCha8Rng;

use ventifact::assert_close;
use ventifact::ground::{Grid, Work};
use ventifact::science::drainage::accumulate::area;
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::condition::{BreachLimits, Conditioned, Conditioning, condition};
use ventifact::science::drainage::d8::receivers;
use ventifact::science::drainage::routing::{OUT, Receivers, Router, STEPS, VOID};

const LIMITS: BreachLimits = BreachLimits { depth_m: 20.0, cells: 50 };
const ROUTERS: [Router; 4] = [Router::D8, Router::DInfinity, Router::Freeman, Router::Quinn];

/// A raster of one of several kinds: rough, stepped (many ties and flats), sloping; with or without missing cells.
fn raster(seed: u64) -> Grid<f32> {
    let mut random = ChaCha8Rng::seed_from_u64(seed);
    let (width, height) = (random.random_range(1..40), random.random_range(1..40));
    let levels = [3.0f32, 10.0, 1e6][random.random_range(0..3)];
    let tilt = [0.0f32, 0.05][random.random_range(0..2)];
    let missing = [0.0, 0.02, 0.3][random.random_range(0..3)];
    let shift = [-5.0f32, 100.0][random.random_range(0..2)];
    let mut values = Vec::new();
    let mut valid = Vec::new();
    for row in 0..height {
        for _ in 0..width {
            let rough: f32 = random.random_range(0.0..1.0);
            values.push(((rough + tilt * row as f32) * levels).floor() / levels * 10.0 + shift);
            valid.push(random.random_range(0.0..1.0) >= missing);
        }
    }
    Grid::from_parts(width, height, values, Some(valid))
}

fn conditioned(elevation: &Grid<f32>, how: Conditioning) -> Conditioned {
    let cells = Cells::square(30.0, elevation.height());
    condition(elevation, &cells, how, LIMITS, &[], &Work::quiet()).expect("not stopped")
}

fn neighbours(grid: &Grid<f32>, col: usize, row: usize) -> Vec<Option<(usize, usize)>> {
    let cell = |(dx, dy): &(isize, isize)| {
        let (col, row) = (col.checked_add_signed(*dx)?, row.checked_add_signed(*dy)?);
        grid.get(col, row).map(|_| (col, row))
    };
    STEPS.iter().map(cell).collect()
}

/// Grey reconstruction by erosion, the slow way: from +∞ inside, lower until nothing changes.
fn reconstruction(z: &Grid<f32>) -> Vec<f32> {
    let (width, height) = (z.width(), z.height());
    let mut level = vec![f32::INFINITY; z.len()];
    loop {
        let mut changed = false;
        for row in 0..height {
            for col in 0..width {
                let Some(own) = z.get(col, row) else { continue };
                let least = neighbours(z, col, row)
                    .into_iter()
                    .map(|n| n.map_or(f32::NEG_INFINITY, |(c, r)| level[r * width + c]))
                    .fold(f32::INFINITY, f32::min);
                let to = least.max(own);
                if to < level[row * width + col] {
                    level[row * width + col] = to;
                    changed = true;
                }
            }
        }
        if !changed {
            return level;
        }
    }
}

#[test]
fn filling_is_grey_reconstruction_by_erosion() {
    for seed in 0..200 {
        let z = raster(seed);
        let filled = conditioned(&z, Conditioning::Fill);
        let want = reconstruction(&z);
        for (i, want) in want.iter().enumerate() {
            let (col, row) = (i % z.width(), i / z.width());
            assert_eq!(filled.surface.is_valid(col, row), z.is_valid(col, row), "raster {seed}");
            if z.is_valid(col, row) {
                assert_eq!(filled.surface.at(col, row), *want, "raster {seed} at {col}, {row}");
                assert!(filled.surface.at(col, row) >= z.at(col, row));
            }
        }
        let again = conditioned(&filled.surface, Conditioning::Fill);
        assert_eq!(again.surface, filled.surface, "raster {seed}");
        assert_eq!(again.changed.raised_cells, 0);
    }
}

/// Checks that following receivers leaves the ground from everywhere, and that where it leaves is allowed.
fn assert_forest(name: &str, surface: &Grid<f32>, receivers: &Receivers) {
    for row in 0..surface.height() {
        for col in 0..surface.width() {
            let code = receivers.0.at(col, row);
            assert_eq!(code == VOID, !surface.is_valid(col, row), "{name}");
            let (mut at, mut steps) = ((col, row), 0);
            while let Some(next) = receivers.next(at.0, at.1).filter(|_| receivers.0.at(at.0, at.1) < OUT) {
                assert!(
                    surface.get(next.0, next.1).expect("ground") <= surface.at(at.0, at.1),
                    "{name} climbs"
                );
                at = next;
                steps += 1;
                assert!(steps <= surface.len(), "{name}: a ring at {col}, {row}");
            }
            if code != VOID {
                assert_eq!(receivers.0.at(at.0, at.1), OUT, "{name}");
                assert!(neighbours(surface, at.0, at.1).contains(&None), "{name}: a sink inside at {at:?}");
            }
        }
    }
}

#[test]
fn receivers_are_a_forest_whose_roots_lie_beside_the_outside() {
    for seed in 0..200 {
        let z = raster(seed);
        for how in
            [Conditioning::Fill, Conditioning::FillSloped, Conditioning::Breach, Conditioning::BreachThenFill]
        {
            let filled = conditioned(&z, how);
            let cells = Cells::square(30.0, z.height());
            let receivers = receivers(&filled, &cells, &Work::quiet()).expect("not stopped");
            assert_forest(&format!("raster {seed}, {how:?}"), &filled.surface, &receivers);
        }
    }
}

#[test]
fn what_leaves_is_what_fell_for_every_router() {
    for seed in 0..100 {
        let z = raster(seed);
        let mut cells = Cells::square(30.0, z.height());
        cells.area.iter_mut().enumerate().for_each(|(row, a)| *a *= 1.0 - 0.01 * row as f64);
        for how in [Conditioning::Fill, Conditioning::FillSloped] {
            let filled = condition(&z, &cells, how, LIMITS, &[], &Work::quiet()).expect("not stopped");
            let receivers = receivers(&filled, &cells, &Work::quiet()).expect("not stopped");
            let rows = 0..z.height();
            let own = |row: usize| {
                (0..z.width()).filter(|col| z.is_valid(*col, row)).count() as f64 * cells.area[row]
            };
            let all: f64 = rows.map(own).sum();
            for router in ROUTERS {
                let area = area(&filled, &cells, router, &receivers, &Work::quiet()).expect("not stopped");
                let codes = receivers.0.values();
                let out: f64 =
                    codes.iter().zip(area.values()).filter(|(c, _)| **c == OUT).map(|(_, a)| *a).sum();
                assert_close!(out, all, 1e-9 * all, "raster {seed}, {router:?}");
            }
        }
    }
}

#[test]
fn areas_do_not_depend_on_threads() {
    let z = raster(9);
    let cells = Cells::square(30.0, z.height());
    let run = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a pool");
        pool.install(|| {
            let filled = conditioned(&z, Conditioning::FillSloped);
            let receivers = receivers(&filled, &cells, &Work::quiet()).expect("not stopped");
            ROUTERS.map(|r| area(&filled, &cells, r, &receivers, &Work::quiet()).expect("not stopped"))
        })
    };
    assert_eq!(run(1), run(3));
}
