//! Gradient operators, the structure tensor, speckle and look: closed forms and published figures.

use ventifact::assert_close;
use ventifact::ground::{Axis, Body, Grid, LocalFrame, Place, Point, Polygon, Seed, Work};
use ventifact::numeric::gauss::{Kernel, Parity};
use ventifact::science::orientation::look::{Weighting, resultant_by_look};
use ventifact::science::orientation::{TensorSettings, crossing, noise, speckle, trend_nodes};
use ventifact::science::scene::{Grating, picture};

const WAVELENGTHS: [f64; 5] = [3.0, 4.0, 6.0, 8.0, 12.0];

/// Worst angle between a plane wave's direction and its gradient, degrees, over directions.
fn worst_error(smooth: &Kernel, slope: &Kernel, wavelength: f64) -> f64 {
    (0..=9000)
        .map(|i| {
            let angle = f64::from(i) * 0.01;
            let omega = 2.0 * std::f64::consts::PI / wavelength;
            let (sin, cos) = angle.to_radians().sin_cos();
            let (x, y) = (omega * cos, omega * sin);
            let gx = slope.response(x) * smooth.response(y);
            let gy = smooth.response(x) * slope.response(y);
            (gy.atan2(gx).to_degrees() - angle).abs()
        })
        .fold(0.0, f64::max)
}

fn kernel(parity: Parity, half: &[f32]) -> Kernel {
    Kernel { parity, half: half.to_vec() }
}

/// Closed-form transfer functions; Scharr 2000, Sobel, and Farid & Simoncelli 2004 (taps as in scikit-image
/// 0.26 `filters.farid`).
#[test]
fn b01_b02_b04_transfer_functions_of_small_stencils() {
    let difference = kernel(Parity::Odd, &[0.0, 0.5]);
    let cases = [
        (
            "Scharr",
            kernel(Parity::Even, &[10.0, 3.0]),
            difference.clone(),
            [0.6353, 0.2889, 0.2538, 0.1622, 0.0777],
        ),
        ("Sobel", kernel(Parity::Even, &[2.0, 1.0]), difference, [6.2603, 3.2447, 1.3651, 0.7537, 0.3306]),
        (
            "Farid–Simoncelli",
            kernel(Parity::Even, &[0.426_374_6, 0.249_153_4, 0.037_659_3]),
            kernel(Parity::Odd, &[0.0, 0.276_691, 0.109_603_8]),
            [0.063, 0.1699, 0.1417, 0.092, 0.0446],
        ),
    ];
    for (name, smooth, slope, expected) in cases {
        for (wavelength, want) in WAVELENGTHS.into_iter().zip(expected) {
            assert_close!(worst_error(&smooth, &slope, wavelength), want, 2e-4, "{name}, {wavelength} px");
        }
    }
}

/// The operator used: sampled Gaussian derivative, σ 1.5, radius 6. Figures by closed-form transfer functions.
#[test]
fn b05_sampled_gaussian_derivative() {
    let (smooth, slope) = (Kernel::gaussian(1.5), Kernel::derivative(1.5));
    for (wavelength, want) in WAVELENGTHS.into_iter().zip([0.0228, 0.004, 0.0011, 0.0038, 0.0035]) {
        assert_close!(worst_error(&smooth, &slope, wavelength), want, 3e-4, "{wavelength} px");
    }
}

fn settings(sigma: f64, rho: f64, step: f64) -> TensorSettings {
    TensorSettings {
        gradient_scale_px: sigma,
        integration_scale_px: rho,
        node_step_px: step,
        significance: 0.01,
        logarithm: false,
    }
}

fn whole(image: &Grid<f32>) -> Polygon {
    Polygon::rectangle(image.width() as f64, image.height() as f64)
}

fn frame(place: &Place) -> LocalFrame {
    place.local_frame(Point::new(0.0, 0.0)).expect("plane")
}

/// Section 0's sign test; SciPy gaussian_filter gave 0.000, 29.997, 63.003, 116.997, 170.002.
#[test]
fn b06_crest_azimuth_signs() {
    let place = Place::pixels(0.0);
    for deg in [0.0, 30.0, 63.0, 117.0, 170.0] {
        let grating = Grating::new(Axis::from_deg(deg), 12.0);
        let image = picture(128, 128, frame(&place), |e, n| grating.tone(e, n));
        let field = trend_nodes(&image, &whole(&image), &place, &settings(1.5, 8.0, 16.0), &Work::quiet())
            .expect("not stopped");
        for node in &field.nodes {
            assert_close!(node.axis.separation(Axis::from_deg(deg)), 0.0, 0.01, "crest at {deg}°");
        }
    }
}

/// tan(az) = Δcol·dx/(Δrow·dy): 45° in pixels twice as tall as wide is 26.565°.
#[test]
fn b07_anisotropic_pixels() {
    let place = Place::plane([1.0, 2.0], 0.0, Body::earth()).expect("pixels");
    assert_close!(frame(&place).azimuth(1.0, -1.0).deg(), 26.565_051_177, 1e-9, "azimuth of a diagonal");
}

