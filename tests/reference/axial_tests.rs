//! Goodness of fit, two-sample tests and mixtures against values from outside the project.
//!
//! Data sets and abbreviations as in `axial.rs`.

use ventifact::assert_close;
use ventifact::ground::{Axis, Seed, Work};
use ventifact::science::axial::AxialSample;
use ventifact::science::axial::equal_kappa::equal_kappa;
use ventifact::science::axial::kuiper::kuiper;
use ventifact::science::axial::mardia_watson_wheeler::{Form, mardia_watson_wheeler};
use ventifact::science::axial::mixture::{MixtureSettings, mixtures};
use ventifact::science::axial::two_samples::{AxesCompared, TwoSampleSettings, compare};
use ventifact::science::axial::von_mises::{cdf, pdf};
use ventifact::science::axial::wallraff::wallraff;
use ventifact::science::axial::watson::{against_uniform, tail, u_squared_von_mises};
use ventifact::science::axial::watson_two::watson_two;
use ventifact::science::axial::watson_williams::{KappaFrom, watson_williams};

use super::axial::{LATHS_B2, SET_1, SET_2, TREES, TURTLES, axes, circle};

/// Directions, degrees: Fisher 1993 B.6 set 3.
const SET_3: [i32; 30] = [
    163, 275, 218, 287, 313, 322, 236, 254, 239, 286, 268, 245, 211, 271, 151, 309, 27, 224, 181, 220, 217,
    192, 292, 283, 216, 231, 147, 163, 155, 203,
];

/// Zar's example 26.8.
const ZAR_A: [i32; 11] = [94, 65, 45, 52, 38, 47, 73, 82, 90, 40, 87];
const ZAR_B: [i32; 9] = [77, 70, 61, 45, 50, 35, 48, 65, 36];
/// Batschelet 1981, §6.2.
const BATSCHELET_A: [i32; 10] = [-20, -10, -10, -10, -10, -10, -10, -10, 0, 0];
const BATSCHELET_B: [i32; 10] = [-10, -10, -10, 0, 0, 0, 10, 10, 10, 20];
/// Zar's example of Watson's two-sample test.
const RANKS_A: [i32; 10] = [35, 45, 50, 55, 60, 70, 85, 95, 105, 120];
const RANKS_B: [i32; 11] = [75, 80, 90, 100, 110, 130, 135, 140, 150, 160, 165];

#[test]
fn a05_watson_and_kuiper_of_laths_b2() {
    let watson = against_uniform(&axes(&LATHS_B2));
    assert_close!(watson.raw, 0.195_747_703, 1e-7, "raw U², independent script");
    assert_close!(watson.modified, 0.196_174_417, 1e-7, "modified U², R");
    assert_close!(kuiper(&axes(&LATHS_B2)).0, 1.902_977_455, 1e-7, "V*, R");
}

#[test]
fn a14_a18_watson_against_a_fitted_von_mises() {
    let rows: [(&[i32], f64); 4] = [
        (&TREES, 0.023_575_198_1),
        (&SET_1, 0.068_548_229_4),
        (&SET_2, 0.023_575_970_9),
        (&TURTLES, 0.161_486_176),
    ];
    for (deg, want) in rows {
        assert_close!(u_squared_von_mises(&circle(deg)), want, 1e-4, "U², n = {}, R", deg.len());
    }
}

#[test]
fn a21_von_mises_density_and_distribution() {
    assert_close!(pdf(0.3, 0.0, 2.0), 0.471_801_171_182, 1e-10, "density, R");
    assert_close!(cdf(0.3, 0.0, 2.0), 0.650_264_933_107, 1e-10, "distribution from −π, R");
}

#[test]
fn a22_a23_watson_williams_by_both_conventions() {
    let (a, b) = (circle(&ZAR_A), circle(&ZAR_B));
    let within = watson_williams(&[&a, &b], KappaFrom::Within);
    assert_close!(within.f, 1.612_773_299, 1e-6, "κ within, scipy; Zar prints 1.61");
    assert_eq!(within.df, [1.0, 18.0]);
    let pooled = watson_williams(&[&a, &b], KappaFrom::Pooled);
    assert_close!(pooled.f, 1.617_336_93, 1e-6, "κ pooled, R");
    let (a, b) = (circle(&BATSCHELET_A), circle(&BATSCHELET_B));
    let within = watson_williams(&[&a, &b], KappaFrom::Within);
    assert_close!(within.f, 8.703_713_472, 1e-6, "Batschelet p. 99, κ within");
    let pooled = watson_williams(&[&a, &b], KappaFrom::Pooled);
    assert_close!(pooled.f, 8.732_862_478, 1e-6, "Batschelet p. 99, κ pooled, R");
    assert_close!(pooled.p, 0.008_471_693_54, 1e-6, "p, R");
}

#[test]
fn a24_watson_two_sample() {
    let (u2, p) = watson_two(&circle(&RANKS_A), &circle(&RANKS_B));
    assert_close!(u2, 0.145_743_145_743, 1e-10, "U², R; the book prints 0.1458");
    assert_close!(p, 0.112_603_45, 1e-6, "asymptotic p");
}

