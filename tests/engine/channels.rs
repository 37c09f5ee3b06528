//! Channels, orders and basins on routed ground that is drawn by hand or by chance.

use proptest::prelude::*;
use rand::Rng as _;
use ventifact::ground::{Grid, Network, Place, Point, Seed, Work};
use ventifact::science::drainage::accumulate::Areas;
use ventifact::science::drainage::basins::{Basin, basins};
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::extract::{ChannelAsk, Channels, channels};
use ventifact::science::drainage::heads::HeadRule;
use ventifact::science::drainage::routing::{OUT, Receivers, STEPS, VOID};

/// Ground with its flow; elevation is 1 m a step from the end.
struct Routed {
    surface: Grid<f32>,
    receivers: Receivers,
    area: Grid<f64>,
    cells: Cells,
}

fn square_cells(rows: usize, size: f64) -> Cells {
    Cells {
        across: vec![size; rows],
        down: vec![size; rows.saturating_sub(1)],
        diagonal: vec![[size * std::f64::consts::SQRT_2; 2]; rows.saturating_sub(1)],
        area: vec![size * size; rows],
    }
}

fn areas(grid: &Grid<f64>) -> Areas {
    Areas::from_parts(grid.width(), grid.height(), grid.values().to_vec())
}

impl Routed {
    /// From a drawing: arrows, `o` where water leaves, a dot for missing ground.
    fn drawn(rows: &[&str]) -> Self {
        let code = |c: char| match c {
            '.' => VOID,
            'o' => OUT,
            arrow => "→↘↓↙←↖↑↗".chars().position(|a| a == arrow).expect("an arrow") as u8,
        };
        let codes: Vec<Vec<u8>> = rows.iter().map(|r| r.chars().map(code).collect()).collect();
        let grid = Grid::from_fn(codes[0].len(), codes.len(), |c, r| codes[r][c]);
        Self::of(Receivers(grid), None)
    }

    fn of(receivers: Receivers, surface: Option<Grid<f32>>) -> Self {
        let (width, height) = (receivers.0.width(), receivers.0.height());
        let mut area = Grid::filled(width, height, 0.0);
        let mut steps = Grid::filled(width, height, 0.0f32);
        for row in 0..height {
            for col in 0..width {
                if receivers.0.at(col, row) == VOID {
                    continue;
                }
                let mut at = Some((col, row));
                let mut count = 0.0;
                while let Some((c, r)) = at {
                    area.values_mut()[r * width + c] += 1.0;
                    at = receivers.next(c, r);
                    count += 1.0;
                }
                steps.values_mut()[row * width + col] = count;
            }
        }
        Self { surface: surface.unwrap_or(steps), receivers, area, cells: square_cells(height, 1.0) }
    }

    /// A rough surface routed to the steepest neighbour, with pits and missing cells.
    fn random(width: usize, height: usize, seed: u64) -> Self {
        let mut random = Seed(seed).stream("test", 0);
        let tilt: f64 = random.random_range(0.0..3.0);
        let mut z = Grid::from_fn(width, height, |c, r| {
            (tilt * (c as f64 + 0.7 * r as f64) + random.random_range(0.0..4.0)) as f32
        });
        let hole = (random.random_range(0..width), random.random_range(0..height));
        z.mask_where(|c, r| (c, r) != hole);
        let steepest = |c: usize, r: usize| {
            let Some(here) = z.get(c, r) else { return VOID };
            let fall = |k: &usize| {
                let (dx, dy) = STEPS[*k];
                let to = z.get(c.checked_add_signed(dx)?, r.checked_add_signed(dy)?)?;
                Some((here - to) / ((dx * dx + dy * dy) as f32).sqrt())
            };
            let best = (0..8)
                .filter(|k| fall(k).is_some_and(|f| f > 0.0))
                .max_by(|a, b| fall(a).partial_cmp(&fall(b)).expect("finite falls").then(b.cmp(a)));
            best.map_or(OUT, |k| k as u8)
        };
        let codes = Grid::from_fn(width, height, steepest);
        Self::of(Receivers(codes), Some(z))
    }

