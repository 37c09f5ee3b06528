//! What a wind record says by the calendar, and what its sampling hides: in `findings.json` and as a table.

use serde_json::{Value, json};

use crate::files::layers::{Column, Value as Cell};
use crate::study::{
    CalendarFinding, ChangedFinding, Findings, PeriodFinding, RoundingFinding, ThinningFinding,
};

use super::json::drift;
use super::layers::Table;

pub fn calendar(c: &CalendarFinding) -> Value {
    let periods = |list: &[PeriodFinding]| list.iter().map(period).collect::<Vec<_>>();
    json!({
        "years": periods(&c.years), "months": periods(&c.months), "seasons": periods(&c.seasons),
        "between_years": c.spread.map(|s| json!({
            "years": s.years, "total_mean": s.total_mean, "total_sd": s.total_sd, "ratio_range": s.ratio,
            "toward_sd_deg": s.toward_sd_deg,
        })),
    })
}

fn period(p: &PeriodFinding) -> Value {
    json!({
        "name": p.name, "flux": drift(&p.drift), "total_ci95": p.total_ci95, "years": p.years,
        "covered": p.covered, "complete": p.is_complete(),
    })
}

pub fn thinning(t: &ThinningFinding) -> Value {
    json!({
        "ratio": t.ratio,
        "thinned": t.thinned.iter().map(|t| json!({
            "interval_h": t.hours, "phases": t.phases,
            "total_share": [t.total.low, t.total.mean, t.total.high],
            "ratio": t.ratio.map(|r| [r.low, r.mean, r.high]),
            "turn_deg": t.turn_deg.map(|r| [r.low, r.mean, r.high]),
            "averaged": changed(&t.averaged),
        })).collect::<Vec<_>>(),
        "classed": t.classed.iter().map(|c| json!({ "classes": c.name, "drift": changed(&c.change) })).collect::<Vec<_>>(),
    })
}

fn changed(c: &ChangedFinding) -> Value {
    json!({ "total_share": c.total, "ratio": c.ratio, "turn_deg": c.turn_deg })
}

pub fn rounding(r: &RoundingFinding) -> Value {
    json!({
        "direction_step_deg": r.direction_deg, "grouping_factor": r.grouping_factor(),
        "speed_step_m_per_s": r.speed, "speed_unit": (!r.speed_unit.is_empty()).then_some(r.speed_unit),
        "speed_gain": r.speed_gain,
    })
}

/// One row a record and year, month or season.
pub fn calendar_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("winds"),
        Column::text("kind"),
        Column::text("period"),
        Column::text("unit"),
        Column::real("total"),
        Column::real("total_low"),
        Column::real("total_high"),
        Column::real("resultant"),
        Column::real("ratio"),
        Column::real("ratio_low"),
        Column::real("ratio_high"),
        Column::real("toward_deg"),
        Column::real("toward_ci95_half_deg"),
        Column::integer("years"),
        Column::real("covered"),
    ];
    let mut rows = Vec::new();
    for wind in &findings.winds {
        let Some(calendar) = &wind.calendar else { continue };
        let kinds = [("year", &calendar.years), ("month", &calendar.months), ("season", &calendar.seasons)];
        for (kind, periods) in kinds {
            rows.extend(periods.iter().map(|p| {
                let own = [Cell::from(wind.name.as_str()), Cell::from(kind), Cell::from(p.name.as_str())];
                own.into_iter().chain(cells(p)).collect::<Vec<_>>()
            }));
        }
    }
    Table { name: "winds-calendar", columns, rows }
}

fn cells(p: &PeriodFinding) -> Vec<Cell> {
    let d = &p.drift;
    let [total_low, total_high] = p.total_ci95.map_or([None, None], |i| i.map(Some));
    let [ratio_low, ratio_high] = d.ratio_ci95.map_or([None, None], |i| i.map(Some));
    vec![
        Cell::from(d.unit),
        Cell::from(d.total),
        Cell::from(total_low),
        Cell::from(total_high),
        Cell::from(d.resultant),
        Cell::from(d.ratio),
        Cell::from(ratio_low),
        Cell::from(ratio_high),
        Cell::from(d.toward.map(|a| a.deg())),
        Cell::from(d.toward_ci95_half_deg),
        Cell::Integer(p.years as i64),
        Cell::from(p.covered),
    ]
}
