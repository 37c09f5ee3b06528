//! What would change a verdict, as lines of text: the parameter, where it turns, and how far off that is.

use crate::ground::Point;
use crate::study::Flip;

use super::sketch::{Sketch, Type};
use super::{Figure, Theme, numbers};

/// The nearest changes, at most six; one line says so when there is none.
pub fn flips(list: &[Flip], width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let (strong, soft) =
        (Type::new(theme.text.small, theme.ink).bold(), Type::new(theme.text.small, theme.ink_soft));
    let mut y = 0.0;
    if list.is_empty() {
        let none = "Nothing between a third and three times the stated values, and no other law.";
        y += sketch.paragraph(Point::new(0.0, y), none, soft, width_mm);
    }
    for flip in list.iter().take(6) {
        let head = format!("{} at {}", flip.parameter, flip.at);
        y += sketch.paragraph(Point::new(0.0, y), &head, strong, width_mm);
        let off = flip.reach.map_or(String::new(), |reach| {
            format!("; {} times its doubt away", numbers::significant(reach, 2))
        });
        let body = format!("now {}: {}{off}", flip.now, flip.change);
        y += sketch.paragraph(Point::new(0.0, y), &body, soft, width_mm) + 0.8;
    }
    sketch.finish(width_mm, y)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_change_adds_its_lines_and_none_is_said() {
        let flip = Flip {
            parameter: "threshold",
            now: "2.1 m/s".into(),
            at: "4.4 m/s".into(),
            change: "“fingering” would lead".into(),
            reach: Some(1.8),
        };
        let theme = Theme::print();
        let height = |list: &[Flip]| flips(list, 60.0, &theme).height_mm;
        assert!(height(&[]) > 0.0);
        assert!(height(&[flip.clone(), flip.clone()]) > 1.5 * height(&[flip]));
    }
}
