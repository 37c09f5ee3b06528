//! The crests of a patch as rows of label and value.

use crate::ground::{Azimuth, LengthUnit, LocalFrame};
use crate::plate::numbers;
use crate::science::crest::{CrestLine, CrestModel, CrestOrigin, End, Fit};
use crate::study::{CrestsFinding, TrendFinding};

use super::facts::{Fact, fact};
use super::{Subject, Tracing};

/// Which method makes which row.
const METHODS: &[(&str, &str)] = &[
    ("Crests", "crest.curvilinear"),
    ("Total length", "crest.numbers"),
    ("Mean length", "crest.censoring"),
    ("Density", "crest.numbers"),
    ("Sinuosity", "crest.numbers"),
    ("Trend by length", "crest.numbers"),
    ("Spacing, transects", "crest.spacing"),
    ("Between quartiles", "crest.spacing"),
    ("Spacing, area", "crest.spacing"),
    ("Ends and forks", "crest.defects"),
    ("Ends by length", "crest.defects"),
    ("Ends and forks by length", "crest.defects"),
    ("Defects, dimensionless", "crest.defects"),
    ("Forks open", "crest.fork-polarity"),
    ("By chance", "crest.fork-polarity"),
    ("Spacing, spectrum", "orientation.spectrum"),
    ("Trend by nodes", "axial.mean"),
];

/// Skewness from which a model stands out, and below which nothing speaks for it.
const STANDS_OUT: f64 = 0.25;
const LITTLE: f64 = 0.1;
/// Level at which forks are said to open one way.
const LEVEL: f64 = 0.05;

fn sourced(facts: Vec<Fact>) -> Vec<Fact> {
    let method = |fact: &Fact| METHODS.iter().find(|(label, _)| *label == fact.label).map(|(_, id)| *id);
    facts.into_iter().map(|fact| Fact { method: method(&fact).unwrap_or(fact.method), ..fact }).collect()
}

/// How well a model fits, in words with its figure.
pub fn fit_words(fit: &Fit) -> String {
    let words = if fit.skewness >= STANDS_OUT {
        "stand out"
    } else if fit.skewness >= LITTLE {
        "hardly stand out"
    } else {
        "do not stand out"
    };
    format!("{words}, γ {}", numbers::fixed(fit.skewness, 2))
}

/// What is said of each model, best first.
pub fn fits(crests: &CrestsFinding) -> Vec<Fact> {
    let hint = "Skewness γ of the model's response over the patch: crests are few and strong, so the right model has a long tail on one side. From 0.25 on it stands out.";
    crests.fits.iter().map(|fit| fact(title(fit.model), fit_words(fit), hint).by("crest.model")).collect()
}

/// At which scale lines were traced.
pub fn scale(crests: &CrestsFinding) -> Fact {
    let value = format!("{} px", numbers::plain(crests.full_scale_px(), 1));
    let hint = "Of the derivatives, pixels of the raster: a sixth of the spacing where that is known, else that of a sweep.";
    fact("Scale", value, hint).by("crest.curvilinear")
}

fn title(model: CrestModel) -> &'static str {
    match model {
        CrestModel::BrightRidge => "Bright ridges",
        CrestModel::DarkRidge => "Dark ridges",
        CrestModel::BothRidges => "Ridges of both",
        CrestModel::SlipFace => "Slip faces",
    }
}

/// Count, length, density, direction.
pub fn lines(crests: &CrestsFinding, trend: &TrendFinding, unit: LengthUnit) -> Vec<Fact> {
    let n = &crests.numbers;
    let mut facts = vec![
        fact("Crests", origins(&crests.lines), "Lines, by where they come from."),
        fact("Total length", numbers::length(n.total_length, unit, 4), "Of all of them along the ground."),
    ];
    if let (Some(mean), Some(plain)) = (n.lengths.restricted_mean(), n.plain_mean_length) {
        let value = format!(
            "{}; {} if cut ones were whole",
            numbers::length(mean, unit, 3),
            numbers::length(plain, unit, 3)
        );
        facts.push(fact(
            "Mean length",
            value,
            "Crests that leave the patch are longer than what is seen of them: Kaplan and Meier's mean takes that into account, the plain mean does not.",
        ));
    }
    facts.push(fact("Density", density(n.density, unit), "Crest length over area."));
    facts.extend(n.sinuosity.map(|s| {
        fact("Sinuosity", numbers::fixed(s, 3), "Length over the distance of the ends, all crests together.")
    }));
    if let Some((axis, resultant)) = n.azimuth {
        let value = format!("{}°, R {}", numbers::fixed(axis.deg(), 1), numbers::fixed(resultant, 2));
        facts.push(fact(
            "Trend by length",
            value,
            "Mean axis of the crests, each piece weighted by its length, and its doubled resultant length.",
        ));
    }
    if let Some(axis) = trend.axis {
        facts.push(fact(
            "Trend by nodes",
            numbers::axis_with_interval(axis, trend.ci95_half_deg),
            "Of the structure tensor: a second opinion that knows nothing of lines.",
        ));
    }
    sourced(facts)
}

