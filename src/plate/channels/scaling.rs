//! Power laws of a network on logarithmic rulers: slope on area, length on area.

use crate::ground::Point;
use crate::science::network::scaling::PowerLaw;
use crate::study::NetworkFinding;

use super::super::chart::{Chart, Span, power_of_ten};
use super::super::sketch::Sketch;
use super::super::{Figure, Theme, numbers};
use super::{SHAPE, brief, verdict_words, with_interval, words_only};

/// How a law is told.
struct Telling {
    x_title: &'static str,
    y_title: &'static str,
    /// `"S"`, `"L"`: the letter before `=`.
    letter: &'static str,
    /// What the exponent is called and compared with.
    remark: &'static str,
}

/// Slope against contributing area (Flint 1974).
pub fn slope_area(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let telling = Telling {
        x_title: "contributing area, m²",
        y_title: "slope",
        letter: "S",
        remark: "the exponent is −θ, the concavity",
    };
    let none = "No slope–area plot: too few places with a slope and a contributing area.";
    power_plot(finding.flint.as_ref(), &telling, none, width_mm, theme)
}

/// Length of the longest channel against area (Hack 1957).
pub fn hack_plot(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let telling = Telling {
        x_title: "contributing area, m²",
        y_title: "longest way up, m",
        letter: "L",
        remark: "exponents of 0.57 to 0.60 are common",
    };
    let none = "No length–area plot: too few places with a length and a contributing area.";
    power_plot(finding.hack.as_ref(), &telling, none, width_mm, theme)
}

fn power_plot(law: Option<&PowerLaw>, telling: &Telling, none: &str, width_mm: f64, theme: &Theme) -> Figure {
    let spans = law.and_then(|l| {
        let span = |k: usize| Span::logarithmic(l.points.iter().map(move |p| p[k]));
        Some((l, span(0)?, span(1)?))
    });
    let Some((law, x, y)) = spans else { return words_only(none, width_mm, theme) };
    let height = SHAPE * width_mm;
    let chart = Chart::new(x, y, Point::default(), [width_mm, height]);
    let mut sketch = Sketch::default();
    let mut inside = Sketch::default();
    let radius = if law.points.len() > 60 { 0.38 } else { 0.6 };
    chart.dots(&mut inside, law.points.iter().copied(), radius, theme.tint(theme.water, 0.75));
    if law.factor > 0.0 && law.exponent.is_finite() {
        let ends = [x.min, x.max].map(|v| [v, law.factor * v.powf(law.exponent)]);
        let [a, b] = ends.map(|[v, w]| chart.at(v, w));
        inside.line(a, b, theme.stroke(theme.paper, 2.2 * theme.widths.line));
        inside.line(a, b, theme.stroke(theme.measured, theme.widths.line));
    }
    chart.clipped(&mut sketch, inside);
    chart.axes(&mut sketch, telling.x_title, telling.y_title, theme);
    let y = height + 0.6;
    let exponent = with_interval(law.exponent, law.exponent_ci95, 2);
    let factor = if (1e-3..1e6).contains(&law.factor) { brief(law.factor) } else { power_of_ten(law.factor) };
    let caption = format!(
        "{} = {factor} A^k · r² {} · {} places shown\n{}",
        telling.letter,
        numbers::fixed(law.r2, 2),
        law.points.len(),
        telling.remark
    );
    let headline = format!("exponent k {exponent}");
    let used = verdict_words(&mut sketch, &headline, &caption, y, width_mm, theme);
    sketch.finish(width_mm, y + used)
}
