//! The evidence of a network as rows of label and value: junctions, pattern, planform, palaeo-flow, agreement,
//! and the reach under the pointer.

use crate::ground::Reach;
use crate::plate::numbers;
use crate::science::network::compare::Agreement;
use crate::science::network::flow::{FlowAsk, PalaeoFlow, Range};
use crate::science::network::pattern::PATTERN_NAMES;
use crate::science::network::planform::{Meander, Planform};
use crate::study::NetworkFinding;

use super::Tracing;
use super::channel_facts::{interval, sourced, square_metres};
use super::facts::{Fact, fact};

/// Junction angles.
pub fn junctions(finding: &NetworkFinding) -> Vec<Fact> {
    let j = &finding.junctions;
    let used =
        j.by_chord.iter().min_by(|a, b| (a.chord - j.chord).abs().total_cmp(&(b.chord - j.chord).abs()));
    let mut facts = Vec::new();
    if let Some(row) = used {
        let half = row.ci95_deg.map_or(String::new(), |[a, b]| {
            format!(" ({}° to {}°)", numbers::fixed(a, 1), numbers::fixed(b, 1))
        });
        facts.push(fact(
            "Mean angle",
            format!(
                "{}°{half}, median {}°",
                numbers::fixed(row.mean_deg, 1),
                numbers::fixed(row.median_deg, 1)
            ),
            "Between the two upstream branches, by chords, with its 95 % interval.",
        ));
        facts.push(fact("Junctions", row.n.to_string(), "With chords of the stated length."));
    }
    facts.push(fact(
        "Chord",
        numbers::length(j.chord, finding.unit, 3),
        "Raw steps from cell to cell attract 45° and 90°; chords do not.",
    ));
    for row in &j.by_chord {
        if used.is_none_or(|used| used.chord != row.chord) {
            let value = format!(
                "{}° at {}",
                numbers::fixed(row.mean_deg, 1),
                numbers::length(row.chord, finding.unit, 3)
            );
            facts.push(fact("With another chord", value, "How far the answer depends on the chord."));
        }
    }
    if j.too_short > 0 {
        facts.push(fact(
            "Left out",
            j.too_short.to_string(),
            "Junctions where a branch is shorter than the chord.",
        ));
    }
    sourced(facts)
}

/// The pattern as probabilities.
pub fn pattern(finding: &NetworkFinding) -> Vec<Fact> {
    let p = &finding.pattern;
    let mut facts = vec![fact("Links", p.links.to_string(), "30 or more are needed for probabilities.")];
    match p.probabilities {
        Some(probabilities) => {
            for (name, share) in PATTERN_NAMES.into_iter().zip(probabilities) {
                facts.push(fact(name, numbers::percent(share), "Probability, not a label."));
            }
        }
        None => facts.push(fact(
            "Pattern",
            if p.too_few { "too few links" } else { "not told" },
            "Below 30 links no pattern is named.",
        )),
    }
    let f = &p.features;
    facts.push(fact(
        "Alignment",
        numbers::fixed(f.alignment, 3),
        "R̄ of doubled link azimuths, weighted by length.",
    ));
    facts.push(fact(
        "Crossing",
        numbers::fixed(f.crossing, 3),
        "R̄ of fourfold link azimuths: two trends at a right angle.",
    ));
    if !p.modes.is_empty() {
        let modes: Vec<String> = p.modes.iter().map(|m| format!("{}°", numbers::fixed(m.deg(), 0))).collect();
        facts.push(fact("Trends of links", modes.join(", "), "Modes of link azimuths."));
    }
    sourced(facts)
}