/// E[C²] = 2/(n + 1): exact for n independent Gaussian gradient pairs, from the exact tail.
#[test]
fn b08_coherence_of_pure_noise() {
    // The list this figure comes from prints .198 039 02 for n = 50, which its own formula √(2/51) does not
    // give; the formula's value stands here.
    for (n, rms, mean) in [(50.0, 0.198_029_51, 0.176_45), (200.0, 0.099_750_93, 0.0887)] {
        // E[C²] = ∫ 2c P(C > c) dc and E[C] = ∫ P(C > c) dc.
        let steps = 200_000;
        let (mut square, mut first) = (0.0, 0.0);
        for i in 0..steps {
            let c = (f64::from(i) + 0.5) / f64::from(steps);
            let tail = noise::coherence_p(n, c) / f64::from(steps);
            square += 2.0 * c * tail;
            first += tail;
        }
        assert_close!(square.sqrt(), rms, 1e-6, "rms, n = {n}");
        // Monte Carlo of 20 000 windows.
        assert_close!(first, mean, 3e-3, "mean, n = {n}");
    }
}

/// C = S/(S + 2N), S = ½A²k²e^{−k²σ²}, N = s²/(8πσ⁴): predicted .94956, measured .9498 on 2048².
#[test]
fn b09_coherence_of_a_wave_in_noise() {
    use rand_distr_free::normal;
    let (k, sigma, s) = (2.0 * std::f64::consts::PI / 12.0, 1.5f64, 0.5f64);
    let signal = 0.5 * k * k * (-k * k * sigma * sigma).exp();
    let noise = s * s / (8.0 * std::f64::consts::PI * sigma.powi(4));
    assert_close!(signal / (signal + 2.0 * noise), 0.949_555_6, 1e-6, "predicted");
    let place = Place::pixels(0.0);
    let grating = Grating::new(Axis::from_deg(30.0), 12.0);
    let mut rng = Seed(3).stream("b09", 0);
    let mut image = picture(512, 512, frame(&place), |e, n| grating.tone(e, n));
    image.values_mut().iter_mut().for_each(|v| *v += (s * normal(&mut rng)) as f32);
    let field = trend_nodes(&image, &whole(&image), &place, &settings(1.5, 40.0, 40.0), &Work::quiet())
        .expect("not stopped");
    let mean = field.nodes.iter().map(|n| n.coherence).sum::<f64>() / field.nodes.len() as f64;
    // A quarter of the published side: four times its tolerance.
    assert_close!(mean, 0.9498, 0.004, "measured");
}

/// A standard normal number from two uniform ones, so that tests need no distribution crate.
mod rand_distr_free {
    use rand::Rng;

    pub fn normal(rng: &mut impl Rng) -> f64 {
        let (u, v): (f64, f64) = (rng.random(), rng.random());
        (-2.0 * (1.0 - u).ln()).sqrt() * (2.0 * std::f64::consts::PI * v).cos()
    }
}

/// Gamma functions, SciPy 1.17.1.
#[test]
fn b11_amplitude_variation() {
    for (looks, want) in [(1.0, 0.522_723_200_9), (3.0, 0.294_104_989_5), (4.0, 0.253_622_399_4)] {
        assert_close!(speckle::amplitude_variation(looks), want, 1e-9, "{looks} looks");
    }
    // ln I: bias −.5772 and variance π²/6 for one look; −.1302 and .2838 for four.
    let (bias, variance) = speckle::logarithm_moments(1.0);
    assert_close!(bias, -0.577_215_664_9, 1e-9, "bias, one look");
    assert_close!(variance, 1.644_934_066_8, 1e-9, "variance, one look");
    let (bias, variance) = speckle::logarithm_moments(4.0);
    assert_close!(bias, -0.1302, 5e-5, "bias, four looks");
    assert_close!(variance, 0.2838, 5e-5, "variance, four looks");
}

/// Numerical maximum of the posterior, SciPy: 1.30996691.
#[test]
fn b12_gamma_map() {
    assert_close!(speckle::gamma_map(2.0, 1.0, 4.0, 0.6), 1.309_966_887_1, 1e-8, "estimate");
}

/// The two published forms of the weight.
#[test]
fn b13_lee_weights() {
    assert_close!(speckle::lee_weight(0.6, 0.25), 0.583_333_333_3, 1e-9, "w");
    assert_close!(speckle::lee_weight_normalised(0.6, 0.25), 0.466_666_666_7, 1e-9, "w with 1 + Cu²");
}

/// A uniform field seen under one look: the integral by sums.
#[test]
fn b14_look_bias() {
    for (weighting, power, want) in [(Weighting::Contrast, 1, 1.0 / 3.0), (Weighting::Energy, 2, 0.5)] {
        let steps = 100_000;
        let (mut c, mut w) = (0.0, 0.0);
        for i in 0..steps {
            let t = std::f64::consts::PI * (f64::from(i) + 0.5) / f64::from(steps);
            let weight = t.sin().abs().powi(power);
            c -= weight * (2.0 * t).cos();
            w += weight;
        }
        // Positive: the axis stands across the look.
        assert_close!(c / w, want, 1e-8, "sum");
        assert_close!(resultant_by_look(weighting), want, 1e-9, "closed form");
    }
}

/// σ = w/√3 and (6√3/√(2π)) e^{−3/2}; a numeric scan agrees.
#[test]
fn b15_scale_of_a_bar() {
    let (sigma, answer) = crossing::bar_scale(3.0);
    assert_close!(sigma, 1.732_050_8, 1e-5, "scale");
    assert_close!(answer, 0.925_082, 1e-5, "answer");
}

/// Buffon; and SciPy `binomtest`, two-sided.
#[test]
fn c08_c09_random_transects_and_the_fork_test() {
    assert_close!(crossing::RANDOM_TRANSECT, 0.5 * std::f64::consts::PI, 1e-9, "random transects");
    assert_close!(crossing::sign_test(14, 17), 0.012_725_830_1, 1e-9, "14 of 17");
}