    /// Turned by 90° clockwise on the image.
    fn turned(&self) -> Self {
        let (w, h) = (self.surface.width(), self.surface.height());
        // (c, r) of the old lies at (h − 1 − r, c) of the new.
        fn turn<T: Copy>(grid: &Grid<T>, h: usize, w: usize, f: impl Fn(T) -> T) -> Grid<T> {
            let mut new = Grid::from_fn(h, w, |c, r| f(grid.at(r, h - 1 - c)));
            new.mask_where(|c, r| grid.is_valid(r, h - 1 - c));
            new
        }
        let receivers = Receivers(turn(&self.receivers.0, h, w, |k| if k < 8 { (k + 2) % 8 } else { k }));
        Self {
            surface: turn(&self.surface, h, w, |z| z),
            receivers,
            area: turn(&self.area, h, w, |a| a),
            cells: square_cells(w, 1.0),
        }
    }

    fn channels(&self, ask: &ChannelAsk) -> Result<Channels, String> {
        let place = Place::plane([1.0, 1.0], 0.0, ventifact::ground::Body::earth()).unwrap();
        let area = areas(&self.area);
        channels(&self.surface, &self.cells, &self.receivers, &area, &place, ask, &Work::quiet()).unwrap()
    }

    fn basins(&self, network: &Network, outlets: &[Point], most: usize) -> Vec<Basin> {
        let Self { surface, receivers, area, cells } = self;
        basins(surface, cells, receivers, &areas(area), network, outlets, 0, most, &Work::quiet()).unwrap()
    }
}

fn ask(threshold: f64) -> ChannelAsk {
    ChannelAsk {
        rule: HeadRule::Area,
        threshold_m2: Some(threshold),
        outlets: Vec::new(),
        snap_cells: 0,
        curvature_scale_cells: 1.0,
    }
}

/// Where each reach begins and ends, with its order and number of cells; sorted.
fn told(network: &Network) -> Vec<([u64; 4], Option<u32>, usize)> {
    let mut told: Vec<_> = network
        .reaches
        .iter()
        .map(|r| {
            let (a, b) = (network.nodes[r.from].at, network.nodes[r.to].at);
            let cells = [a.x, a.y, b.x, b.y].map(|v| v as u64);
            (cells, r.order.map(|o| o.strahler), r.line.0.len())
        })
        .collect();
    told.sort();
    told
}

/// Two forks that meet: four heads, two of order 2, one of order 3.
const FORKS: [&str; 9] =
    ["↘.↙.↘.↙", "→↓←.→↓←", "→↘←.→↙←", "..↘.↙..", "...↓...", "→→→↓←←←", "...↓...", "...↓...", "...o..."];

#[test]
fn a_drawn_network_has_its_nodes_lengths_and_orders() {
    let ground = Routed::drawn(&FORKS);
    let found = ground.channels(&ask(1.0)).unwrap();
    let n = &found.network;
    // At one cell every arrow is a channel: 14 sources; the last channel is of order 3.
    assert_eq!((n.heads().len(), n.outlets().len(), n.greatest_order(), n.loops()), (14, 1, Some(3), 0));
    let last = n.reaches.iter().find(|r| r.to == n.outlets()[0]).unwrap();
    assert_eq!(last.order.map(|o| (o.strahler, o.shreve)), Some((3, 14)));
    assert_eq!((last.line.0.len(), last.length), (4, 3.0));
    // The junction in row 5 gathers three at once and is one node.
    let crowd = n.nodes.iter().position(|n| n.at == Point::new(3.5, 5.5)).unwrap();
    assert_eq!(n.incoming()[crowd].len(), 3);
    assert_eq!(n.nodes[crowd].elevation_m, Some(4.0));
    let areas: Vec<_> = last.stations.iter().map(|s| s.area_m2.unwrap()).collect();
    assert_eq!(areas, [26.0, 27.0, 28.0, 29.0]);

    // At six cells two channels meet and leave: (cells of the reach's ends, order, cells).
    let six = ground.channels(&ask(6.0)).unwrap();
    assert_eq!(
        told(&six.network),
        [([1, 2, 3, 4], Some(1), 3), ([3, 4, 3, 8], Some(2), 5), ([5, 2, 3, 4], Some(1), 3)]
    );
    assert_eq!(told(&six.half).len(), 6, "at three cells the sides show");
    assert_eq!(told(&six.twice), [([3, 4, 3, 8], Some(1), 5)]);
    assert!(ground.channels(&ask(30.0)).is_err_and(|why| why.contains("30")));
}

