//! Properties of drainage: what filling and routing must keep on any raster.

use std::time::{Duration, Instant};

use rand::{Rng as _, SeedableRng as _};
use rand_chacha::ChaCha8Rng;

use ventifact::assert_close;
use ventifact::ground::{Grid, Point, Polygon, Work};
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
                    codes.iter().zip(area.values().iter()).filter(|(c, _)| **c == OUT).map(|(_, a)| *a).sum();
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

/// The raster turned by a quarter, clockwise.
fn turned<T: Copy>(grid: &Grid<T>) -> Grid<T> {
    let (width, height) = (grid.width(), grid.height());
    let mut turned = Grid::from_fn(height, width, |col, row| grid.at(row, height - 1 - col));
    turned.mask_where(|col, row| grid.is_valid(row, height - 1 - col));
    turned
}

#[test]
fn a_raster_turned_by_a_quarter_has_the_network_turned() {
    for seed in 0..60 {
        // No two cells alike, so that no tie is left to the order of directions.
        let mut random = ChaCha8Rng::seed_from_u64(seed);
        let mut z = Grid::from_fn(17, 12, |_, _| random.random_range(0.0f32..100.0));
        z.mask_where(|col, row| (col, row) != (5, 5));
        let run = |z: &Grid<f32>| {
            let cells = Cells::square(10.0, z.height());
            let given = Conditioned::untouched(z, &cells, &Work::quiet()).expect("not stopped");
            let receivers = receivers(&given, &cells, &Work::quiet()).expect("not stopped");
            let areas =
                ROUTERS.map(|r| area(&given, &cells, r, &receivers, &Work::quiet()).expect("not stopped"));
            (receivers, areas)
        };
        let ((codes, areas), (codes_turned, areas_turned)) = (run(&z), run(&turned(&z)));
        for row in 0..z.width() {
            for col in 0..z.height() {
                let (from_col, from_row) = (row, z.height() - 1 - col);
                let code = codes.0.at(from_col, from_row);
                // A quarter clockwise is two of the eight steps.
                let want = if code < OUT { (code + 2) % 8 } else { code };
                assert_eq!(codes_turned.0.at(col, row), want, "raster {seed} at {from_col}, {from_row}");
                for (before, after) in areas.iter().zip(&areas_turned).filter(|_| code != VOID) {
                    let want = before.at(from_col, from_row);
                    assert_close!(after.at(col, row), want, 1e-9 * want, "raster {seed}");
                }
            }
        }
    }
}

#[test]
fn a_basin_marked_as_closed_keeps_its_water() {
    // Two bowls in a plain; one is marked.
    let bowl = |x: f32, y: f32| (x * x + y * y).min(16.0);
    let z = Grid::from_fn(40, 20, |col, row| {
        let (x, y) = (col as f32, row as f32 - 10.0);
        bowl(x - 10.0, y).min(bowl(x - 30.0, y)) + 0.01 * x
    });
    let cells = Cells::square(2.0, 20);
    let around = |x: f64| Polygon {
        outer: vec![
            Point::new(x - 3.0, 7.0),
            Point::new(x + 4.0, 7.0),
            Point::new(x + 4.0, 14.0),
            Point::new(x - 3.0, 14.0),
        ],
        holes: Vec::new(),
    };
    let run = |closed: &[Polygon]| {
        condition(&z, &cells, Conditioning::FillSloped, LIMITS, closed, &Work::quiet()).expect("not stopped")
    };
    let (open, kept) = (run(&[]), run(&[around(10.0)]));
    assert_eq!((open.changed.left_closed, kept.changed.left_closed), (0, 1));
    assert_eq!((open.changed.filled, kept.changed.filled), (2, 1));
    assert!(open.surface.at(10, 10) > z.at(10, 10));
    assert_eq!(kept.surface.at(10, 10), z.at(10, 10));
    assert_eq!(kept.surface.at(30, 10), open.surface.at(30, 10));
    let receivers = receivers(&kept, &cells, &Work::quiet()).expect("not stopped");
    assert_eq!(receivers.0.at(10, 10), OUT);
    let area = area(&kept, &cells, Router::D8, &receivers, &Work::quiet()).expect("not stopped");
    assert!(area.at(10, 10) >= 4.0 * 45.0, "{}", area.at(10, 10));
    // A polygon on ground that only slopes holds no sink.
    assert_eq!(run(&[around(20.0)]).changed.left_closed, 0);
}

