//! The outline of a set of cells as rings through their corners.

use crate::ground::{Point, Polygon, Stopped, Work};

use super::paths::pause;

/// Ways along a cell's sides: up, right, down, left; each the next after a turn to the right.
const WAYS: [(isize, isize); 4] = [(0, -1), (1, 0), (0, 1), (-1, 0)];

/// The outline of the cells for which `is_in(col, row)` holds within columns and rows; cells that touch at a
/// corner only belong together, so that connected cells have one outer ring. Corners in pixels; rings keep only
/// points where they turn.
pub(super) fn outline(
    cols: std::ops::Range<usize>,
    rows: std::ops::Range<usize>,
    is_in: impl Fn(usize, usize) -> bool,
    work: &Work,
) -> Result<Polygon, Stopped> {
    let inside = |col: isize, row: isize| {
        let (Ok(col), Ok(row)) = (usize::try_from(col), usize::try_from(row)) else { return false };
        cols.contains(&col) && rows.contains(&row) && is_in(col, row)
    };
    // Left sides: every ring has one, and on the outer ring lies the first.
    let mut steps = 0;
    let mut sides: Vec<(usize, usize)> = Vec::new();
    for row in rows.clone() {
        let mut before = false;
        for col in cols.clone() {
            pause(&mut steps, work)?;
            let here = is_in(col, row);
            if here && !before {
                sides.push((row, col));
            }
            before = here;
        }
    }
    let mut walked = vec![false; sides.len()];
    let mut rings = Vec::new();
    for i in 0..sides.len() {
        if !walked[i] {
            rings.push(ring(sides[i], &sides, &mut walked, inside, &mut steps, work)?);
        }
    }
    let mut rings = rings.into_iter();
    Ok(Polygon { outer: rings.next().unwrap_or_default(), holes: rings.collect() })
}

/// Walks a ring with its cells on the right, beginning up the left side of a cell.
fn ring(
    start: (usize, usize),
    sides: &[(usize, usize)],
    walked: &mut [bool],
    inside: impl Fn(isize, isize) -> bool,
    steps: &mut usize,
    work: &Work,
) -> Result<Vec<Point>, Stopped> {
    let (row, col) = (start.0 as isize, start.1 as isize);
    let mut ring = Vec::new();
    // The corner reached, and the way that led there.
    let (mut x, mut y, mut way) = (col, row + 1, 0usize);
    loop {
        pause(steps, work)?;
        if way == 0 {
            // Up from (x, y) along the left side of the cell (x, y − 1).
            let side = ((y - 1) as usize, x as usize);
            if let Ok(i) = sides.binary_search(&side) {
                if walked[i] {
                    return Ok(ring);
                }
                walked[i] = true;
            }
        }
        (x, y) = (x + WAYS[way].0, y + WAYS[way].1);
        // Cells ahead to the left and to the right of the way.
        let [left, right] = match way {
            0 => [(x - 1, y - 1), (x, y - 1)],
            1 => [(x, y - 1), (x, y)],
            2 => [(x, y), (x - 1, y)],
            _ => [(x - 1, y), (x - 1, y - 1)],
        }
        .map(|(col, row)| inside(col, row));
        let next = if left {
            (way + 3) % 4
        } else if right {
            way
        } else {
            (way + 1) % 4
        };
        if next != way {
            ring.push(Point::new(x as f64, y as f64));
        }
        way = next;
    }
}
