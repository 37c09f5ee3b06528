//! Gratings at every azimuth: the tensor and the spectrum must return what was drawn.

use ventifact::ground::{Axis, Body, Grid, Place, Point, Polygon, Work};
use ventifact::science::orientation::{SpectrumSettings, TensorSettings, spectrum, trend_nodes};
use ventifact::science::scene::{Grating, picture};

fn place(pixel: [f64; 2]) -> Place {
    Place::plane(pixel, 0.0, Body::earth()).expect("pixel size")
}

fn draw(size: [usize; 2], place: &Place, grating: Grating) -> Grid<f32> {
    let frame = place.local_frame(Point::new(0.0, 0.0)).expect("plane");
    picture(size[0], size[1], frame, |e, n| grating.tone(e, n))
}

fn whole(image: &Grid<f32>) -> Polygon {
    Polygon::rectangle(image.width() as f64, image.height() as f64)
}

/// Worst node error of the tensor over azimuths, for one spacing and pixel shape.
fn tensor_error(spacing: f64, pixel: [f64; 2], size: [usize; 2], every: usize) -> f64 {
    let place = place(pixel);
    let settings = TensorSettings {
        gradient_scale_px: (spacing / 8.0).max(1.0),
        integration_scale_px: (0.5 * spacing).max(4.0),
        node_step_px: 16.0,
        significance: 0.01,
        logarithm: false,
    };
    let mut worst = 0.0f64;
    for deg in (0..180).step_by(every) {
        let trend = Axis::from_deg(deg as f64);
        let mut grating = Grating::new(trend, spacing);
        grating.phase = 0.1 * deg as f64;
        let image = draw(size, &place, grating);
        let field =
            trend_nodes(&image, &whole(&image), &place, &settings, &Work::quiet()).expect("not stopped");
        assert!(field.nodes.len() > 4, "{} nodes", field.nodes.len());
        for node in &field.nodes {
            worst = worst.max(node.axis.separation(trend));
        }
    }
    worst
}

#[test]
fn the_tensor_returns_the_trend_of_gratings() {
    for (pixel, size) in [([1.0, 1.0], [160, 160]), ([1.0, 2.0], [160, 120])] {
        for spacing in [6.0, 9.0, 14.5, 24.0] {
            let worst = tensor_error(spacing, pixel, size, 5);
            println!("tensor, pixel {pixel:?}, spacing {spacing}: worst {worst:.4}°");
            assert!(worst <= 0.05, "pixel {pixel:?}, spacing {spacing}: got {worst}, bound 0.05");
        }
    }
}

/// Worst (trend error in degrees, spacing error as a share) of the spectrum over azimuths.
fn spectrum_error(spacing: f64, pixel: [f64; 2], size: [usize; 2], every: usize) -> (f64, f64) {
    let place = place(pixel);
    let settings = SpectrumSettings {
        window_px: None,
        shortest_spacing_px: 4.0,
        longest_spacing_px: None,
        significance: 0.05,
        logarithm: false,
    };
    let mut worst = (0.0f64, 0.0f64);
    for deg in (0..180).step_by(every) {
        let trend = Axis::from_deg(deg as f64);
        let mut grating = Grating::new(trend, spacing);
        grating.phase = 0.1 * deg as f64;
        let image = draw(size, &place, grating);
        let found = spectrum(&image, &whole(&image), &place, &settings, &Work::quiet()).expect("not stopped");
        assert!(found.defined, "{deg}°, spacing {spacing}: {found:?}");
        let peak = found.peak.expect("a peak");
        worst.0 = worst.0.max(peak.axis.separation(trend));
        worst.1 = worst.1.max((peak.spacing / spacing - 1.0).abs());
    }
    worst
}

#[test]
fn the_spectrum_returns_trend_and_spacing_of_gratings() {
    for (pixel, size) in [([1.0, 1.0], [256, 256]), ([1.0, 2.0], [256, 128])] {
        for spacing in [6.0, 9.0, 14.5, 24.0] {
            let (trend, share) = spectrum_error(spacing, pixel, size, 5);
            println!(
                "spectrum, pixel {pixel:?}, spacing {spacing}: worst {trend:.4}°, {:.3} %",
                100.0 * share
            );
            assert!(trend <= 0.3, "pixel {pixel:?}, spacing {spacing}: got {trend}°, bound 0.3°");
            assert!(share <= 0.01, "pixel {pixel:?}, spacing {spacing}: got {share}, bound 0.01");
        }
    }
}
