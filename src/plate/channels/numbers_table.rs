//! The numbers of a network as a table.

use crate::ground::{LengthUnit, Reach, ReachOrigin};
use crate::study::NetworkFinding;

use super::super::numbers::{self, count};
use super::super::sketch::Sketch;
use super::super::{Figure, Theme};
use super::{area, brief, table, with_interval};

/// Lengths, counts, density, ratios, and what conditioning or tracing did.
pub fn network_numbers(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let mut rows = size(finding);
    rows.extend(measures(finding));
    rows.extend(from_elevation(finding));
    rows.extend(from_image(finding));
    let height = table(&mut sketch, &rows, 0.0, width_mm, theme);
    sketch.finish(width_mm, height)
}

type Row = (String, String);

fn row(name: &str, value: String) -> Row {
    (name.to_owned(), value)
}

fn size(finding: &NetworkFinding) -> Vec<Row> {
    let network = &finding.network;
    let mut rows = vec![
        row("channels", numbers::length(network.length(), finding.unit, 3)),
        row("ground", area(finding.area, finding.unit)),
        row(
            "reaches, junctions",
            format!("{}, {}", count(network.reaches.len()), count(network.junctions().len())),
        ),
    ];
    // Without a sense of flow an end is neither head nor outlet.
    rows.push(if network.reaches.iter().any(told) {
        let ends = [network.heads().len(), network.outlets().len()].map(count);
        row("heads, outlets", ends.join(", "))
    } else {
        let (into, out) = (network.incoming(), network.outgoing());
        let ends = (0..network.nodes.len()).filter(|n| into[*n].len() + out[*n].len() == 1);
        row("loose ends", count(ends.count()))
    });
    let order = network.greatest_order().map_or("undefined".to_owned(), |o| o.to_string());
    let without = network.reaches.iter().filter(|r| r.order.is_none()).count();
    let told = if without == 0 || network.greatest_order().is_none() {
        order
    } else {
        format!("{order}; {} reaches without, on or below loops", count(without))
    };
    rows.push(row("highest order", told));
    rows
}

/// Whether the sense of flow is as good as known.
fn told(reach: &Reach) -> bool {
    !(0.05..=0.95).contains(&reach.sense.probability())
}

fn measures(finding: &NetworkFinding) -> Vec<Row> {
    let mut rows = Vec::new();
    if let Some(d) = &finding.density {
        let told = match finding.unit {
            LengthUnit::Metre => format!("{} km/km²", brief(1000.0 * d.density)),
            LengthUnit::Pixel => format!("{} per px", brief(d.density)),
        };
        rows.push(row("drainage density", told));
        if let Some(f) = d.frequency {
            let told = match finding.unit {
                LengthUnit::Metre => format!("{} per km²", brief(1e6 * f)),
                LengthUnit::Pixel => format!("{} per px²", brief(f)),
            };
            rows.push(row("stream frequency", told));
        }
    }
    if let Some(h) = &finding.hack {
        rows.push(row("Hack’s exponent", with_interval(h.exponent, h.exponent_ci95, 2)));
    }
    if let Some(f) = &finding.flint {
        rows.push(row("slope–area exponent", with_interval(f.exponent, f.exponent_ci95, 2)));
    }
    rows
}

fn from_elevation(finding: &NetworkFinding) -> Vec<Row> {
    let Some(d) = &finding.drainage else { return Vec::new() };
    let c = &d.changed;
    let share = |cells: usize| numbers::percent(cells as f64 / c.valid_cells.max(1) as f64);
    let metres = |v: f64| format!("{} m", brief(v));
    let raised = if c.raised_cells == 0 {
        "none".to_owned()
    } else {
        format!("{} of cells, deepest {}", share(c.raised_cells), metres(c.deepest_fill))
    };
    let cut = if c.cut_cells == 0 {
        "none".to_owned()
    } else {
        format!("{} of cells, deepest {}", share(c.cut_cells), metres(c.deepest_cut))
    };
    let sinks = format!(
        "{}: {} breached, {} filled, {} left closed",
        count(c.sinks),
        count(c.breached),
        count(c.filled),
        count(c.left_closed)
    );
    let mut rows = vec![
        row("threshold", area(d.channels.threshold_m2, LengthUnit::Metre)),
        row("basins", count(d.basins.len())),
        row("raised", raised),
        row("cut", cut),
    ];
    if c.sinks > 0 {
        rows.push(row("sinks", sinks));
    }
    rows
}

fn from_image(finding: &NetworkFinding) -> Vec<Row> {
    let Some(t) = &finding.tracing else { return Vec::new() };
    let of_origin = |origin| finding.network.reaches.iter().filter(|r| r.origin == origin).count();
    let sure = finding.network.reaches.iter().filter(|r| told(r));
    let mut rows = vec![
        row("proposed, struck out", format!("{}, {}", t.proposed_reaches, t.struck_reaches)),
        row("traced by hand", count(of_origin(ReachOrigin::Traced))),
        row("gaps bridged", t.bridged_gaps.to_string()),
        row("loops", t.loops.to_string()),
        row(
            "sense told (p > 0.95)",
            format!("{} of {} reaches", count(sure.count()), count(finding.network.reaches.len())),
        ),
        row("noise floor", brief(t.floor)),
    ];
    if let (Some(least), Some(most)) =
        (t.widths_px.iter().copied().reduce(f64::min), t.widths_px.iter().copied().reduce(f64::max))
    {
        let told = format!("{}–{} px", brief(least), brief(most));
        rows.push(row("widths looked for", told));
    }
    if !t.lost_arrows.is_empty() {
        rows.push(row("arrows beside no reach", t.lost_arrows.len().to_string()));
    }
    rows
}
