//! Drainage on surfaces whose answer is known.
//!
//! Source of the figures: SCIENCE.md H1–H4 and `checks.json` (H02, H04, H05, H06, H08). Their border cells hold one
//! cell and pass nothing on, so the rasters here are the 99 × 99 cells inside.

use ventifact::assert_close;
use ventifact::ground::{Affine, Body, Frame, Grid, LatitudeKind, Place, Work};
use ventifact::science::drainage::accumulate::{Areas, area, specific_area};
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::condition::{BreachLimits, Conditioned, Conditioning, condition};
use ventifact::science::drainage::d_infinity::{Descent, Facets};
use ventifact::science::drainage::d8::receivers;
use ventifact::science::drainage::multiple::Spread;
use ventifact::science::drainage::routing::{Router, STEPS};

const ROUTERS: [Router; 4] = [Router::D8, Router::DInfinity, Router::Freeman, Router::Quinn];
/// Cells of a side, and the column and row of the middle.
const SIDE: usize = 99;
const MIDDLE: isize = 49;

/// Contributing area on a surface given by (x east, y north) from the middle, in cells.
fn areas(router: Router, z: impl Fn(f64, f64) -> f64) -> Areas {
    both_areas(router, z).0
}

/// The same over the width across the flow.
fn specific_areas(router: Router, z: impl Fn(f64, f64) -> f64) -> Grid<f64> {
    both_areas(router, z).1
}

fn both_areas(router: Router, z: impl Fn(f64, f64) -> f64) -> (Areas, Grid<f64>) {
    let surface = Grid::from_fn(SIDE, SIDE, |col, row| {
        z((col as isize - MIDDLE) as f64, (MIDDLE - row as isize) as f64) as f32
    });
    let (cells, quiet) = (Cells::square(1.0, SIDE), Work::quiet());
    let surface = Conditioned::untouched(&surface, &cells, &quiet).expect("not stopped");
    let receivers = receivers(&surface, &cells, &quiet).expect("not stopped");
    let area = area(&surface, &cells, router, &receivers, &quiet).expect("not stopped");
    let specific = specific_area(&area, &cells, &receivers);
    (area, specific)
}

#[test]
fn an_inward_cone_sends_everything_to_its_pit() {
    for router in ROUTERS {
        let area = areas(router, f64::hypot);
        assert_close!(area.at(49, 49), 9801.0, 1e-8, "{router:?}");
    }
}

#[test]
fn an_outward_cone_has_half_its_radius_as_specific_area() {
    let want = [(0.53247, 0.89242), (0.11741, 0.90423), (0.07685, 1.07583), (0.12381, 1.11968)];
    for (router, (rms, mean)) in ROUTERS.into_iter().zip(want) {
        let area = specific_areas(router, |x, y| -x.hypot(y));
        let mut ratios = Vec::new();
        for row in 0..SIDE {
            for col in 0..SIDE {
                let r = (col as f64 - 49.0).hypot(row as f64 - 49.0);
                if r > 20.0 && r < 45.0 {
                    ratios.push(area.at(col, row) / (0.5 * r));
                }
            }
        }
        let n = ratios.len() as f64;
        let got_mean = ratios.iter().sum::<f64>() / n;
        let got_rms = (ratios.iter().map(|q| (q - 1.0).powi(2)).sum::<f64>() / n).sqrt();
        assert_close!(got_rms, rms, 0.01 * rms, "{router:?} rms");
        assert_close!(got_mean, mean, 0.01 * mean, "{router:?} mean");
    }
}

#[test]
fn a_valley_gathers_its_rows() {
    for (router, want) in
        [(Router::D8, [990.0, 4950.0, 8910.0]), (Router::DInfinity, [679.909, 4639.09, 8599.09])]
    {
        let area = areas(router, |x, y| x.abs() + 0.1 * y);
        // Row 10 of the 101 is the tenth inside.
        for (row, want) in [9, 49, 89].into_iter().zip(want) {
            assert_close!(area.at(49, row), want, 0.01, "{router:?} at row {row}");
        }
    }
}

/// A plane that falls toward `psi` degrees counter-clockwise from east: the neighbours of a cell at 0.
fn plane(psi: f64) -> [f64; 8] {
    let (sin, cos) = psi.to_radians().sin_cos();
    STEPS.map(|(dx, dy)| -(dx as f64 * cos - dy as f64 * sin))
}

