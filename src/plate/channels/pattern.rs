//! The pattern of a network: probabilities of five kinds, what they rest on, and the rose of its links.

use crate::ground::Point;
use crate::science::network::pattern::{PATTERN_NAMES, Pattern};
use crate::study::NetworkFinding;

use super::super::rose::bare_rose;
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, font, numbers};
use super::{table, words_only};

/// Bars of the five kinds, and the features behind them; in words when there are too few links.
pub fn pattern_bars(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let pattern = &finding.pattern;
    let mut sketch = Sketch::default();
    let mut y = match pattern.probabilities.filter(|_| !pattern.too_few) {
        Some(shares) => bars(&mut sketch, &shares, width_mm, theme),
        None => {
            let text = if pattern.too_few {
                format!("Too few links for probabilities: {}, at least 30 are needed.", pattern.links)
            } else {
                format!("No probabilities of patterns: {} links do not tell them.", pattern.links)
            };
            let look = Type::new(theme.text.body, theme.ink);
            sketch.paragraph(Point::default(), &text, look, width_mm)
        }
    };
    y += 0.8;
    y += table(&mut sketch, &features(pattern), y, width_mm, theme);
    sketch.finish(width_mm, y)
}

fn bars(sketch: &mut Sketch, shares: &[f64; 5], width_mm: f64, theme: &Theme) -> f64 {
    let size = theme.text.small;
    let pitch = 1.75 * size;
    let widest = PATTERN_NAMES.iter().map(|n| font::text_width(n, size, true)).fold(0.0, f64::max);
    let (left, right) = (widest + 1.6, width_mm - font::text_width(">99 %", size, true) - 1.2);
    let likeliest = shares.iter().copied().fold(0.0, f64::max);
    for (i, (name, share)) in PATTERN_NAMES.iter().zip(shares).enumerate() {
        let middle = (i as f64 + 0.5) * pitch;
        let base = middle + 0.5 * font::CAP_HEIGHT * size;
        let look = Type::new(size, theme.ink);
        let look = if *share >= likeliest { look.bold() } else { look };
        sketch.text(Point::new(0.0, base), *name, look);
        let (top, bottom) = (middle - 0.3 * size, middle + 0.3 * size);
        sketch.rectangle(Point::new(left, top), Point::new(right, bottom), Some(theme.panel), None);
        let end = left + share.clamp(0.0, 1.0) * (right - left);
        sketch.rectangle(Point::new(left, top), Point::new(end, bottom), Some(theme.water), None);
        let value = look.bold().anchored(TextAnchor::End);
        sketch.text(Point::new(width_mm, base), numbers::percent(*share), value);
    }
    PATTERN_NAMES.len() as f64 * pitch
}

fn features(pattern: &Pattern) -> Vec<(String, String)> {
    let f = &pattern.features;
    let two = |v: f64| numbers::fixed(v, 2);
    let mut rows = vec![
        ("links".to_owned(), pattern.links.to_string()),
        ("along one axis".to_owned(), two(f.alignment)),
        ("along two at a right angle".to_owned(), two(f.crossing)),
    ];
    let mut more = |name: &str, value: Option<String>| {
        rows.extend(value.map(|v| (name.to_owned(), v)));
    };
    more("mean junction angle", f.mean_junction_deg.map(|v| format!("{}°", numbers::fixed(v, 0))));
    more("junctions near 90°", f.right_angles.map(numbers::percent));
    more("short ones across", f.short_across.map(two));
    more("away from the summit", f.radial.map(two));
    rows
}

/// Azimuths of the links as an equal-area rose drawn both ways, weighted by length.
pub fn link_rose(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let pattern = &finding.pattern;
    if !pattern.rose.iter().any(|s| *s > 0.0) {
        return words_only("No rose of links: there is no link with a length.", width_mm, theme);
    }
    let mut sketch =
        bare_rose(&pattern.rose, pattern.rose_bin_deg, &pattern.modes, theme.water, width_mm, theme);
    let middle = |y: f64| Point::new(0.5 * width_mm, y);
    let mut y = width_mm;
    let modes: Vec<String> =
        pattern.modes.iter().map(|m| format!("{}°", numbers::angle(m.deg(), 0, 180.0))).collect();
    let headline = match modes.len() {
        0 => "no preferred azimuth".to_owned(),
        1 => format!("mode {}", modes[0]),
        _ => format!("modes {}", modes.join(", ")),
    };
    let look = Type::new(theme.text.heading, if modes.is_empty() { theme.ink } else { theme.measured });
    y += sketch.paragraph(middle(y), &headline, look.bold().anchored(TextAnchor::Middle), width_mm);
    let caption = format!(
        "{} links by length · {}° bins\npetal area = share, drawn both ways",
        pattern.links,
        numbers::plain(pattern.rose_bin_deg, 1)
    );
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &caption, look, width_mm);
    sketch.finish(width_mm, y)
}
