//! Which way the water went, where no elevation tells.
