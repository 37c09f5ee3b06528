//! Windows, coarser views and built levels against plain definitions.

use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use proptest::prelude::{ProptestConfig, prop_assert, proptest};
use ventifact::assert_close;
use ventifact::files::raster::{Bands, Limits, Raster, RasterError, Window, write_tiff};
use ventifact::ground::{Grid, Work};

use crate::tiff_writer::{Codec, Recipe, write};

const BAND: Bands = Bands::One(0);

fn scene(width: usize, height: usize) -> Grid<f32> {
    let mut grid = Grid::from_fn(width, height, |c, r| ((c * 31 + r * 17) % 97) as f32 + c as f32 * 0.25);
    grid.mask_where(|c, r| (c / 9 + r / 7) % 5 != 0);
    grid
}

fn saved(folder: &Path, grid: &Grid<f32>) -> PathBuf {
    let path = folder.join("scene.tif");
    write_tiff(&path, grid, None).expect("writes");
    path
}

/// The definition: the mean of the valid pixels of a block, or nothing.
fn block_mean(grid: &Grid<f32>, window: Window, factor: usize, col: usize, row: usize) -> Option<f64> {
    let inside = window.clipped(grid.width(), grid.height());
    let cols = (col * factor).min(inside.width)..((col + 1) * factor).min(inside.width);
    let rows = (row * factor).min(inside.height)..((row + 1) * factor).min(inside.height);
    let values: Vec<f64> = rows
        .flat_map(|r| cols.clone().map(move |c| (c, r)))
        .filter_map(|(c, r)| grid.get(window.col + c, window.row + r).map(f64::from))
        .collect();
    (!values.is_empty()).then(|| values.iter().sum::<f64>() / values.len() as f64)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(40))]
    #[test]
    fn reduced_windows_are_means_of_valid_pixels(
        col in 0..600usize, row in 0..600usize, width in 1..500usize, height in 1..500usize, factor in 1..40usize,
    ) {
        let grid = scene(530, 410);
        let folder = tempfile::tempdir().expect("a folder");
        let raster = Raster::open(&saved(folder.path(), &grid), &Limits::default()).expect("opens");
        let window = Window { col, row, width, height };
        let got = raster.read_reduced(window, factor, &BAND, &Work::quiet()).expect("reads");
        prop_assert!(got.width() == width.div_ceil(factor) && got.height() == height.div_ceil(factor));
        for r in 0..got.height() {
            for c in 0..got.width() {
                match (got.get(c, r), block_mean(&grid, window, factor, c, r)) {
                    (Some(got), Some(want)) => prop_assert!((f64::from(got) - want).abs() < 1e-4, "{got} {want}"),
                    (got, want) => prop_assert!(got.is_none() && want.is_none(), "{got:?} {want:?}"),
                }
            }
        }
    }
}

#[test]
fn built_levels_agree_with_the_pixels_and_are_built_once() {
    let folder = tempfile::tempdir().expect("a folder");
    let grid = Grid::from_fn(2000, 1700, |c, r| ((c * 31 + r * 17) % 97) as f32);
    let path = saved(folder.path(), &grid);
    let raster = Raster::open(&path, &Limits::default()).expect("opens");
    let work = Work::quiet();
    raster.build_coarse(&BAND, &work).expect("builds");
    assert_eq!(work.progress().phase, "coarse levels");
    let again = Work::quiet();
    raster.build_coarse(&BAND, &again).expect("builds");
    assert_eq!(again.progress().phase, "", "nothing was left to do");
    let window = Window { col: 100, row: 60, width: 1900, height: 1640 };
    for factor in [2, 4, 10] {
        let got = raster.read_reduced(window, factor, &BAND, &work).expect("reads");
        for (c, r) in [(0, 0), (7, 3), (got.width() - 1, got.height() - 1), (100, 90)] {
            let want = block_mean(&grid, window, factor, c, r).expect("valid");
            assert_close!(f64::from(got.at(c, r)), want, 1e-3, "factor {factor} at {c}, {r}");
        }
    }
}

