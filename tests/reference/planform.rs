//! Planform and palaeo-flow against closed forms: sine-generated curves, meander relations, velocities,
//! competent grains (entries I01, I03–I05 of the collection of checks).

use std::f64::consts::TAU;

use rand::Rng as _;

use ventifact::assert_close;
use ventifact::ground::{
    Body, FlowSense, Network, NetworkNode, Place, Point, Polyline, Reach, ReachOrigin, Seed, Station, Width,
};
use ventifact::science::network::flow::{
    FlowAsk, competent_size, equivalent_manning, flow, rescaled_manning, velocity,
};
use ventifact::science::network::meanders::{wavelength_of_radius, wavelength_of_width};
use ventifact::science::network::planform::{Planform, planforms};

/// ω in degrees and 1/J₀(ω), by scipy (quadrature agrees).
const SINUOSITIES: [(f64, f64); 4] =
    [(40.0, 1.134_024_92), (70.0, 1.514_589_52), (90.0, 2.118_638_61), (110.0, 3.699_855_98)];

/// θ = ω sin(2πs/M), turned by `turn_deg`, as points `step` apart.
fn sine_generated(omega_deg: f64, m: f64, waves: f64, turn_deg: f64, step: f64) -> Vec<Point> {
    let fine = 0.02f64.min(0.2 * step);
    let count = (waves * m / fine) as usize;
    let every = (step / fine).round() as usize;
    let mut p = Point::new(2000.0, 2000.0);
    let mut line = vec![p];
    for i in 1..=count {
        let s = (i as f64 - 0.5) * fine;
        let theta = omega_deg.to_radians() * (TAU * s / m).sin() + turn_deg.to_radians();
        p = Point::new(p.x + fine * theta.cos(), p.y + fine * theta.sin());
        if i % every == 0 {
            line.push(p);
        }
    }
    line
}

fn one_reach(line: Vec<Point>, place: &Place, width: f64) -> Network {
    let node = |at: Point| NetworkNode { at, elevation_m: None };
    let stations =
        line.iter().step_by(10).map(|p| Station { at: *p, width: Some(width), ..Station::default() });
    let reach = Reach {
        from: 0,
        to: 1,
        length: 0.0,
        sense: FlowSense::default(),
        order: None,
        width: Some(Width { mean: width, se: 0.1 }),
        stations: stations.collect(),
        origin: ReachOrigin::Traced,
        confidence: 1.0,
        line: Polyline(line.clone()),
    };
    let network = Network { nodes: vec![node(line[0]), node(line[line.len() - 1])], reaches: vec![reach] };
    network.on_ground(place, 1.0, |p| p)
}

fn only(line: Vec<Point>, place: &Place, width: f64, scale_widths: f64, cell: f64) -> Planform {
    planforms(&one_reach(line, place, width), place, scale_widths, cell, 3).remove(0)
}

fn errors(form: &Planform, m: f64, truth: f64) -> [f64; 3] {
    let spectrum = form.wavelength_spectrum.expect("a wavelength by spectrum").wavelength;
    let inflections = form.wavelength_inflections.expect("a wavelength by inflections").wavelength;
    [form.sinuosity / truth - 1.0, spectrum * truth / m - 1.0, inflections * truth / m - 1.0]
}

/// Langbein & Leopold (1966): K = 1/J₀(ω), λ = M J₀(ω).
#[test]
fn sine_generated_curves_have_their_sinuosity_and_wavelength() {
    let place = Place::pixels(0.0);
    let m = 200.0;
    for (omega, truth) in SINUOSITIES {
        for turn in [0.0, 23.0, 67.0] {
            let form = only(sine_generated(omega, m, 16.0, turn, 0.5), &place, 10.0, 40.0, 1.0);
            let [k, spectrum, inflections] = errors(&form, m, truth);
            println!(
                "ω {omega}° turned {turn}°: K {:+.3} %, λ by spectrum {:+.3} %, by inflections {:+.3} %",
                100.0 * k,
                100.0 * spectrum,
                100.0 * inflections
            );
            assert_close!(k, 0.0, 0.01, "sinuosity at ω = {omega}°, turned {turn}°");
            assert_close!(spectrum, 0.0, 0.01, "wavelength by spectrum at ω = {omega}°, turned {turn}°");
            assert_close!(
                inflections,
                0.0,
                0.01,
                "wavelength by inflections at ω = {omega}°, turned {turn}°"
            );
            let [low, high] = form.wavelength_spectrum.unwrap().ci95.unwrap();
            assert!(low < m / truth && m / truth < high, "{low} to {high}");
        }
    }
}

