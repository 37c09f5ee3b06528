//! Streaks against the axis they were drawn along: read back by the structure tensor, they tell that axis.

use proptest::prelude::*;
use ventifact::assert_close;
use ventifact::ground::{Axis, Grid, Place, Polygon, Seed, Work};
use ventifact::numeric::streaks::{AxisCell, StreakSettings, Streaks, streaks};
use ventifact::science::orientation::{TensorSettings, trend_nodes};

const SIDE: usize = 400;

fn cell(deg: f64) -> AxisCell {
    let (sin2, cos2) = (2.0 * deg.to_radians()).sin_cos();
    AxisCell { cos2: cos2 as f32, sin2: sin2 as f32, fade: 1.0 }
}

fn drawn(field: &Grid<AxisCell>, seed: u64) -> Streaks {
    let settings = StreakSettings {
        size: [SIDE, SIDE],
        step: 8.0,
        half_length: 16,
        origin: [-1000, 77],
        seed: Seed(seed),
    };
    streaks(field, &settings, &Work::quiet()).expect("nobody stops it")
}

/// The axis of streaks in the picture, degrees from the columns' way toward the rows', and R̄.
fn read(streaks: &Streaks) -> (f64, f64) {
    let settings = TensorSettings {
        gradient_scale_px: 1.5,
        integration_scale_px: 12.0,
        node_step_px: 12.0,
        significance: 0.01,
        logarithm: false,
    };
    let (side, place) = (SIDE as f64, Place::pixels(0.0));
    let outline = Polygon::rectangle(side, side);
    let field =
        trend_nodes(&streaks.texture, &outline, &place, &settings, &Work::quiet()).expect("not stopped");
    let (mut sin, mut cos, mut n) = (0.0, 0.0, 0.0);
    for node in field.nodes.iter().filter(|n| n.significant) {
        let (s, c) = node.axis.doubled().sin_cos();
        (sin, cos, n) = (sin + s, cos + c, n + 1.0);
    }
    // Azimuths run from up to the right; here the columns' way is 0 and down is positive.
    let axis = Axis::from_doubled(f64::atan2(sin, cos)).rotated(-90.0);
    (axis.deg(), f64::hypot(sin, cos) / n)
}

fn apart(a: f64, b: f64) -> f64 {
    Axis::from_deg(a).separation(Axis::from_deg(b))
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(12))]

    #[test]
    fn streaks_run_along_their_axis_and_turn_with_it(deg in 0.0..180.0f64, seed in any::<u64>()) {
        let (along, resultant) = read(&drawn(&Grid::filled(50, 50, cell(deg)), seed));
        assert_close!(apart(along, deg), 0.0, 1.0, "axis {deg}");
        prop_assert!(resultant > 0.95, "{} streaks of one axis", resultant);
        let (across, _) = read(&drawn(&Grid::filled(50, 50, cell(deg + 90.0)), seed));
        assert_close!(apart(across, along), 90.0, 2.0, "a quarter turn of {deg}");
    }

    #[test]
    fn any_field_gives_tones_between_0_and_1(
        cells in prop::collection::vec((-2.0..2.0f32, -2.0..2.0f32, -0.5..1.5f32), 0..40),
        cols in 1usize..8, width in 0usize..70, height in 0usize..70, half_length in 0usize..20,
        step in 0.5..40.0f64, left in any::<i64>(), top in any::<i64>(),
    ) {
        let rows = cells.len() / cols;
        let cell = |(cos2, sin2, fade): &(f32, f32, f32)| AxisCell { cos2: *cos2, sin2: *sin2, fade: *fade };
        let values = cells.iter().take(cols * rows).map(cell).collect();
        let field = Grid::from_parts(cols, rows, values, None);
        let s = StreakSettings { size: [width, height], step, half_length, origin: [left, top], seed: Seed(1) };
        let got = streaks(&field, &s, &Work::quiet()).expect("nobody stops it");
        let tones = got.texture.values().iter().chain(got.fade.values());
        prop_assert_eq!(got.texture.len(), width * height);
        let all_fit = tones.clone().all(|v| (0.0..=1.0).contains(v));
        prop_assert!(all_fit);
    }
}

/// A field that turns through all axes and back: the walkers never lose their way at the seam of 180° and 0°.
#[test]
fn there_is_no_seam_where_axes_pass_half_a_turn() {
    let turning = Grid::from_fn(50, 50, |col, _| cell(170.0 + 20.0 * (col as f64 / 49.0)));
    let (axis, resultant) = read(&drawn(&turning, 3));
    assert_close!(apart(axis, 0.0), 0.0, 1.5, "170° to 190°");
    assert!(resultant > 0.9, "{resultant}");
}

#[test]
fn the_same_bits_on_one_thread_and_on_many() {
    let field = Grid::from_fn(50, 50, |col, row| cell(5.0 * col as f64 + 3.0 * row as f64));
    let on = |threads| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a pool");
        pool.install(|| drawn(&field, 9))
    };
    assert_eq!(on(1), on(3));
}
