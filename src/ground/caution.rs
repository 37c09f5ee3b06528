//! A coded weakness of a valid result. It is printed wherever the result is.

use serde::Serialize;

/// `code` is stable and short (`"few-cycles"`), `text` says it in one sentence with the figures.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Caution {
    pub code: &'static str,
    pub text: String,
}

impl Caution {
    pub fn new(code: &'static str, text: impl Into<String>) -> Self {
        Self { code, text: text.into() }
    }
}
