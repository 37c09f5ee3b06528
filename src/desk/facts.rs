//! The evidence as rows of label and value, page by page; the window sets them in type.

use crate::files::raster::Light;
use crate::ground::{LengthUnit, Method};
use crate::plate::numbers;
use crate::science;
use crate::study::{
    DriftFinding, ObstacleFinding, OpenRaster, PatchFinding, RasterEntry, VerdictFinding, WindFinding, run,
};

/// One row of a bench page.
#[derive(Clone, Debug, PartialEq)]
pub struct Fact {
    pub label: &'static str,
    pub value: String,
    /// What the number is, for hovering.
    pub hint: &'static str,
    /// Key of the method that made it, for its record; empty for what no method made.
    pub method: &'static str,
}

impl Fact {
    pub(super) fn by(self, method: &'static str) -> Self {
        Self { method, ..self }
    }

    /// The record of the method that made the value.
    pub fn record(&self) -> Option<&'static Method> {
        science::methods().into_iter().find(|m| m.id == self.method)
    }
}

pub(super) fn fact(label: &'static str, value: impl Into<String>, hint: &'static str) -> Fact {
    Fact { label, value: value.into(), hint, method: "" }
}

/// The ground page: what the file is and where it lies.
pub fn ground(entry: &RasterEntry, open: &OpenRaster) -> Vec<Fact> {
    let (info, raster) = (open.raster.info(), run::raster(entry, open));
    let bands = if raster.bands == 1 { "1 band".to_owned() } else { format!("{} bands", raster.bands) };
    let mut facts = vec![
        fact("File", raster.path, "Read where it lies; never copied."),
        fact(
            "Pixels",
            format!("{} × {}, {bands} of {}", raster.width, raster.height, raster.sample),
            "Columns × rows.",
        ),
        fact(
            "Stored as",
            format!("{}, {}, {}, levels: {}", info.format, info.compression, info.layout, info.levels.len()),
            "Coarse levels that are missing are made while the raster opens.",
        ),
    ];
    let size = raster
        .pixel_m
        .map(|[x, y]| format!("{} × {} m", numbers::significant(x, 4), numbers::significant(y, 4)));
    facts.push(fact(
        "Pixel on the ground",
        size.unwrap_or_else(|| "not known: lengths are in pixels".into()),
        "At the centre of the raster, after the projection's own stretch.",
    ));
    facts.push(fact("Body", raster.body, "Whose shape, gravity and air are used."));
    facts.push(fact("Reference", raster.projection, "Angles are turned to true north point by point."));
    if let Some(from) = info.light.and_then(Light::from).filter(|_| entry.light_from.is_none()) {
        let value = format!("from {:.1}° by a tag, not stated yet", from.deg());
        facts.push(fact("Light", value, "State it on the page Light to hold trends against it."));
    }
    if let Some(nodata) = raster.nodata {
        let nodata = if nodata.is_nan() { "not a number".to_owned() } else { nodata.to_string() };
        facts.push(fact("No data", nodata, "Pixels of this value are missing."));
    }
    facts
}

