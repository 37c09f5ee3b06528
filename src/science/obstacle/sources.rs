//! The publications the family cites more than once.

use crate::ground::{Read, Source};

pub(super) const MILNE_THOMSON: Source = Source {
    key: "milnethomson1968",
    authors: "Milne-Thomson, L. M.",
    year: 1968,
    title: "Theoretical Hydrodynamics",
    published: "Macmillan, 5th edition",
    locator: "chapter 6",
    read: Read::Memory,
};

/// What was worked out for this program and checked by simulation.
pub(super) const DERIVED: Source = Source {
    key: "ventifact",
    authors: "Ventifact",
    year: 2026,
    title: "Derived for this program",
    published: "method notes and simulation tests",
    locator: "",
    read: Read::Derived,
};

/// The same source at a page or equation.
pub(super) const fn at(source: Source, locator: &'static str) -> Source {
    Source { locator, ..source }
}
