//! Lines of equal value on a grid of cell centres, joined into long runs.

use std::collections::BTreeMap;

/// The lines on which `values` (row by row, `columns` wide) equal `level`, in units of columns and rows;
/// what lies beyond the outermost cells counts as below, so that lines close round the edge.
pub(super) fn contour(values: &[f64], columns: usize, level: f64) -> Vec<Vec<[f64; 2]>> {
    let rows = values.len() / columns.max(1);
    let inside = |i: i64, j: i64| i >= 0 && j >= 0 && i < columns as i64 && j < rows as i64;
    let value = |i: i64, j: i64| if inside(i, j) { values[j as usize * columns + i as usize] } else { 0.0 };
    // Where the line crosses the edge between two neighbouring centres; beyond the grid it follows the
    // border of the cell, half a step out.
    let cross = |a: (i64, i64), b: (i64, i64)| -> [f64; 2] {
        let (va, vb) = (value(a.0, a.1), value(b.0, b.1));
        let share = if inside(a.0, a.1) && inside(b.0, b.1) { (level - va) / (vb - va) } else { 0.5 };
        let mix = |p: i64, q: i64| p as f64 + share * (q - p) as f64;
        [mix(a.0, b.0), mix(a.1, b.1)]
    };
    let mut links: BTreeMap<Edge, Vec<Edge>> = BTreeMap::new();
    let mut places: BTreeMap<Edge, [f64; 2]> = BTreeMap::new();
    for j in -1..rows as i64 {
        for i in -1..columns as i64 {
            let corners = [(i, j), (i + 1, j), (i + 1, j + 1), (i, j + 1)];
            let mut crossed = Vec::new();
            for k in 0..4 {
                let (a, b) = (corners[k], corners[(k + 1) % 4]);
                if (value(a.0, a.1) >= level) != (value(b.0, b.1) >= level) {
                    let edge = (a.min(b), a.max(b));
                    places.insert(edge, cross(a, b));
                    crossed.push(edge);
                }
            }
            for pair in crossed.chunks_exact(2) {
                links.entry(pair[0]).or_default().push(pair[1]);
                links.entry(pair[1]).or_default().push(pair[0]);
            }
        }
    }
    let mut lines = Vec::new();
    while let Some(start) = links.keys().next().copied() {
        let (mut line, mut at) = (vec![places[&start]], start);
        while let Some(next) = links.get_mut(&at).and_then(Vec::pop) {
            if let Some(back) = links.get_mut(&next)
                && let Some(k) = back.iter().position(|e| *e == at)
            {
                back.remove(k);
            }
            line.push(places[&next]);
            at = next;
        }
        links.retain(|_, to| !to.is_empty());
        if line.len() > 1 {
            lines.push(line);
        } else {
            links.remove(&start);
        }
    }
    lines
}

/// Two neighbouring centres, the lesser first.
type Edge = ((i64, i64), (i64, i64));

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_hill_has_one_closed_line_through_its_level() {
        let values: Vec<f64> = (0..9)
            .flat_map(|j| (0..11).map(move |i| 10.0 - f64::hypot(f64::from(i) - 5.0, f64::from(j) - 4.0)))
            .collect();
        let lines = contour(&values, 11, 7.0);
        assert_eq!(lines.len(), 1);
        assert_eq!(lines[0].first(), lines[0].last());
        for p in &lines[0] {
            crate::assert_close!(f64::hypot(p[0] - 5.0, p[1] - 4.0), 3.0, 0.15, "on the circle");
        }
    }

    #[test]
    fn a_plateau_at_the_corner_closes_along_the_border() {
        let lines = contour(&[1.0, 0.0, 0.0, 0.0], 2, 0.5);
        assert_eq!(lines.len(), 1);
        assert_eq!(lines[0].first(), lines[0].last());
        let least = lines[0].iter().map(|p| p[0].min(p[1])).fold(f64::INFINITY, f64::min);
        crate::assert_close!(least, -0.5, 1e-12, "half a cell out");
    }
}
