//! Where the peak is: sub-bin start, weighted centre over all windows, and the scatter between windows.

use crate::ground::LocalFrame;
use crate::numeric::tail::student_two_sided;

use super::bins::Bin;
use super::windows::Windows;

/// The excess power of one window around the peak, and its own north.
pub(super) struct Share {
    /// Which window.
    pub window: usize,
    pub frame: LocalFrame,
    /// (P − background) over the mean power of the stretch: windows with a clear texture count alike.
    pub excess: Vec<f32>,
}

/// Sub-bin offset of a peak from three log powers: δ = ½(l₋ − l₊)/(l₋ − 2l₀ + l₊); 0 unless the middle
/// one is the highest.
pub fn log_parabola(below: f64, middle: f64, above: f64) -> f64 {
    if !(middle >= below && middle >= above && below > 0.0 && above > 0.0) {
        return 0.0;
    }
    let [b, m, a] = [below, middle, above].map(f64::ln);
    let bend = b - 2.0 * m + a;
    if bend < 0.0 { 0.5 * (b - a) / bend } else { 0.0 }
}

/// How far off a peak read from its bin alone may be, with `cycles` wavelengths in the window: share of the
/// spacing, and radians of trend; both 1/2m.
pub fn half_bin(cycles: f64) -> f64 {
    0.5 / cycles
}

/// Steps of the mean shift; it settles in far fewer.
const STEPS: usize = 60;

/// Weighted sums of excess power about a centre.
#[derive(Clone, Copy, Default)]
struct Moments {
    e: f64,
    d: [f64; 2],
    dd: [f64; 3],
}

impl Moments {
    fn add(&mut self, other: Self) {
        self.e += other.e;
        (0..2).for_each(|i| self.d[i] += other.d[i]);
        (0..3).for_each(|i| self.dd[i] += other.dd[i]);
    }
}

/// Sums of one window under the Gaussian weight exp(−d²/2h²), d from `centre`.
fn moments(share: &Share, bins: &[Bin], centre: [f64; 2], h: f64) -> Moments {
    let mut sum = Moments::default();
    let far = 12.0 * h * h;
    for (bin, excess) in bins.iter().zip(&share.excess) {
        let (e, n) = share.frame.gradient(bin.pixel[0], bin.pixel[1]);
        // The half-plane's other side holds the same wave with both signs turned.
        let (mut x, mut y) = (e - centre[0], n - centre[1]);
        let (x2, y2) = (-e - centre[0], -n - centre[1]);
        if x2 * x2 + y2 * y2 < x * x + y * y {
            (x, y) = (x2, y2);
        }
        let square = x * x + y * y;
        if square > far {
            continue;
        }
        let w = (-0.5 * square / (h * h)).exp() * f64::from(*excess);
        sum.add(Moments { e: w, d: [w * x, w * y], dd: [w * x * x, w * x * y, w * y * y] });
    }
    sum
}

/// Moves `start` to the centre of the excess power under a Gaussian weight of width `h`; `None` when it
/// wanders off or the power there is not positive.
pub(super) fn settle(shares: &[Share], bins: &[Bin], start: [f64; 2], h: f64) -> Option<[f64; 2]> {
    let mut centre = start;
    for _ in 0..STEPS {
        let mut sum = Moments::default();
        shares.iter().for_each(|s| sum.add(moments(s, bins, centre, h)));
        if sum.e <= 0.0 {
            return None;
        }
        let step = sum.d.map(|d| d / sum.e);
        centre = [centre[0] + step[0], centre[1] + step[1]];
        if (centre[0] - start[0]).hypot(centre[1] - start[1]) > 4.0 * h {
            return None;
        }
        if step[0].hypot(step[1]) < 1e-5 * h {
            break;
        }
    }
    Some(centre)
}

/// Directions, degrees, and ln frequency within which the width of a peak is read.
const WIDTH_DEG: f64 = 25.0;
const WIDTH_LN: f64 = 0.35;