/// "84: 70 traced (12 accepted), 5 drawn".
fn origins(lines: &[CrestLine]) -> String {
    let all = [CrestOrigin::Traced, CrestOrigin::Edited, CrestOrigin::Drawn, CrestOrigin::Imported];
    let part = |origin: CrestOrigin| {
        let of = lines.iter().filter(|line| line.origin == origin);
        let accepted = of.clone().filter(|line| line.accepted).count();
        let words = match accepted {
            0 => format!("{} {}", numbers::count(of.clone().count()), origin.name()),
            accepted => {
                format!("{} {} ({accepted} accepted)", numbers::count(of.clone().count()), origin.name())
            }
        };
        (of.count() > 0).then_some(words)
    };
    let parts: Vec<String> = all.into_iter().filter_map(part).collect();
    match parts.as_slice() {
        [] => "none".into(),
        parts => format!("{}: {}", numbers::count(lines.len()), parts.join(", ")),
    }
}

/// Length over area in the usual unit.
fn density(density: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre => format!("{} km/km²", numbers::significant(1e3 * density, 3)),
        LengthUnit::Pixel => format!("{} a pixel", numbers::significant(density, 3)),
    }
}

/// Spacing three ways.
pub fn spacing(crests: &CrestsFinding, unit: LengthUnit) -> Vec<Fact> {
    let (s, [spectrum, ..]) = (&crests.spacing, crests.spacings);
    let length = |value: f64| numbers::length(value, unit, 3);
    let known = |value: Option<f64>| value.map_or_else(|| "not known".to_owned(), length);
    let cut = match s.uncensored_median {
        Some(whole) => format!("{}; {} from those seen whole", known(s.quartiles[1]), length(whole)),
        None => known(s.quartiles[1]),
    };
    let mut facts = vec![
        fact("Spacing, spectrum", known(spectrum), "Dominant wavelength of the patch (page Spacing)."),
        fact(
            "Spacing, transects",
            cut,
            "Median from crest to crest, square to them. Transects that leave the patch are counted as longer than what is seen of them; without that a small patch makes spacings too short.",
        ),
    ];
    if let [Some(low), _, Some(high)] = s.quartiles {
        let value = format!("{} to {}", length(low), length(high));
        facts.push(fact("Between quartiles", value, "Half of the transects lie between."));
    }
    facts.push(fact(
        "Spacing, area",
        known(s.stereology),
        "Area over crest length: what parallel crests would be apart. It asks for no neighbour.",
    ));
    sourced(facts)
}

/// Ends, forks and what they say of how mature the pattern is.
pub fn defects(crests: &CrestsFinding, unit: LengthUnit) -> Vec<Fact> {
    let d = &crests.defects;
    let mut facts = vec![fact(
        "Ends and forks",
        format!(
            "{} free ends, {} forks, {} crossings; {} ends cut by border or gap",
            d.ends, d.forks, d.crossings, d.cut_ends
        ),
        "An end at the border of the patch or at missing ground is no defect.",
    )];
    let both =
        "Per length, and per twice the length: both conventions are published. Compare like with like.";
    for (label, densities) in
        [("Ends by length", d.ends_per_length), ("Ends and forks by length", d.with_forks_per_length)]
    {
        facts.extend(densities.map(|[one, two]| {
            fact(label, format!("N/L {}, N/2L {}", per_length(one, unit), per_length(two, unit)), both)
        }));
    }
    facts.extend(d.dimensionless.map(|it| {
        let hint =
            "Free ends times spacing over crest length: patterns of any size on one scale; small is mature.";
        fact("Defects, dimensionless", numbers::significant(it, 3), hint)
    }));
    sourced(facts)
}

fn per_length(value: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre => format!("{} per km", numbers::significant(1e3 * value, 3)),
        LengthUnit::Pixel => format!("{} per 1000 pixels", numbers::significant(1e3 * value, 3)),
    }
}