/// One channel path.
pub fn planform(finding: &NetworkFinding, planform: &Planform) -> Vec<Fact> {
    let unit = finding.unit;
    let mut facts = vec![
        fact("Length", numbers::length(planform.length, unit, 3), "Along the channel."),
        fact(
            "Sinuosity",
            format!(
                "{} over a valley line smoothed at {}",
                numbers::fixed(planform.sinuosity, 3),
                numbers::length(planform.valley_scale, unit, 3)
            ),
            "Channel length over valley length; the scale of the valley line is part of the number.",
        ),
    ];
    for (label, meander) in [
        ("Wavelength, spectrum", &planform.wavelength_spectrum),
        ("Wavelength, inflections", &planform.wavelength_inflections),
    ] {
        facts.extend(
            meander
                .as_ref()
                .map(|m| fact(label, meander_words(m, unit), "Along the valley, with its 95 % interval.")),
        );
    }
    if let Some([median, low, high]) = planform.radius {
        facts.push(fact(
            "Radius of bends",
            format!(
                "{} (quartiles {} and {}), {} bends",
                numbers::length(median, unit, 3),
                numbers::length(low, unit, 3),
                numbers::length(high, unit, 3),
                planform.bends
            ),
            "Of curvature, at bends.",
        ));
    }
    if let Some(w) = &planform.width {
        let value = format!(
            "{}, {} places, {} effective",
            numbers::length_with_interval(w.mean, w.mean_ci95, unit),
            w.n,
            numbers::significant(w.n_eff, 3)
        );
        facts.push(fact("Width", value, "Bank to bank; neighbours along the channel say the same thing."));
    }
    facts.extend(planform.wavelength_widths.map(|ratio| {
        fact("Wavelength over width", numbers::significant(ratio, 3), "Near 11 in free meanders.")
    }));
    facts
}

fn meander_words(meander: &Meander, unit: crate::ground::LengthUnit) -> String {
    format!(
        "{}, amplitude {}",
        numbers::length_with_interval(meander.wavelength, meander.ci95, unit),
        numbers::length(meander.amplitude, unit, 3)
    )
}

/// What went into the palaeo-flow and what came out.
pub fn flow((ask, flow): &(FlowAsk, PalaeoFlow)) -> Vec<Fact> {
    let given = |[low, high]: [f64; 2]| {
        if low == high {
            numbers::significant(low, 3)
        } else {
            format!("{} to {}", numbers::significant(low, 3), numbers::significant(high, 3))
        }
    };
    let mut facts = vec![
        fact("Gravity", format!("{} m/s²", numbers::significant(ask.gravity, 4)), "Of the body."),
        fact("Width", format!("{} m", given(ask.width_m)), "Measured."),
        fact("Slope", given(ask.slope), "Of the bed; measured or from the settings."),
        fact("Depth", range(&flow.depth_m, "m"), "From width over depth: least, middle, greatest."),
        fact("Velocity", range(&flow.velocity, "m/s"), "Darcy–Weisbach."),
        fact("Froude number", range(&flow.froude, ""), "Does not depend on gravity."),
        fact("Discharge", range(&flow.discharge, "m³/s"), "Darcy–Weisbach, under this gravity."),
        fact(
            "Discharge, by width",
            range(&flow.discharge_by_width, "m³/s"),
            "Dimensionally consistent hydraulic geometry, from width alone.",
        ),
        fact(
            "Discharge, Manning",
            range(&flow.discharge_by_manning, "m³/s"),
            "Manning’s n is Earth’s; rescaled to this gravity.",
        ),
        fact("Greatest grain", range(&flow.grain_m, "m"), "That such a flow moves (Shields)."),
    ];
    if !flow.shares.is_empty() {
        let shares: Vec<String> =
            flow.shares.iter().map(|(name, share)| format!("{name} {}", numbers::percent(*share))).collect();
        facts.push(fact("Doubt comes from", shares.join(", "), "Shares of the spread of ln discharge."));
    }
    facts
}

fn range(range: &Range, unit: &str) -> String {
    let f = |v| numbers::significant(v, 2);
    let space = if unit.is_empty() { "" } else { " " };
    format!("{} to {}{space}{unit} (middle {})", f(range.least), f(range.greatest), f(range.middle))
}

