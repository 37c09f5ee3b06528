//! Straight lines by least squares, with what an honest interval needs.

use crate::numeric::tail::student_two_sided;

/// y = intercept + slope · x.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Line {
    pub slope: f64,
    pub intercept: f64,
    /// Σ w (y − ŷ)².
    pub residual: f64,
    /// Σ w (x − x̄)².
    pub spread: f64,
    pub r2: f64,
    pub n: usize,
}

impl Line {
    /// The line through rows (x, y, weight); `None` when x does not vary or a number is not finite.
    pub fn through(rows: &[[f64; 3]]) -> Option<Self> {
        let weight: f64 = rows.iter().map(|r| r[2]).sum();
        let mean = |k: usize| rows.iter().map(|r| r[2] * r[k]).sum::<f64>() / weight;
        let (x, y) = (mean(0), mean(1));
        let moment = |f: &dyn Fn(&[f64; 3]) -> f64| rows.iter().map(|r| r[2] * f(r)).sum::<f64>();
        let xx = moment(&|r| (r[0] - x).powi(2));
        let xy = moment(&|r| (r[0] - x) * (r[1] - y));
        let yy = moment(&|r| (r[1] - y).powi(2));
        let size = x * x * weight;
        if !(xx.is_finite() && xy.is_finite() && yy.is_finite()) || xx <= 1e-24 * size.max(f64::MIN_POSITIVE)
        {
            return None;
        }
        let slope = xy / xx;
        let intercept = y - slope * x;
        let residual = moment(&|r| (r[1] - intercept - slope * r[0]).powi(2));
        let r2 = if yy > 0.0 { (1.0 - residual / yy).clamp(0.0, 1.0) } else { 1.0 };
        Some(Self { slope, intercept, residual, spread: xx, r2, n: rows.len() })
    }

    /// Half width of the 95 % interval of the slope by Student's t with n − 2 degrees of freedom, n independent
    /// rows; `None` for two rows.
    pub fn slope_half_width(&self) -> Option<f64> {
        let df = self.n.checked_sub(2).filter(|df| *df > 0)? as f64;
        Some(student_two_sided(0.95, df) * (self.residual / df / self.spread).sqrt())
    }

    pub fn at(&self, x: f64) -> f64 {
        self.intercept + self.slope * x
    }
}
