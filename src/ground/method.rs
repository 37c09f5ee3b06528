//! Records that say which method made a number, and who published it. Hover text, captions,
//! `docs/methods.md`, `ventifact methods` and the bibliography all read these.

/// What a published method computes and when it may be believed.
#[derive(Debug, PartialEq)]
pub struct Method {
    /// Stable short key, `family.method`, for example `"orientation.structure-tensor"`.
    pub id: &'static str,
    pub name: &'static str,
    /// The question it answers, as a user would ask it.
    pub question: &'static str,
    /// The formula as printed in the source, in plain UTF-8.
    pub formula: &'static str,
    pub symbols: &'static [Symbol],
    pub assumptions: &'static [&'static str],
    pub limits: &'static [&'static str],
    pub sources: &'static [Source],
}

/// One symbol of a formula.
#[derive(Debug, PartialEq)]
pub struct Symbol {
    pub symbol: &'static str,
    pub meaning: &'static str,
    /// SI unit, `"1"` for a pure number, `"deg"` for degrees.
    pub unit: &'static str,
}

/// A publication.
#[derive(Debug, PartialEq)]
pub struct Source {
    /// Citation key, `authorYEAR`.
    pub key: &'static str,
    pub authors: &'static str,
    pub year: u16,
    pub title: &'static str,
    /// Journal with volume and page, or publisher.
    pub published: &'static str,
    /// Page or equation the formula stands on; empty when unknown.
    pub locator: &'static str,
    pub read: Read,
}

/// How the source was consulted; printed beside every citation.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Read {
    /// The text itself was read.
    Opened,
    /// Only the abstract or a summary was read.
    Abstract,
    /// Known, but not opened: "cited from memory".
    Memory,
    /// Worked out for this program and checked numerically.
    Derived,
}

impl Read {
    /// The remark printed after the citation; empty when the text was read.
    pub fn remark(self) -> &'static str {
        match self {
            Self::Opened => "",
            Self::Abstract => "abstract seen",
            Self::Memory => "cited from memory",
            Self::Derived => "derived here",
        }
    }
}