/// Against another network.
pub fn agreement(finding: &NetworkFinding, with: &Agreement) -> Vec<Fact> {
    let [theirs, found, ours] = with.junctions;
    let share = |share: Option<f64>| share.map_or("not told".into(), numbers::percent);
    sourced(vec![
        fact(
            "Found of it",
            numbers::percent(with.found),
            "Share of the other’s length that this network has too.",
        ),
        fact(
            "Confirmed by it",
            numbers::percent(with.confirmed),
            "Share of this network’s length that the other has too.",
        ),
        fact(
            "Apart by",
            format!(
                "{} where both are found, {} at most",
                numbers::length(with.mean_distance, finding.unit, 2),
                numbers::length(with.tolerance, finding.unit, 2)
            ),
            "Mean distance; farther than the tolerance is another channel.",
        ),
        fact(
            "Same sense",
            share(with.same_sense),
            "Share of the common length where the water goes the same way.",
        ),
        fact("Same order", share(with.same_order), "Share of the common length where Strahler orders agree."),
        fact("Junctions", format!("{found} of its {theirs} found, {ours} here"), "Within the tolerance."),
    ])
}

/// The channel under way with the pen.
pub fn tracing(tracing: &Tracing) -> Vec<Fact> {
    let mut facts = vec![fact(
        "Picks",
        format!("{}; Backspace takes one back, Enter ends", tracing.picks.len()),
        "Of the channel under way.",
    )];
    let last = tracing.live.as_ref().or(tracing.legs.iter().flatten().last());
    let Some(leg) = last else { return facts };
    let Some(way) = &leg.way else {
        facts.push(fact(
            "Way",
            "straight: there is no ground for the pen here",
            "Off the raster, or no data.",
        ));
        return facts;
    };
    let cost = way.cost_ratio.map_or("not known yet".into(), |ratio| {
        format!("{} of that of chance ways", numbers::fixed(ratio, 2))
    });
    facts.push(
        fact("Cost", cost, "Per length, over the median of ways between random places as far apart; well below 1 on a channel.")
            .by("channel.pen-chance"),
    );
    facts.extend(way.p.map(|p| {
        fact("By chance", numbers::p_value(p), "Share of such ways that are as cheap.")
            .by("channel.pen-chance")
    }));
    facts
}

/// The reach under the pointer.
pub fn reach(finding: &NetworkFinding, reach: &Reach) -> Vec<Fact> {
    let order = reach
        .order
        .map_or("order not defined".into(), |o| format!("order {}, magnitude {}", o.strahler, o.shreve));
    let mut facts = vec![
        fact(
            "Reach",
            format!("{}, {order}", numbers::length(reach.length, finding.unit, 3)),
            "Under the pointer.",
        ),
        fact(
            "Origin",
            format!("{}, confidence {}", reach.origin.in_words(), numbers::fixed(reach.confidence, 2)),
            "And how sure that there is a channel.",
        ),
    ];
    if let Some(area) = reach.stations.last().and_then(|s| s.area_m2) {
        facts.push(fact("Drains", square_metres(area), "Through its lower end."));
    }
    if let Some(width) = reach.width {
        let ci = Some([width.mean - 1.96 * width.se, width.mean + 1.96 * width.se]);
        facts.push(fact(
            "Width",
            format!("{} {}", interval(width.mean, ci, 3), finding.unit.symbol()),
            "Bank to bank, with its 95 % interval.",
        ));
    }
    let evidence: Vec<String> = reach
        .sense
        .evidence
        .iter()
        .map(|e| format!("{} {}", e.kind.in_words(), numbers::fixed(e.ln_odds, 1)))
        .collect();
    let told = if evidence.is_empty() { "nothing tells".to_owned() } else { evidence.join(", ") };
    facts.push(fact(
        "Sense",
        format!("{} as drawn: {told}", numbers::percent(reach.sense.probability())),
        "Probability that the water went the way the reach is drawn, and the ln odds of each piece of evidence.",
    ));
    facts
}
