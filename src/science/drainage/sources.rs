//! The publications the family cites more than once.

use crate::ground::{Read, Source};

pub(super) use crate::science::axial::sources::{DERIVED, at};

pub(super) const OCALLAGHAN: Source = Source {
    key: "ocallaghan1984",
    authors: "O'Callaghan, J. F.; Mark, D. M.",
    year: 1984,
    title: "The extraction of drainage networks from digital elevation data",
    published: "Computer Vision, Graphics, and Image Processing 28, 323–344",
    locator: "",
    read: Read::Memory,
};
