//! The axis somebody states: another study's prediction, a fault line, a wind known by other means.

use crate::ground::{Method, Read, Source, Symbol};

/// A stated axis as a theory.
pub const METHOD: Method = Method {
    id: "alignment.stated",
    name: "Stated axis",
    question: "Does the trend follow an axis known from elsewhere?",
    formula: "α = α₀",
    symbols: &[Symbol { symbol: "α₀", meaning: "axis stated for the patch", unit: "deg" }],
    assumptions: &["The axis was chosen before the trend was looked at"],
    limits: &["The axis counts as exact up to the model error"],
    sources: &[Source {
        key: "ventifact-stated",
        authors: "Ventifact",
        year: 2026,
        title: "A user's axis weighed like a theory",
        published: "convention of this program",
        locator: "",
        read: Read::Derived,
    }],
};
