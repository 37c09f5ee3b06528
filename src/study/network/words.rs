//! A network in one plain sentence, and its cautions.

use crate::ground::{Caution, LengthUnit, Network};
use crate::science::network::junctions::Junctions;
use crate::science::network::pattern::{PATTERN_NAMES, Pattern};
use crate::study::NetworkFinding;

/// A sense held by less than this is no sense.
const SENSE_KNOWN: f64 = 0.9;
/// Turn of the mean junction angle over half to twice the chord that calls for a caution, degrees.
const CHORD_TURN_DEG: f64 = 10.0;
/// Width below which banks are not resolved, pixels.
const RESOLVED_PX: f64 = 3.0;

/// What is found, how sure it is, and what it rests on.
pub fn sentence(n: &NetworkFinding) -> String {
    let f = &n.network;
    if f.reaches.is_empty() {
        return match &n.drainage {
            Some(_) => format!("{}: no channel passes the threshold.", n.name),
            None => format!("{}: no channel stands out from the noise.", n.name),
        };
    }
    let mut parts = Vec::new();
    if let Some(d) = &n.drainage {
        let source = if d.channels.is_proposed { "by the constant-drop test" } else { "as stated" };
        let source =
            if n.cautions.iter().any(|c| c.code == "threshold-assumed") { "assumed" } else { source };
        parts.push(format!(
            "channels from elevation begin at {} ({source})",
            area(d.channels.threshold_m2, n.unit)
        ));
    } else {
        parts.push("channels on the image".to_owned());
    }
    let order = f.greatest_order().map_or(String::new(), |o| format!(", order {o}"));
    let loops = match f.loops() {
        0 => String::new(),
        1 => ", 1 loop".into(),
        many => format!(", {many} loops"),
    };
    parts.push(format!(
        "{} reaches{order}{loops}, {} on {}",
        f.reaches.len(),
        length(f.length(), n.unit),
        area(n.area, n.unit)
    ));
    if let Some(at) = n.junctions.by_chord.iter().find(|c| c.chord == n.junctions.chord).filter(|c| c.n >= 2)
    {
        let interval = at.ci95_deg.map_or(String::new(), |[low, high]| format!(" ({low:.0}° to {high:.0}°)"));
        parts.push(format!(
            "{} junctions meet at {:.0}°{interval} by chords of {}",
            at.n,
            at.mean_deg,
            length(at.chord, n.unit)
        ));
    }
    match (n.pattern.probabilities, n.pattern.too_few) {
        (_, true) => parts.push(format!("too few links ({}) to name a pattern", n.pattern.links)),
        (None, false) => parts.push("no pattern told".into()),
        (Some(p), false) => {
            let best = (0..p.len()).max_by(|a, b| p[*a].total_cmp(&p[*b])).unwrap_or(0);
            parts.push(format!("pattern {} with probability {:.0} %", PATTERN_NAMES[best], 100.0 * p[best]));
        }
    }
    if let Some(p) = n.planforms.first() {
        parts.push(format!("trunk of sinuosity {:.2}", p.sinuosity));
        if let Some(w) = &p.width {
            let interval = w.mean_ci95.map_or(String::new(), |[low, high]| {
                format!(" ({} to {})", length(low, n.unit), length(high, n.unit))
            });
            parts.push(format!("{}{interval} wide", length(w.mean, n.unit)));
        }
    }
    format!("{}: {}.", n.name, parts.join("; "))
}

/// What weakens a network's measures.
pub fn cautions(
    network: &Network,
    junctions: &Junctions,
    pattern: &Pattern,
    is_image: bool,
    width_px: Option<f64>,
) -> Vec<Caution> {
    let mut found = Vec::new();
    let mut say = |code, text: String| found.push(Caution::new(code, text));
    let without_order = network.reaches.iter().filter(|r| r.order.is_none()).count();
    if without_order > 0 {
        say(
            "order-undefined",
            format!(
                "{without_order} of {} reaches lie on loops or below a parting, where no stream order is defined.",
                network.reaches.len()
            ),
        );
    }
    let total = network.length();
    let unknown: f64 = network
        .reaches
        .iter()
        .filter(|r| {
            let p = r.sense.probability();
            p.max(1.0 - p) < SENSE_KNOWN
        })
        .map(|r| r.length)
        .sum();
    if total > 0.0 && unknown > 0.1 * total {
        say(
            "sense-unknown",
            format!(
                "On {:.0} % of the length nothing tells which way the water went: orders, junction angles and profiles there rest on a guess. Name an elevation raster or draw arrows.",
                100.0 * unknown / total
            ),
        );
    }
    let means: Vec<f64> = junctions.by_chord.iter().filter(|c| c.n > 0).map(|c| c.mean_deg).collect();
    let (low, high) =
        (means.iter().copied().fold(f64::INFINITY, f64::min), means.iter().copied().fold(0.0, f64::max));
    if high - low > CHORD_TURN_DEG {
        say(
            "chord-dependence",
            format!(
                "The mean junction angle runs from {low:.0}° to {high:.0}° as the chord is halved and doubled: it is a matter of scale."
            ),
        );
    }
    if pattern.too_few && !network.reaches.is_empty() {
        say("few-links", format!("{} links are too few to name a pattern; 30 are asked for.", pattern.links));
    }
    if is_image && width_px.is_some_and(|w| w < RESOLVED_PX) {
        say(
            "narrow-channels",
            "Channels narrower than 3 pixels are not resolved: their widths are bounds.".into(),
        );
    }
    found
}

fn length(x: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre if x >= 10_000.0 => format!("{:.0} km", x / 1000.0),
        LengthUnit::Metre if x >= 1000.0 => format!("{:.1} km", x / 1000.0),
        LengthUnit::Metre if x >= 10.0 => format!("{x:.0} m"),
        LengthUnit::Metre => format!("{x:.1} m"),
        LengthUnit::Pixel => format!("{x:.0} px"),
    }
}

fn area(x: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre if x >= 1e8 => format!("{:.0} km²", x / 1e6),
        LengthUnit::Metre if x >= 1e5 => format!("{:.2} km²", x / 1e6),
        LengthUnit::Metre => format!("{x:.0} m²"),
        LengthUnit::Pixel => format!("{x:.0} px²"),
    }
}
