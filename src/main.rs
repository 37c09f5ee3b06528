//! Ventifact.
fn main() {}
