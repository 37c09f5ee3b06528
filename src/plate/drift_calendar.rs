//! The sand by months and by years: what each gives as a bar, where it goes as an arrow in a ring.

use crate::ground::Point;
use crate::study::{CalendarFinding, PeriodFinding};

use super::sketch::{Sketch, Type, arrow_head, sector, toward};
use super::{Figure, TextAnchor, Theme, font, numbers};

/// Height of the tallest bar, text sizes.
const BARS: f64 = 8.0;
/// Rings are no larger than this, millimetres.
const LARGEST_RING_MM: f64 = 5.0;
/// Years drawn; of longer records the last.
const MOST_YEARS: usize = 24;

/// Months, and years where there are several, `width_mm` wide, as high as they need. North is up.
pub fn drift_calendar(calendar: &CalendarFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    let months: Vec<(String, &PeriodFinding)> =
        calendar.months.iter().map(|m| (m.name.chars().take(1).collect(), m)).collect();
    y += strip(&mut sketch, &months, y, width_mm, theme);
    let late = calendar.years.len().saturating_sub(MOST_YEARS);
    if calendar.years.len() > 1 {
        let years: Vec<(String, &PeriodFinding)> =
            calendar.years[late..].iter().map(|p| (p.name.chars().skip(2).collect(), p)).collect();
        y += 0.8 * theme.text.small;
        y += strip(&mut sketch, &years, y, width_mm, theme);
    }
    let unit = calendar.months.first().map_or("", |m| m.drift.unit);
    let each = if calendar.years.len() > 1 { " or of the year" } else { "" };
    let periods = || calendar.months.iter().chain(&calendar.years);
    let pale = if periods().all(PeriodFinding::is_complete) { "" } else { "; pale: rows missing" };
    let caption = format!(
        "bar: sand of the month{each}, {unit}\nline: its 95 % interval{pale}\narrow: where it goes; ring: resultant/total 1"
    );
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(Point::new(0.5 * width_mm, y), &caption, look, width_mm);
    sketch.finish(width_mm, y)
}

/// One row of periods; returns its height.
fn strip(
    sketch: &mut Sketch,
    periods: &[(String, &PeriodFinding)],
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let size = theme.text.small;
    let most =
        periods.iter().map(|(_, p)| p.total_ci95.map_or(p.drift.total, |[_, high]| high)).fold(0.0, f64::max);
    let top_value = numbers::round_up(most);
    let scale_label = numbers::significant(top_value, 2);
    let left = font::text_width(&scale_label, size, false) + 1.2;
    let pitch = (width_mm - left) / periods.len().max(1) as f64;
    let ring = (0.46 * pitch).min(LARGEST_RING_MM);
    let bars_top = top + 2.0 * ring + 1.0;
    let base = bars_top + BARS * size;
    let height = |value: f64| if top_value > 0.0 { value / top_value * BARS * size } else { 0.0 };
    let hair = theme.stroke(theme.rule, theme.widths.hair);
    for share in [0.0, 0.5, 1.0] {
        let y = base - share * BARS * size;
        sketch.line(Point::new(left, y), Point::new(width_mm, y), hair);
    }
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::End);
    sketch.text(Point::new(left - 0.8, bars_top + 0.35 * size), scale_label, look);
    sketch.text(Point::new(left - 0.8, base + 0.35 * size), "0", look);
    // Labels that would touch are left out evenly.
    let widest = periods.iter().map(|(label, _)| font::text_width(label, size, false)).fold(0.0, f64::max);
    let every = ((widest + 0.6) / pitch).ceil().max(1.0) as usize;
    for (k, (label, period)) in periods.iter().enumerate() {
        let x = left + (k as f64 + 0.5) * pitch;
        let reach = 0.32 * pitch;
        let depth = if period.is_complete() { 0.45 } else { 0.18 };
        let (from, to) =
            (Point::new(x - reach, base - height(period.drift.total)), Point::new(x + reach, base));
        sketch.rectangle(from, to, Some(theme.tint(theme.predicted, depth)), None);
        if let Some([low, high]) = period.total_ci95 {
            let line = theme.stroke(theme.ink_soft, theme.widths.thin);
            sketch.line(Point::new(x, base - height(low)), Point::new(x, base - height(high)), line);
        }
        compass(sketch, period, Point::new(x, top + ring), ring, theme);
        if k % every == 0 {
            let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle);
            sketch.text(Point::new(x, base + 1.3 * size), label.as_str(), look);
        }
    }
    base + 1.7 * size - top
}

