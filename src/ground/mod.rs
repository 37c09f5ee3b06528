//! The words every floor uses: angles, grids, bodies, places, shapes, running work, seeds,
//! cautions, and the records that say which method made a number and who published it.

mod affine;
mod angle;
mod bodies;
mod body;
mod caution;
mod flow;
pub mod gas;
mod geodesic;
mod grid;
mod local_frame;
mod method;
mod network;
mod place;
mod projection;
mod seed;
mod shape;
mod wind_record;
mod work;

pub use affine::Affine;
pub use angle::{Axis, Azimuth};
pub use bodies::BodyFigure;
pub use body::{Air, Body, BodyShape};
pub use caution::Caution;
pub use flow::{Regime, SandFlow};
pub use gas::{Gas, GasShare, GasState, Sutherland};
pub use geodesic::Geodesic;
pub use grid::Grid;
pub use local_frame::LocalFrame;
pub use method::{Method, Read, Source, Symbol};
pub use network::{
    FlowSense, Network, NetworkNode, Order, Reach, ReachOrigin, SenseEvidence, SenseKind, Station, Width,
    ground_distance, orders,
};
pub use place::{Frame, LatitudeKind, LengthUnit, Place, PlaceError};
pub use projection::{LonLat, Projection, ProjectionError};
pub use seed::Seed;
pub use shape::{Bounds, Nearest, Point, Polygon, Polyline};
pub use wind_record::{WindRecord, WindSample};
pub use work::{Progress, Stopped, Work};
