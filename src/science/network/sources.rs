//! The publications the family cites more than once.

use crate::ground::{Read, Source};

pub(super) use crate::science::axial::sources::{DERIVED, at};

/// A source cited from memory.
pub(super) const fn memory(
    key: &'static str,
    authors: &'static str,
    year: u16,
    title: &'static str,
    published: &'static str,
) -> Source {
    Source { key, authors, year, title, published, locator: "", read: Read::Memory }
}

pub(super) const STRAHLER_1957: Source = memory(
    "strahler1957",
    "Strahler, A. N.",
    1957,
    "Quantitative analysis of watershed geomorphology",
    "Transactions of the American Geophysical Union 38, 913–920",
);

pub(super) const HORTON_1945: Source = memory(
    "horton1945",
    "Horton, R. E.",
    1945,
    "Erosional development of streams and their drainage basins",
    "Geological Society of America Bulletin 56, 275–370",
);

pub(super) const SHREVE_1966: Source = memory(
    "shreve1966",
    "Shreve, R. L.",
    1966,
    "Statistical law of stream numbers",
    "Journal of Geology 74, 17–37",
);

pub(super) const WOBUS_2006: Source = memory(
    "wobus2006",
    "Wobus, C.; Whipple, K. X.; Kirby, E.; and others",
    2006,
    "Tectonics from topography: procedures, promise, and pitfalls",
    "Geological Society of America Special Paper 398, 55–74",
);

pub(super) const PERRON_ROYDEN: Source = memory(
    "perron2013",
    "Perron, J. T.; Royden, L.",
    2013,
    "An integral approach to bedrock river profile analysis",
    "Earth Surface Processes and Landforms 38, 570–576",
);