/// The trend page.
pub fn trend(finding: &PatchFinding) -> Vec<Fact> {
    let t = &finding.trend;
    let mut facts = vec![
        fact(
            "Trend",
            super::ledger::trend_words(finding),
            "Mean axis of the structure tensor, clockwise from true north, with its 95 % interval.",
        )
        .by("axial.mean"),
    ];
    if t.ci95_half_deg.is_some() {
        facts.push(
            fact("Interval from", t.ci95_source, "How the 95 % interval was made.").by("axial.interval"),
        );
    }
    facts.push(fact(
        "Test for a trend",
        t.rayleigh_p.map_or("not possible".into(), numbers::p_value),
        "Rayleigh test on the effective number of samples: how often axes without preference would look as aligned.",
    ).by("axial.rayleigh"));
    facts.push(
        fact(
            "Resultant length",
            numbers::fixed(t.resultant_length, 3),
            "Of the doubled angle: 0 = no alignment, 1 = all axes equal.",
        )
        .by("axial.mean"),
    );
    if let Some(kappa) = t.kappa_doubled {
        facts.push(
            fact("κ (doubled angle)", numbers::significant(kappa, 3), "Concentration of the axes.")
                .by("axial.kappa"),
        );
    }
    if let Some(spread) = t.spread_deg {
        facts.push(fact("Spread", degrees(spread), "Axial standard deviation.").by("axial.spread"));
    }
    facts.push(fact(
        "Nodes used",
        format!("{} of {}", t.n, t.n_all),
        "Places that passed the noise floor, of all places looked at.",
    ));
    facts.push(
        fact(
            "Effective samples",
            numbers::significant(t.n_eff, 3),
            "Pixels are not samples: neighbours say the same thing.",
        )
        .by("axial.effective-number"),
    );
    if let Some(length) = t.correlation_length {
        facts.push(fact(
            "Correlation length",
            numbers::length(length, finding.unit, 3),
            "Distance over which the trend field forgets itself.",
        ));
    }
    facts.push(
        fact(
            "Scales",
            format!(
                "gradient {} px, integration {} px, nodes every {} px",
                numbers::plain(t.gradient_scale_px, 1),
                numbers::plain(t.integration_scale_px, 1),
                numbers::plain(t.node_step_px, 1)
            ),
            "As used; settings left open follow the spacing.",
        )
        .by("orientation.structure-tensor"),
    );
    facts.push(
        fact(
            "Coherence floor",
            numbers::fixed(t.coherence_floor, 3),
            "Coherence that pure noise reaches; nodes below it are not used.",
        )
        .by("orientation.noise-floor"),
    );
    facts
}

/// The spacing page.
pub fn spacing(finding: &PatchFinding) -> Vec<Fact> {
    let s = &finding.spectrum;
    let spacing = s.spacing.map_or_else(
        || "no dominant spacing".to_owned(),
        |value| numbers::length_with_interval(value, s.spacing_ci95, finding.unit),
    );
    let mut facts = vec![
        fact("Spacing", spacing, "Dominant wavelength across the crests, with its 95 % interval.")
            .by("orientation.spectrum"),
    ];
    if let Some(axis) = s.axis {
        facts.push(
            fact(
                "Trend of the peak",
                numbers::axis_with_interval(axis, s.axis_ci95_half_deg),
                "Trend by the spectrum: a second opinion on the structure tensor.",
            )
            .by("orientation.spectrum"),
        );
    }
    if let Some(p) = s.p {
        facts.push(
            fact("Chance of such a peak", numbers::p_value(p), "Over the whole search range.")
                .by("orientation.spectrum"),
        );
    }
    if let Some(spread) = s.spread_deg {
        facts.push(fact("Spread of the peak", degrees(spread), "Angular width of the peak."));
    }
    facts.push(fact(
        "Windows",
        format!("{} of {} show the peak, {} px a side", s.windows_with_peak, s.windows, s.window_px),
        "Squares inside the patch whose spectra are averaged.",
    ));
    if let Some(cycles) = s.cycles {
        facts.push(fact(
            "Wavelengths a window",
            numbers::plain(cycles, 1),
            "Fewer than about four make a spacing doubtful.",
        ));
    }
    facts
}

/// The winds page.
pub fn winds(finding: &WindFinding) -> Vec<Fact> {
    let rows = format!("{} used of {}, {} calm", finding.used, finding.rows, finding.calm);
    let mut facts = vec![fact("Record", rows, "Rows after quality control.").by("wind.quality-control")];
    if let Some([first, last]) = finding.span {
        let years = (last - first) as f64 / (365.25 * 86_400.0);
        facts.push(fact(
            "Span",
            format!("{} years", numbers::significant(years, 3)),
            "From the first to the last row.",
        ));
    }
    if let Some(step) = finding.interval_s {
        let hours = numbers::significant(step / 3600.0, 3);
        facts.push(fact("Interval", format!("{hours} h"), "Usual time between rows."));
    }
    facts.push(
        fact("Transport law", finding.law.clone(), "Turns wind into moving sand.").by("wind.transport-law"),
    );
    facts.push(fact(
        "Threshold",
        format!(
            "{} m/s at the mast (u* {} m/s)",
            numbers::significant(finding.threshold_speed_at_height, 3),
            numbers::significant(finding.threshold_ustar, 3)
        ),
        "Wind at which sand starts to move.",
    ));
    facts.extend(drift("Sand flux", &finding.flux));
    if let Some(earth) = &finding.fryberger {
        facts.extend(drift("Drift potential", earth));
    }
    facts
}

