//! Body and sand as rows of label and value, and the thresholds as a table.

use crate::ground::gas::mean_free_path;
use crate::ground::{Body, BodyFigure};
use crate::plate::numbers;
use crate::study::{Doubtful, SandFinding};

use super::facts::Fact;

const STATED: &str = "Stated in the raster's file or in this sheet.";

/// The figures of a body; the hint says where each is from.
pub fn body(body: &Body) -> Vec<Fact> {
    let row = |label, value: String, figure| Fact {
        label,
        value,
        hint: body.source(figure).unwrap_or(STATED),
        method: "",
    };
    let gravity = body.gravity.map_or("not known".into(), |g| format!("{} m/s²", numbers::plain(g, 4)));
    let mut facts = vec![
        row("Shape", body.shape.in_words(), BodyFigure::Shape),
        row("Gravity", gravity, BodyFigure::Gravity),
    ];
    if let Some(gas) = &body.gas {
        facts.push(row("Gas", gas.in_words(), BodyFigure::Gas));
    }
    let made = |label, value: String, hint| Fact { label, value, hint, method: "wind.air" };
    match (body.air, &body.gas) {
        (None, _) => facts.push(row("Air", "none that is known".into(), BodyFigure::Gas)),
        (Some(air), None) => facts.push(row("Air", in_words(air.density, air.viscosity), BodyFigure::Gas)),
        (Some(air), Some(gas)) => {
            let z = gas.compressibility();
            facts.push(made(
                "Air",
                in_words(air.density, air.viscosity),
                "Density and viscosity that follow from gas, pressure and temperature.",
            ));
            if z != 1.0 {
                facts.push(made("Compressibility", numbers::significant(z, 3), "Z; 1 for an ideal gas."));
            }
            facts.push(made(
                "Mean free path",
                format!("{} µm", numbers::significant(1e6 * mean_free_path(gas), 2)),
                "Of the molecules; grains near it or smaller fall faster than computed.",
            ));
        }
    }
    if !body.note.is_empty() {
        facts.push(Fact {
            label: "Note",
            value: body.note.clone(),
            hint: "As the user wrote it.",
            method: "",
        });
    }
    facts
}

fn in_words(density: f64, viscosity: f64) -> String {
    let viscosity = numbers::significant(1e6 * viscosity, 3);
    format!("{} kg/m³, {viscosity} µPa s", numbers::significant(density, 3))
}

/// What the sand of a record does besides moving.
pub fn sand(sand: &SandFinding) -> Vec<Fact> {
    let row = |label, value, hint, method| Fact { label, value, hint, method };
    let span = |[low, high]: [f64; 2]| {
        format!("{} to {} m", numbers::significant(low, 2), numbers::significant(high, 2))
    };
    let each: Vec<_> = sand
        .first_waves
        .iter()
        .map(|wave| format!("{} m ({})", numbers::significant(wave.wavelength_m, 2), wave.rule))
        .collect();
    vec![
        row(
            "Settling velocity",
            format!("{} m/s", numbers::significant(sand.settling_m_s, 3)),
            "How fast a grain falls through the still air.",
            "wind.settling",
        ),
        row(
            "Saturation length",
            format!("{} m", numbers::significant(sand.saturation_length_m, 2)),
            "Way over which the flux follows a change of the wind.",
            "wind.minimal-wavelength",
        ),
        row(
            "First dunes",
            span(sand.first_wave_m),
            "Spacing with which dunes start, over all rules and with grain and density as doubtful as set.",
            "wind.minimal-wavelength",
        ),
        row(
            "By rule",
            each.join(", "),
            "The same by each rule, for the stated grain.",
            "wind.minimal-wavelength",
        ),
        row(
            "Shortest to grow",
            span(sand.shortest_wave_m),
            "Shorter waves are levelled.",
            "wind.minimal-wavelength",
        ),
    ]
}

/// `"0.278"` and `"0.241–0.331"`, with as many decimals as the value bears.
pub fn doubtful(figure: Doubtful) -> [String; 2] {
    let Doubtful { value, low, high } = figure;
    let decimals = match value {
        v if v < 0.5 => 3,
        v if v < 20.0 => 2,
        _ => 1,
    };
    let [value, low, high] = [value, low, high].map(|v| numbers::fixed(v, decimals));
    [value, format!("{low}–{high}")]
}

#[cfg(test)]
mod tests {
    use super::{body, doubtful};
    use crate::ground::Body;
    use crate::study::Doubtful;

    #[test]
    fn every_figure_says_where_it_is_from() {
        let moon = body(&Body::cold_nitrogen_moon());
        let of = |label: &str| moon.iter().find(|fact| fact.label == label).expect("a row");
        assert!(of("Gravity").hint.contains("common practice, no source"), "{}", of("Gravity").hint);
        assert!(of("Air").value.starts_with("5.39 kg/m³"), "{}", of("Air").value);
        assert!(moon.iter().all(|fact| fact.method.is_empty() || fact.record().is_some()));
        let changed = body(&Body { gravity: Some(1.0), ..Body::cold_nitrogen_moon() });
        assert!(changed[1].hint.contains("this sheet"), "{}", changed[1].hint);
    }

    #[test]
    fn a_range_has_the_decimals_of_its_value() {
        let thin = doubtful(Doubtful { value: 0.092, low: 0.0781, high: 0.1188 });
        assert_eq!(thin, ["0.092", "0.078–0.119"]);
        let fast = doubtful(Doubtful { value: 38.02, low: 30.0, high: 51.27 });
        assert_eq!(fast, ["38.0", "30.0–51.3"]);
    }

    #[test]
    fn an_airless_body_has_no_air() {
        let air = body(&Body::moon()).pop().expect("rows");
        assert_eq!((air.label, air.value.as_str()), ("Air", "none that is known"));
    }
}