#[test]
fn volumes_count_cells_in_square_metres() {
    // One cell 3 m deep in a plain, on cells of 2 m.
    let mut z = Grid::filled(9, 9, 5.0f32);
    z.values_mut()[4 * 9 + 4] = 2.0;
    let cells = Cells::square(2.0, 9);
    let run = |how| condition(&z, &cells, how, LIMITS, &[], &Work::quiet()).expect("not stopped").changed;
    let filled = run(Conditioning::Fill);
    assert_eq!((filled.raised_cells, filled.sinks, filled.filled, filled.cut_cells), (1, 1, 1, 0));
    assert_close!(filled.raised_volume, 12.0, 1e-9);
    assert_close!(filled.deepest_fill, 3.0, 1e-9);
    let cut = run(Conditioning::Breach);
    assert_eq!((cut.raised_cells, cut.breached, cut.filled), (0, 1, 0));
    // Four cells to the edge, each dug to the level of the sink.
    assert_eq!(cut.cut_cells, 4);
    assert_close!(cut.cut_volume, 4.0 * 4.0 * 3.0, 1e-9);
}

#[test]
fn a_trench_too_deep_or_too_long_is_not_dug() {
    let mut z = Grid::filled(9, 9, 5.0f32);
    z.values_mut()[4 * 9 + 4] = 2.0;
    let cells = Cells::square(2.0, 9);
    for (depth_m, steps, breached) in [(3.5, 4, 1), (2.5, 4, 0), (3.5, 3, 0)] {
        let limits = BreachLimits { depth_m, cells: steps };
        let how = Conditioning::BreachThenFill;
        let changed = condition(&z, &cells, how, limits, &[], &Work::quiet()).expect("not stopped").changed;
        assert_eq!(
            (changed.breached, changed.filled),
            (breached, 1 - breached),
            "{depth_m} m, {steps} cells"
        );
    }
}

#[test]
fn a_trench_is_as_deep_as_it_falls() {
    // From 2 m under a rim of 5 m to 1 m two cells on: 1.5 m in the middle, 3.5 m deep. The lower sink cannot get out.
    let mut z = Grid::filled(9, 9, 5.0f32);
    z.values_mut()[4 * 9 + 4] = 2.0;
    z.values_mut()[4 * 9 + 6] = 1.0;
    let cells = Cells::square(2.0, 9);
    for (depth_m, breached) in [(3.2, 0), (3.6, 1)] {
        let limits = BreachLimits { depth_m, cells: 2 };
        let how = Conditioning::BreachThenFill;
        let changed = condition(&z, &cells, how, limits, &[], &Work::quiet()).expect("not stopped").changed;
        assert_eq!((changed.breached, changed.filled), (breached, 2 - breached), "{depth_m} m");
    }
}

#[test]
fn breaching_without_limits_raises_nothing() {
    for seed in 0..200 {
        let z = raster(seed);
        let changed = conditioned(&z, Conditioning::Breach).changed;
        assert_eq!(changed.raised_cells, 0, "raster {seed}");
        assert_eq!(changed.breached, changed.sinks, "raster {seed}");
    }
}