fn drift(name: &'static str, drift: &DriftFinding) -> Vec<Fact> {
    let mut facts = vec![fact(
        name,
        format!("{} {}", numbers::significant(drift.total, 3), drift.unit),
        "Sum over all directions.",
    )];
    if let Some(toward) = drift.toward {
        facts.push(
            fact(
                "Resultant toward",
                numbers::azimuth_with_interval(toward, drift.toward_ci95_half_deg),
                "Where the sand goes on balance, with its 95 % bootstrap interval.",
            )
            .by("wind.resultant-drift"),
        );
    }
    if let Some(ratio) = drift.ratio {
        let interval = drift
            .ratio_ci95
            .map(|[lo, hi]| format!(" ({} to {})", numbers::fixed(lo, 2), numbers::fixed(hi, 2)))
            .unwrap_or_default();
        facts.push(fact(
            "Resultant / total",
            numbers::fixed(ratio, 2) + &interval,
            "1 = one direction, 0 = directions cancel.",
        ));
    }
    facts
}

/// The verdict page, for one wind record.
pub fn verdict(verdict: &VerdictFinding) -> Vec<Fact> {
    let mut facts = Vec::new();
    if let Some(toward) = verdict.toward {
        facts.push(fact(
            "Sand goes toward",
            numbers::azimuth_with_interval(toward, None),
            "Resultant drift direction of the record.",
        ));
    }
    if let Some(obliquity) = verdict.obliquity_deg {
        let interval = verdict
            .obliquity_ci95_deg
            .map(|[lo, hi]| format!(" ({}° to {}°)", numbers::fixed(lo, 0), numbers::fixed(hi, 0)))
            .unwrap_or_default();
        facts.push(
            fact(
                "Obliquity",
                format!("{}°{interval}", numbers::fixed(obliquity, 1)),
                "Angle between the trend and the resultant: 0° along, 90° across.",
            )
            .by("alignment.obliquity"),
        );
    }
    if let Some(e) = &verdict.elongation {
        let [low, high] = e.ci95_deg;
        facts.push(
            fact(
                "From elongation",
                format!("{:.0}° ({low:.0}° to {high:.0}°), it is {:.0}°", e.separation_deg, e.toward.deg()),
                "Angle between the trend and the direction in which these winds extend crests.",
            )
            .by("alignment.fingering"),
        );
        facts.push(fact(
            "Near elongation",
            numbers::percent(e.within_margin),
            "Chance that the trend lies within the margin of agreement of that direction.",
        ));
    }
    let b = verdict.building;
    facts.push(fact(
        "Built",
        format!("by crossing {}, by extending {}", numbers::percent(b.crossed), numbers::percent(b.extended)),
        "Posterior summed over the theories in which sand crosses the crests (full cover) and those in which crests extend along themselves (starved ground).",
    ));
    if let Some(ln) = verdict.supply_ln {
        facts.push(fact(
            "Sand supply, ln",
            numbers::fixed(ln, 1),
            "ln of the factor by which bed instability is better than fingering: above 0 speaks for full cover, below for starved ground.",
        ).by("alignment.together"));
    }
    for m in &verdict.migration {
        let way = m.toward.map_or_else(|| "nowhere".to_owned(), |t| format!("toward {:.0}°", t.deg()));
        let way = format!("{way} (net over gross {:.2})", m.share);
        facts.push(
            fact(
                "Crests at bed instability move",
                way,
                "The side that the slip face of a transverse crest would look to.",
            )
            .by("alignment.migration"),
        );
    }
    if let Some(ratio) = verdict.growth_ratio {
        facts.push(
            fact(
                "Finger over bed growth",
                numbers::fixed(ratio, 2),
                "Growth of the fingering trend over that of bed instability; high values go with fingers on starved ground, low ones with barchans.",
            )
            .by("alignment.growth-discriminator"),
        );
    }
    if let Some(strength) = verdict.alignment_strength {
        facts.push(
            fact(
                "Alignment strength",
                numbers::fixed(strength, 2),
                "How much better the best trend is than the worst; near 0 any trend would do.",
            )
            .by("alignment.gross-normal"),
        );
    }
    facts
}