/// The same drawn by cells (rounded to whole pixels) or with half a pixel of scatter at each pixel.
#[test]
fn pixel_steps_and_scatter_hardly_matter() {
    let place = Place::pixels(0.0);
    let m = 200.0;
    for (omega, truth) in SINUOSITIES {
        for turn in [0.0, 23.0, 45.0] {
            let line = sine_generated(omega, m, 16.0, turn, 1.0);
            let mut rng = Seed(9).stream("scatter", 0);
            let mut noise = || rng.random::<f64>() - 0.5;
            let scattered = line.iter().map(|p| Point::new(p.x + noise(), p.y + noise())).collect();
            let mut stepped: Vec<Point> =
                line.iter().map(|p| Point::new(p.x.floor() + 0.5, p.y.floor() + 0.5)).collect();
            stepped.dedup();
            for (what, line) in [("scattered", scattered), ("stepped", stepped)] {
                let form = only(line, &place, 10.0, 40.0, 1.0);
                let [k, spectrum, inflections] = errors(&form, m, truth);
                println!(
                    "{what}, ω {omega}° turned {turn}°: K {:+.2} %, λ by spectrum {:+.2} %, by inflections {:+.2} %",
                    100.0 * k,
                    100.0 * spectrum,
                    100.0 * inflections
                );
                assert_close!(k, 0.0, 0.01, "sinuosity, {what}, ω = {omega}°, {turn}°");
                assert_close!(spectrum, 0.0, 0.01, "spectrum, {what}, ω = {omega}°, {turn}°");
                assert_close!(inflections, 0.0, 0.01, "inflections, {what}, ω = {omega}°, {turn}°");
            }
        }
    }
}

/// Cells of 3 m by 2 m: lengths are ground lengths, and width over wavelength follows.
#[test]
fn ground_units_are_used() {
    let place = Place::plane([3.0, 2.0], 0.0, Body::earth()).unwrap();
    let line = sine_generated(70.0, 600.0, 12.0, 30.0, 1.0);
    let line = line.iter().map(|p| Point::new(p.x / 3.0, p.y / 2.0)).collect();
    let form = only(line, &place, 20.0, 45.0, 2.4);
    let [k, spectrum, inflections] = errors(&form, 600.0, SINUOSITIES[1].1);
    for (what, error) in [("sinuosity", k), ("spectrum", spectrum), ("inflections", inflections)] {
        assert_close!(error, 0.0, 0.01, "{what} on oblong cells");
    }
    assert_close!(form.length, 7200.0, 36.0, "length in metres");
    // Width: across the pixel's mean size, so about 20·√6 m here.
    let width = form.width.unwrap();
    assert_close!(width.mean, 20.0 * 6f64.sqrt(), 1e-6, "mean width");
    let widths = form.wavelength_spectrum.unwrap().wavelength / width.mean;
    assert_close!(form.wavelength_widths.unwrap(), widths, 1e-9, "wavelength in widths");
    // κ = ω 2π/M cos: its mean over the middle third of a bend is 3/π of the greatest.
    let radius = 600.0 / (TAU * 70f64.to_radians()) * std::f64::consts::PI / 3.0;
    assert_close!(form.radius.unwrap()[0] / radius, 1.0, 0.03, "radius of bends");
}

#[test]
fn a_straight_channel_does_not_meander() {
    let place = Place::pixels(0.0);
    let line: Vec<Point> = (0..900).map(|i| Point::new(i as f64, 0.3 * i as f64)).collect();
    let form = only(line, &place, 6.0, 30.0, 1.0);
    assert_close!(form.sinuosity, 1.0, 1e-9, "sinuosity");
    assert!(form.wavelength_spectrum.is_none() && form.wavelength_inflections.is_none());
    assert_eq!((form.bends, form.radius), (0, None));
    assert!(planforms(&Network::default(), &place, 30.0, 1.0, 5).is_empty());
}

/// Leopold & Wolman (1960), put into metres.
#[test]
fn meander_relations_in_metres() {
    assert_close!(wavelength_of_width(1.0), 11.03, 0.005, "λ of 1 m");
    assert_close!(wavelength_of_width(50.0), 573.5, 0.05, "λ of 50 m");
    assert_close!(wavelength_of_radius(1.0), 4.59, 0.005, "λ of bends of 1 m");
}

