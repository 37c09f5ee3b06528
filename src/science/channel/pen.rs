//! The pen: the cheapest way along a channel between two picks.