/// A second since 1970 as date and time of day.
pub fn clock(seconds: i64) -> String {
    chrono::DateTime::from_timestamp(seconds, 0)
        .map_or_else(|| "–".to_owned(), |at| at.format("%Y-%m-%d %H:%M").to_string())
}

/// Area with its unit squared.
pub fn area(value: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre if value >= 1e5 => format!("{} km²", numbers::significant(value / 1e6, 3)),
        LengthUnit::Metre => format!("{} m²", numbers::significant(value, 3)),
        LengthUnit::Pixel => format!("{} px²", numbers::significant(value, 3)),
    }
}

fn degrees(value: f64) -> String {
    format!("{}°", numbers::fixed(value, 1))
}

/// One outcrop on the obstacles page; empty where it could not be tested.
pub fn obstacle(finding: &ObstacleFinding) -> Vec<Fact> {
    let Ok(test) = &finding.outcome else { return Vec::new() };
    let (e, b) = (&test.estimate, |r: &crate::science::obstacle::AtRadius| r.b_s.hypot(r.b_c));
    let mut facts = vec![
        fact(
            "Turn left over",
            format!("{} beside {} of the trend as a whole", degrees(e.residual_deg), degrees(e.offset_deg)),
            "Scatter that the flow does not explain, and the local lean from the regional trend, counter-clockwise.",
        )
        .by("obstacle.obliquity"),
        fact(
            "Far-field check",
            format!(
                "b sin {}, b cos {}",
                numbers::fixed(e.quadrupole.b_s, 2),
                numbers::fixed(e.quadrupole.b_c, 2)
            ),
            "The published regression on the two far-field harmonics; near the outcrop the exact flow turns more.",
        )
        .by("obstacle.obliquity"),
        fact(
            "Independent samples",
            format!("{} of {} nodes", numbers::significant(e.n_eff, 2), e.n),
            "What the nodes round it are worth, since neighbours say the same thing.",
        )
        .by("obstacle.residual-correlation"),
    ];
    if let (Some(first), Some(last)) = (test.over_radius.first(), test.over_radius.last()) {
        let best = test.best_radius.map_or("the data do not tell which".to_owned(), |factor| {
            format!("fits best at {}", numbers::fixed(factor, 2))
        });
        facts.push(
            fact(
                "If the radius errs",
                format!(
                    "amplitude {} at {}, {} at {}; {best}",
                    numbers::fixed(b(first), 2),
                    numbers::fixed(first.factor, 2),
                    numbers::fixed(b(last), 2),
                    numbers::fixed(last.factor, 2)
                ),
                "Amplitude with the outlined radius taken smaller and larger, on nodes beyond the largest.",
            )
            .by("obstacle.obliquity"),
        );
    }
    if let Some(null) = &test.null {
        facts.push(
            fact(
                "Virtual outcrops",
                format!("{}, worth {} independent ones", null.count, numbers::fixed(null.independent, 0)),
                "The same outline set down where none stands.",
            )
            .by("obstacle.virtual"),
        );
    }
    facts
}

#[cfg(test)]
mod tests {
    use super::{spacing, trend};
    use crate::ground::LengthUnit;
    use crate::study::{Id, PatchFinding, PatternFinding, SpectrumFinding, TrendFinding};

    #[test]
    fn every_method_that_a_fact_names_has_a_record() {
        let finding = PatchFinding {
            id: Id(1),
            name: "a".into(),
            raster: Id(2),
            fingerprint: String::new(),
            unit: LengthUnit::Metre,
            area: 1e6,
            valid_fraction: 1.0,
            centre: None,
            trend: TrendFinding::default(),
            spectrum: SpectrumFinding::default(),
            verdicts: Vec::new(),
            backwards: None,
            sentence: String::new(),
            cautions: Vec::new(),
            birth: Vec::new(),
            crests: Err("not traced".into()),
            pattern: PatternFinding::default(),
            obstacles: None,
        };
        let facts = trend(&finding).into_iter().chain(spacing(&finding));
        for fact in facts.filter(|fact| !fact.method.is_empty()) {
            assert!(fact.record().is_some(), "{} names {}, which has no record", fact.label, fact.method);
        }
    }
}
