//! The evidence of a network as rows of label and value: where it comes from, its hierarchy, its profiles.

use crate::ground::LengthUnit;
use crate::plate::numbers;
use crate::science::drainage::condition::Conditioning;
use crate::science::drainage::heads::HeadRule;
use crate::science::drainage::routing::Router;
use crate::science::network::hierarchy::Ratio;
use crate::study::{DrainageFinding, NetworkFinding, TracingFinding};

use super::channels::density_words;
use super::facts::{Fact, fact};

/// Which method makes which row.
const METHODS: &[(&str, &str)] = &[
    ("Sinks", "drainage.fill"),
    ("Constant-drop test", "drainage.constant-drop"),
    ("Mean drops", "drainage.constant-drop"),
    ("A channel begins", "drainage.channel-heads"),
    ("Bifurcation ratio", "network.horton"),
    ("Length ratio", "network.horton"),
    ("Area ratio", "network.horton"),
    ("Slope ratio", "network.horton"),
    ("Tokunaga", "network.tokunaga"),
    ("Drainage density", "network.density"),
    ("Stream frequency", "network.density"),
    ("Knickpoint", "network.knickpoints"),
    ("Concavity θ", "network.chi"),
    ("Steepness", "network.chi"),
    ("Hack’s exponent", "network.hack"),
    ("Flint’s exponent", "network.flint"),
    ("Hypsometric integral", "network.hypsometry"),
    ("Melton ratio", "network.hypsometry"),
    ("Relief ratio", "network.hypsometry"),
    ("Noise floor", "channel.proposal"),
    ("Proposed", "channel.proposal"),
    ("Mean angle", "network.junctions"),
    ("Links", "network.pattern"),
    ("Found of it", "network.agreement"),
    ("Confirmed by it", "network.agreement"),
];

/// The rows with the methods that made them.
pub(super) fn sourced(facts: Vec<Fact>) -> Vec<Fact> {
    let method = |fact: &Fact| METHODS.iter().find(|(label, _)| *label == fact.label).map(|(_, id)| *id);
    facts.into_iter().map(|fact| Fact { method: method(&fact).unwrap_or(fact.method), ..fact }).collect()
}

/// What the network is and what it was sought on.
pub fn about(finding: &NetworkFinding) -> Vec<Fact> {
    let network = &finding.network;
    let area = area(finding.area, finding.unit);
    let mut facts = vec![
        fact("Ground", area, "On which channels were sought, after missing pixels."),
        fact(
            "Channels",
            format!(
                "{} reaches, {} heads, {} junctions, {} outlets",
                network.reaches.len(),
                network.heads().len(),
                network.junctions().len(),
                network.outlets().len()
            ),
            "A reach runs between two nodes: heads, junctions, outlets.",
        ),
        fact(
            "Length",
            numbers::length(network.length(), finding.unit, 4),
            "Of all reaches along the ground.",
        ),
        fact(
            "Order",
            match network.greatest_order() {
                Some(order) => format!("{order}"),
                None => "not defined".into(),
            },
            "Greatest Strahler order. Where flow divides and below, order has no meaning.",
        ),
    ];
    let loops = network.loops();
    if loops > 0 {
        facts.push(fact("Loops", loops.to_string(), "Channels that part and meet again."));
    }
    if finding.factor > 1 {
        let factor = format!("every {}th pixel each way, averaged", finding.factor);
        facts.push(fact("Measured on", factor, "The ground is too large to be measured pixel by pixel."));
    }
    facts
}

/// What was done so that the elevation drains.
pub fn conditioning(drainage: &DrainageFinding) -> Vec<Fact> {
    let c = &drainage.changed;
    let share = |cells: usize| {
        format!("{cells} cells, {}", numbers::percent(cells as f64 / c.valid_cells.max(1) as f64))
    };
    let volume = |m3: f64| format!("{} m³", numbers::significant(m3, 3));
    let metres = |m: f64| format!("{} m", numbers::significant(m, 3));
    let method = match drainage.conditioning {
        Conditioning::Fill => "filled to the lowest rim",
        Conditioning::FillSloped => "filled, with the least slope toward the outlet",
        Conditioning::Breach => "breached along the way of least cost",
        Conditioning::BreachThenFill => "breached where shallow and short, filled elsewhere",
    };
    let mut facts = vec![
        fact("Sinks", method, "How closed depressions were dealt with."),
        fact(
            "Of them",
            format!(
                "{} in all: {} filled, {} breached, {} left closed",
                c.sinks, c.filled, c.breached, c.left_closed
            ),
            "Basins marked as closed keep their water.",
        ),
    ];
    if c.raised_cells > 0 {
        let value = format!(
            "{}, {}, deepest {}",
            share(c.raised_cells),
            volume(c.raised_volume),
            metres(c.deepest_fill)
        );
        facts.push(fact("Raised", value, "Cells, volume and the greatest depth filled."));
    }
    if c.cut_cells > 0 {
        let value =
            format!("{}, {}, deepest {}", share(c.cut_cells), volume(c.cut_volume), metres(c.deepest_cut));
        facts.push(fact("Cut", value, "Cells, volume and the greatest depth of a trench."));
    }
    let (router, method) = router(drainage.router);
    facts.push(fact("Flow", router, "How contributing area is shared among neighbours.").by(method));
    let basins = drainage.basins.len();
    if let Some(greatest) = drainage.basins.first() {
        let edge = if greatest.touches_edge { "; it may be larger, the edge cuts it" } else { "" };
        let value = format!("{basins}; the greatest {}{edge}", square_metres(greatest.area_m2));
        facts.push(fact("Basins", value, "Ground that drains through one outlet."));
    }
    sourced(facts)
}