/// Which way forks open and what that would mean; empty without forks or trend.
pub fn forks(crests: &CrestsFinding) -> Vec<Fact> {
    let (Some(forks), Some(toward)) = (&crests.forks, crests.forks_toward) else { return Vec::new() };
    let heading = |azimuth: Azimuth| format!("{}°", numbers::fixed(azimuth.deg(), 0));
    let [there, back] = [heading(toward), heading(toward.reversed())];
    let value = format!(
        "{} toward {there}, {} toward {back}, {} neither way",
        forks.toward, forks.away, forks.unclear
    );
    let counted = forks.toward + forks.away;
    let meaning = if counted == 0 {
        "no fork opens along the trend".to_owned()
    } else if forks.p > LEVEL {
        "no side is preferred: they do not tell which way the sand went".to_owned()
    } else {
        let sand = if forks.toward > forks.away { back } else { there };
        format!("were these linear dunes, sand went toward {sand}; a clue, no proof")
    };
    sourced(vec![
        fact("Forks open", value, "Along the trend; a fork opens from its stem toward its two arms."),
        fact(
            "By chance",
            numbers::p_value(forks.p),
            "Two-sided: how often so many would open one way if both were as likely.",
        ),
        fact("It would mean", meaning, "Linear dunes fork upwind. Drainage and wakes behind rocks fork too."),
    ])
}

/// One line; `frame` makes ground lengths of its pixels.
pub fn line(line: &CrestLine, frame: Option<LocalFrame>, unit: LengthUnit) -> Vec<Fact> {
    let ground = |dx: f64, dy: f64| frame.map_or((dx, -dy), |frame| frame.ground(dx, dy));
    let steps = line.line.0.windows(2).map(|w| ground(w[1].x - w[0].x, w[1].y - w[0].y));
    let length: f64 = steps.map(|(e, n)| e.hypot(n)).sum();
    let ends = line.line.0.first().zip(line.line.0.last());
    let chord = ends.map(|(a, b)| ground(b.x - a.x, b.y - a.y)).filter(|(e, n)| e.hypot(*n) > 0.0);
    let pixels = line.line.length().max(f64::MIN_POSITIVE);
    let share = |px: f64| numbers::percent((px / pixels).min(1.0));
    let mut facts = vec![fact("Length", numbers::length(length, unit, 3), "Along the ground.")];
    if let Some((east, north)) = chord {
        let axis = crate::ground::Axis::from_east_north(east, north);
        let value = format!(
            "{}°, sinuosity {}",
            numbers::fixed(axis.deg(), 0),
            numbers::fixed(length / east.hypot(north), 2)
        );
        facts.push(fact("Runs along", value, "From end to end, clockwise from north."));
    }
    let mut origin = line.origin.name().to_owned();
    if line.accepted {
        origin += ", accepted";
    }
    if line.by_hand_px > 0.0 && line.origin == CrestOrigin::Edited {
        origin += &format!(", {} by hand", share(line.by_hand_px));
    }
    facts.push(fact("Comes from", origin, "The detector, your hand, or a file."));
    if matches!(line.origin, CrestOrigin::Traced | CrestOrigin::Edited) {
        let mut value = numbers::percent(line.confidence);
        if line.bridged_px > 0.0 {
            value += &format!(", {} over gaps", share(line.bridged_px));
        }
        facts.push(fact(
            "Evidence",
            value,
            "Response along it between the threshold to follow and the one to start a line. Not a probability.",
        ));
    }
    let [a, b] = line.ends.map(end_words);
    let value = if line.ends[0] == End::Closed { "none: it closes".to_owned() } else { format!("{a}; {b}") };
    facts.push(fact("Ends", value, "Why the line stops. Only free ends are defects."));
    facts
}

/// The line under way.
pub fn tracing(tracing: &Tracing) -> Vec<Fact> {
    let Subject::Crest { ends, joins, .. } = tracing.subject else { return Vec::new() };
    let becomes = match (joins, ends.map(|end| end.is_some())) {
        (true, _) | (_, [true, true]) => "a join: the lines at its ends become one",
        (_, [false, false]) => "a crest of its own",
        _ => "the line at its end goes on",
    };
    let next = if joins {
        "Backspace takes it back, then the other end"
    } else {
        "Backspace takes one back, Enter ends"
    };
    let mut facts = vec![
        fact("Picks", format!("{}; {next}", tracing.picks.len()), "Of the crest under way."),
        fact("It will be", becomes, "By the ends of other lines at its own."),
    ];
    let last = tracing.live.as_ref().or(tracing.legs.iter().flatten().last());
    if last.is_some_and(|leg| leg.way.is_none()) {
        let straight = "straight: there is no ground for the pen here";
        facts.push(fact("Way", straight, "Off the raster, or no data.").by("crest.pen"));
    }
    facts
}

fn end_words(end: End) -> &'static str {
    match end {
        End::Free => "free",
        End::Junction => "on another line",
        End::Border => "at the border",
        End::Gap => "at a gap",
        End::Closed => "none",
    }
}

#[cfg(test)]
mod tests {
    use super::METHODS;

    #[test]
    fn every_method_named_has_a_record() {
        let known = crate::science::methods();
        for (label, id) in METHODS {
            assert!(known.iter().any(|m| m.id == *id), "{label} names {id}, which has no record");
        }
    }
}
