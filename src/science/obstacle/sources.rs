//! The publications the family cites more than once.

use crate::ground::{Read, Source};

pub(super) use crate::science::axial::sources::{DERIVED, at};

pub(super) const MILNE_THOMSON: Source = Source {
    key: "milnethomson1968",
    authors: "Milne-Thomson, L. M.",
    year: 1968,
    title: "Theoretical Hydrodynamics",
    published: "Macmillan, 5th edition",
    locator: "chapter 6",
    read: Read::Memory,
};
