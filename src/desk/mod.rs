//! The desk floor.

mod tiles;

pub use tiles::{TILE, TileKey, TileReader, TileShelf};
