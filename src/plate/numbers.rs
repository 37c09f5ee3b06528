//! Numbers as plates print them: a true minus sign, no more figures than the interval carries.

use crate::ground::{Axis, Azimuth, LengthUnit};

/// `decimals` places, with a true minus sign and no "−0".
pub fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    let is_zero = !text.contains(|c: char| ('1'..='9').contains(&c));
    match text.strip_prefix('-') {
        Some(rest) if is_zero => rest.to_owned(),
        Some(rest) => format!("−{rest}"),
        None => text,
    }
}

/// At most `decimals` places, trailing zeros dropped.
pub fn plain(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    if !text.contains('.') {
        return text;
    }
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// `figures` significant figures, thousands set apart by narrow blanks, powers of ten from 10⁷ and
/// below 10⁻³.
pub fn significant(value: f64, figures: usize) -> String {
    if value == 0.0 || !value.is_finite() {
        return if value == 0.0 { "0".into() } else { "–".into() };
    }
    let exponent = value.abs().log10().floor() as i32;
    if !(-3..7).contains(&exponent) {
        let mantissa = fixed(value / 10f64.powi(exponent), figures.saturating_sub(1));
        let sign = if exponent < 0 { "−" } else { "" };
        return format!("{mantissa}e{sign}{}", exponent.abs());
    }
    let decimals = figures as i32 - 1 - exponent;
    if decimals >= 0 {
        return fixed(value, decimals as usize);
    }
    let step = 10f64.powi(-decimals);
    grouped(&fixed((value / step).round() * step, 0))
}

/// A count, thousands set apart.
pub fn count(n: usize) -> String {
    grouped(&n.to_string())
}

/// Digits before the point in groups of three, from five digits on.
fn grouped(text: &str) -> String {
    let digits = text.trim_start_matches('−');
    if digits.len() < 5 {
        return text.to_owned();
    }
    let mut out = text[..text.len() - digits.len()].to_owned();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            out.push('\u{202f}');
        }
        out.push(c);
    }
    out
}

/// Decimals that make sense beside an uncertainty: one more figure below 10, two below 1.
fn decimals_for(uncertainty: f64) -> usize {
    if uncertainty >= 9.95 {
        0
    } else if uncertainty >= 0.095 {
        1
    } else {
        2
    }
}

/// `"84.2° ± 3.4°"`, or the axis alone with `"(interval: all axes)"`.
pub fn axis_with_interval(axis: Axis, half_deg: Option<f64>) -> String {
    match half_deg {
        Some(half) => {
            let d = decimals_for(half);
            format!("{}° ± {}°", angle(axis.deg(), d, 180.0), fixed(half, d))
        }
        None => format!("{}° (interval: all axes)", angle(axis.deg(), 0, 180.0)),
    }
}

/// `"84.2° ± 6.0°"` for a direction; without interval `"84°"`.
pub fn azimuth_with_interval(azimuth: Azimuth, half_deg: Option<f64>) -> String {
    match half_deg {
        Some(half) => {
            let d = decimals_for(half);
            format!("{}° ± {}°", angle(azimuth.deg(), d, 360.0), fixed(half, d))
        }
        None => format!("{}°", angle(azimuth.deg(), 0, 360.0)),
    }
}

/// Never prints the period itself: 179.97 with one decimal is 0.0.
pub(super) fn angle(deg: f64, decimals: usize, period: f64) -> String {
    let step = 10f64.powi(decimals as i32);
    fixed((deg * step).round() / step % period, decimals)
}

/// A length with its unit: km from 10 000 m on.
pub fn length(value: f64, unit: LengthUnit, figures: usize) -> String {
    match unit {
        LengthUnit::Metre if value.abs() >= 10_000.0 => {
            format!("{} km", significant(value / 1000.0, figures))
        }
        unit => format!("{} {}", significant(value, figures), unit.symbol()),
    }
}

/// A length with its interval, in one unit.
pub fn length_with_interval(value: f64, interval: Option<[f64; 2]>, unit: LengthUnit) -> String {
    let (scale, symbol) = match unit {
        LengthUnit::Metre if value.abs() >= 10_000.0 => (1000.0, "km"),
        unit => (1.0, unit.symbol()),
    };
    match interval {
        Some([low, high]) => format!(
            "{} {symbol} ({}–{})",
            significant(value / scale, 3),
            significant(low / scale, 3),
            significant(high / scale, 3)
        ),
        None => format!("{} {symbol}", significant(value / scale, 3)),
    }
}

