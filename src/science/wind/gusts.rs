//! What gusts could add: the drift had every gust blown for its whole interval.

use std::collections::BTreeMap;

use crate::ground::{Method, Read, Source, Symbol, WindRecord, WindSample};

use super::regime::{Drift, flows, gathered};

/// The drift by gusts.
pub const METHOD: Method = Method {
    id: "wind.gusts",
    name: "Upper bound by gusts",
    question: "How much more sand could the gusts move that the means do not show?",
    formula: "Q_g = Σ q(max(vᵢ, gᵢ)) tᵢ ≥ Q;  gust factor = mean of gᵢ/vᵢ over rows with a gust and a wind",
    symbols: &[
        Symbol { symbol: "gᵢ", meaning: "gust of row i, at the same height", unit: "m s⁻¹" },
        Symbol { symbol: "vᵢ", meaning: "mean speed of row i", unit: "m s⁻¹" },
        Symbol { symbol: "q", meaning: "flux of a steady wind", unit: "vector units or kg m⁻¹ yr⁻¹" },
        Symbol { symbol: "tᵢ", meaning: "share of time of row i", unit: "1" },
    ],
    assumptions: &["A gust blows the way its mean does"],
    limits: &[
        "A bound, not a law: a gust lasts seconds, here it is given the whole interval",
        "Rows without a gust keep their mean; many stations report a gust only where it stands out",
    ],
    sources: &[Source {
        key: "ventifact-gusts",
        authors: "Ventifact",
        year: 2026,
        title: "Flux of the greatest speed of each interval as a bound",
        published: "worked out for this program",
        locator: "",
        read: Read::Derived,
    }],
};

/// The drift had every gust blown for its whole interval.
#[derive(Clone, Debug, PartialEq)]
pub struct Gusts {
    /// Rows with a gust.
    pub rows: usize,
    /// Mean of gust over mean speed.
    pub factor: Option<f64>,
    pub drift: Drift,
}

/// The bound for the rows `kept` of `record`; `None` when it has no gusts.
pub fn gusts(
    record: &WindRecord,
    kept: &[WindSample],
    flux: impl Fn(f64) -> f64,
    unit: &'static str,
) -> Option<Gusts> {
    let lines = record.samples.iter().map(|s| s.line);
    let by_line: BTreeMap<u32, f64> =
        lines.zip(&record.gusts).filter_map(|(line, gust)| Some((line, (*gust)?))).collect();
    let gust_of = |s: &WindSample| by_line.get(&s.line).copied();
    let factors: Vec<f64> =
        kept.iter().filter_map(|s| Some(gust_of(s)? / s.speed.filter(|v| *v > 0.0)?)).collect();
    let rows = kept.iter().filter(|s| gust_of(s).is_some()).count();
    let raised = kept.iter().map(|s| {
        let speed = s.speed.map(|v| gust_of(s).map_or(v, |gust| gust.max(v)));
        WindSample { speed, ..*s }
    });
    let raised: Vec<WindSample> = raised.collect();
    (rows > 0).then(|| Gusts {
        rows,
        factor: (!factors.is_empty()).then(|| factors.iter().sum::<f64>() / factors.len() as f64),
        drift: Drift::of(&gathered(&flows(&raised, flux).0), unit),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Azimuth;

    #[test]
    fn gusts_raise_the_rows_they_belong_to_and_no_others() {
        let sample = |line: u32, speed: f64| WindSample {
            line,
            time: None,
            speed: Some(speed),
            from: Some(Azimuth::from_deg(90.0)),
            weight: 1.0,
        };
        let samples = vec![sample(2, 4.0), sample(3, 6.0), sample(4, 5.0), sample(5, 1.0)];
        let kept = [samples[0], samples[1], samples[3]];
        let record =
            WindRecord { samples, is_table: false, gusts: vec![Some(8.0), Some(3.0), Some(99.0), None] };
        let cube = |v: f64| v.powi(3);
        let found = gusts(&record, &kept, cube, "u").expect("gusts");
        // A gust below its mean is no gust, and the row of 99 was set aside.
        crate::assert_close!(found.drift.total, (512.0 + 216.0 + 1.0) / 3.0, 1e-9, "total");
        assert_eq!((found.rows, found.factor), (2, Some(0.5 * (2.0 + 0.5))));
        let none = WindRecord { gusts: Vec::new(), ..record };
        assert_eq!(gusts(&none, &kept, cube, "u"), None);
    }
}
