//! Tables of the weighing: what would change each verdict, the drift under every law and threshold, and what
//! the patches say together.

use crate::files::layers::{Column, Value};
use crate::study::Findings;

use super::layers::Table;

/// One row a change.
pub fn flip_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("patch"),
        Column::text("winds"),
        Column::text("parameter"),
        Column::text("now"),
        Column::text("at"),
        Column::text("change"),
        Column::real("reach"),
    ];
    let mut rows = Vec::new();
    for patch in &findings.patches {
        for verdict in &patch.verdicts {
            rows.extend(verdict.flips.iter().map(|flip| {
                vec![
                    Value::from(patch.name.as_str()),
                    Value::from(verdict.winds_name.as_str()),
                    Value::from(flip.parameter),
                    Value::from(flip.now.as_str()),
                    Value::from(flip.at.as_str()),
                    Value::from(flip.change.as_str()),
                    Value::from(flip.reach),
                ]
            }));
        }
    }
    Table { name: "flips", columns, rows }
}

/// One row a record, law and threshold.
pub fn sensitivity_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("winds"),
        Column::text("law"),
        Column::text("threshold"),
        Column::real("threshold_ustar_m_per_s"),
        Column::real("ratio"),
        Column::real("toward_deg"),
        Column::real("total"),
        Column::text("unit"),
    ];
    let mut rows = Vec::new();
    for wind in &findings.winds {
        rows.extend(wind.sensitivity.iter().map(|s| {
            vec![
                Value::from(wind.name.as_str()),
                Value::from(s.law),
                Value::from(s.threshold.as_str()),
                Value::from(s.threshold_ustar),
                Value::from(s.drift.ratio),
                Value::from(s.drift.toward.map(|a| a.deg())),
                Value::from(s.drift.total),
                Value::from(s.drift.unit),
            ]
        }));
    }
    Table { name: "sensitivity", columns, rows }
}

/// One row a record and theory that was weighed by several trends at once.
pub fn together_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("winds"),
        Column::real("trends"),
        Column::text("theory"),
        Column::real("posterior"),
        Column::real("ln_bayes_factor"),
    ];
    let mut rows = Vec::new();
    for joint in &findings.together.joint {
        rows.extend(joint.theories.iter().map(|theory| {
            vec![
                Value::from(joint.winds_name.as_str()),
                Value::from(joint.trends.len() as f64),
                Value::from(theory.name),
                Value::from(theory.posterior),
                Value::from(theory.ln_bayes_factor),
            ]
        }));
    }
    Table { name: "together", columns, rows }
}