/// A probability in words of figures: `"p < 0.0001"`, `"p = 0.034"`.
pub fn p_value(p: f64) -> String {
    if p < 1e-4 { "p < 0.0001".into() } else { format!("p = {}", significant(p, 2)) }
}

/// A share as percent without decimals, `"<1 %"` and `">99 %"` at the ends.
pub fn percent(share: f64) -> String {
    match share {
        s if s > 0.0 && s < 0.005 => "<1 %".into(),
        s if s < 1.0 && s > 0.995 => ">99 %".into(),
        s => format!("{:.0} %", 100.0 * s),
    }
}

/// The smallest number not below `value` that is round and whose quarter is round too; 0 for 0.
pub fn round_up(value: f64) -> f64 {
    if value <= 0.0 || !value.is_finite() {
        return 0.0;
    }
    let decade = 10f64.powf(value.log10().floor());
    let steps = [1.0, 1.2, 1.6, 2.0, 2.4, 2.8, 3.2, 3.6, 4.0, 5.0, 6.0, 8.0, 10.0];
    let step = steps.into_iter().find(|s| s * decade >= value * (1.0 - 1e-9)).unwrap_or(10.0);
    step * decade
}

/// The number of 1, 1.5, 2, 2.5, 3, 4, 5, 6, 8 times a power of ten nearest to `value` by ratio.
pub(super) fn round_spacing(value: f64) -> f64 {
    let decade = 10f64.powf(value.log10().floor());
    let off = |step: f64| (step * decade / value).ln().abs();
    let steps = [1.0, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0];
    steps.into_iter().min_by(|a, b| off(*a).total_cmp(&off(*b))).unwrap_or(1.0) * decade
}

/// The largest of 1, 2, 5 times a power of ten that is not above `value`; 0 for 0.
pub fn round_down(value: f64) -> f64 {
    if value <= 0.0 || !value.is_finite() {
        return 0.0;
    }
    let decade = 10f64.powf(value.log10().floor());
    let step = [5.0, 2.0, 1.0].into_iter().find(|s| s * decade <= value * (1.0 + 1e-9)).unwrap_or(0.5);
    step * decade
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn figures_follow_the_interval() {
        assert_eq!(axis_with_interval(Axis::from_deg(84.24), Some(3.44)), "84.2° ± 3.4°");
        assert_eq!(axis_with_interval(Axis::from_deg(84.24), Some(23.0)), "84° ± 23°");
        assert_eq!(axis_with_interval(Axis::from_deg(179.97), Some(3.0)), "0.0° ± 3.0°");
        assert_eq!(axis_with_interval(Axis::from_deg(84.2), None), "84° (interval: all axes)");
        assert_eq!(azimuth_with_interval(Azimuth::from_deg(359.99), Some(12.0)), "0° ± 12°");
    }

    #[test]
    fn significant_figures_and_signs() {
        assert_eq!(significant(1234.5, 3), "1230");
        assert_eq!(significant(123_456.0, 3), "123\u{202f}000");
        assert_eq!(significant(0.012_345, 3), "0.0123");
        assert_eq!(significant(-0.5, 2), "−0.50");
        assert_eq!(significant(3.2e-7, 2), "3.2e−7");
        assert_eq!(fixed(-0.01, 1), "0.0");
        assert_eq!(plain(7.50, 2), "7.5");
        assert_eq!(plain(10.0, 1), "10");
    }

    #[test]
    fn lengths_keep_one_unit() {
        let text = length_with_interval(12_400.0, Some([9_800.0, 15_100.0]), LengthUnit::Metre);
        assert_eq!(text, "12.4 km (9.80–15.1)");
        assert_eq!(length_with_interval(14.0, None, LengthUnit::Pixel), "14.0 px");
    }

    #[test]
    fn round_numbers_bound_their_value() {
        assert!((round_up(0.31) - 0.32).abs() < 1e-12);
        assert_eq!(round_up(0.2), 0.2);
        assert_eq!(round_down(0.31), 0.2);
        assert_eq!(round_down(1000.0), 1000.0);
        assert_eq!(percent(0.998), ">99 %");
        assert_eq!(p_value(2e-9), "p < 0.0001");
    }
}