/// I03: V = √(8gRS/f), Fr = √(8S/f), equivalent n.
#[test]
fn darcy_weisbach_under_three_gravities() {
    let rows = [
        (9.81, 2.169_976_96, 0.030_312_78),
        (3.71, 1.334_466_19, 0.049_291_64),
        (1.352, 0.805_580_54, 0.081_652_95),
    ];
    for (g, v, n) in rows {
        assert_close!(velocity(g, 3.0, 1e-3, 0.05), v, 1e-7, "velocity at {g}");
        assert_close!(velocity(g, 3.0, 1e-3, 0.05) / (g * 3.0).sqrt(), 0.4, 1e-12, "Froude number at {g}");
        assert_close!(equivalent_manning(g, 3.0, 0.05), n, 1e-7, "equivalent n at {g}");
    }
}

/// I04 and I05.
#[test]
fn manning_rescaled_and_competent_grains() {
    assert_close!(rescaled_manning(0.035, 3.71), 0.056_913_54, 1e-7, "n at 3.71");
    assert_close!(rescaled_manning(0.035, 1.352), 0.094_278_83, 1e-7, "n at 1.352");
    assert_close!(competent_size(3.0, 1e-3, 2.65, 0.045), 0.040_404_04, 1e-7, "quartz in water");
    assert_close!(competent_size(3.0, 1e-3, 2.2, 0.045), 0.055_555_56, 1e-7, "ice in a light liquid");
}

fn ask(gravity: f64) -> FlowAsk {
    FlowAsk {
        gravity,
        width_m: [40.0, 60.0],
        width_to_depth: [10.0, 40.0],
        slope: [5e-4, 2e-3],
        friction: [0.03, 0.12],
        liquid_density: 1000.0,
        grain_density: 2650.0,
        shields: [0.03, 0.06],
        manning_earth: [0.025, 0.05],
    }
}

/// What does not depend on gravity does not, what does goes with its root, and shares add up.
#[test]
fn ranges_follow_gravity_and_the_unknowns() {
    let (here, there) = (flow(&ask(9.81)).unwrap(), flow(&ask(3.71)).unwrap());
    assert_eq!((here.depth_m, here.grain_m), (there.depth_m, there.grain_m));
    let root = (3.71f64 / 9.81).sqrt();
    for (a, b) in [
        (here.velocity, there.velocity),
        (here.discharge, there.discharge),
        (here.discharge_by_width, there.discharge_by_width),
        (here.discharge_by_manning, there.discharge_by_manning),
    ] {
        assert!(a.least < a.middle && a.middle < a.greatest);
        assert_close!(b.middle / a.middle, root, 1e-12, "share of √g");
    }
    assert_close!(here.froude.greatest, there.froude.greatest, 1e-12, "Froude number");
    let whole: f64 = here.shares.iter().map(|s| s.1).sum();
    assert_close!(whole, 1.0, 1e-12, "shares");
    // ln Q = 5/2 ln w − 3/2 ln(w/h) + ½ ln S − ½ ln f, nearly: squared slopes times squared log ranges.
    let expected = [1.5 * 4f64.ln(), 2.5 * 1.5f64.ln(), 0.5 * 4f64.ln(), 0.5 * 4f64.ln()].map(|v| v * v);
    let share = |name: &str| here.shares.iter().find(|s| s.0 == name).unwrap().1;
    assert_close!(share("width to depth"), expected[0] / expected.iter().sum::<f64>(), 0.05, "depth's share");
    assert_close!(share("slope"), expected[2] / expected.iter().sum::<f64>(), 0.02, "slope's share");
    let sure = FlowAsk {
        width_m: [50.0; 2],
        width_to_depth: [20.0; 2],
        slope: [1e-3; 2],
        friction: [0.05; 2],
        ..ask(9.81)
    };
    let known = flow(&sure).unwrap();
    assert!(known.shares.is_empty() && known.discharge.least == known.discharge.greatest);
    assert!(flow(&FlowAsk { slope: [0.0, 1e-3], ..sure }).is_err());
    assert!(flow(&FlowAsk { friction: [0.1, 0.05], ..sure }).is_err());
    assert!(flow(&FlowAsk { grain_density: 900.0, ..sure }).is_err());
    assert!(flow(&FlowAsk { gravity: f64::NAN, ..sure }).is_err());
}
