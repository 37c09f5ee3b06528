//! The methods, one a file, families side by side. A family uses no other but `axial`.

pub mod alignment;
pub mod axial;
pub mod channel;
pub mod crest;
pub mod drainage;
pub mod network;
pub mod obstacle;
pub mod orientation;
pub mod scene;
pub mod wind;

use crate::ground::Method;

/// Every method of the program, in the order of the reasoning: trend, spacing, statistics, crests, what
/// light hides, wind, verdict, outcrops, channels.
pub fn methods() -> Vec<&'static Method> {
    [
        orientation::METHODS,
        axial::METHODS,
        crest::METHODS,
        scene::METHODS,
        wind::METHODS,
        alignment::METHODS,
        obstacle::METHODS,
        drainage::METHODS,
        channel::METHODS,
        network::METHODS,
    ]
    .concat()
}
