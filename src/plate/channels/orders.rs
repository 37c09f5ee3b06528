//! Horton's laws: numbers and mean lengths of streams by Strahler order, with the regressions.

use crate::ground::Point;
use crate::science::network::hierarchy::{OrderCount, Ratio};
use crate::study::NetworkFinding;

use super::super::chart::{Chart, Span};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, numbers};
use super::{length_ruler, verdict_words, with_interval, words_only};

/// Streams and mean lengths by order on logarithmic rulers, side by side.
pub fn order_plot(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let orders = &finding.orders;
    if orders.is_empty() {
        let loops = finding.network.loops();
        let why = match loops {
            0 => "No stream orders: the channels have no sense of flow that orders could follow.".to_owned(),
            n => format!(
                "No stream orders: the channels part and join again ({n} loop{}), and orders are defined on trees only.",
                if n == 1 { "" } else { "s" }
            ),
        };
        return words_only(&why, width_mm, theme);
    }
    let mut sketch = Sketch::default();
    let horton = finding.horton.as_ref();
    let (each, height) = (0.5 * width_mm, 0.5 * width_mm);
    let (per, symbol) = length_ruler(orders.iter().map(|o| o.mean_length).fold(0.0, f64::max), finding.unit);
    let counts = Panel {
        values: orders.iter().map(|o| o.streams as f64).collect(),
        per: 1.0,
        title: "streams".into(),
        growth: horton.map(|h| 1.0 / h.bifurcation.value),
    };
    let lengths = Panel {
        values: orders.iter().map(|o| o.mean_length).collect(),
        per,
        title: format!("mean length, {symbol}"),
        growth: horton.map(|h| h.length.value),
    };
    for (i, panel) in [counts, lengths].into_iter().enumerate() {
        panel.draw(&mut sketch, orders, Point::new(i as f64 * each, 0.0), [each, height], theme);
    }
    let mut y = height + 0.6;
    let (headline, caption) = words(finding);
    y += verdict_words(&mut sketch, &headline, &caption, y, width_mm, theme);
    sketch.finish(width_mm, y)
}

fn words(finding: &NetworkFinding) -> (String, String) {
    let Some(h) = &finding.horton else {
        return ("too few orders for ratios".into(), "a regression needs two orders".into());
    };
    let told = |name: &str, ratio: &Ratio| format!("{name} {}", with_interval(ratio.value, ratio.ci95, 1));
    let headline = format!("{}\n{}", told("bifurcation", &h.bifurcation), told("length", &h.length));
    let mut caption = vec![format!("ratios by regression over {} orders", h.orders)];
    caption.extend(h.area.as_ref().map(|r| told("area", r)));
    caption.extend(h.slope.as_ref().map(|r| told("slope", r)));
    if let Some(t) = &finding.tokunaga {
        let [a, c, r] = [t.a, t.c, t.bifurcation].map(|v| numbers::fixed(v, 2));
        caption.push(format!("Tokunaga a {a}, c {c} (bifurcation {r})"));
    }
    let caption = caption.join(" · ")
        + "\nNearly every network has a bifurcation ratio of 3 to 5: it does not tell how channels came about.";
    (headline, caption)
}

/// One quantity against order.
struct Panel {
    values: Vec<f64>,
    per: f64,
    title: String,
    /// Factor from one order to the next by regression.
    growth: Option<f64>,
}

impl Panel {
    fn draw(&self, sketch: &mut Sketch, orders: &[OrderCount], at: Point, size: [f64; 2], theme: &Theme) {
        let Some(y) = Span::logarithmic(self.values.iter().copied()) else {
            let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
            let middle = Point::new(at.x + 0.5 * size[0], at.y + 0.5 * size[1]);
            sketch.text(middle, format!("{}: none", self.title), look);
            return;
        };
        let (first, last) = (f64::from(orders[0].order), f64::from(orders[orders.len() - 1].order));
        let x = Span::between(first - 0.4, last.max(first + 1.0) + 0.4);
        let chart = Chart::new(x, y.per(self.per), at, size);
        let mut inside = Sketch::default();
        let points: Vec<[f64; 2]> = orders
            .iter()
            .zip(&self.values)
            .map(|(o, v)| [f64::from(o.order), *v])
            .filter(|p| p[1] > 0.0 && p[1].is_finite())
            .collect();
        if let Some(growth) = self.growth.filter(|g| *g > 0.0 && g.is_finite() && points.len() > 1) {
            let n = points.len() as f64;
            let (order, ln) = points.iter().fold((0.0, 0.0), |(o, l), p| (o + p[0] / n, l + p[1].ln() / n));
            let ends = [first, last].map(|w| chart.at(w, (ln + (w - order) * growth.ln()).exp()));
            inside.line(ends[0], ends[1], theme.stroke(theme.measured, theme.widths.line));
        }
        for [order, value] in &points {
            let edge = theme.stroke(theme.paper, theme.widths.thin);
            inside.circle(chart.at(*order, *value), 0.8, Some(theme.water), Some(edge));
        }
        chart.clipped(sketch, inside);
        let step = ((last - first) as usize / 6).max(1);
        let ticks: Vec<(f64, String)> =
            orders.iter().step_by(step).map(|o| (f64::from(o.order), o.order.to_string())).collect();
        chart.bare_axes(sketch, "Strahler order", &self.title, &ticks, &chart.y.ticks(7.0), theme);
    }
}
