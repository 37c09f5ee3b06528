//! The strokes of all findings on the table, thinned for the scale and kept from frame to frame.

use std::collections::BTreeMap;

use crate::ground::Point;
use crate::study::Id;

use super::Table;
use super::draw::ScreenStroke;
use super::strokes::{Stroke, StrokeField};

/// Longest stroke, points.
const LONGEST: f64 = 30.0;

#[derive(Default)]
pub struct Fields {
    kept: BTreeMap<Id, Kept>,
}

/// The strokes of one finding at one spacing.
struct Kept {
    fingerprint: String,
    field: StrokeField,
    spacing_px: f64,
    strokes: Vec<Placed>,
}

/// A stroke whose direction is worked out when it first comes into sight: a projection is dear.
struct Placed {
    stroke: Stroke,
    direction: Option<Option<(f64, f64)>>,
}

impl Fields {
    /// The strokes in sight.
    pub fn on_screen(&mut self, table: &Table<'_>) -> Vec<ScreenStroke> {
        let findings: Vec<_> = table.trends().collect();
        self.kept.retain(|id, _| findings.iter().any(|(finding, _)| finding.id == *id));
        let lens = &table.lens;
        let seen = lens.visible();
        let mut on_screen = Vec::new();
        for (finding, faded) in findings {
            let kept = self.kept.entry(finding.id).or_insert_with(Kept::nothing);
            if kept.fingerprint != finding.fingerprint {
                *kept = Kept {
                    fingerprint: finding.fingerprint.clone(),
                    field: StrokeField::new(&finding.trend),
                    ..Kept::nothing()
                };
            }
            kept.respace(lens.per_col.min(lens.per_row));
            let room = (kept.spacing_px * lens.per_col.min(lens.per_row)).min(LONGEST);
            for placed in &mut kept.strokes {
                let Point { x, y } = placed.stroke.at;
                if x < seen.min.x || x > seen.max.x || y < seen.min.y || y > seen.max.y {
                    continue;
                }
                let stroke = placed.stroke;
                let direction = *placed.direction.get_or_insert_with(|| stroke.direction(&table.laid.place));
                let Some((dcol, drow)) = direction else { continue };
                let along = lens.step(dcol, drow).normalized();
                let half = along * (0.5 * room * (0.35 + 0.6 * stroke.strength)) as f32;
                let at = lens.to_screen(stroke.at);
                on_screen.push(ScreenStroke { from: at - half, to: at + half, faded });
            }
        }
        on_screen
    }
}

impl Kept {
    fn nothing() -> Self {
        Self {
            fingerprint: String::new(),
            field: StrokeField::default(),
            spacing_px: 0.0,
            strokes: Vec::new(),
        }
    }

    fn respace(&mut self, scale: f64) {
        let spacing_px = self.field.spacing_px(scale);
        if spacing_px != self.spacing_px {
            self.spacing_px = spacing_px;
            let thinned = self.field.thinned(spacing_px).into_iter();
            self.strokes = thinned.map(|stroke| Placed { stroke, direction: None }).collect();
        }
    }
}
