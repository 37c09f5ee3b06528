//! Channels from routed elevation as a network.

use crate::ground::{
    FlowSense, Grid, LengthUnit, Network, NetworkNode, Place, Point, Polyline, Reach, ReachOrigin, Station,
    Stopped, Work,
};
use crate::numeric::quantile;
use crate::numeric::sum::{Sum, total};

use super::accumulate::Areas;
use super::cells::Cells;
use super::drop;
use super::heads::{self, DropRow, HeadRule};
use super::outlets;
use super::paths::{Paths, pause};
use super::routing::Receivers;
use super::tree::{Choice, Tree};

/// What the user wants of the channels.
#[derive(Clone, Debug, PartialEq)]
pub struct ChannelAsk {
    pub rule: HeadRule,
    /// m²; `None` = proposed by the constant-drop test.
    pub threshold_m2: Option<f64>,
    /// Where the network ends, pixels; none = every channel that leaves the ground.
    pub outlets: Vec<Point>,
    /// A picked outlet is moved to the greatest area within so many cells.
    pub snap_cells: usize,
    /// Standard deviation of the smoothing before curvature, cells.
    pub curvature_scale_cells: f64,
}

/// Channels at the threshold used, and at half and twice of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Channels {
    pub rule: HeadRule,
    pub threshold_m2: f64,
    /// Whether the threshold is the test's proposal. Else it is stated or, when none is stated and
    /// `proposed_m2` is `None`, [`FALLBACK_SHARE`] of the greatest.
    pub is_proposed: bool,
    /// Proposed by the constant-drop test; `None` when no threshold passes.
    pub proposed_m2: Option<f64>,
    pub drops: Vec<DropRow>,
    pub network: Network,
    pub half: Network,
    pub twice: Network,
}

/// Least threshold of the constant-drop test, mean cells.
const LEAST_CELLS: f64 = 10.0;
/// The same for curved cells, which are about half of all.
const LEAST_CURVED_CELLS: f64 = 5.0;
/// Without a stated threshold and with none that passes: what a cell that drains this share of the greatest
/// area has.
pub const FALLBACK_SHARE: f64 = 0.01;