/// The width of the mean peak, as the standard deviation of its excess power in one direction: from the
/// second moments about the centre, within 25° and half an octave of it. 0 without excess.
pub(super) fn width(shares: &[Share], bins: &[Bin], centre: [f64; 2]) -> f64 {
    let length = centre[0].hypot(centre[1]);
    let (mut sum, mut square) = (0.0, 0.0);
    for share in shares {
        for (bin, excess) in bins.iter().zip(&share.excess) {
            let (e, n) = share.frame.gradient(bin.pixel[0], bin.pixel[1]);
            let f = e.hypot(n);
            let along = (e * centre[0] + n * centre[1]).abs() / length;
            if (f / length).ln().abs() > WIDTH_LN || along < f * WIDTH_DEG.to_radians().cos() {
                continue;
            }
            let near = (e - centre[0]).hypot(n - centre[1]).min((e + centre[0]).hypot(n + centre[1]));
            sum += f64::from(*excess);
            square += f64::from(*excess) * near * near;
        }
    }
    if sum > 0.0 { (0.5 * square / sum).max(0.0).sqrt() } else { 0.0 }
}

/// 95 % half widths of direction (radians) and spacing (share) from the scatter between windows.
///
/// Each window's influence is ψ = A⁻¹ D/S, with D its weighted offset, S the mean weighted power and
/// A = I − Cov/h² the share of a shift that the weight lets through. Windows that overlap
/// are taken as neighbours (Bartlett weights). `None` for fewer than four independent windows.
pub(super) fn scatter(
    shares: &[Share],
    bins: &[Bin],
    windows: &Windows,
    independent: f64,
    centre: [f64; 2],
    h: f64,
) -> Option<[f64; 2]> {
    if independent < 4.0 {
        return None;
    }
    let each: Vec<Moments> = shares.iter().map(|s| moments(s, bins, centre, h)).collect();
    let mut sum = Moments::default();
    each.iter().for_each(|m| sum.add(*m));
    let k = shares.len() as f64;
    let [xx, xy, yy] = sum.dd.map(|d| d / (sum.e * h * h));
    let (a, b, c) = ((1.0 - xx).max(0.1), -xy, (1.0 - yy).max(0.1));
    let det = (a * c - b * b).max(0.01);
    let length = centre[0].hypot(centre[1]);
    let influence: Vec<[f64; 2]> = each
        .iter()
        .map(|m| {
            let d = m.d.map(|d| d * k / sum.e);
            let shift = [(c * d[0] - b * d[1]) / det, (a * d[1] - b * d[0]) / det];
            let along = (shift[0] * centre[0] + shift[1] * centre[1]) / (length * length);
            let across = (shift[0] * centre[1] - shift[1] * centre[0]) / (length * length);
            [across, along]
        })
        .collect();
    let mut own = [0.0f64; 2];
    let mut with_neighbours = [0.0f64; 2];
    for (i, (s, p)) in shares.iter().zip(&influence).enumerate() {
        let here = windows.origins[s.window];
        for v in 0..2 {
            own[v] += p[v] * p[v];
            with_neighbours[v] += p[v] * p[v];
        }
        for (t, q) in shares[i + 1..].iter().zip(&influence[i + 1..]) {
            let there = windows.origins[t.window];
            if there[1] >= here[1] + windows.size[1] {
                break;
            }
            let share = |d: usize| 1.0 - here[d].abs_diff(there[d]) as f64 / windows.size[d] as f64;
            let weight = share(0).max(0.0) * share(1).max(0.0);
            for v in 0..2 {
                with_neighbours[v] += 2.0 * weight * p[v] * q[v];
            }
        }
    }
    let t = student_two_sided(0.95, independent - 1.0);
    let half = |v: usize| t * (own[v].max(with_neighbours[v]) / (k * (k - 1.0))).sqrt();
    Some([half(0), half(1)])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_log_parabola_finds_the_top_of_a_bell() {
        let bell = |x: f64| (-0.5 * (x - 0.3f64).powi(2)).exp();
        crate::assert_close!(log_parabola(bell(-1.0), bell(0.0), bell(1.0)), 0.3, 1e-12, "offset");
        assert_eq!(log_parabola(2.0, 1.0, 0.5), 0.0);
    }
}