#[test]
fn a25_asymptotic_tail_of_u2() {
    // Stephens 1970, closed series.
    assert_close!(tail(0.145_743_145_743), 0.112_603_45, 1e-6, "tail");
    for (alpha, u2) in [(0.1, 0.151_765_57), (0.05, 0.186_880_82), (0.01, 0.268_415_89)] {
        // These are where the leading term 2 exp(−2π²U²) is α; the next term is −2(α/2)⁴.
        let next = 2.0 * f64::powi(alpha / 2.0, 4);
        assert_close!(tail(u2), alpha - next, 1e-7, "critical value at {alpha}");
    }
}

#[test]
fn a26_mardia_watson_wheeler_by_both_forms() {
    let (a, b) = (circle(&RANKS_A), circle(&RANKS_B));
    let (w, p) = mardia_watson_wheeler(&[&a, &b], Form::TwoSample, Seed(1));
    assert_close!(w, 3.678_270_036, 1e-7, "two-sample W, R");
    assert_close!(p, 0.158_954_86, 1e-7, "p, R");
    let (w, _) = mardia_watson_wheeler(&[&a, &b], Form::QSample, Seed(1));
    assert_close!(w, 3.862_183_538, 1e-7, "q-sample W, independent script");
}

#[test]
fn a27_wallraff() {
    let (h, p) = wallraff(&[&circle(&SET_2), &circle(&SET_3)]);
    assert_close!(h, 2.941_692_604, 1e-7, "χ², R");
    assert_close!(p, 0.086_320_236_3, 1e-7, "p, R");
}

#[test]
fn a28_equal_concentration() {
    let (chi2, p) = equal_kappa(&[&circle(&SET_2), &circle(&SET_3)]);
    assert_close!(chi2, 2.346_017_95, 1e-7, "χ², R");
    assert_close!(p, 0.125_603_489, 1e-7, "p, R");
}

#[test]
fn a29_mixture_of_turtles() {
    let settings = MixtureSettings { most_modes: 3, background: false, n_eff: 76.0 };
    let models = mixtures(&circle(&TURTLES), None, settings, Seed(1), &Work::quiet()).expect("nobody stops");
    // EM with 20 random starts, scipy; BIC of K = 1, 2, 3: K = 2 wins.
    let best = &models[0];
    assert_eq!(best.components.len(), 2);
    assert_close!(best.log_likelihood, -105.410_441_2, 1e-4, "L");
    let [a, b] = [best.components[0], best.components[1]];
    assert_close!(a.weight, 0.836_621_48, 1e-4, "ω₁");
    assert_close!(a.mean.to_degrees(), 63.471_61, 0.01, "μ₁");
    assert_close!(b.mean.to_degrees(), 241.203_28, 0.01, "μ₂");
    assert_close!(a.kappa, 2.618_648_14, 1e-3, "κ₁");
    assert_close!(b.kappa, 8.447_016_84, 1e-3, "κ₂");
    for (modes, want) in [(1, 247.750_508_5), (2, 232.474_549_2), (3, 244.912_273_6)] {
        let model = models.iter().find(|m| m.components.len() == modes).expect("a model of each size");
        assert_close!(model.bic, want, 1e-3, "BIC, K = {modes}");
    }
}

#[test]
fn a14_cross_validated_bandwidth() {
    // SCIENCE A14: R gave 3.418 for B.6 set 1.
    let nu = ventifact::science::axial::density::likelihood_cv(&circle(&SET_1), None, 40.0);
    assert_close!(nu, 3.418, 5e-3, "ν, R bw.cv.ml.circular");
}

#[test]
fn a22_a24_by_the_comparison_of_two_samples() {
    // Independent axes are worth as many as they are: the comparison then gives the textbooks' numbers.
    let halved = |deg: &[i32]| deg.iter().map(|d| Axis::from_deg(0.5 * f64::from(*d))).collect::<Vec<_>>();
    let run = |a: &[i32], b: &[i32]| {
        let (a, b) = (halved(a), halved(b));
        let [first, second] = [&a, &b].map(|axes| AxialSample { axes, weights: None, nodes: None });
        let settings = TwoSampleSettings { significance: 0.05, resamples: 99, permutations: 99 };
        compare(&first, &second, &[], settings, Seed(1), &Work::quiet()).expect("nobody stops")
    };
    let test = |c: &AxesCompared, method: &str| {
        let found = c.tests.iter().find(|t| t.method == method).expect("the test");
        (found.statistic, found.p)
    };
    let zar = run(&ZAR_A, &ZAR_B);
    assert_eq!(zar.tests[0].method, "axial.watson-williams", "κ above 2 and alike");
    assert_close!(zar.tests[0].statistic, 1.612_773_299, 1e-6, "F, scipy; Zar prints 1.61");
    // F with 1 and 18 degrees of freedom, R pf.
    assert_close!(zar.tests[0].p, 0.220, 1e-3, "p");
    let ranks = run(&RANKS_A, &RANKS_B);
    let (u2, p) = test(&ranks, "axial.watson-two");
    assert_close!(u2, 0.145_743_145_743, 1e-9, "U², R");
    assert_close!(p, 0.112_603_45, 1e-6, "asymptotic p");
    assert_close!(test(&ranks, "axial.mardia-watson-wheeler").0, 3.678_270_036, 1e-7, "W, R");
    let spread = run(&SET_2, &SET_3);
    assert_close!(test(&spread, "axial.wallraff").0, 2.941_692_604, 1e-7, "χ², R");
}