/// Channels where the rule's quantity reaches the threshold, and below. Lines run through the centres of cells
/// in pixels of the grid, a station a cell; lengths are pixels until [`Network::on_ground`]. Half and twice carry
/// no stations.
///
/// The inner error says in words why there are no channels.
///
/// # Errors
/// [`Stopped`].
pub fn channels(
    surface: &Grid<f32>,
    cells: &Cells,
    receivers: &Receivers,
    area: &Areas,
    place: &Place,
    ask: &ChannelAsk,
    work: &Work,
) -> Result<Result<Channels, String>, Stopped> {
    work.phase("Channels", 0);
    let paths = Paths::new(receivers, cells)
        .filter(|p| [surface.len(), area.len()] == [p.len(); 2] && surface.width() == p.width);
    let Some(paths) = paths else {
        return Ok(Err("Elevation, flow and areas are not of one size.".into()));
    };
    let picked = outlets::all_snapped(&ask.outlets, area, paths, ask.snap_cells);
    if picked.is_empty() && !ask.outlets.is_empty() {
        return Ok(Err("The picked outlets lie on no ground.".into()));
    }
    let kept = if picked.is_empty() { None } else { Some(outlets::above(&picked, paths, work)?) };
    let is_kept = |cell: &usize| paths.is_ground(*cell) && kept.as_ref().is_none_or(|kept| kept[*cell]);
    let support = heads::support(ask.rule, surface, area, paths, ask.curvature_scale_cells, work)?;

    let (mut count, mut greatest, mut most_area, mut steps) = (0usize, 0.0f64, 0.0f64, 0);
    let mut by_row = vec![0usize; paths.height];
    for cell in (0..paths.len()).filter(is_kept) {
        pause(&mut steps, work)?;
        count += 1;
        by_row[cell / paths.width] += 1;
        greatest = greatest.max(support[cell]);
        most_area = most_area.max(area.of(cell));
    }
    if count == 0 {
        return Ok(Err("There is no ground with an elevation.".into()));
    }
    let ground_m2 = total(by_row.iter().zip(&cells.area).map(|(n, a)| *n as f64 * a));
    let mean_cell = ground_m2 / count as f64;
    let choice = Choice { support: &support, threshold: 0.0, kept: kept.as_deref(), picked: &picked };
    let least = match ask.rule {
        HeadRule::Area => LEAST_CELLS * mean_cell,
        HeadRule::CurvedArea => LEAST_CURVED_CELLS * mean_cell,
        HeadRule::SlopeArea => {
            let mut squares = Sum::default();
            for cell in (0..paths.len()).filter(is_kept) {
                pause(&mut steps, work)?;
                squares.add(heads::slope(surface, paths, cell).powi(2));
            }
            LEAST_CELLS * mean_cell * squares.value() / count as f64
        }
    };
    let drops = drop::rows(surface, paths, choice, least, ground_m2, work)?;
    let proposed_m2 = drop::proposed(&drops);
    let stated = ask.threshold_m2.filter(|t| *t > 0.0 && t.is_finite());
    let threshold_m2 = stated.or(proposed_m2).unwrap_or_else(|| {
        let share = FALLBACK_SHARE * most_area;
        let near = |c: &usize| (0.5 * share..=2.0 * share).contains(&area.of(*c));
        let mut values: Vec<f64> =
            (0..paths.len()).filter(is_kept).filter(near).map(|c| support[c]).collect();
        match ask.rule {
            HeadRule::Area => share,
            _ if values.is_empty() => FALLBACK_SHARE * greatest,
            _ => quantile::median(&mut values),
        }
    });
    if !(threshold_m2 > 0.0 && threshold_m2 <= greatest) {
        let (asked, most) = (in_words(threshold_m2, place), in_words(greatest, place));
        return Ok(Err(match ask.rule {
            HeadRule::Area => format!("No cell drains {asked}: the most is {most}."),
            HeadRule::SlopeArea => {
                format!("Area times slope squared reaches {asked} nowhere: the most is {most}.")
            }
            HeadRule::CurvedArea => {
                format!("No cell has {asked} of curved ground above: the most is {most}.")
            }
        }));
    }
    let drawn = |factor: f64, with_stations: bool| -> Result<Network, Stopped> {
        let choice = Choice { threshold: factor * threshold_m2, ..choice };
        let tree = Tree::new(paths, choice, work)?;
        network(surface, area, paths, choice, &tree, with_stations, work)
    };
    Ok(Ok(Channels {
        rule: ask.rule,
        threshold_m2,
        is_proposed: stated.is_none() && proposed_m2.is_some(),
        proposed_m2,
        drops,
        network: drawn(1.0, true)?,
        half: drawn(0.5, false)?,
        twice: drawn(2.0, false)?,
    }))
}

/// The tree as a network: a node for each, a reach for each way down.
fn network(
    surface: &Grid<f32>,
    area: &Areas,
    paths: Paths,
    choice: Choice,
    tree: &Tree,
    with_stations: bool,
    work: &Work,
) -> Result<Network, Stopped> {
    let z = |cell: usize| Some(f64::from(surface.values()[cell]));
    let node = |cell: &usize| NetworkNode { at: paths.centre(*cell), elevation_m: z(*cell) };
    let mut reaches = Vec::new();
    let mut steps = 0;
    for (from, down) in tree.down.iter().enumerate() {
        let Some((to, _)) = *down else { continue };
        let mut way = vec![tree.nodes[from]];
        while let Some(next) = choice.next(paths, way[way.len() - 1]) {
            way.push(next);
            pause(&mut steps, work)?;
            if next == tree.nodes[to] {
                break;
            }
        }
        let line = Polyline(way.iter().map(|cell| paths.centre(*cell)).collect());
        let mut along = 0.0;
        let mut before = line.0[0];
        let station = |cell: &usize| {
            let at = paths.centre(*cell);
            along += before.distance(at);
            before = at;
            let area_m2 = Some(area.of(*cell));
            Station { at, along, elevation_m: z(*cell), area_m2, ..Station::default() }
        };
        let stations = if with_stations { way.iter().map(station).collect() } else { Vec::new() };
        reaches.push(Reach {
            sense: FlowSense::of_elevation(),
            stations,
            ..Reach::drawn(from, to, line, ReachOrigin::Elevation)
        });
    }
    Ok(Network { nodes: tree.nodes.iter().map(node).collect(), reaches }.ordered())
}

/// An area in the unit of the place.
fn in_words(area: f64, place: &Place) -> String {
    match place.unit() {
        LengthUnit::Pixel => format!("{area:.0} px²"),
        LengthUnit::Metre if area >= 1e4 => format!("{:.3} km²", area / 1e6),
        LengthUnit::Metre => format!("{area:.1} m²"),
    }
}
