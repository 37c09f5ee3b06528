//! What a recovery says in one sentence, and its arcs of missed trends.

use crate::ground::LengthUnit;
use crate::study::sentence::length;
use crate::study::{RecoveredTrend, RecoveryFinding};

/// Arcs in which less than half of the fields were found, from the trends in order from north: the ends lie where
/// straight lines between neighbouring trends cross one half. Degrees clockwise; the end may pass 180.
pub(super) fn missed(trends: &[RecoveredTrend]) -> Vec<[f64; 2]> {
    let n = trends.len();
    let share = |i: usize| {
        let t = &trends[i % n];
        f64::from(t.found) / f64::from(t.tries.max(1))
    };
    let found = |i: usize| share(i) >= 0.5;
    let Some(first) = (0..n).find(|i| found(*i)) else {
        return if n > 0 { vec![[0.0, 180.0]] } else { Vec::new() };
    };
    let step = 180.0 / n as f64;
    let start = trends[first].trend.deg();
    // Degrees after `start` at which the probability crosses one half between trends i and i + 1.
    let crossing = |i: usize| {
        let (a, b) = (share(first + i), share(first + i + 1));
        step * (i as f64 + (a - 0.5) / (a - b))
    };
    let mut arcs = Vec::new();
    let mut from = 0.0;
    for i in 0..n {
        match (found(first + i), found(first + i + 1)) {
            (true, false) => from = crossing(i),
            (false, true) => {
                let begin = (start + from).rem_euclid(180.0);
                arcs.push([begin, begin + crossing(i) - from]);
            }
            _ => {}
        }
    }
    arcs.sort_by(|a: &[f64; 2], b| a[0].total_cmp(&b[0]));
    arcs
}

/// One plain sentence.
pub(super) fn sentence(r: &RecoveryFinding) -> String {
    let bedforms = format!("{} apart and {} high", size(r.spacing, r.unit), size(r.height, r.unit));
    let [found, tries] = elsewhere(r);
    if r.missed == [[0.0, 180.0]] {
        return format!(
            "Bedforms {bedforms} would have been missed here whatever their trend: that none is seen says nothing."
        );
    }
    let percent = 100.0 * found / tries.max(1.0);
    if r.missed.is_empty() {
        return format!(
            "Bedforms {bedforms} would have been found here whatever their trend ({percent:.0} % of the fields laid in)."
        );
    }
    let arcs: Vec<String> = r.missed.iter().map(arc).collect();
    format!(
        "Trends {} would have been missed here; of bedforms {bedforms} with other trends {percent:.0} % were found.",
        arcs.join(" and ")
    )
}

/// An arc in words; one that passes north says so.
fn arc([from, to]: &[f64; 2]) -> String {
    match *to > 180.5 {
        true => format!("from {from:.0}° through north to {:.0}°", to - 180.0),
        false => format!("between {from:.0}° and {to:.0}°"),
    }
}

/// Fields found and laid in, at trends that were not missed.
fn elsewhere(r: &RecoveryFinding) -> [f64; 2] {
    let seen = r.trends.iter().filter(|t| 2 * t.found >= t.tries);
    seen.fold([0.0; 2], |[found, tries], t| [found + f64::from(t.found), tries + f64::from(t.tries)])
}

fn size(value: f64, unit: LengthUnit) -> String {
    length(value, unit)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Axis;

    fn curve(found: &[u32]) -> Vec<RecoveredTrend> {
        let step = 180.0 / found.len() as f64;
        let trend = |i: usize| RecoveredTrend {
            trend: Axis::from_deg(5.0 + step * i as f64),
            tries: 8,
            found: found[i],
            probability_ci95: [0.0, 1.0],
            bias_deg: None,
            spread_deg: None,
            share: 0.0,
            resultant_length: 0.0,
        };
        (0..found.len()).map(trend).collect()
    }

    #[test]
    fn arcs_lie_where_half_is_found_and_wrap() {
        assert_eq!(missed(&curve(&[8; 12])), Vec::<[f64; 2]>::new());
        assert_eq!(missed(&curve(&[0; 12])), [[0.0, 180.0]]);
        assert_eq!(missed(&curve(&[8, 8, 0, 0, 8, 8, 8, 8, 8, 8, 8, 8])), [[27.5, 57.5]]);
        // Missed at 170°, 5° and 20°.
        assert_eq!(missed(&curve(&[0, 0, 8, 8, 8, 8, 8, 8, 8, 8, 8, 0])), [[162.5, 207.5]]);
        assert_eq!(missed(&curve(&[6, 0, 6, 8, 8, 8, 2, 8, 8, 8, 8, 8])).len(), 2);
    }
}