fn router(router: Router) -> (&'static str, &'static str) {
    match router {
        Router::D8 => ("steepest of eight neighbours (D8)", "drainage.d8"),
        Router::DInfinity => ("steepest facet (D∞)", "drainage.d-infinity"),
        Router::Freeman => ("several neighbours, by slope (Freeman)", "drainage.freeman"),
        Router::Quinn => ("several neighbours, by slope and contour (Quinn)", "drainage.quinn"),
    }
}

/// Where channels begin.
pub fn heads(drainage: &DrainageFinding) -> Vec<Fact> {
    let channels = &drainage.channels;
    let rule = match channels.rule {
        HeadRule::Area => "area A above the threshold",
        HeadRule::SlopeArea => "A·S² above the threshold",
        HeadRule::CurvedArea => "hollow area above the threshold",
    };
    let origin = if channels.is_proposed { "proposed by the constant-drop test" } else { "stated" };
    let proposed = match channels.proposed_m2 {
        Some(m2) => square_metres(m2),
        None => "none: no threshold passes".into(),
    };
    let used = channels.drops.iter().min_by(|a, b| {
        let off = |m2: f64| (m2 / channels.threshold_m2).ln().abs();
        off(a.threshold_m2).total_cmp(&off(b.threshold_m2))
    });
    let mut facts = vec![
        fact("A channel begins", rule, "The rule for heads (settings)."),
        fact(
            "Threshold",
            format!("{}, {origin}", square_metres(channels.threshold_m2)),
            "What must drain through.",
        ),
        fact(
            "Constant-drop test",
            proposed,
            "The smallest threshold at which first-order streams drop as much as the others.",
        ),
    ];
    if let Some(row) = used {
        let t = row.t.map_or("–".into(), |t| numbers::fixed(t, 2));
        let value = format!(
            "{} m over {} streams of order 1, {} m over {} above: t {t}",
            numbers::significant(row.first.1, 3),
            row.first.0,
            numbers::significant(row.higher.1, 3),
            row.higher.0
        );
        facts.push(fact("Mean drops", value, "Near this threshold; |t| below 2 passes."));
    }
    sourced(facts)
}

/// How channels were found on the image.
pub fn tracing(tracing: &TracingFinding) -> Vec<Fact> {
    let widths = match (tracing.widths_px.first(), tracing.widths_px.last()) {
        (Some(a), Some(b)) => {
            format!("{} to {} pixels", numbers::significant(*a, 2), numbers::significant(*b, 2))
        }
        _ => "none".into(),
    };
    sourced(vec![
        fact("Widths sought", widths, "Of channels, on the image measured."),
        fact(
            "Noise floor",
            numbers::significant(tracing.floor, 3),
            "Contrast over noise a place had to pass to count as channel.",
        ),
        fact(
            "Proposed",
            format!("{} reaches, {} struck out by you", tracing.proposed_reaches, tracing.struck_reaches),
            "Found by themselves.",
        ),
        fact(
            "Gaps bridged",
            tracing.bridged_gaps.to_string(),
            "Dashed on the table; each with its confidence.",
        ),
        fact("Loops kept", tracing.loops.to_string(), "Order is not defined on them and below."),
    ])
}

/// Streams by order and Horton's and Tokunaga's laws.
pub fn hierarchy(finding: &NetworkFinding) -> Vec<Fact> {
    let mut facts = Vec::new();
    if let Some(h) = &finding.horton {
        facts.push(fact(
            "Bifurcation ratio",
            ratio(&h.bifurcation),
            "Streams of one order over those of the next, by regression. 3 to 5 nearly everywhere: it does not tell rivers from other trees.",
        ));
        facts.push(fact(
            "Length ratio",
            ratio(&h.length),
            "Mean length of one order over that of the order below.",
        ));
        facts.extend(h.area.as_ref().map(|r| fact("Area ratio", ratio(r), "The same of drained areas.")));
        facts
            .extend(h.slope.as_ref().map(|r| fact("Slope ratio", ratio(r), "The same of slopes, downward.")));
    }
    if let Some(t) = &finding.tokunaga {
        let value = format!("a {}, c {}", numbers::significant(t.a, 3), numbers::significant(t.c, 3));
        facts.push(fact("Tokunaga", value, "Side branches T_k = a c^(k−1) by difference of order k."));
    }
    if let Some(d) = &finding.density {
        facts.push(fact("Drainage density", density_words(finding, d.density), "Channel length over area."));
        if d.inflation != 1.0 {
            facts.push(fact(
                "Length corrected by",
                numbers::fixed(d.inflation, 4),
                "What a path from cell to cell overstates; already divided out.",
            ));
        }
        facts.extend(
            d.frequency.map(|f| fact("Stream frequency", frequency(f, finding.unit), "Streams over area.")),
        );
    }
    sourced(facts)
}

