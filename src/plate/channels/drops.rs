//! The constant-drop test against the threshold, and the channels at half, one and twice the threshold used.

use crate::ground::{Bounds, LengthUnit, Network, Point};
use crate::science::drainage::extract::Channels;
use crate::study::NetworkFinding;

use super::super::chart::{Chart, Span};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, numbers};
use super::lines::{Panel, pixel_shape};
use super::{SHAPE, area, verdict_words, words_only};

/// |t| below which order 1 and higher orders drop alike.
const LIMIT: f64 = 2.0;

/// Student's t against the threshold, with the band where the test passes.
pub fn drop_test(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some(channels) = finding.drainage.as_ref().map(|d| &d.channels) else {
        return words_only("No constant-drop test: this network is not from elevation.", width_mm, theme);
    };
    let marks = [0.5, 1.0, 2.0].map(|k| k * channels.threshold_m2);
    let thresholds = channels.drops.iter().map(|d| d.threshold_m2);
    let told = channels.drops.iter().filter_map(|d| d.t).any(f64::is_finite);
    let Some(x) = Span::logarithmic(thresholds.chain(marks)).filter(|_| told) else {
        return words_only(
            "The constant-drop test could not be made: at no threshold are there two streams of order 1 and two above.",
            width_mm,
            theme,
        );
    };
    let most = channels.drops.iter().filter_map(|d| d.t).map(f64::abs).fold(3.0, f64::max).min(8.0);
    let (per, symbol) = if x.max >= 1e6 { (1e6, "km²") } else { (1.0, "m²") };
    let height = SHAPE * width_mm;
    let chart =
        Chart::new(x.per(per), Span::between(-1.1 * most, 1.1 * most), Point::default(), [width_mm, height]);
    let mut sketch = Sketch::default();
    let mut inside = Sketch::default();
    ground(&mut inside, channels, &chart, marks, theme);
    points(&mut inside, channels, &chart, most, theme);
    chart.clipped(&mut sketch, inside);
    chart.axes(&mut sketch, &format!("threshold, {symbol}"), "t of the difference in drop", theme);
    let y = height + 0.6;
    let used = verdict_words(&mut sketch, &headline(channels), CAPTION, y, width_mm, theme);
    sketch.finish(width_mm, y + used)
}

const CAPTION: &str = "filled: passes, |t| < 2; open: fails; cross: too few streams\n\
    lines: ½, 1 and 2 times the threshold used";

fn headline(channels: &Channels) -> String {
    let of = |m2: f64| area(m2, LengthUnit::Metre);
    match (channels.is_proposed, channels.proposed_m2) {
        (true, _) => format!("threshold {}, proposed", of(channels.threshold_m2)),
        (false, Some(m2)) => {
            format!("threshold {} as stated; the test proposes {}", of(channels.threshold_m2), of(m2))
        }
        (false, None) => format!("threshold {} as stated; none passes the test", of(channels.threshold_m2)),
    }
}

fn ground(sketch: &mut Sketch, channels: &Channels, chart: &Chart, marks: [f64; 3], theme: &Theme) {
    let (min, max) = chart.corners();
    let band = (Point::new(min.x, chart.y.at(LIMIT)), Point::new(max.x, chart.y.at(-LIMIT)));
    sketch.rectangle(band.0, band.1, Some(theme.panel), None);
    let zero = chart.y.at(0.0);
    sketch.line(
        Point::new(min.x, zero),
        Point::new(max.x, zero),
        theme.stroke(theme.rule, theme.widths.hair),
    );
    for (m2, word) in marks.into_iter().zip(["½", "1", "2"]) {
        let x = chart.x.at(m2);
        let stroke = if word == "1" {
            theme.stroke(theme.water, theme.widths.line)
        } else {
            theme.dashed(theme.water, theme.widths.thin)
        };
        sketch.line(Point::new(x, min.y), Point::new(x, max.y), stroke);
        let look = Type::new(theme.text.small, theme.water).bold().haloed(theme.paper);
        sketch.text(Point::new(x + 0.6, max.y - 0.8), word, look);
    }
    if let Some(m2) = channels.proposed_m2 {
        let x = chart.x.at(m2);
        sketch.line(
            Point::new(x, min.y),
            Point::new(x, max.y),
            theme.stroke(theme.measured, theme.widths.line),
        );
        let right = x > 0.6 * (min.x + max.x);
        let anchor = if right { TextAnchor::End } else { TextAnchor::Start };
        let look = Type::new(theme.text.small, theme.measured).anchored(anchor).haloed(theme.paper);
        let x = if right { x - 0.7 } else { x + 0.7 };
        sketch.text(Point::new(x, min.y + theme.text.small), "proposed", look);
    }
}