#[test]
fn a_tight_budget_builds_coarser_levels() {
    let folder = tempfile::tempdir().expect("a folder");
    let grid = scene(2400, 1600);
    let path = saved(folder.path(), &grid);
    let limits = Limits { coarse_bytes: 1 << 20, ..Limits::default() };
    let raster = Raster::open(&path, &limits).expect("opens");
    raster.build_coarse(&BAND, &Work::quiet()).expect("builds");
    let window = Window::whole(2400, 1600);
    let got = raster.read_reduced(window, 16, &BAND, &Work::quiet()).expect("reads");
    let exact = Raster::open(&path, &limits).expect("opens").read_reduced(window, 16, &BAND, &Work::quiet());
    let exact = exact.expect("reads");
    // Means of means weigh a block's few valid pixels like many, so only nearly equal.
    let worst = (0..got.len())
        .filter(|i| exact.mask().is_none_or(|m| m[*i]))
        .map(|i| (got.values()[i] - exact.values()[i]).abs())
        .fold(0.0, f32::max);
    assert_close!(f64::from(worst), 0.0, 8.0, "built level against pixels");
    assert_eq!(got.valid_count(), exact.valid_count());
}

#[test]
fn one_thread_and_two_give_the_same_bits_cached_or_not() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = saved(folder.path(), &scene(900, 700));
    let read = |threads: usize, cache_bytes: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a pool");
        let raster = Raster::open(&path, &Limits { cache_bytes, ..Limits::default() }).expect("opens");
        pool.install(|| {
            let window = Window { col: 13, row: 29, width: 850, height: 640 };
            let first = raster.read(0, window, &BAND, &Work::quiet()).expect("reads");
            let second = raster.read(0, window, &BAND, &Work::quiet()).expect("reads");
            assert!(first == second, "the cache changes pixels");
            (first, raster.read_reduced(window, 7, &BAND, &Work::quiet()).expect("reads"))
        })
    };
    let one = read(1, 1 << 26);
    assert!(one == read(2, 1 << 26), "two threads");
    assert!(one == read(2, 0), "two threads without a cache");
}

#[test]
fn stop_acts_at_once() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = saved(folder.path(), &scene(1600, 1600));
    let raster = Raster::open(&path, &Limits::default()).expect("opens");
    let work = Work::quiet();
    work.stop();
    let begin = Instant::now();
    for result in [
        raster.read(0, Window::whole(1600, 1600), &BAND, &work).map(|_| ()),
        raster.read_reduced(Window::whole(1600, 1600), 5, &BAND, &work).map(|_| ()),
        raster.build_coarse(&BAND, &work),
    ] {
        assert!(matches!(result, Err(RasterError::Stopped(_))), "{result:?}");
    }
    // Room for a loaded machine: the work itself would take seconds there.
    assert!(begin.elapsed() < Duration::from_millis(500), "{:?}", begin.elapsed());
}

#[test]
fn a_million_tiles_open_quickly_and_left_out_ones_are_missing() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("million.tif");
    let side = 1000;
    let recipe = Recipe {
        width: side * 16,
        height: side * 16,
        tile: Some((16, 16)),
        codec: Codec::Deflate,
        big_tiff: true,
        // All but the first.
        sparse: 1..side * side,
        ..Recipe::default()
    };
    std::fs::write(&path, write(&recipe, |_, _, _| 9.0)).expect("writes");
    let begin = Instant::now();
    let raster = Raster::open(&path, &Limits::default()).expect("opens");
    let took = begin.elapsed();
    assert!(took < Duration::from_millis(500), "opening took {took:?}");
    let grid = raster
        .read(0, Window { col: 8, row: 8, width: 16, height: 8 }, &BAND, &Work::quiet())
        .expect("reads");
    assert_eq!((grid.valid_count(), grid.at(0, 0)), (64, 9.0));
}
