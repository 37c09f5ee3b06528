//! Dominant spacing and trend from windowed two-dimensional spectra.

mod background;
mod bins;
mod detect;
mod locate;
mod measure;
mod picture;
pub mod shares;
mod windows;

pub use detect::{ln_global_p, ratio_floor};
pub use locate::{half_bin, log_parabola};
pub use picture::NorthUp;

use crate::ground::{
    Axis, Caution, Grid, LocalFrame, Method, Place, Polygon, Read, Source, Stopped, Symbol, Work,
};
use crate::numeric::fft::quick_size;

use super::gradient::Tone;
use detect::{Survey, survey};
use windows::Scene;

/// The record of the windowed spectrum.
pub static METHOD: Method = Method {
    id: "orientation.spectrum",
    name: "Windowed spectrum",
    question: "How far apart are the crests, and which way do they run, in the patch as a whole?",
    formula: "λ = 1/|f|;  normal = atan2(f_E, f_N);  trend = normal + 90°;  x = P / P_bg,  P_bg = median of a ring / ln 2;  p = 1 − (1 − Q(K, K x̄))^M",
    symbols: &[
        Symbol { symbol: "f", meaning: "wave vector of the peak on the ground", unit: "1/m" },
        Symbol { symbol: "λ", meaning: "crest spacing", unit: "m" },
        Symbol {
            symbol: "P, P_bg",
            meaning: "power of a Hann-tapered window, and its background",
            unit: "tone²",
        },
        Symbol { symbol: "x̄", meaning: "P/P_bg averaged over windows", unit: "1" },
        Symbol { symbol: "K", meaning: "independent windows, overlap accounted for", unit: "1" },
        Symbol { symbol: "M", meaning: "independent bins looked at", unit: "1" },
        Symbol { symbol: "Q", meaning: "upper tail of the Gamma distribution of unit scale", unit: "1" },
    ],
    assumptions: &[
        "the background is smooth and depends on |f| only, except along the pixel axes",
        "the texture is alike across the patch",
    ],
    limits: &[
        "m wavelengths per window cannot tell trends closer than about 1.5/m rad, nor place a peak better than 1/2m without interpolation",
        "spacings below four pixels are not looked for unless asked",
        "on textures of widely spread trends the 95 % intervals are too narrow: in simulated scenes the axis was held by 69–91 %, the spacing by 50–78 % of them",
        "speckle blurred by 1.5 pixels passes the 5 % level about twice as often as stated",
        "the interval comes from the scatter between windows; with fewer than four independent windows it is the half-bin limit",
    ],
    sources: &[
        Source {
            key: "rife1974",
            authors: "Rife, D. C.; Boorstyn, R. R.",
            year: 1974,
            title: "Single-tone parameter estimation from discrete-time observations",
            published: "IEEE Transactions on Information Theory 20, 591",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "welch1967",
            authors: "Welch, P. D.",
            year: 1967,
            title: "The use of fast Fourier transform for the estimation of power spectra",
            published: "IEEE Transactions on Audio and Electroacoustics 15, 70",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// How the spectrum is taken. Lengths in pixels of the finer ground direction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SpectrumSettings {
    /// Side of a window; `None` tries several and then fits the window to the spacing.
    pub window_px: Option<f64>,
    pub shortest_spacing_px: f64,
    pub longest_spacing_px: Option<f64>,
    /// Level of the test for a periodic texture.
    pub significance: f64,
    /// Whether to take the logarithm first (speckled radar).
    pub logarithm: bool,
}

/// A spacing and a trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    pub axis: Axis,
    /// 95 % half width, degrees.
    pub axis_ci95_half_deg: f64,
    /// Ground units.
    pub spacing: f64,
    pub spacing_ci95: [f64; 2],
    /// Mean power over background at the peak.
    pub ratio: f64,
    /// Axial standard deviation of the texture's trends about the peak, the window's own taken off,
    /// degrees; `None` when the power around the peak does not exceed the background.
    pub spread_deg: Option<f64>,
    /// RMS of the texture within half an octave of the peak over the mean tone.
    pub contrast: f64,
}

/// What the windows of a patch say together.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Spectrum {
    /// Whether a periodic texture is claimed at the level asked for.
    pub defined: bool,
    /// The strongest peak, whether or not it passes the test; `None` without any window.
    pub peak: Option<Peak>,
    /// Other peaks that pass the test, strongest first: (axis, spacing, ratio).
    pub others: Vec<(Axis, f64, f64)>,
    /// Probability of so high a peak by chance anywhere in the band, at any window size tried.
    pub p: Option<f64>,
    pub windows: usize,
    pub windows_with_peak: usize,
    /// Side of the windows the numbers come from, pixels of the finer ground direction.
    pub window_px: f64,
    /// Wavelengths per window.
    pub cycles: Option<f64>,
    pub picture: Option<NorthUp>,
    /// (wavelength in ground units, mean power over background) within 15° of the peak's direction.
    pub profile: Vec<[f64; 2]>,
    pub cautions: Vec<Caution>,
}

