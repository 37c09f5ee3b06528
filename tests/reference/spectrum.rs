//! Tapers, peaks and thresholds of spectra, against numpy, SciPy and Monte Carlo figures.

use ventifact::assert_close;
use ventifact::ground::{Axis, Place, Point, Seed};
use ventifact::numeric::fft::PowerPlan;
use ventifact::numeric::taper::hann;
use ventifact::science::orientation::spectrum::{half_bin, log_parabola, ratio_floor};
use ventifact::science::scene::Grating;

/// SciPy `hann(sym=False)`.
#[test]
fn c01_periodic_hann() {
    let w = hann(128);
    let n = w.len() as f64;
    let (sum, square) = (w.iter().sum::<f64>(), w.iter().map(|v| v * v).sum::<f64>());
    assert_close!(sum / n, 0.5, 1e-4, "gain");
    assert_close!(square / n, 0.375, 1e-4, "mean square");
    assert_close!(n * square / (sum * sum), 1.5, 1e-4, "noise bandwidth");
    assert_close!((n * square / (sum * sum)).powi(2), 2.25, 1e-4, "noise bandwidth in two dimensions");
    let half: (f64, f64) = w.iter().enumerate().fold((0.0, 0.0), |(re, im), (i, v)| {
        let phase = std::f64::consts::PI * i as f64 / n;
        (re + v * phase.cos(), im + v * phase.sin())
    });
    assert_close!(20.0 * (half.0.hypot(half.1) / sum).log10(), -1.423_62, 1e-4, "scallop, dB");
}

/// (trend, spacing) by Hann, 128² transform and log-parabola along both axes, nothing else.
fn peak(trend: f64, spacing: f64) -> (f64, f64) {
    const N: usize = 128;
    let mut grating = Grating::new(Axis::from_deg(trend), spacing);
    grating.phase = 0.7;
    let w = hann(N);
    let window: Vec<f32> = (0..N * N)
        .map(|i| {
            let (col, row) = (i % N, i / N);
            (w[col] * w[row] * grating.tone(col as f64, -(row as f64))) as f32
        })
        .collect();
    let plan = PowerPlan::new(N, N);
    let mut power = vec![0.0; plan.len()];
    plan.power(&window, N, &mut plan.scratch(), &mut power);
    let at = |kc: i64, kr: i64| {
        let (kc, kr) = if kc < 0 { (-kc, -kr) } else { (kc, kr) };
        f64::from(power[kc as usize * N + kr.rem_euclid(N as i64) as usize])
    };
    let half = N as i64 / 2;
    let (kc, kr) = (0..half)
        .flat_map(|kc| (-half + 1..half).map(move |kr| (kc, kr)))
        .filter(|(kc, kr)| kc * kc + kr * kr >= 4)
        .max_by(|a, b| at(a.0, a.1).total_cmp(&at(b.0, b.1)))
        .expect("bins");
    let fc = kc as f64 + log_parabola(at(kc - 1, kr), at(kc, kr), at(kc + 1, kr));
    let fr = kr as f64 + log_parabola(at(kc, kr - 1), at(kc, kr), at(kc, kr + 1));
    let frame = Place::pixels(0.0).local_frame(Point::new(0.0, 0.0)).expect("pixels");
    let (e, n) = frame.gradient(fc / N as f64, fr / N as f64);
    (Axis::from_east_north(e, n).perpendicular().deg(), 1.0 / e.hypot(n))
}

/// numpy: the peak bin alone would give 63.43/14.31, 120.96/21.95, 0.0/42.67. The last case has 3.2 cycles a
/// window, and is 0.26° off.
#[test]
fn c03_log_parabola_in_two_dimensions() {
    let cases = [
        ((63.0, 14.5), (62.966_09, 14.514_57)),
        ((117.0, 23.0), (116.977_41, 23.020_26)),
        ((5.0, 40.0), (5.260_03, 39.816_72)),
    ];
    for ((trend, spacing), (want_trend, want_spacing)) in cases {
        let (got_trend, got_spacing) = peak(trend, spacing);
        assert_close!(got_trend, want_trend, 1e-3, "trend of {trend}°, {spacing} px");
        assert_close!(got_spacing, want_spacing, 1e-3, "spacing of {trend}°, {spacing} px");
    }
}

/// Geometry: 1/2m.
#[test]
fn c04_half_bin_limits() {
    for (cycles, percent, deg) in
        [(3.0, 16.666_666_7, 9.549_296_6), (5.0, 10.0, 5.729_578), (8.0, 6.25, 3.580_986_2)]
    {
        assert_close!(100.0 * half_bin(cycles), percent, 1e-6, "spacing, {cycles} cycles");
        assert_close!(half_bin(cycles).to_degrees(), deg, 1e-6, "trend, {cycles} cycles");
    }
}

/// −ln(1 − (1 − p)^{1/M}).
#[test]
fn c06_highest_of_many_exponentials() {
    for (bins, p, want) in [
        (500.0, 0.01, 10.814_767_38),
        (1000.0, 0.01, 11.507_909_53),
        (500.0, 0.05, 9.184_854_64),
        (1000.0, 0.05, 9.877_976_17),
    ] {
        assert_close!(ratio_floor(bins, p), want, 1e-6, "{bins} bins, p {p}");
    }
}

/// 95 % of the highest of 1682 bins of Hann-tapered white noise, 64²: 10.12 by 1500 runs. The count of
/// bins itself is the safe choice.
#[test]
fn c07_highest_bin_of_tapered_noise() {
    const N: usize = 64;
    assert_close!(ratio_floor(1682.0, 0.05), 10.397_949_34, 1e-6, "all bins");
    assert_close!(ratio_floor(1682.0 / 2.25, 0.05), 9.587_038_18, 1e-6, "bins less the taper's bandwidth");
    let w = hann(N);
    let square: f64 = w.iter().map(|v| v * v).sum::<f64>().powi(2);
    let plan = PowerPlan::new(N, N);
    let (mut scratch, mut power) = (plan.scratch(), vec![0.0; plan.len()]);
    let mut rng = Seed(11).stream("c07", 0);
    let mut highest: Vec<f64> = (0..1500)
        .map(|_| {
            use rand::Rng as _;
            // The sum of four uniform numbers is normal enough: the transform sums thousands of them.
            let mut normal = || (0..4).map(|_| rng.random::<f64>() - 0.5).sum::<f64>() * 3f64.sqrt();
            let window: Vec<f32> = (0..N * N).map(|i| (w[i % N] * w[i / N] * normal()) as f32).collect();
            plan.power(&window, N, &mut scratch, &mut power);
            let mut bins = (1..N / 2).flat_map(|kc| (0..N).map(move |kr| (kc, kr))).filter(|(kc, kr)| {
                let r = if *kr > N / 2 { N - kr } else { *kr };
                // 1682 bins lie within this distance of the origin.
                (9..33 * 33).contains(&(kc * kc + r * r))
            });
            let top = bins.by_ref().map(|(kc, kr)| power[kc * N + kr]).fold(0.0f32, f32::max);
            f64::from(top) / square
        })
        .collect();
    highest.sort_by(f64::total_cmp);
    assert_close!(highest[1425], 10.12, 0.25, "95 % of the highest");
}
