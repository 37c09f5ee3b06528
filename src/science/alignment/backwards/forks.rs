//! Which way forks open, against a toss of a coin.

use crate::ground::{Method, Read, Source, Symbol};

/// The fork count.
pub const FORKS: Method = Method {
    id: "alignment.forks",
    name: "Polarity of forks",
    question: "Do more forks of the crests open one way than chance would have it?",
    formula: "p = min(1, 2 Σ_{k ≥ max(a, b)} C(a + b, k) 2^{−(a + b)})",
    symbols: &[
        Symbol { symbol: "a, b", meaning: "forks that open one way and the other", unit: "1" },
        Symbol { symbol: "p", meaning: "two-sided chance of a count as uneven", unit: "1" },
    ],
    assumptions: &["Forks are independent"],
    limits: &[
        "That forks of long dunes open upwind is common practice, not law: a clue to the sense, no proof",
        "Channels and lee wakes fork too",
    ],
    sources: &[Source {
        key: "arbuthnott1710",
        authors: "Arbuthnott, J.",
        year: 1710,
        title: "An argument for Divine Providence, taken from the constant regularity observ'd in the births of both sexes",
        published: "Philosophical Transactions 27, 186–190",
        locator: "",
        read: Read::Memory,
    }],
};

/// Two-sided p of `a` forks one way and `b` the other; 1 without forks.
pub fn fork_p(a: u32, b: u32) -> f64 {
    let n = a + b;
    let most = a.max(b);
    // C(n, k) 2⁻ⁿ from k = n down, each from the one before.
    let mut term = 0.5f64.powi(n.min(1000) as i32);
    let mut sum = 0.0;
    for k in (most..=n).rev() {
        sum += term;
        term *= f64::from(k) / f64::from(n - k + 1);
    }
    (2.0 * sum).min(1.0)
}