#[test]
fn picked_outlets_keep_their_ground_only() {
    let ground = Routed::drawn(&FORKS);
    let pick = |x: f64, y: f64, snap_cells: usize, threshold: f64| {
        ground.channels(&ChannelAsk { outlets: vec![Point::new(x, y)], snap_cells, ..ask(threshold) })
    };
    // The left fork alone, picked beside its lower end.
    let left = pick(1.2, 3.9, 1, 2.0).unwrap().network;
    assert!(left.nodes.iter().all(|n| n.at.x < 4.0 && n.at.y < 4.0));
    assert_eq!(left.nodes[left.outlets()[0]].at, Point::new(2.5, 3.5));
    assert!(pick(3.5, 1.5, 0, 1.0).is_err(), "no ground there");
    // An outlet halfway is a node of the network of the one below.
    let both = ChannelAsk { outlets: vec![Point::new(3.5, 8.5), Point::new(3.5, 6.5)], ..ask(6.0) };
    let network = ground.channels(&both).unwrap().network;
    assert_eq!(network.reaches.len(), 4);
    let parts = ground.basins(&network, &both.outlets, 9);
    assert_eq!(parts.iter().map(|b| b.area_m2).collect::<Vec<_>>(), [29.0, 27.0]);
    assert_eq!(parts[1].outline.area(), 27.0);
}

#[test]
fn basins_have_divides_and_elevations() {
    let ground = Routed::drawn(&["→o.→o", "↗↑.↗↑", "....↑"]);
    let network = ground.channels(&ask(2.0)).unwrap().network;
    let found = ground.basins(&network, &[], 9);
    assert_eq!(found.len(), 2);
    let right = &found[0];
    assert_eq!((right.area_m2, right.outlet), (5.0, Point::new(4.5, 0.5)));
    assert!(right.node.is_some() && right.touches_edge);
    assert_eq!(right.outline.area(), 5.0);
    assert_eq!(right.outline.outer.len(), 6);
    assert_eq!((right.elevations.len(), right.elevations[0], right.elevations[100]), (101, 3.0, 1.0));
    // One cell at 3 m, three at 2 m, one at 1 m.
    assert!((right.elevations[30] - 2.0).abs() < 1e-3 && (right.elevations[10] - 3.0).abs() < 1e-3);
}

#[test]
fn a_closed_basin_within_is_a_hole() {
    let ground = Routed::drawn(&["→→→→↓", "↑↘↓↙↓", "↑→o←↓", "↑↗↑↖↓", "→→→→o"]);
    let found = ground.basins(&Network::default(), &[], 9);
    assert_eq!(found.iter().map(|b| b.area_m2).collect::<Vec<_>>(), [16.0, 9.0]);
    assert_eq!((found[0].outline.holes.len(), found[0].outline.area()), (1, 16.0));
    assert!(!found[1].touches_edge && found[0].touches_edge);
    assert!(
        !found[0].outline.contains(Point::new(2.5, 2.5)) && found[1].outline.contains(Point::new(2.5, 2.5))
    );
    assert_eq!(found[0].node, None);
}