#[test]
fn strange_rasters_do_no_harm() {
    let strange = [
        Grid::from_parts(0, 0, Vec::new(), None),
        Grid::filled(1, 1, 3.0f32),
        Grid::filled(3, 1, f32::NAN),
        Grid::from_fn(5, 5, |col, _| if col == 2 { f32::INFINITY } else { -1.0 }),
        Grid::from_parts(2, 2, vec![0.0; 4], Some(vec![false; 4])),
    ];
    for z in strange {
        for how in
            [Conditioning::Fill, Conditioning::FillSloped, Conditioning::Breach, Conditioning::BreachThenFill]
        {
            let filled = conditioned(&z, how);
            let cells = Cells::square(1.0, z.height());
            let receivers = receivers(&filled, &cells, &Work::quiet()).expect("not stopped");
            for router in ROUTERS {
                let area = area(&filled, &cells, router, &receivers, &Work::quiet()).expect("not stopped");
                assert_eq!(area.len(), z.len());
            }
        }
    }
}

#[test]
fn stop_is_heard_within_a_tenth_of_a_second() {
    let mut random = ChaCha8Rng::seed_from_u64(4);
    let z = Grid::from_fn(1500, 1500, |_, _| random.random_range(0.0f32..100.0).floor());
    let cells = Cells::square(1.0, 1500);
    let late = |job: &(dyn Fn(&Work) -> bool + Sync), after: u64| {
        let work = Work::quiet();
        std::thread::scope(|scope| {
            let running = scope.spawn(|| {
                let stopped = job(&work);
                (stopped, Instant::now())
            });
            std::thread::sleep(Duration::from_millis(after));
            let asked = Instant::now();
            work.stop();
            let (stopped, ended) = running.join().expect("no panic");
            // A job that was done before it was asked says nothing.
            stopped.then(|| ended.saturating_duration_since(asked))
        })
    };
    let filled = condition(&z, &cells, Conditioning::Fill, LIMITS, &[], &Work::quiet()).expect("not stopped");
    let codes = receivers(&filled, &cells, &Work::quiet()).expect("not stopped");
    for after in [0, 5, 20, 60] {
        for how in [Conditioning::FillSloped, Conditioning::Breach] {
            let job = |work: &Work| condition(&z, &cells, how, LIMITS, &[], work).is_err();
            assert_soon(&format!("{how:?} after {after} ms"), &|| late(&job, after));
        }
        for router in ROUTERS {
            let job = |work: &Work| area(&filled, &cells, router, &codes, work).is_err();
            assert_soon(&format!("{router:?} after {after} ms"), &|| late(&job, after));
        }
    }
}

/// A busy machine may hold a thread up: the quickest of five tries counts.
fn assert_soon(name: &str, late: &dyn Fn() -> Option<Duration>) {
    let tries: Vec<Duration> = (0..5).map_while(|_| late()).collect();
    let least = tries.iter().min().copied().unwrap_or_default();
    assert!(least < Duration::from_millis(100), "{name}: {tries:?}");
}

#[test]
fn equal_cells_are_counted_as_unequal_ones_are_summed() {
    // Wider and higher than what is worked on at once, and of no round size.
    let mut random = ChaCha8Rng::seed_from_u64(12);
    let mut z = Grid::from_fn(333, 150, |col, _| random.random_range(0.0f32..9.0) + 0.1 * col as f32);
    z.mask_where(|col, row| col * row % 1997 != 1996);
    let filled = conditioned(&z, Conditioning::FillSloped);
    let equal = Cells::square(2.0, z.height());
    let mut unequal = equal.clone();
    // One row apart by the least a number can be.
    unequal.area[149] = 4.0f64.next_up();
    let receivers = receivers(&filled, &equal, &Work::quiet()).expect("not stopped");
    let run =
        |cells: &Cells| area(&filled, cells, Router::D8, &receivers, &Work::quiet()).expect("not stopped");
    let (counted, summed) = (run(&equal), run(&unequal));
    let mut most = 0.0f64;
    for (cell, code) in receivers.0.values().iter().enumerate().filter(|(_, code)| **code != VOID) {
        assert_close!(counted.of(cell), summed.of(cell), 1e-9, "cell {cell}, code {code}");
        most = most.max(counted.of(cell));
    }
    // More than the rounds of adding can hold.
    assert!(most > 4.0 * 255.0, "{most}");
}
