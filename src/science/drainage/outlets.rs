//! Outlets the user picked, and the ground above them.

use crate::ground::{Point, Stopped, Work};

use super::accumulate::Areas;
use super::paths::{Paths, pause};

/// The cell of greatest area within `reach` cells of a picked point; the nearest of equals, then the first.
/// `None` where there is no ground.
pub(super) fn snapped(pick: Point, area: &Areas, paths: Paths, reach: usize) -> Option<usize> {
    if !(pick.x.is_finite() && pick.y.is_finite()) {
        return None;
    }
    let radius = reach as f64;
    let span = |at: f64, n: usize| {
        let from = (at - radius).floor().clamp(0.0, n as f64) as usize;
        from..((at + radius).floor() + 1.0).clamp(0.0, n as f64) as usize
    };
    let own = Point::new(pick.x.floor() + 0.5, pick.y.floor() + 0.5);
    let mut best: Option<(f64, f64, usize)> = None;
    for row in span(pick.y, paths.height) {
        for col in span(pick.x, paths.width) {
            let cell = row * paths.width + col;
            let distance = paths.centre(cell).distance(own);
            let a = area.of(cell);
            if !paths.is_ground(cell) || distance > radius || !a.is_finite() {
                continue;
            }
            if best.is_none_or(|(most, near, _)| a > most || a == most && distance < near) {
                best = Some((a, distance, cell));
            }
        }
    }
    best.map(|(.., cell)| cell)
}

/// The snapped cells of all picks, ascending, each once.
pub(super) fn all_snapped(picks: &[Point], area: &Areas, paths: Paths, reach: usize) -> Vec<usize> {
    let mut cells: Vec<usize> = picks.iter().filter_map(|p| snapped(*p, area, paths, reach)).collect();
    cells.sort_unstable();
    cells.dedup();
    cells
}

/// Calls `visit` for every cell that drains through `outlet`, itself first; `visit` says whether to go on above
/// it.
pub(super) fn climb(
    outlet: usize,
    paths: Paths,
    work: &Work,
    mut visit: impl FnMut(usize) -> bool,
) -> Result<(), Stopped> {
    let mut waiting = vec![outlet];
    let mut steps = 0;
    while let Some(cell) = waiting.pop() {
        pause(&mut steps, work)?;
        if visit(cell) {
            waiting.extend(paths.donors(cell));
        }
    }
    Ok(())
}

/// Which cells drain through one of the outlets.
pub(super) fn above(outlets: &[usize], paths: Paths, work: &Work) -> Result<Vec<bool>, Stopped> {
    let mut kept = vec![false; paths.len()];
    for outlet in outlets {
        climb(*outlet, paths, work, |cell| !std::mem::replace(&mut kept[cell], true))?;
    }
    Ok(kept)
}
