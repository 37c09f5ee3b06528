//! The frequency bins of one window size: where they lie on the ground, and which are looked at.

use crate::ground::{Axis, LocalFrame};

/// One bin of the half-plane, column frequency ≥ 0.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bin {
    /// Place in the power array.
    pub index: usize,
    /// Cycles per pixel along a row and down a column.
    pub pixel: [f64; 2],
    /// ln of the ground frequency, cycles per ground unit.
    pub ln_f: f64,
    /// Which axis line the bin lies on, to within the taper's width.
    pub line: Option<usize>,
    /// Whether a peak is looked for here.
    pub sought: bool,
}

/// Window and padded size, and the bins within the band.
#[derive(Clone, Debug)]
pub(super) struct Bins {
    /// Samples of a window along a row and down a column.
    pub window: [usize; 2],
    pub padded: [usize; 2],
    /// In order of rising frequency, from somewhat below the band, for the background.
    pub all: Vec<Bin>,
    /// Index into `all` of the first bin of the band.
    pub band_from: usize,
    pub band_to: usize,
}

/// Highest frequency trusted along either pixel direction, cycles per pixel.
const NYQUIST_SHARE: f64 = 0.45;

/// How far below the band the background is followed.
const BELOW: f64 = 1.5;

impl Bins {
    /// Bins for `window` zero-padded to `padded`, keeping ground frequencies in `band` (cycles per
    /// ground unit).
    pub fn new(window: [usize; 2], padded: [usize; 2], frame: LocalFrame, band: [f64; 2]) -> Self {
        let [cols, rows] = padded;
        let mut all = Vec::new();
        for kc in 0..=cols / 2 {
            for kr in 0..rows {
                let signed = if kr <= rows / 2 { kr as f64 } else { kr as f64 - rows as f64 };
                // The column kc = 0 holds each frequency twice.
                if kc == 0 && signed <= 0.0 {
                    continue;
                }
                let pixel = [kc as f64 / cols as f64, signed / rows as f64];
                let (east, north) = frame.gradient(pixel[0], pixel[1]);
                let f = east.hypot(north);
                let trusted = pixel.iter().all(|p| p.abs() <= NYQUIST_SHARE);
                if trusted && f >= band[0] / BELOW && f <= band[1] {
                    // Within one bin of the unpadded transform.
                    let line = (0..2).find(|i| pixel[1 - i].abs() * window[1 - i] as f64 <= 1.0 + 1e-9);
                    all.push(Bin { index: kc * rows + kr, pixel, ln_f: f.ln(), line, sought: true });
                }
            }
        }
        all.sort_by(|a, b| a.ln_f.total_cmp(&b.ln_f).then(a.index.cmp(&b.index)));
        let low = band[0].ln();
        let band_from = all.partition_point(|b| b.ln_f < low);
        let band_to = all.len();
        Self { window, padded, all, band_from, band_to }
    }

    /// Peaks are looked for only where the trend lies within so many degrees of an axis.
    pub fn along(mut self, frame: LocalFrame, trend: Option<(Axis, f64)>) -> Self {
        if let Some((axis, within)) = trend {
            for bin in &mut self.all {
                let (east, north) = frame.gradient(bin.pixel[0], bin.pixel[1]);
                bin.sought = Axis::from_east_north(east, north).perpendicular().separation(axis) <= within;
            }
        }
        self
    }

    pub fn band(&self) -> &[Bin] {
        &self.all[self.band_from..self.band_to]
    }

    /// Number of independent bins looked at in the band: as many as the unpadded transform has.
    pub fn independent(&self) -> f64 {
        let padding = (self.padded[0] * self.padded[1]) as f64 / (self.window[0] * self.window[1]) as f64;
        self.band().iter().filter(|b| b.sought).count() as f64 / padding
    }
}
