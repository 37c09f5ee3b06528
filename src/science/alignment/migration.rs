//! Which way bedforms migrate: the side of the slip face, and whether they move at all.

use crate::ground::{Axis, Azimuth, Method, Read, SandFlow, Source, Symbol};

use super::bed_instability::{COURRECH, bed_instability};
use super::fingering::crest_transport;

/// The sense of migration.
pub const METHOD: Method = Method {
    id: "alignment.migration",
    name: "Sense of migration",
    question: "To which side do the bedforms move, and on which side is the slip face?",
    formula: "Q⊥ = Σ qᵢ (1 + Γ |sᵢ|) sᵢ, sᵢ = sin(θᵢ − α) at α = α_BI;  m = |Q⊥|/Σ qᵢ (1 + Γ |sᵢ|) |sᵢ|;  toward α + 90° \
              when Q⊥ > 0",
    symbols: &[
        Symbol { symbol: "Q⊥", meaning: "net transport across the crest", unit: "unit of q" },
        Symbol { symbol: "m", meaning: "share of the gross transport left as net", unit: "1" },
        Symbol { symbol: "Γ", meaning: "flux-up ratio: gain of flux over a crest", unit: "1" },
        Symbol { symbol: "qᵢ, θᵢ", meaning: "flow and its azimuth toward", unit: "any, deg" },
    ],
    assumptions: &["Full sand cover: the trend is that of bed instability"],
    limits: &[
        "Speed needs the height: celerity is Q⊥ over height",
        "Below m = 0.1 both sides count as slip faces in turn",
    ],
    sources: &[
        COURRECH,
        Source {
            key: "ventifact-migration",
            authors: "Ventifact",
            year: 2026,
            title: "Net over gross transport as the measure of migration",
            published: "derived here",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Net over gross transport below which bedforms are said not to migrate.
pub const LEAST: f64 = 0.1;

/// How bedforms of one trend move.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Migration {
    /// The trend of bed instability.
    pub trend: Axis,
    /// Net over gross transport across the crest, in [0, 1].
    pub share: f64,
    /// Where the slip face looks; `None` when the share is below [`LEAST`].
    pub toward: Option<Azimuth>,
}

/// The sense of migration at the trend of bed instability, and at each trend that ties with it; empty
/// without flow.
pub fn migration(flows: &[SandFlow], flux_up: f64) -> Vec<Migration> {
    let Some(fastest) = bed_instability(flows, flux_up) else { return Vec::new() };
    let of = |trend: &Axis| {
        let (across, _) = crest_transport(flows, flux_up, trend.azimuth());
        let share = (across.abs() / fastest.growth).min(1.0);
        let side = trend.azimuth().rotated(if across > 0.0 { 90.0 } else { -90.0 });
        Migration { trend: *trend, share, toward: (share >= LEAST).then_some(side) }
    };
    std::iter::once(&fastest.axis).chain(&fastest.ties).map(of).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn flows(winds: &[(f64, f64)]) -> Vec<SandFlow> {
        winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect()
    }

    #[test]
    fn one_wind_drives_all_of_it_downwind() {
        for deg in [10.0, 100.0, 190.0, 280.0] {
            let found = migration(&flows(&[(deg, 2.0)]), 1.6);
            crate::assert_close!(found[0].share, 1.0, 1e-9, "share");
            crate::assert_close!(found[0].toward.expect("a side").deg(), deg, 1e-6, "side");
        }
    }

    #[test]
    fn reversing_winds_leave_it_where_it_is() {
        let found = migration(&flows(&[(30.0, 1.0), (210.0, 1.0)]), 1.6);
        assert_eq!(found[0].toward, None);
        crate::assert_close!(found[0].trend.deg(), 120.0, 1e-6, "trend");
        assert!(migration(&[], 1.6).is_empty());
    }
}
