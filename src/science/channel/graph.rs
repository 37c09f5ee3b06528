//! From a thinned channel mask to nodes and reaches.