fn points(sketch: &mut Sketch, channels: &Channels, chart: &Chart, most: f64, theme: &Theme) {
    let told = channels.drops.iter().map(|d| {
        let t = d.t.filter(|t| t.is_finite()).map_or(f64::NAN, |t| t.clamp(-most, most));
        [d.threshold_m2, t]
    });
    chart.curve(sketch, told, theme.stroke(theme.ink_soft, theme.widths.thin));
    let edge = theme.stroke(theme.ink, theme.widths.thin);
    for drop in &channels.drops {
        match drop.t.filter(|t| t.is_finite()) {
            Some(t) => {
                let fill = if t.abs() < LIMIT { theme.ink } else { theme.paper };
                sketch.circle(
                    chart.at(drop.threshold_m2, t.clamp(-most, most)),
                    0.62,
                    Some(fill),
                    Some(edge),
                );
            }
            None => {
                let p = chart.at(drop.threshold_m2, 0.0);
                for s in [-0.6, 0.6] {
                    sketch.line(Point::new(p.x - 0.6, p.y - s), Point::new(p.x + 0.6, p.y + s), edge);
                }
            }
        }
    }
}

/// Small maps of the channels at half, one and twice the threshold, side by side.
pub fn threshold_maps(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some(channels) = finding.drainage.as_ref().map(|d| &d.channels) else {
        return words_only("No thresholds to compare: this network is not from elevation.", width_mm, theme);
    };
    let parts: [(&Network, f64, &str); 3] =
        [(&channels.half, 0.5, "half"), (&channels.network, 1.0, "used"), (&channels.twice, 2.0, "twice")];
    let points = parts.iter().flat_map(|p| p.0.reaches.iter().flat_map(|r| r.line.0.iter().copied()));
    let Some(covers) = Bounds::of(points) else {
        return words_only("No channel at half, one or twice the threshold.", width_mm, theme);
    };
    let gap = 2.0;
    let each = (width_mm - 2.0 * gap) / 3.0;
    let shape = pixel_shape(&finding.network);
    let mut sketch = Sketch::default();
    let mut foot = 0.0f64;
    for (i, (network, times, word)) in parts.into_iter().enumerate() {
        let x = i as f64 * (each + gap);
        let panel = Panel::fit(covers, shape, Point::new(x, 0.0), [each, 1.25 * each]);
        panel.frame(&mut sketch, theme);
        let least = panel.network(&mut sketch, network, theme.water, 0.6, theme);
        let streams = network.heads().len();
        let y = panel.max.y + 0.5;
        let look = Type::new(theme.text.small, theme.ink).bold();
        let text = format!("{word}: {}", area(times * channels.threshold_m2, LengthUnit::Metre));
        let mut end = y + sketch.paragraph(Point::new(x, y), &text, look, each);
        let look = Type::new(theme.text.small, theme.ink_soft);
        let order = network.greatest_order().map_or(String::new(), |o| format!(", order\u{a0}{o}"));
        let text =
            format!("{}\u{a0}head{}{order}", numbers::count(streams), if streams == 1 { "" } else { "s" });
        end += sketch.paragraph(Point::new(x, end), &text, look, each);
        if least > 1 {
            let text = format!("drawn from order\u{a0}{least}");
            end += sketch.paragraph(Point::new(x, end), &text, look, each);
        }
        foot = foot.max(end);
    }
    sketch.finish(width_mm, foot)
}