/// Largest window tried, fine pixels.
const LARGEST: f64 = 1024.0;

/// Least window, fine pixels.
const LEAST: f64 = 32.0;

/// Wavelengths a window is made to hold once the spacing is known, and the fewest that are enough.
const CYCLES: f64 = 10.0;
const FEW_CYCLES: f64 = 5.0;

/// Spacings below this many pixels are near the limit of what a raster shows.
const NEAR_LIMIT_PX: f64 = 6.0;

/// Measures spacing and trend of the texture in a patch (pixel coordinates of `image`).
///
/// # Errors
/// [`Stopped`].
pub fn spectrum(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    settings: &SpectrumSettings,
    work: &Work,
) -> Result<Spectrum, Stopped> {
    spectrum_along(image, patch, place, settings, None, work)
}

/// The same with the peak sought only where the trend lies within so many degrees of an axis.
///
/// # Errors
/// [`Stopped`].
pub fn spectrum_along(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    settings: &SpectrumSettings,
    trend: Option<(Axis, f64)>,
    work: &Work,
) -> Result<Spectrum, Stopped> {
    let tone = if settings.logarithm { Tone::logarithm(image) } else { Tone::Linear };
    let Some(scene) = Scene::new(image, patch, tone, place) else { return Ok(no_window()) };
    let Some(frame) = place.local_frame(scene.centre()) else { return Ok(no_window()) };
    let scale = Scale { trend, ..Scale::new(frame) };
    let mut surveys = Vec::new();
    for size in sizes(&scene, &scale, settings, work)? {
        let band = scale.band(size, settings);
        surveys.extend(survey(&scene, scale.window(size), frame, band, trend, work)?.map(|s| (size, s)));
    }
    let tried = surveys.len() as f64;
    let Some((size, best)) = surveys.into_iter().min_by(|a, b| a.1.ln_p.total_cmp(&b.1.ln_p)) else {
        return Ok(no_window());
    };
    // The best of several sizes is judged as the best of several.
    let p = (best.ln_p + tried.ln()).exp().min(1.0);
    let size = settings.window_px.unwrap_or_else(|| fitted(&best, &scale, &scene, size));
    let defined = p <= settings.significance;
    let mut found = measure::measure(&scene, &scale, size, &best, defined, settings, work)?;
    found.p = Some(p);
    found.defined = defined && found.peak.is_some();
    found.cautions = cautions(&found, &scale);
    Ok(found)
}

fn no_window() -> Spectrum {
    Spectrum {
        cautions: vec![Caution::new(
            "no-window",
            "No window of at least 32 pixels lies nine tenths inside the patch on valid pixels: no spectrum.",
        )],
        ..Spectrum::default()
    }
}

/// Pixel sizes on the ground at the middle of the patch.
struct Scale {
    frame: LocalFrame,
    /// Ground size of the finer pixel direction.
    fine: f64,
    /// Column and row step in fine pixels.
    pixel: [f64; 2],
    /// Peaks are sought within so many degrees of this trend.
    trend: Option<(Axis, f64)>,
}

