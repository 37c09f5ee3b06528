//! Strahler order and Shreve magnitude, reach by reach.

use super::Network;

/// The place of a reach in the hierarchy of its network.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Order {
    /// Heads are 1; where two of the highest order meet it grows by one (Strahler 1957).
    pub strahler: u32,
    /// Heads are 1; magnitudes add (Shreve 1966).
    pub shreve: u32,
}

/// The order of every reach; `None` where the flow divides, on circles, and below them, since neither hierarchy
/// is defined there.
pub fn orders(network: &Network) -> Vec<Option<Order>> {
    let (into, out) = (network.incoming(), network.outgoing());
    let mut orders = vec![None; network.reaches.len()];
    let Some(sequence) = network.downstream_sequence() else { return orders };
    for node in sequence {
        let [reach] = out[node][..] else { continue };
        let above: Option<Vec<Order>> = into[node].iter().map(|r| orders[*r]).collect();
        orders[reach] = above.map(|above| {
            let most = above.iter().map(|o| o.strahler).max().unwrap_or(1);
            let grows = above.iter().filter(|o| o.strahler == most).count() >= 2;
            Order {
                strahler: most + u32::from(grows),
                shreve: above.iter().map(|o| o.shreve).sum::<u32>().max(1),
            }
        });
    }
    orders
}

impl Network {
    /// The network with the order of each reach set.
    pub fn ordered(mut self) -> Self {
        let orders = orders(&self);
        for (reach, order) in self.reaches.iter_mut().zip(orders) {
            reach.order = order;
        }
        self
    }

    /// The greatest Strahler order; `None` when no reach has one.
    pub fn greatest_order(&self) -> Option<u32> {
        self.reaches.iter().filter_map(|r| r.order).map(|o| o.strahler).max()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{FlowSense, NetworkNode, Point, Polyline, Reach, ReachOrigin};

    /// A network from pairs of node numbers; every reach is one long.
    fn network(pairs: &[(usize, usize)]) -> Network {
        let count = pairs.iter().map(|(a, b)| a.max(b) + 1).max().unwrap_or(0);
        let at = |n: usize| Point::new(n as f64, 0.0);
        let reach = |&(from, to): &(usize, usize)| Reach {
            from,
            to,
            line: Polyline(vec![at(from), at(to)]),
            length: 1.0,
            sense: FlowSense::of_elevation(),
            order: None,
            width: None,
            stations: Vec::new(),
            origin: ReachOrigin::Elevation,
            confidence: 1.0,
        };
        let nodes = (0..count).map(|n| NetworkNode { at: at(n), elevation_m: None }).collect();
        Network { nodes, reaches: pairs.iter().map(reach).collect() }.ordered()
    }

    fn pair(network: &Network, reach: usize) -> Option<(u32, u32)> {
        network.reaches[reach].order.map(|o| (o.strahler, o.shreve))
    }

    #[test]
    fn equals_raise_the_order_and_magnitudes_add() {
        // Two heads meet, a third joins below, then a pair of heads from the side.
        let n = network(&[(0, 2), (1, 2), (2, 4), (3, 4), (4, 8), (5, 7), (6, 7), (7, 8), (8, 9)]);
        assert_eq!((pair(&n, 2), pair(&n, 4), pair(&n, 8)), (Some((2, 2)), Some((2, 3)), Some((3, 5))));
        assert_eq!((n.heads().len(), n.outlets(), n.loops(), n.greatest_order()), (5, vec![9], 0, Some(3)));
        assert_eq!(n.trunk(), vec![0, 2, 4, 8]);
    }

    #[test]
    fn nothing_below_a_parting_has_an_order() {
        let n = network(&[(0, 1), (1, 2), (1, 3), (2, 4), (3, 4), (4, 5), (6, 5)]);
        assert_eq!(pair(&n, 0), Some((1, 1)));
        assert!([1, 2, 3, 4, 5].iter().all(|r| pair(&n, *r).is_none()));
        assert_eq!(pair(&n, 6), Some((1, 1)));
        assert_eq!(n.loops(), 1);
        assert!(network(&[(0, 1), (1, 0)]).reaches.iter().all(|r| r.order.is_none()));
    }
}
