//! The finding in one plain sentence: what was measured, how sure it is, and the caveat that matters most.

use crate::ground::LengthUnit;

use super::backwards;
use super::cautions::WEAK_ALIGNMENT;
use super::obstacles;
use super::populations::plain_name;
use super::{
    PatchFinding, PopulationFinding, PopulationSource, SpectrumFinding, TrendFinding, VerdictFinding,
};

/// The sentence of a patch.
pub fn of_patch(finding: &PatchFinding) -> String {
    let mut parts = vec![trend(&finding.trend, finding.pattern.populations.len())];
    parts.extend(spacing(&finding.spectrum, finding.unit));
    let mut sentence = format!("{}: {}", finding.name, parts.join(", "));
    if let Some(clause) = populations(&finding.pattern.populations, finding.unit) {
        sentence.push_str("; ");
        sentence.push_str(&clause);
    }
    for verdict in &finding.verdicts {
        sentence.push_str("; ");
        sentence.push_str(&judged(verdict));
    }
    if let Some(found) = finding.backwards.as_ref().filter(|_| finding.verdicts.is_empty()) {
        sentence.push_str("; ");
        sentence.push_str(&backwards::clause(found));
    }
    for clause in finding.obstacles.iter().flat_map(obstacles::clauses) {
        sentence.push_str("; ");
        sentence.push_str(&clause);
    }
    sentence.push('.');
    sentence
}

fn trend(t: &TrendFinding, populations: usize) -> String {
    let (Some(axis), true) = (t.axis, t.defined) else {
        let share = format!("{} of {} places pass the noise floor", t.n, t.n_all);
        return match t.rayleigh_p {
            Some(p) if p > 0.05 => format!("no preferred trend (p = {}, {share})", probability(p)),
            Some(_) => format!("axes are uneven, but too little independent ground places a trend ({share})"),
            None if t.n_all == 0 => "no place in it can be measured, so there is no trend to state".into(),
            None => format!("too little independent ground to tell a trend ({share})"),
        };
    };
    let interval =
        t.ci95_half_deg.map_or("interval unknown".to_owned(), |half| format!("± {}°", degrees(half)));
    let strength = match t.resultant_length_all {
        r if r >= 0.7 => "strongly aligned",
        r if r >= WEAK_ALIGNMENT => "aligned",
        _ => "weakly aligned",
    };
    let mut text = format!("trend {:.0}° {interval} (95 %), {strength}", axis.deg() % 180.0);
    // Populations say more than the modes of one scale, in a clause of their own.
    if t.modes.len() > 1 && populations < 2 {
        let axes: Vec<_> =
            t.modes.iter().map(|m| format!("{:.0}° ({:.0} %)", m.axis.deg(), 100.0 * m.weight)).collect();
        text.push_str(&format!(", in {} trends: {}", t.modes.len(), axes.join(", ")));
    }
    text
}

/// "two populations: ripples, 84° ± 2°, spacing 12 m, 62 % of the texture; …"
fn populations(list: &[PopulationFinding], unit: LengthUnit) -> Option<String> {
    if list.len() < 2 {
        return None;
    }
    let superposed = list.iter().any(|p| p.source == PopulationSource::Scale);
    let of = if superposed { "texture" } else { "ground" };
    let each: Vec<String> = list
        .iter()
        .map(|p| {
            let trend = p.trend.axis.map_or(String::new(), |axis| {
                let plain = p.name == plain_name(axis);
                let trend = if plain { String::new() } else { format!(", {}", plain_name(axis)) };
                trend + &p.trend.ci95_half_deg.map_or(String::new(), |h| format!(" ± {}°", degrees(h)))
            });
            let spacing = p
                .spacing
                .map_or(", spacing unknown".to_owned(), |s| format!(", spacing {}", length(s, unit)));
            format!("{}{trend}{spacing}, {:.0} % of the {of}", p.name, 100.0 * p.weight)
        })
        .collect();
    let count = match list.len() {
        2 => "two".to_owned(),
        3 => "three".to_owned(),
        n => n.to_string(),
    };
    let how = if superposed { "one laid over the other" } else { "side by side" };
    Some(format!("{count} populations {how}: {}", each.join(" and ")))
}