fn frequency(frequency: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre => format!("{} per km²", numbers::significant(1e6 * frequency, 3)),
        LengthUnit::Pixel => format!("{} a square pixel", numbers::significant(frequency, 3)),
    }
}

/// Profiles, χ and scaling.
pub fn profile(finding: &NetworkFinding) -> Vec<Fact> {
    let mut facts = Vec::new();
    if let Some(trunk) = finding.profiles.iter().find(|p| p.is_trunk) {
        let ends = trunk.stations.first().zip(trunk.stations.last());
        if let Some((low, high)) = ends {
            let value = format!(
                "{} long, falls {} m",
                numbers::length(high.from_outlet_m - low.from_outlet_m, LengthUnit::Metre, 3),
                numbers::significant(high.elevation_m - low.elevation_m, 3)
            );
            facts.push(fact("Trunk", value, "The longest flow path."));
        }
        for knick in &trunk.knickpoints {
            let value = format!(
                "{} above the outlet, ksn × {}, {}",
                numbers::length(knick.from_outlet_m, LengthUnit::Metre, 3),
                numbers::significant(knick.ratio, 2),
                numbers::p_value(knick.p)
            );
            facts.push(fact("Knickpoint", value, "Where steepness changes; its ratio above over below."));
        }
    }
    if let Some(chi) = &finding.chi {
        let how = if chi.found { "by least scatter" } else { "stated" };
        let range = chi.theta_range.map_or(String::new(), |[a, b]| {
            format!(" ({} to {})", numbers::fixed(a, 2), numbers::fixed(b, 2))
        });
        facts.push(fact(
            "Concavity θ",
            format!("{}{range}, {how}", numbers::fixed(chi.theta, 2)),
            "Lays all profiles on one line in χ.",
        ));
        facts.push(fact(
            "Steepness",
            format!("{}, R² {}", interval(chi.slope, chi.slope_ci95, 3), numbers::fixed(chi.r2, 2)),
            "Slope of elevation on χ.",
        ));
    }
    for (label, law, hint) in [
        ("Hack’s exponent", &finding.hack, "Of length on area; 0.57 to 0.6 in many rivers."),
        ("Flint’s exponent", &finding.flint, "Of slope on area, downward."),
    ] {
        facts.extend(law.as_ref().map(|law| fact(label, interval(law.exponent, law.exponent_ci95, 3), hint)));
    }
    if let Some(h) = &finding.hypsometry {
        facts.push(fact(
            "Hypsometric integral",
            numbers::fixed(h.integral, 3),
            "(mean − lowest) / (highest − lowest) of the greatest basin.",
        ));
        facts.push(fact(
            "Melton ratio",
            numbers::significant(h.melton, 3),
            "Relief over the root of the area.",
        ));
        facts.extend(h.relief_ratio.map(|r| {
            fact("Relief ratio", numbers::significant(r, 3), "Relief over the length of the trunk.")
        }));
    }
    sourced(facts)
}

fn ratio(ratio: &Ratio) -> String {
    interval(ratio.value, ratio.ci95, 3)
}

/// A value with its 95 % interval, when it has one.
pub(super) fn interval(value: f64, ci95: Option<[f64; 2]>, figures: usize) -> String {
    let f = |v| numbers::significant(v, figures);
    match ci95 {
        Some([low, high]) => format!("{} ({} to {})", f(value), f(low), f(high)),
        None => f(value),
    }
}

/// An area in the square of `unit`.
pub fn area(area: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre => square_metres(area),
        LengthUnit::Pixel => format!("{} square pixels", numbers::significant(area, 4)),
    }
}

/// km² from 100 000 m² on.
pub fn square_metres(m2: f64) -> String {
    if m2.abs() >= 1e5 {
        format!("{} km²", numbers::significant(1e-6 * m2, 3))
    } else {
        format!("{} m²", numbers::significant(m2, 3))
    }
}

#[cfg(test)]
mod tests {
    use super::METHODS;

    #[test]
    fn every_method_named_has_a_record() {
        let known = crate::science::methods();
        for (label, id) in METHODS {
            assert!(known.iter().any(|m| m.id == *id), "{label} names {id}, which has no record");
        }
    }
}
