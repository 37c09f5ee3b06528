//! Axial statistics against values from outside the project.
//!
//! Data sets: feldspar laths B.5 and B.2, sets B.6 and turtles B.3 of Fisher 1993, *Statistical
//! Analysis of Circular Data*, as shipped with R `circular`. Values "R": R 4.2.2 with `circular`
//! 0.4-95. Values "scipy": scipy 1.17.1.

use ventifact::assert_close;
use ventifact::ground::Axis;
use ventifact::numeric::bessel::{inverse_ratio, ratio};
use ventifact::science::axial::density::{density, plug_in};
use ventifact::science::axial::interval::{dispersion, half_width, half_width_chi2};
use ventifact::science::axial::kappa::{Kappa, best_fisher, piecewise};
use ventifact::science::axial::mean::{Resultant, doubled};
use ventifact::science::axial::rayleigh::{rayleigh_p, rayleigh_p_closed};
use ventifact::science::axial::rose::radii;
use ventifact::science::axial::v_test::v_test;

/// Axes, degrees: Fisher 1993 B.5.
const LATHS_B5: [i32; 60] = [
    1, 1, 2, 2, 3, 8, 9, 12, 16, 17, 19, 23, 28, 28, 34, 34, 35, 36, 36, 37, 41, 45, 49, 50, 51, 53, 58, 68,
    69, 70, 72, 72, 76, 78, 80, 85, 97, 97, 99, 101, 105, 121, 125, 126, 133, 141, 143, 149, 152, 156, 160,
    163, 167, 168, 170, 171, 172, 174, 175, 176,
];
/// Axes, degrees: Fisher 1993 B.2.
pub const LATHS_B2: [i32; 133] = [
    176, 162, 49, 174, 174, 49, 54, 63, 59, 61, 66, 104, 97, 58, 121, 5, 178, 3, 168, 0, 18, 39, 140, 63, 55,
    170, 169, 37, 152, 73, 53, 176, 72, 170, 113, 56, 87, 161, 164, 21, 50, 6, 59, 140, 54, 64, 56, 38, 61,
    143, 51, 144, 148, 44, 60, 98, 86, 145, 38, 168, 39, 134, 68, 57, 129, 68, 132, 82, 54, 119, 131, 50, 93,
    160, 127, 124, 65, 108, 52, 61, 86, 37, 132, 83, 163, 58, 144, 29, 80, 172, 144, 138, 10, 45, 137, 11,
    145, 103, 69, 124, 54, 121, 1, 39, 111, 153, 13, 5, 5, 107, 104, 39, 133, 36, 63, 4, 21, 51, 30, 52, 90,
    143, 13, 50, 109, 12, 170, 5, 14, 91, 132, 12, 1,
];
/// Directions, degrees: Mardia & Jupp 2000.
const ROULETTE: [i32; 9] = [43, 45, 52, 61, 75, 88, 88, 279, 357];
/// Directions, degrees: Zar, tree leans.
pub const TREES: [i32; 8] = [45, 55, 81, 96, 110, 117, 132, 154];
/// Directions, degrees: Fisher 1993 B.6 set 1.
pub const SET_1: [i32; 40] = [
    284, 311, 334, 320, 294, 137, 123, 166, 143, 127, 244, 243, 152, 242, 143, 186, 263, 234, 209, 267, 315,
    329, 235, 38, 241, 319, 308, 127, 217, 245, 169, 161, 263, 209, 228, 168, 98, 278, 154, 279,
];
/// Directions, degrees: Fisher 1993 B.6 set 2.
pub const SET_2: [i32; 30] = [
    294, 301, 329, 315, 277, 281, 254, 245, 272, 242, 177, 257, 177, 229, 250, 166, 232, 245, 224, 186, 257,
    267, 241, 239, 287, 229, 290, 214, 215, 224,
];
/// Directions, degrees: Stephens 1969, Fisher 1993 B.3.
pub const TURTLES: [i32; 76] = [
    8, 9, 13, 13, 14, 18, 22, 27, 30, 34, 38, 38, 40, 44, 45, 47, 48, 48, 48, 48, 50, 53, 56, 57, 58, 58, 61,
    63, 64, 64, 64, 65, 65, 68, 70, 73, 78, 78, 78, 83, 83, 88, 88, 88, 90, 92, 92, 93, 95, 96, 98, 100, 103,
    106, 113, 118, 138, 153, 153, 155, 204, 215, 223, 226, 237, 238, 243, 244, 250, 251, 257, 268, 285, 319,
    343, 350,
];

