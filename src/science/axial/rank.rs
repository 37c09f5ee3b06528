//! Ranks of two samples together: what the rank tests sum, as circle angles whose correlation can be measured.

use std::f64::consts::{PI, TAU};

use super::mean::Resultant;

/// Radians that the ranks of a scalar are spread over: so few that sine and angle are one.
const SMALL: f64 = 0.01;

/// β = 2πr/N: the circular rank of every angle among all of both; equal angles share a rank.
pub(super) fn circular(samples: [&[f64]; 2]) -> [Vec<f64>; 2] {
    ranks(samples.map(|s| s.iter().map(|p| p.rem_euclid(TAU)).collect()), TAU)
}

/// The rank of every angle's distance from its own sample's mean among all, as a small turn.
pub(super) fn of_distance(samples: [&[f64]; 2]) -> [Vec<f64>; 2] {
    let distances = samples.map(|s| {
        let mean = Resultant::of(s, None).direction();
        s.iter()
            .map(|p| {
                let turn = (p - mean).rem_euclid(TAU);
                if turn > PI { TAU - turn } else { turn }
            })
            .collect()
    });
    ranks(distances, SMALL)
}

/// Mean ranks over all values, from 0 to `span`.
fn ranks(values: [Vec<f64>; 2], span: f64) -> [Vec<f64>; 2] {
    let mut order: Vec<(f64, usize, usize)> = Vec::new();
    for (set, v) in values.iter().enumerate() {
        order.extend(v.iter().enumerate().map(|(i, x)| (*x, set, i)));
    }
    order.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)).then(a.2.cmp(&b.2)));
    let all = order.len() as f64;
    let mut out = values.map(|v| vec![0.0; v.len()]);
    let mut before = 0.0;
    for ties in order.chunk_by(|a, b| a.0 == b.0) {
        let rank = before + 0.5 * (ties.len() as f64 + 1.0);
        ties.iter().for_each(|(_, set, i)| out[*set][*i] = span * rank / all);
        before += ties.len() as f64;
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ties_share_a_rank_and_all_ranks_fill_the_circle() {
        let [a, b] = circular([&[0.1, 3.0, 0.1], &[2.0, 0.1]]);
        let rank = |angle: f64| (angle / TAU * 5.0 * 2.0).round() / 2.0;
        assert_eq!(a.iter().map(|x| rank(*x)).collect::<Vec<_>>(), [2.0, 5.0, 2.0]);
        assert_eq!(rank(b[0]), 4.0);
    }
}