fn spacing(s: &SpectrumFinding, unit: LengthUnit) -> Option<String> {
    let (Some(spacing), true) = (s.spacing, s.defined) else {
        return Some("no dominant spacing".into());
    };
    let interval = s
        .spacing_ci95
        .map_or(String::new(), |[low, high]| format!(" ({} to {})", length(low, unit), length(high, unit)));
    Some(format!("spacing {}{interval}", length(spacing, unit)))
}

fn judged(v: &VerdictFinding) -> String {
    if let Some(reason) = &v.refused {
        return format!("no verdict on {}: {reason}", v.winds_name);
    }
    let mut parts: Vec<String> = Vec::new();
    if let (Some(obliquity), Some(classes)) = (v.obliquity_deg, v.probabilities) {
        let names = ["longitudinal", "oblique", "transverse"];
        let best = (0..3).max_by(|a, b| classes[*a].total_cmp(&classes[*b])).unwrap_or(1);
        let interval =
            v.obliquity_ci95_deg.map_or(String::new(), |[low, high]| format!(" ({low:.0}° to {high:.0}°)"));
        parts.push(format!(
            "{obliquity:.0}°{interval} from the resultant drift of {}: {} with probability {:.0} % (random axis: {:.0} %)",
            v.winds_name,
            names[best],
            100.0 * classes[best],
            100.0 * v.class_priors[best]
        ));
    } else {
        parts.push(format!("under {} there is no resultant", v.winds_name));
    }
    if let Some(best) = v.theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior)) {
        let toward = best.toward.map_or(String::new(), |t| format!(", growing toward {:.0}°", t.deg()));
        parts.push(format!("best told by “{}” ({:.0} %{toward})", best.name, 100.0 * best.posterior));
    }
    parts.extend(v.elongation.filter(|_| v.building.extended > v.building.crossed).map(|e| {
        format!(
            "{:.0}° ({:.0}° to {:.0}°) from the direction in which these winds extend crests",
            e.separation_deg, e.ci95_deg[0], e.ci95_deg[1]
        )
    }));
    parts.extend(v.flips.first().map(|flip| {
        let sure =
            if flip.reach.is_some_and(|r| r < 1.0) { "would change within doubt" } else { "would change" };
        format!("it {sure} with {} at {} (now {}): {}", flip.parameter, flip.at, flip.now, flip.change)
    }));
    parts.join(", ")
}

/// A length with three significant figures, in kilometres from 10 km on.
pub(super) fn length(value: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Pixel => format!("{} px", figures(value)),
        LengthUnit::Metre if value >= 10_000.0 => format!("{} km", figures(value / 1000.0)),
        LengthUnit::Metre => format!("{} m", figures(value)),
    }
}

/// Three significant figures without an exponent.
fn figures(value: f64) -> String {
    if !value.is_finite() || value == 0.0 {
        return value.to_string();
    }
    let decimals = 2 - value.abs().log10().floor() as i32;
    if decimals >= 0 {
        format!("{value:.*}", decimals as usize)
    } else {
        let step = 10f64.powi(-decimals);
        format!("{:.0}", (value / step).round() * step)
    }
}

/// Whole degrees from 10° on, one decimal below.
fn degrees(half: f64) -> String {
    if half >= 9.95 { format!("{half:.0}") } else { format!("{half:.1}") }
}

fn probability(p: f64) -> String {
    if p < 1e-4 { "below 0.0001".into() } else { format!("{p:.2}") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn three_figures_without_exponent() {
        assert_eq!(figures(1763.4), "1760");
        assert_eq!(figures(17.634), "17.6");
        assert_eq!(figures(0.17634), "0.176");
        assert_eq!(figures(99.96), "100.0");
        assert_eq!(length(12_345.0, LengthUnit::Metre), "12.3 km");
    }

    #[test]
    fn an_undefined_trend_is_a_sentence_not_a_number() {
        let trend = TrendFinding { rayleigh_p: Some(0.4), n: 9, n_all: 100, ..Default::default() };
        let text = super::trend(&trend, 0);
        assert!(text.starts_with("no preferred trend (p = 0.40"), "{text}");
        assert!(!text.contains('°'), "{text}");
    }
}
