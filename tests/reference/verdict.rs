//! Class probabilities, likelihoods and tests of agreement against scipy 1.17.1 and numpy 2.4.6.

use ventifact::assert_close;
use ventifact::ground::Axis;
use ventifact::science::alignment::equivalence::equivalence;
use ventifact::science::alignment::likelihood::{density, kappa_of_axial_sd, mean_length_of_axial_sd};
use ventifact::science::alignment::obliquity::{Obliquity, RANDOM};

/// Folded normal 20 ± 5 between the borders 15 and 75, by scipy.
#[test]
fn class_probabilities() {
    let obliquity = Obliquity::of(Axis::from_deg(20.0), 5.0, &[Axis::from_deg(0.0)]);
    for (got, want) in obliquity.classes().into_iter().zip([0.158_655_25, 0.841_344_75, 0.0]) {
        assert_close!(got, want, 1e-6, "class");
    }
}

/// 15/90, 60/90, 15/90.
#[test]
fn classes_of_a_random_axis() {
    for (got, want) in RANDOM.into_iter().zip([0.166_666_666_7, 0.666_666_666_7, 0.166_666_666_7]) {
        assert_close!(got, want, 1e-9, "class");
    }
}

/// Marginal density of two von Mises axes, κ 20 and 30, by quadrature.
#[test]
fn density_of_the_measured_axis() {
    for (separation, want, bound) in [(0.0, 1.37079, 5e-6), (12.0, 0.485_581, 5e-7), (35.0, 2.66e-4, 5e-7)] {
        // Quoted for the measure of the doubled angle.
        assert_close!(density(separation, 20.0, 30.0), want, bound, "separation {separation}");
    }
    let factor = density(12.0, 20.0, 30.0) * std::f64::consts::TAU;
    assert_close!(factor, 3.050_993_699, 1e-8, "Bayes factor at 12°");
}

/// R̄ = e^{−2s²} and its κ by root finding in scipy.
#[test]
fn concentration_of_an_axial_spread() {
    for (sd, length, kappa) in [(5.0, 0.984_884_53, 33.334_593_58), (10.0, 0.940_895_23, 8.736_066_64)] {
        assert_close!(mean_length_of_axial_sd(sd), length, 1e-6, "R̄ at {sd}°");
        assert_close!(kappa_of_axial_sd(sd), kappa, 1e-6, "κ at {sd}°");
    }
}

/// Two one-sided tests of D = 6, se = 4 within ± 15, normal, by scipy.
#[test]
fn equivalence_of_two_axes() {
    let got = equivalence(6.0, 4.0, 15.0);
    assert_close!(got.p[0], 0.012_224_47, 1e-8, "upper p");
    assert_close!(got.p[1], 7.605e-8, 1e-11, "lower p");
    assert_close!(got.ci90[0], -0.5794, 1e-3, "lower end");
    assert_close!(got.ci90[1], 12.5794, 1e-3, "upper end");
    assert!(got.equivalent);
}