pub fn circle(deg: &[i32]) -> Vec<f64> {
    deg.iter().map(|d| f64::from(*d).to_radians()).collect()
}

pub fn axes(deg: &[i32]) -> Vec<f64> {
    doubled(&deg.iter().map(|d| Axis::from_deg(f64::from(*d))).collect::<Vec<_>>())
}

#[test]
fn a01_mean_axis_of_laths_b5() {
    let r = Resultant::of(&axes(&LATHS_B5), None);
    assert_close!(r.axis().deg(), 19.877_640_7, 1e-5, "mean axis, R");
    assert_close!(r.mean_length(), 0.237_021_692, 1e-8, "R̄ doubled, R");
}

#[test]
fn a02_rayleigh_of_laths_b5() {
    let r = Resultant::of(&axes(&LATHS_B5), None).mean_length();
    assert_close!((-60.0 * r * r).exp(), 0.034_363_616, 1e-8, "e^(−Z), R at n ≥ 50");
    assert_close!(rayleigh_p(r, 60.0), 0.033_691_110_7, 1e-8, "series, independent script");
    // 3 million draws; three standard errors.
    assert_close!(rayleigh_p(r, 60.0), 0.033_626, 3e-4, "series against Monte Carlo");
}

#[test]
fn a04_laths_b2_have_no_preferred_axis() {
    let r = Resultant::of(&axes(&LATHS_B2), None);
    assert_close!(r.axis().deg(), 35.946_694_8, 1e-7, "mean axis, R");
    assert_close!(r.mean_length(), 0.118_679_39, 1e-7, "R̄ doubled, R");
    // R prints the bare e^(−Z) = 0.153619257 at n ≥ 50; the series differs by 0.2 %.
    let z = 133.0 * r.mean_length().powi(2);
    assert_close!((-z).exp(), 0.153_619_257, 1e-7, "e^(−Z), R");
    assert_close!(rayleigh_p(r.mean_length(), 133.0), 0.153_619_257, 6e-4, "series");
}

#[test]
fn a06_a07_roulette() {
    let r = Resultant::of(&circle(&ROULETTE), None);
    assert_close!(r.direction().to_degrees(), 51.050_177_1, 1e-6, "mean, scipy; the book prints 51°");
    assert_close!(r.mean_length(), 0.710_990_999, 1e-6, "R̄, scipy; the book prints 0.711");
    assert_close!(rayleigh_p(r.mean_length(), 9.0), 0.006_858_175_34, 1e-9, "series, R and astropy 8.0.2");
    assert_close!(rayleigh_p(r.mean_length(), 9.0), 0.006_75, 1.2e-4, "4 million draws ± 3 se");
}

#[test]
fn a09_rayleigh_of_trees_by_three_formulas() {
    let r = 6.601_741_958_560_359 / 8.0;
    assert_close!(rayleigh_p(r, 8.0), 0.001_644_197_4, 1e-9, "series, R");
    assert_close!(rayleigh_p_closed(r, 8.0), 0.001_851_637_51, 1e-9, "closed form, independent script");
    assert_close!(rayleigh_p(r, 8.0), 0.001_668_5, 4.3e-5, "8 million draws ± 3 se");
}

#[test]
fn a10_chi_square_interval_of_trees() {
    let half = half_width_chi2(6.601_741_958_560_359 / 8.0, 8.0, 3.841_458_820_694_124).expect("an arc");
    assert_close!(half.to_degrees(), 30.933_508_1, 1e-5, "Zar's data recomputed; the book prints ±31°");
}

