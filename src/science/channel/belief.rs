//! Which way every reach runs, weighed over the whole graph: junctions as factors, reaches as variables,
//! sums passed along until they settle (exact on trees).

/// One node: the reaches that meet there, each with whether it begins there, and for each how well the angles
/// and widths fit it as the stem of the other two (ln likelihood; all 0 unless three meet).
#[derive(Clone, Debug)]
pub(super) struct Meeting {
    pub reaches: Vec<(usize, bool)>,
    pub stem: Vec<f64>,
}

/// ln odds of every reach by one view of the junctions, and the ln evidence for that view.
#[derive(Clone, Debug)]
pub(super) struct Belief {
    pub ln_odds: Vec<f64>,
    pub ln_evidence: f64,
}

/// Weight of a node where water only comes or only goes.
const SINK: f64 = 0.002;
/// More reaches than this are not weighed together; such a node says nothing.
const MOST_REACHES: usize = 10;
const SWEEPS: usize = 400;
const SETTLED: f64 = 1e-9;

impl Meeting {
    fn says_something(&self) -> bool {
        (2..=MOST_REACHES).contains(&self.reaches.len())
    }

    /// Weight of a pattern of who comes in (a bit each); `joining` is the share of junctions where channels
    /// join rather than part.
    fn weight(&self, coming: usize, joining: f64) -> f64 {
        let n = self.reaches.len();
        let into = coming.count_ones() as usize;
        if into == 0 || into == n {
            return SINK;
        }
        if n == 2 {
            return 1.0;
        }
        if into + 1 == n {
            let out = (0..n).find(|i| coming & (1 << i) == 0).unwrap_or(0);
            return joining * self.stem[out].exp();
        }
        if into == 1 {
            let stem = coming.trailing_zeros() as usize;
            return (1.0 - joining) * self.stem[stem].exp();
        }
        (joining * (1.0 - joining)).sqrt()
    }

    /// (Σ weights with reach k coming in, without) given the probability that each comes in; the own one's
    /// is left out.
    fn sums(&self, coming: &[f64], k: usize, joining: f64) -> [f64; 2] {
        let mut sums = [0.0; 2];
        for pattern in 0..1usize << self.reaches.len() {
            let mut weight = self.weight(pattern, joining);
            for (i, p) in coming.iter().enumerate().filter(|(i, _)| *i != k) {
                weight *= if pattern & (1 << i) != 0 { *p } else { 1.0 - p };
            }
            sums[usize::from(pattern & (1 << k) == 0)] += weight;
        }
        sums
    }
}

fn logistic(x: f64) -> f64 {
    1.0 / (1.0 + (-x).exp())
}

/// Weighs the graph. `own` is the ln odds of each reach by itself for running as it is written.
pub(super) fn weigh(meetings: &[Meeting], own: &[f64], joining: f64) -> Belief {
    // What the node at each end says of a reach, ln odds for running as written: [at its start, at its end].
    let mut said = vec![[0.0f64; 2]; own.len()];
    let speaking: Vec<usize> = (0..meetings.len()).filter(|m| meetings[*m].says_something()).collect();
    // Probability that each reach of a meeting comes in there, by all but the meeting itself.
    let coming = |meeting: &Meeting, said: &[[f64; 2]]| -> Vec<f64> {
        let one = |&(reach, begins): &(usize, bool)| {
            let others = own[reach] + said[reach][usize::from(begins)];
            logistic(if begins { -others } else { others })
        };
        meeting.reaches.iter().map(one).collect()
    };
    for sweep in 0..SWEEPS {
        let mut change: f64 = 0.0;
        // There and back again, so that news crosses a long chain in one sweep.
        let order: Box<dyn Iterator<Item = &usize>> =
            if sweep % 2 == 0 { Box::new(speaking.iter()) } else { Box::new(speaking.iter().rev()) };
        for m in order {
            let meeting = &meetings[*m];
            let all = coming(meeting, &said);
            for (k, &(reach, begins)) in meeting.reaches.iter().enumerate() {
                let [with, without] = meeting.sums(&all, k, joining);
                let odds = (with / without).ln().clamp(-40.0, 40.0);
                let new = if begins { -odds } else { odds };
                let slot = &mut said[reach][usize::from(!begins)];
                // Half steps once loops are seen not to settle at once.
                let new = if sweep > 60 { 0.5 * (new + *slot) } else { new };
                change = change.max((new - *slot).abs());
                *slot = new;
            }
        }
        if change < SETTLED {
            break;
        }
    }
    // Bethe's ln Z: nodes, plus reaches, minus what both count.
    let mut ln_evidence = 0.0;
    for m in &speaking {
        let all = coming(&meetings[*m], &said);
        let [with, without] = meetings[*m].sums(&all, 0, joining);
        ln_evidence += (all[0] * with + (1.0 - all[0]) * without).ln();
    }
    for (own, [start, end]) in own.iter().zip(&said) {
        // p(x by all) over the messages' own normalisation, for each pair and for all three.
        let pair = |a: f64, b: f64| {
            (logistic(a) * logistic(b) + logistic(-a) * logistic(-b)).max(f64::MIN_POSITIVE).ln()
        };
        let three = logistic(*own) * logistic(*start) * logistic(*end)
            + logistic(-own) * logistic(-start) * logistic(-end);
        ln_evidence += three.max(f64::MIN_POSITIVE).ln() - pair(*start, own + end) - pair(*end, own + start);
    }
    let ln_odds = own.iter().zip(&said).map(|(own, [start, end])| own + start + end).collect();
    Belief { ln_odds, ln_evidence }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A tree of five reaches (two junctions of three) by running through all 32 senses.
    #[test]
    fn sums_on_a_tree_are_those_over_all_senses() {
        let meetings = [
            Meeting { reaches: vec![(0, false), (1, false), (2, true)], stem: vec![-1.0, -0.5, 0.0] },
            Meeting { reaches: vec![(2, false), (3, false), (4, true)], stem: vec![0.0, -2.0, -0.3] },
            Meeting { reaches: vec![(0, true)], stem: vec![0.0] },
        ];
        let own = [0.3, -0.2, 0.0, 1.0, -0.7];
        for joining in [0.9, 0.5, 0.1] {
            let mut sums = [[0.0f64; 2]; 5];
            let mut whole = 0.0;
            for senses in 0..32usize {
                let as_written = |r: usize| senses & (1 << r) != 0;
                let mut weight: f64 =
                    (0..5).map(|r| logistic(if as_written(r) { own[r] } else { -own[r] })).product();
                for meeting in &meetings[..2] {
                    let coming = (0..3)
                        .filter(|i| as_written(meeting.reaches[*i].0) != meeting.reaches[*i].1)
                        .fold(0, |bits, i| bits | 1 << i);
                    weight *= meeting.weight(coming, joining);
                }
                whole += weight;
                (0..5).for_each(|r| sums[r][usize::from(!as_written(r))] += weight);
            }
            let belief = weigh(&meetings, &own, joining);
            for (r, sum) in sums.iter().enumerate() {
                let want = (sum[0] / sum[1]).ln();
                crate::assert_close!(belief.ln_odds[r], want, 1e-9, "reach {r}, joining {joining}");
            }
            crate::assert_close!(belief.ln_evidence, whole.ln(), 1e-9, "evidence for joining {joining}");
        }
    }
}
