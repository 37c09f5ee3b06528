//! What does not belong: spurs of the thinning, and lone short pieces.

use crate::ground::{Point, Stopped, Work};

use super::graph::{Sketch, Stretch};

/// ln of the greatest number of noise chains as good in the whole image, for a part or a branch to stay: 0.01.
const GREATEST_CHANCE: f64 = -4.6;
/// Links between junctions are judged when longer than so many widths.
const LINK_WIDTHS: f64 = 4.0;
/// Stretches weaker than this share of the strength that half of the length reaches are texture.
const WEAKEST: f64 = 0.25;
/// Arms nearer than this are not told apart, pixels.
const LEAST_ISLAND: f64 = 6.0;

impl Sketch {
    /// Drops free-ended stretches off a junction that are shorter than `half_widths` half-widths of the widest
    /// stretch there, the shortest of a junction first, until none is left; joins what then meets alone.
    pub(super) fn prune_spurs(&mut self, half_widths: f64) {
        loop {
            let at = self.at_nodes();
            let mut gone = vec![false; self.stretches.len()];
            for meeting in at.iter().filter(|meeting| meeting.len() >= 3) {
                if meeting.iter().any(|s| gone[*s]) {
                    continue;
                }
                let is_free = |s: &usize| self.stretches[*s].ends.iter().any(|n| at[*n].len() == 1);
                let shortest = meeting
                    .iter()
                    .copied()
                    .filter(is_free)
                    .map(|s| (self.stretches[s].length(), s))
                    .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
                let Some((length, spur)) = shortest else { continue };
                let widest = meeting.iter().map(|s| self.stretches[*s].width).fold(0.0, f64::max);
                if length < half_widths * 0.5 * widest && !self.goes_on(spur, meeting) {
                    gone[spur] = true;
                }
            }
            if !gone.contains(&true) {
                return;
            }
            self.drop_where(&gone);
            self.join_through();
        }
    }

    /// Whether a stretch is as wide as the widest other of a meeting and twice as wide as the next: it is the trunk.
    fn goes_on(&self, stretch: usize, meeting: &[usize]) -> bool {
        let mut others: Vec<f64> =
            meeting.iter().filter(|s| **s != stretch).map(|s| self.stretches[*s].width).collect();
        others.sort_by(|a, b| b.total_cmp(a));
        let width = self.stretches[stretch].width;
        let is_long = self.stretches[stretch].length() >= width;
        is_long && matches!(others[..], [first, second, ..] if width >= 0.7 * first && width >= 2.0 * second)
    }

    /// Of two stretches between the same nodes that stay within `widths` of their width of each other, the weaker goes;
    /// so does one that returns to its own node within that reach.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn drop_doubles(
        &mut self,
        widths: f64,
        strength: impl Fn(&Stretch) -> f64,
        work: &Work,
    ) -> Result<(), Stopped> {
        loop {
            let mut gone = vec![false; self.stretches.len()];
            let mut by_ends = std::collections::BTreeMap::new();
            for (i, s) in self.stretches.iter().enumerate() {
                by_ends
                    .entry((s.ends[0].min(s.ends[1]), s.ends[0].max(s.ends[1])))
                    .or_insert_with(Vec::new)
                    .push(i);
            }
            for (ends, same) in by_ends {
                work.advance(0)?;
                for (k, &i) in same.iter().enumerate() {
                    let one = &self.stretches[i];
                    let near = (widths * one.width).max(LEAST_ISLAND);
                    if ends.0 == ends.1 {
                        gone[i] = one.line.iter().all(|p| p.distance(one.line[0]) < near);
                    }
                    for &j in &same[k + 1..] {
                        let two = &self.stretches[j];
                        let near = near.max(widths * two.width);
                        let close =
                            |p: &Point, other: &Stretch| other.line.iter().any(|q| q.distance(*p) < near);
                        if one.line.iter().all(|p| close(p, two)) && two.line.iter().all(|p| close(p, one)) {
                            gone[if strength(one) < strength(two) { i } else { j }] = true;
                        }
                    }
                }
            }
            if !gone.contains(&true) {
                return Ok(());
            }
            self.drop_where(&gone);
            self.join_through();
        }
    }

    /// Drops parts, and then free-ended branches and long links, that noise would give too. `ln_chance` tells of how many chains of
    /// noise as good the image holds.
    pub(super) fn drop_chance(
        &mut self,
        ln_chance: impl Fn(&[&Stretch]) -> f64,
        work: &Work,
    ) -> Result<(), Stopped> {
        let part = self.parts();
        let mut members: Vec<Vec<&Stretch>> = vec![Vec::new(); self.nodes.len()];
        for stretch in &self.stretches {
            members[part[stretch.ends[0]]].push(stretch);
        }
        work.advance(0)?;
        let by_chance: Vec<bool> =
            members.iter().map(|m| !m.is_empty() && ln_chance(m) > GREATEST_CHANCE).collect();
        let gone: Vec<bool> = self.stretches.iter().map(|s| by_chance[part[s.ends[0]]]).collect();
        self.drop_where(&gone);
        loop {
            work.advance(0)?;
            let at = self.at_nodes();
            let is_branch = |s: &Stretch| {
                let [a, b] = s.ends.map(|n| at[n].len());
                let is_free = (a == 1) != (b == 1) && a.max(b) >= 3;
                is_free || (a.min(b) >= 3 && s.length() > LINK_WIDTHS * s.width)
            };
            let gone: Vec<bool> =
                self.stretches.iter().map(|s| is_branch(s) && ln_chance(&[s]) > GREATEST_CHANCE).collect();
            if !gone.contains(&true) {
                return Ok(());
            }
            self.drop_where(&gone);
            self.join_through();
        }
    }

    /// Drops stretches whose `strength` is below a share of what half of the length found reaches: a network is of one
    /// kind, the texture of the ground is weaker.
    pub(super) fn drop_weak(&mut self, strength: impl Fn(&Stretch) -> f64) {
        let mut by: Vec<(f64, f64)> = self.stretches.iter().map(|s| (strength(s), s.length())).collect();
        let strengths: Vec<f64> = by.iter().map(|s| s.0).collect();
        by.sort_by(|a, b| b.0.total_cmp(&a.0));
        let half = 0.5 * by.iter().map(|s| s.1).sum::<f64>();
        let mut sum = 0.0;
        let typical = by.iter().find(|s| {
            sum += s.1;
            sum >= half
        });
        let Some(&(typical, _)) = typical else { return };
        let gone: Vec<bool> = strengths.iter().map(|s| *s < WEAKEST * typical).collect();
        self.drop_where(&gone);
        self.join_through();
    }

    /// Drops each part whose found length is below `widths` of its mean width, and parts without any found line.
    pub(super) fn drop_lone(&mut self, widths: f64) {
        let part = self.parts();
        let mut length = vec![0.0; self.nodes.len()];
        let mut area = vec![0.0; self.nodes.len()];
        for stretch in self.stretches.iter().filter(|s| s.bridge.is_none()) {
            let root = part[stretch.ends[0]];
            length[root] += stretch.length();
            area[root] += stretch.length() * stretch.width;
        }
        let lone = |node: usize| {
            let (length, area) = (length[part[node]], area[part[node]]);
            length <= 0.0 || length * length < widths * area
        };
        let gone: Vec<bool> = self.stretches.iter().map(|s| lone(s.ends[0])).collect();
        self.drop_where(&gone);
    }
}