impl Scale {
    fn new(frame: LocalFrame) -> Self {
        let size = frame.pixel_size();
        let fine = size[0].min(size[1]);
        Self { frame, fine, pixel: size.map(|s| s / fine), trend: None }
    }

    /// Samples of a window `size` fine pixels on a side, square on the ground and quick to transform.
    fn window(&self, size: f64) -> [usize; 2] {
        self.pixel.map(|p| quick_size((size / p).round() as usize))
    }

    /// Ground frequencies looked at: from three cycles a window to the shortest spacing.
    fn band(&self, size: f64, settings: &SpectrumSettings) -> [f64; 2] {
        let longest = settings.longest_spacing_px.unwrap_or(f64::INFINITY).min(size / 3.0);
        [1.0 / (longest * self.fine), 1.0 / (settings.shortest_spacing_px.max(2.0) * self.fine)]
    }
}

/// Window sizes to try, largest first: halves down from the largest that fits the patch.
fn sizes(
    scene: &Scene,
    scale: &Scale,
    settings: &SpectrumSettings,
    work: &Work,
) -> Result<Vec<f64>, Stopped> {
    if let Some(size) = settings.window_px {
        return Ok(vec![size]);
    }
    let extent = scene.extent();
    let least = LEAST.max(FEW_CYCLES * settings.shortest_spacing_px);
    let mut size = LARGEST.min(extent[0] as f64 * scale.pixel[0]).min(extent[1] as f64 * scale.pixel[1]);
    while size >= least && scene.windows(scale.window(size), 64, work)?.origins.is_empty() {
        size *= std::f64::consts::FRAC_1_SQRT_2;
    }
    let halves = std::iter::successors(Some(size), |s| Some(s / 2.0));
    Ok(halves.take_while(|s| *s >= least).collect())
}

/// The side that holds ten of the spacings found, within the patch.
fn fitted(best: &Survey, scale: &Scale, scene: &Scene, size: f64) -> f64 {
    let spacing_px = 1.0 / (best.bins.all[best.peak].ln_f.exp() * scale.fine);
    let extent = scene.extent();
    let room = (extent[0] as f64 * scale.pixel[0]).min(extent[1] as f64 * scale.pixel[1]).min(LARGEST);
    let wanted = (CYCLES * spacing_px).clamp(LEAST, room.max(LEAST));
    // A window larger than the one that was seen to fit may not fit an odd-shaped patch.
    let fits =
        |s: f64| scene.windows(scale.window(s), 64, &Work::quiet()).is_ok_and(|w| !w.origins.is_empty());
    if wanted <= size || fits(wanted) { wanted } else { size }
}

fn cautions(found: &Spectrum, scale: &Scale) -> Vec<Caution> {
    let mut cautions = Vec::new();
    let (Some(peak), Some(cycles)) = (found.peak, found.cycles) else { return cautions };
    if !found.defined {
        return cautions;
    }
    if cycles < FEW_CYCLES {
        cautions.push(Caution::new(
            "few-cycles",
            format!(
                "Only {cycles:.1} wavelengths fit a window: trend and spacing are uncertain by up to {:.0}° and {:.0} %.",
                half_bin(cycles).to_degrees(),
                100.0 * half_bin(cycles)
            ),
        ));
    }
    let spacing_px = peak.spacing / scale.fine;
    if spacing_px < NEAR_LIMIT_PX {
        cautions.push(Caution::new(
            "near-resolution",
            format!("The spacing is {spacing_px:.1} pixels, near the limit of what the raster shows."),
        ));
    }
    if found.windows < 4 {
        cautions.push(Caution::new(
            "few-windows",
            format!(
                "{} window(s) only: the interval is the half-bin limit, not a measured scatter.",
                found.windows
            ),
        ));
    }
    if let Some((axis, spacing, ratio)) = found.others.first() {
        cautions.push(Caution::new(
            "second-texture",
            format!(
                "A second texture at {:.0}° and {:.1} pixels stands {ratio:.0} times above the background.",
                axis.deg(),
                spacing / scale.fine
            ),
        ));
    }
    cautions
}
