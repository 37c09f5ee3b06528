//! The publications the family cites more than once.

use crate::ground::{Read, Source};

pub(super) const FISHER: Source = Source {
    key: "fisher1993",
    authors: "Fisher, N. I.",
    year: 1993,
    title: "Statistical Analysis of Circular Data",
    published: "Cambridge University Press",
    locator: "",
    read: Read::Memory,
};

pub(super) const MARDIA_JUPP: Source = Source {
    key: "mardia2000",
    authors: "Mardia, K. V.; Jupp, P. E.",
    year: 2000,
    title: "Directional Statistics",
    published: "Wiley",
    locator: "",
    read: Read::Memory,
};

pub(super) const ZAR: Source = Source {
    key: "zar2010",
    authors: "Zar, J. H.",
    year: 2010,
    title: "Biostatistical Analysis",
    published: "Pearson, 5th edition",
    locator: "chapters 26 and 27",
    read: Read::Memory,
};

/// What was worked out for this program and checked by simulation.
pub(in crate::science) const DERIVED: Source = Source {
    key: "ventifact",
    authors: "Ventifact",
    year: 2026,
    title: "Derived for this program",
    published: "method notes and simulation tests",
    locator: "",
    read: Read::Derived,
};

/// The same source at a page or equation.
pub(in crate::science) const fn at(source: Source, locator: &'static str) -> Source {
    Source { locator, ..source }
}