#[test]
fn the_steepest_facet_finds_the_angle_of_a_plane() {
    let facets = Facets::of(&Cells::square(1.0, 3), 1);
    for psi in (0..16).map(|i| 22.5 * f64::from(i)).chain([0.0, 10.0, 22.5, 30.0, 45.0, 60.0, 100.0, 250.0]) {
        let Descent { side, corner, corner_share, slope } =
            facets.steepest(0.0, &plane(psi)).expect("a way down");
        // STEPS run clockwise by 45°.
        let to_corner = if (side + 1) % 8 == corner { -1.0 } else { 1.0 };
        let got = (-45.0 * side as f64 + to_corner * 45.0 * corner_share).rem_euclid(360.0);
        let error = (got - psi + 180.0).rem_euclid(360.0) - 180.0;
        assert_close!(error, 0.0, 1e-9, "H02 at {psi}°");
        assert_close!(slope, 1.0, 1e-12, "slope at {psi}°");
    }
}

#[test]
fn sharing_by_angle_turns_the_mean_way() {
    // H09: the mean of the two steps, weighted by share, against the angle itself.
    let facets = Facets::of(&Cells::square(1.0, 3), 1);
    let turn = |r: f64| {
        let share = facets.steepest(0.0, &plane(r)).expect("a way down").corner_share;
        share.atan2(1.0).to_degrees() - r
    };
    let worst =
        (0..45_000).map(|i| f64::from(i) * 1e-3).max_by(|a, b| turn(*a).abs().total_cmp(&turn(*b).abs()));
    let at = worst.expect("angles");
    assert_close!(turn(at).abs(), 4.074_568_6, 1e-3, "H09 greatest");
    assert_close!(at, 23.523, 0.01, "H09 at");
}

#[test]
fn shares_on_planes_are_those_of_the_closed_forms() {
    // H04 and H05, neighbours in the order of STEPS.
    let freeman = [
        (0.0, [0.42265, 0.28868, 0.0, 0.0, 0.0, 0.0, 0.0, 0.28868]),
        (22.5, [0.36251, 0.13749, 0.0, 0.0, 0.0, 0.0, 0.13749, 0.36251]),
        (45.0, [0.28868, 0.0, 0.0, 0.0, 0.0, 0.0, 0.28868, 0.42265]),
    ];
    let quinn = [
        (0.0, [0.5, 0.25, 0.0, 0.0, 0.0, 0.0, 0.0, 0.25]),
        (22.5, [0.41421, 0.12132, 0.0, 0.0, 0.0, 0.0, 0.17157, 0.29289]),
        (45.0, [0.33333, 0.0, 0.0, 0.0, 0.0, 0.0, 0.33333, 0.33333]),
    ];
    let cells = Cells::square(1.0, 3);
    for (rule, want) in [(Spread::freeman(&cells, 1), freeman), (Spread::quinn(&cells, 1), quinn)] {
        for (psi, want) in want {
            // Zero slope across the plane is rounding only.
            let around = plane(psi).map(|z| if z.abs() < 1e-12 { 0.0 } else { z });
            for (got, want) in rule.shares(0.0, &around).into_iter().zip(want) {
                assert_close!(got, want, 1e-5, "at {psi}°");
            }
        }
    }
}

#[test]
fn on_a_plane_area_is_the_distance_from_its_upper_edge() {
    // Along a side every step moves on by one row; what is lost at the flanks does not reach the middle.
    for router in ROUTERS {
        let area = specific_areas(router, |_, y| y);
        for row in 0..SIDE {
            assert_close!(area.at(49, row), row as f64 + 1.0, 1e-6, "{router:?} at row {row}");
        }
    }
    // Between, D8 and D∞ still move on by one cell along the greater axis, so the middle has passed 50. Spreading
    // flow also goes along the lesser axis and takes more steps. (At 22.5° itself two neighbours tie in D8.)
    for azimuth in (0..16).map(|i| (22.5 * f64::from(i) + 5.0).to_radians()) {
        for router in ROUTERS {
            let area = areas(router, |x, y| -(x * azimuth.sin() + y * azimuth.cos()));
            let spreads = matches!(router, Router::Freeman | Router::Quinn);
            let (want, bound) = if spreads { (62.0, 14.0) } else { (50.0, 0.05) };
            assert_close!(area.at(49, 49), want, bound, "{router:?} at {azimuth}");
        }
    }
}