#[test]
fn a11_dispersion_interval_of_set_2() {
    let phi = circle(&SET_2);
    let mean = Resultant::of(&phi, None).direction().to_degrees().rem_euclid(360.0);
    assert_close!(mean, 247.616_562_9, 1e-5, "mean, scipy");
    let delta = dispersion(&phi, None);
    assert_close!(delta, 0.517_961_46, 1e-5, "δ, scipy");
    let half = half_width(delta, 1.959_963_984_540_054 / 30f64.sqrt()).expect("an arc");
    assert_close!(half.to_degrees(), 14.923_845_4, 1e-5, "half width, scipy, Fisher 4.4.4");
}

#[test]
fn v_test_of_ten_directions() {
    // SCIENCE A7: V = 9.49761, u = 4.24746 (n = 10).
    let r = Resultant { cos: 9.497_61, sin: 0.0, weight: 10.0 };
    let test = v_test(r, 10.0, 0.0);
    assert_close!(test.u, 4.247_46, 1e-5, "u, Zar");
    assert_close!(test.p, 1e-4, 0.0, "the far tail is a bound");
}

#[test]
fn a14_a18_piecewise_and_corrected_kappa() {
    let rows: [(&[i32], f64, f64); 4] = [
        (&TREES, 3.207_256_65, 2.115_555_83),
        (&SET_1, 0.885_198_735, 0.828_714_244),
        (&SET_2, 2.668_182_18, 2.407_484_1),
        (&TURTLES, 1.142_309_1, 1.119_271_73),
    ];
    for (deg, plain, corrected) in rows {
        let n = deg.len() as f64;
        let kappa = piecewise(Resultant::of(&circle(deg), None).mean_length());
        assert_close!(kappa, plain, 1e-6, "piecewise κ, n = {n}, R");
        assert_close!(best_fisher(kappa, n), corrected, 1e-6, "Best–Fisher κ, n = {n}, R");
    }
}

#[test]
fn estimators_of_kappa_disagree_on_set_2() {
    // SCIENCE A4, computed with scipy.
    let r = Resultant::of(&circle(&SET_2), None).mean_length();
    assert_close!(Kappa::MaximumLikelihood.of(r, 30.0), 2.675_73, 1e-5, "exact");
    assert_close!(Kappa::Schou.of(r, 30.0), 2.609_69, 1e-5, "Schou");
}

#[test]
fn a19_exact_inverse_of_the_bessel_ratio() {
    let want = [0.629_215_376_1, 1.159_319_920_8, 2.013_627_806_8, 5.304_689_063, 10.271_688_802_2];
    for (r, want) in [0.3, 0.5, 0.7, 0.9, 0.95].into_iter().zip(want) {
        assert_close!(inverse_ratio(r), want, 1e-8, "A⁻¹({r}), scipy brentq on ive");
    }
}

#[test]
fn a20_piecewise_kappa() {
    let want = [0.629_025, 1.151_041_666_7, 2.006_333_333_3, 5.291_005_291, 10.269_576_379_4];
    for (r, want) in [0.3, 0.5, 0.7, 0.9, 0.95].into_iter().zip(want) {
        assert_close!(piecewise(r), want, 1e-9, "κ({r}), Fisher 1993 eq. 4.40; R agrees");
    }
}

#[test]
fn a21_bessel_ratio_at_two() {
    assert_close!(ratio(2.0), 0.697_774_657_964, 1e-10, "A(2), R");
}

#[test]
fn a30_density_with_a_given_bandwidth() {
    let at: Vec<f64> = (0..8).map(|i| (45.0 * f64::from(i)).to_radians()).collect();
    let want = [
        0.005_891_164_69,
        0.041_181_200_4,
        0.040_449_997_3,
        0.269_785_6,
        0.151_633_654,
        0.269_458_591,
        0.253_229_636,
        0.277_173_374,
    ];
    for ((got, want), at) in density(&circle(&SET_1), None, 25.0, &at).into_iter().zip(want).zip(at) {
        assert_close!(got, want, 1e-8, "density at {at}, R density.circular");
    }
}

#[test]
fn a31_plug_in_bandwidth() {
    assert_close!(plug_in(40.0, 0.885_198_735_141), 1.841_908_398_99, 1e-8, "R bw.nrd.circular");
}

#[test]
fn a16_rose_radii_are_equal_area() {
    // SCIENCE A16: counts 4 : 1 give radii 1 : ½.
    assert_eq!(radii(&[0.8, 0.2]), [1.0, 0.5]);
}