#[test]
fn degenerate_ground_gives_a_reason() {
    let one = Routed::drawn(&["o"]);
    assert_eq!(one.channels(&ask(1.0)).map(|c| c.network.reaches.len()), Ok(0));
    assert_eq!(one.basins(&Network::default(), &[], 5).len(), 1);
    let none = Routed::drawn(&[".."]);
    assert!(none.channels(&ask(1.0)).is_err());
    assert_eq!(none.basins(&Network::default(), &[], 5), vec![]);
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    #[test]
    fn random_ground_keeps_the_rules(seed in 0u64..u64::MAX, width in 1usize..40, height in 1usize..40) {
        let ground = Routed::random(width, height, seed);
        for rule in [HeadRule::Area, HeadRule::SlopeArea, HeadRule::CurvedArea] {
            let Ok(found) = ground.channels(&ChannelAsk { rule, ..ask(4.0) }) else { continue };
            let network = &found.network;
            prop_assert_eq!(network.loops(), 0);
            prop_assert!(network.outgoing().iter().all(|out| out.len() <= 1));
            for reach in &network.reaches {
                prop_assert!(reach.line.0.len() >= 2 && reach.length > 0.0);
                prop_assert_eq!(reach.line.0[0], network.nodes[reach.from].at);
                prop_assert_eq!(reach.line.0[reach.line.0.len() - 1], network.nodes[reach.to].at);
                if rule == HeadRule::Area {
                    prop_assert!(reach.stations.iter().all(|s| s.area_m2 >= Some(4.0)));
                }
            }
            let cells = |n: &Network| -> std::collections::BTreeSet<[u64; 2]> {
                n.reaches.iter().flat_map(|r| r.line.0.iter().map(|p| [p.x as u64, p.y as u64])).collect()
            };
            let (half, once, twice) = (cells(&found.half), cells(network), cells(&found.twice));
            prop_assert!(twice.is_subset(&once) && once.is_subset(&half));
        }
    }

    #[test]
    fn turning_the_ground_turns_the_network(seed in 0u64..u64::MAX, width in 2usize..30, height in 2usize..30) {
        let ground = Routed::random(width, height, seed);
        let turned = ground.turned();
        for rule in [HeadRule::Area, HeadRule::SlopeArea, HeadRule::CurvedArea] {
            // Without smoothing: sums of single precision depend on their order.
            let ask = ChannelAsk { rule, curvature_scale_cells: 0.0, ..ask(3.0) };
            let (Ok(a), Ok(b)) = (ground.channels(&ask), turned.channels(&ask)) else { continue };
            let mut back = told(&a.network);
            let h = height as u64;
            for (cells, ..) in &mut back {
                let [ax, ay, bx, by] = *cells;
                *cells = [h - 1 - ay, ax, h - 1 - by, bx];
            }
            back.sort();
            prop_assert_eq!(back, told(&b.network));
            let areas = |g: &Routed| g.basins(&Network::default(), &[], 2000).iter().map(|b| b.area_m2).collect::<Vec<_>>();
            prop_assert_eq!(areas(&ground), areas(&turned));
        }
    }

    #[test]
    fn basins_part_the_ground(seed in 0u64..u64::MAX, width in 1usize..30, height in 1usize..30) {
        let ground = Routed::random(width, height, seed);
        let found = ground.basins(&Network::default(), &[], usize::MAX);
        prop_assert_eq!(found.iter().map(|b| b.area_m2).sum::<f64>(), ground.surface.valid_count() as f64);
        for basin in &found {
            prop_assert!((basin.outline.area() - basin.area_m2).abs() < 1e-9);
            prop_assert!(basin.outline.contains(basin.outlet));
            prop_assert!(basin.elevations.is_sorted_by(|a, b| a >= b));
        }
    }
}