#[test]
fn a_saddle_sends_its_flow_two_ways_alike() {
    for router in ROUTERS {
        let area = areas(router, |x, y| x * x - y * y);
        // Along the edges the flow gathers where they are lowest.
        let (north, south) = (area.at(49, 0), area.at(49, SIDE - 1));
        assert_close!(north + south, 9801.0, 1e-6, "{router:?}");
        // Cells on the axis itself go one way by the rule of ties.
        assert_close!(north, south, 0.03 * 9801.0, "{router:?}");
    }
}

#[test]
fn eight_neighbour_lengths_are_inflated() {
    // H10: a straight line at angle φ ≤ 45° takes cos φ + (√2 − 1) sin φ times its length in eight directions.
    let length = |phi: f64| phi.cos() + (std::f64::consts::SQRT_2 - 1.0) * phi.sin();
    let steps = Cells::square(1.0, 2).steps(0);
    let by_steps = |phi: f64| (phi.cos() - phi.sin()) * steps[0] + phi.sin() * steps[1];
    let n = 100_000;
    let angles = (0..n).map(|i| (f64::from(i) + 0.5) / f64::from(n) * std::f64::consts::FRAC_PI_4);
    let lengths: Vec<f64> = angles.map(by_steps).collect();
    assert_close!(by_steps(0.3), length(0.3), 1e-12);
    assert_close!(lengths.iter().sum::<f64>() / f64::from(n), 1.054_785_6, 1e-6, "H10 mean");
    assert_close!(lengths.iter().copied().fold(0.0, f64::max), 1.082_392_2, 1e-6, "H10 greatest");
}

#[test]
fn a_small_raster_is_raised_as_by_hand() {
    // Two sinks behind rims in a frame of 9 with one gap at 4: levels by hand.
    let z = [
        [9.0f32, 9.0, 9.0, 9.0, 9.0, 9.0, 9.0],
        [9.0, 2.0, 3.0, 8.0, 1.0, 6.0, 9.0],
        [9.0, 3.0, 5.0, 8.0, 6.0, 6.0, 9.0],
        [4.0, 5.0, 8.0, 8.0, 7.0, 8.0, 9.0],
        [9.0, 9.0, 8.0, 7.0, 7.0, 8.0, 9.0],
        [9.0, 9.0, 9.0, 9.0, 9.0, 9.0, 9.0],
        [9.0, 9.0, 9.0, 9.0, 9.0, 9.0, 9.0],
    ];
    let grid = Grid::from_fn(7, 7, |col, row| z[row][col]);
    let cells = Cells::square(1.0, 7);
    let limits = BreachLimits { depth_m: 1.0, cells: 1 };
    let filled =
        condition(&grid, &cells, Conditioning::Fill, limits, &[], &Work::quiet()).expect("not stopped");
    // The western sink leaves over the 3 at its south and the gap at 4: to 4, raised 2 + 1 + 1. The eastern one
    // leaves over the ridge of 8: 1, 6, 6, 6 to 8 and 7, 7, 7 to 8.
    assert_close!(filled.changed.raised_volume, (2.0 + 1.0 + 1.0) + (7.0 + 3.0 * 2.0) + 3.0, 1e-9);
    assert_eq!((filled.changed.sinks, filled.changed.filled), (2, 2));
}

#[test]
fn geographic_cells_add_up_to_the_area_of_their_zone() {
    // On the ellipsoid the zone from the equator to φ has b²/2 (sin φ/(1 − e² sin² φ) + artanh(e sin φ)/e) a radian.
    let body = Body::earth();
    let shape = body.shape;
    let e = (1.0 - (shape.polar_m / shape.equatorial_m).powi(2)).sqrt();
    let zone = |lat: f64| {
        let sin = lat.to_radians().sin();
        0.5 * shape.polar_m.powi(2) * (sin / (1.0 - (e * sin).powi(2)) + (e * sin).atanh() / e)
    };
    let step = 1.0 / 120.0;
    for top in [10.0, 36.7, 61.0] {
        let affine = Affine { a: step, b: 0.0, c: 20.0, d: 0.0, e: -step, f: top };
        let frame = Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetographic };
        let place = Place::new(affine, frame, body.clone()).expect("a place");
        let (width, height) = (240, 360);
        let cells = Cells::of(&place, width, height).expect("ground sizes");
        let got = cells.area.iter().sum::<f64>() * width as f64;
        let want = (width as f64 * step).to_radians() * (zone(top) - zone(top - height as f64 * step));
        assert_close!(got, want, 1e-6 * want, "from {top}°");
        // A degree of longitude shrinks with the cosine of latitude.
        let ratio = cells.across[0] / cells.down[0];
        assert_close!(ratio, top.to_radians().cos(), 0.01, "across over down at {top}°");
    }
}