/// The ring of one period: its arrow from the centre, the interval as a wedge.
fn compass(sketch: &mut Sketch, period: &PeriodFinding, centre: Point, ring: f64, theme: &Theme) {
    sketch.circle(centre, ring, None, Some(theme.stroke(theme.rule, theme.widths.hair)));
    let (Some(azimuth), Some(ratio)) = (period.drift.toward, period.drift.ratio) else { return };
    if let Some(half) = period.drift.toward_ci95_half_deg.filter(|h| *h < 180.0) {
        let wedge = sector(centre, 0.0, ring, azimuth.deg() - half, azimuth.deg() + half);
        sketch.polygon(wedge, Some(theme.tint(theme.predicted, 0.3)), None);
    }
    let length = ratio * ring;
    let head = 1.3f64.min(0.7 * length);
    let line = theme.stroke(theme.predicted, theme.widths.line);
    sketch.line(centre, toward(centre, length - 0.75 * head, azimuth), line);
    sketch.polygon(arrow_head(toward(centre, length, azimuth), head, azimuth), Some(theme.predicted), None);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Azimuth;
    use crate::plate::Item;
    use crate::study::DriftFinding;

    fn period(name: &str, total: f64, toward: f64) -> PeriodFinding {
        PeriodFinding {
            name: name.into(),
            drift: DriftFinding {
                unit: "kg/m/yr",
                total,
                resultant: 0.8 * total,
                ratio: Some(0.8),
                toward: Some(Azimuth::from_deg(toward)),
                toward_ci95_half_deg: Some(12.0),
                ratio_ci95: None,
            },
            total_ci95: Some([0.8 * total, 1.25 * total]),
            years: 1,
            covered: 1.0,
        }
    }

    fn of(totals: &[f64], years: &[f64]) -> Figure {
        let months = totals.iter().enumerate().map(|(m, t)| period("March", *t, 30.0 * m as f64)).collect();
        let years = years.iter().map(|t| period("2013", *t, 90.0)).collect();
        let calendar = CalendarFinding { years, months, ..CalendarFinding::default() };
        drift_calendar(&calendar, 80.0, &Theme::print())
    }

    fn bars(figure: &Figure) -> Vec<f64> {
        let theme = Theme::print();
        let fill = theme.tint(theme.predicted, 0.45);
        let height = |item: &Item| match item {
            Item::Path { points, fill: Some(f), .. } if *f == fill => Some(points[2].y - points[0].y),
            _ => None,
        };
        figure.items.iter().filter_map(height).collect()
    }

    #[test]
    fn bars_are_as_high_as_their_totals_and_arrows_point_where_the_sand_goes() {
        let figure = of(&[1.0, 2.0, 3.0], &[]);
        let heights = bars(&figure);
        assert_close!(heights[2] / heights[0], 3.0, 1e-9);
        let theme = Theme::print();
        let tips: Vec<Point> = figure
            .items
            .iter()
            .filter_map(|i| match i {
                Item::Path { points, fill: Some(f), .. } if *f == theme.predicted => Some(points[0]),
                _ => None,
            })
            .collect();
        let centres: Vec<Point> = figure
            .items
            .iter()
            .filter_map(|i| match i {
                Item::Circle { centre, .. } => Some(*centre),
                _ => None,
            })
            .collect();
        for (m, (tip, centre)) in tips.iter().zip(&centres).enumerate() {
            let azimuth = Azimuth::from_east_north(tip.x - centre.x, centre.y - tip.y);
            assert_close!(azimuth.turn_from(Azimuth::from_deg(30.0 * m as f64)), 0.0, 1e-6);
        }
    }

    #[test]
    fn years_are_drawn_when_there_are_several() {
        assert_eq!(bars(&of(&[1.0; 12], &[5.0])).len(), 12);
        assert_eq!(bars(&of(&[1.0; 12], &[5.0; 3])).len(), 15);
        assert_eq!(bars(&of(&[1.0; 12], &[5.0; 40])).len(), 12 + MOST_YEARS);
        assert!(bars(&of(&[], &[])).is_empty());
    }
}
