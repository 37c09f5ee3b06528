//! What is printed under a plate: methods with their sources, cautions, and the recipe that
//! reproduces it.

use crate::ground::{Caution, Method, ReachOrigin, Read, Source};
use crate::science::crest::CrestOrigin;
use crate::science::drainage::condition::Conditioning;
use crate::science::drainage::heads::HeadRule;
use crate::science::drainage::routing::Router;
use crate::science::{channel, crest, drainage, network};
use crate::study::{CrestsFinding, NetworkFinding, PatchFinding, WindFinding};

/// What made a plate.
#[derive(Clone, Debug, PartialEq)]
pub struct Recipe {
    /// Name and version, `"Ventifact 0.1.0"`.
    pub program: String,
    pub sheet_title: String,
    pub sheet_fingerprint: String,
    pub seed: u64,
}

/// Methods that stand behind every trend.
const TREND: &[&str] =
    &["orientation.structure-tensor", "orientation.noise-floor", "axial.mean", "axial.rayleigh"];
const INTERVAL: &[&str] = &["axial.interval", "axial.effective-number"];
const BOOTSTRAP: &str = "axial.block-bootstrap";
const MIXTURE: &str = "axial.mixture";
const SPECTRUM: &[&str] = &["orientation.spectrum"];
const WINDS: &[&str] = &["wind.log-law", "wind.transport-law", "wind.resultant-drift"];
const OBSTACLES: &[&str] = &["obstacle.potential-flow", "obstacle.obliquity", "obstacle.virtual"];
const SEVERAL_OBSTACLES: &str = "obstacle.combined";
const SCALES: &[&str] = &["orientation.scale-sweep", "orientation.plateau"];
const POPULATIONS: &[&str] = &["orientation.populations", "orientation.band"];
const LIGHT: &str = "orientation.look-bias";
/// Injection and recovery.
pub(super) const RECOVERY: &[&str] = &["scene.bedforms", "scene.texture"];
/// Two pictures of one ground, beside the tests that were made.
pub(super) const COMPARISON: &[&str] = &["axial.two-samples", "axial.paired", "crest.shift"];
const VERDICT: &[&str] = &["alignment.obliquity", "alignment.bayes-factor"];

/// Where sand moves, people may be in its way.
pub(super) const SAFETY: &str = "Where roads, buildings or people may lie in the path of moving sand, local codes and \
     licensed practice decide; this plate is evidence for them and no design.";

/// The keys of the methods a patch's results rest on, in the order of the reasoning.
pub(super) fn methods_of(patch: &PatchFinding) -> Vec<&'static str> {
    let mut keys: Vec<&'static str> = TREND.to_vec();
    keys.extend(INTERVAL);
    if patch.trend.ci95_source == "block bootstrap" {
        keys.push(BOOTSTRAP);
    }
    if patch.trend.modes.len() > 1 {
        keys.push(MIXTURE);
    }
    if !patch.pattern.scales.is_empty() {
        keys.extend(SCALES);
    }
    if !patch.pattern.populations.is_empty() {
        keys.extend(POPULATIONS);
    }
    keys.extend(patch.pattern.light.is_some().then_some(LIGHT));
    if patch.spectrum.windows > 0 {
        keys.extend(SPECTRUM);
    }
    keys.extend(methods_of_crests(patch));
    if !patch.verdicts.is_empty() {
        keys.extend(WINDS);
        keys.extend(VERDICT);
        for theory in patch.verdicts.iter().flat_map(|v| &v.theories).filter(|t| t.prior > 0.0) {
            if !keys.contains(&theory.method) {
                keys.push(theory.method);
            }
        }
    }
    if patch.backwards.is_some() && patch.verdicts.is_empty() {
        keys.push("alignment.backwards");
    }
    if let Some(found) = &patch.obstacles {
        keys.extend(OBSTACLES);
        keys.extend(found.combined.is_some().then_some(SEVERAL_OBSTACLES));
    }
    keys
}

/// The keys of the methods the crests of a patch rest on; none where none were traced.
pub(super) fn methods_of_crests(patch: &PatchFinding) -> Vec<&'static str> {
    let Ok(found) = &patch.crests else { return Vec::new() };
    crest::METHODS.iter().map(|m| m.id).filter(|id| serves_crests(found, id)).collect()
}

/// Whether a method of crests had a part in the finding; one that is not listed always has.
fn serves_crests(found: &CrestsFinding, id: &str) -> bool {
    let by_hand = |l: &crest::CrestLine| matches!(l.origin, CrestOrigin::Edited | CrestOrigin::Drawn);
    match id {
        "crest.pen" | "crest.editing" => found.lines.iter().any(by_hand),
        "crest.fork-polarity" => found.forks.is_some(),
        "crest.shift" => false,
        _ => true,
    }
}

/// The keys of the methods a network's results rest on: those of its source, then the measures.
pub(super) fn methods_of_network(finding: &NetworkFinding) -> Vec<&'static str> {
    let source = [
        finding.drainage.as_ref().map(|_| drainage::METHODS),
        finding.tracing.as_ref().map(|_| channel::METHODS),
        Some(network::METHODS),
    ];
    source.into_iter().flatten().flatten().map(|m| m.id).filter(|id| serves(finding, id)).collect()
}

/// Whether a method of the three families had a part in the finding; one that is not listed always has.
fn serves(finding: &NetworkFinding, id: &str) -> bool {
    let routed = finding.drainage.as_ref();
    let sinks = |which: &[Conditioning]| routed.is_some_and(|d| which.contains(&d.conditioning));
    let by = |router| routed.is_some_and(|d| d.router == router);
    let seen = finding.tracing.as_ref();
    match id {
        "drainage.fill" => {
            sinks(&[Conditioning::Fill, Conditioning::FillSloped, Conditioning::BreachThenFill])
        }
        "drainage.flats" => sinks(&[Conditioning::FillSloped, Conditioning::BreachThenFill]),
        "drainage.breach" => sinks(&[Conditioning::Breach, Conditioning::BreachThenFill]),
        "drainage.d-infinity" => by(Router::DInfinity),
        "drainage.freeman" => by(Router::Freeman),
        "drainage.quinn" => by(Router::Quinn),
        "drainage.curved-area" => routed.is_some_and(|d| d.channels.rule == HeadRule::CurvedArea),
        "channel.strip-response" | "channel.proposal" => seen.is_some_and(|t| t.proposed_reaches > 0),
        "channel.pen" | "channel.pen-cost" | "channel.pen-chance" => {
            finding.network.reaches.iter().any(|r| r.origin == ReachOrigin::Traced)
        }
        "channel.width" => finding.network.reaches.iter().any(|r| r.width.is_some()),
        "network.planform" | "network.meanders" => !finding.planforms.is_empty(),
        "network.palaeo-flow" => finding.flow.is_ok(),
        "network.horton" => finding.horton.is_some(),
        "network.tokunaga" => finding.tokunaga.is_some(),
        "network.density" => finding.density.is_some(),
        "network.hack" => finding.hack.is_some(),
        "network.flint" => finding.flint.is_some(),
        "network.steepness" | "network.knickpoints" => !finding.profiles.is_empty(),
        "network.chi" => finding.chi.is_some(),
        "network.hypsometry" => finding.hypsometry.is_some(),
        "network.junctions" => !finding.junctions.angles.is_empty(),
        "network.agreement" => !finding.agreements.is_empty(),
        _ => true,
    }
}

/// `"Methods: structure tensor (Bigün & Granlund 1987*); … * cited from memory."` for the keys that
/// `known` holds, each method once.
pub(super) fn cited(keys: &[&str], known: &[&Method]) -> String {
    let mut remarks: Vec<Read> = Vec::new();
    let mut parts = Vec::new();
    for key in keys {
        let Some(method) = known.iter().find(|m| m.id == *key) else { continue };
        let sources: Vec<String> = method.sources.iter().map(|s| short(s, &mut remarks)).collect();
        let name = method.name;
        parts.push(if sources.is_empty() {
            name.to_owned()
        } else {
            format!("{name} ({})", sources.join("; "))
        });
    }
    if parts.is_empty() {
        return String::new();
    }
    let mut text = format!("Methods: {}.", parts.join("; "));
    let notes: Vec<String> =
        remarks.iter().map(|read| format!("{} {}", mark(*read), read.remark())).collect();
    if !notes.is_empty() {
        text += &format!(" {}.", notes.join(", "));
    }
    text
}

/// `"Bigün & Granlund 1987*"`; three authors or more become "et al.".
fn short(source: &Source, remarks: &mut Vec<Read>) -> String {
    if !source.read.remark().is_empty() && !remarks.contains(&source.read) {
        remarks.push(source.read);
    }
    if source.read == Read::Derived {
        return format!("this program{}", mark(source.read));
    }
    let authors: Vec<&str> = source.authors.split("; ").flat_map(|part| part.split(" and ")).collect();
    let surname = |author: &str| author.split(',').next().unwrap_or(author).trim().to_owned();
    let names = match authors.as_slice() {
        [] => String::new(),
        [one] => surname(one),
        [one, two] => format!("{} & {}", surname(one), surname(two)),
        [first, ..] => format!("{} et al.", surname(first)),
    };
    let locator = if source.locator.is_empty() { String::new() } else { format!(", {}", source.locator) };
    format!("{names} {}{locator}{}", source.year, mark(source.read))
}

fn mark(read: Read) -> &'static str {
    match read {
        Read::Opened => "",
        Read::Abstract => "†",
        Read::Memory => "*",
        Read::Derived => "‡",
    }
}

/// All cautions of a patch, its verdicts and the winds behind them; each text once.
pub(super) fn cautions(patch: &PatchFinding, winds: &[WindFinding]) -> Vec<Caution> {
    let of_verdicts = patch.verdicts.iter().flat_map(|v| &v.cautions);
    let of_winds =
        winds.iter().filter(|w| patch.verdicts.iter().any(|v| v.winds == w.id)).flat_map(|w| &w.cautions);
    let mut all: Vec<Caution> = Vec::new();
    let of_outcrops = patch.obstacles.iter().flat_map(|o| &o.cautions);
    let of_crests = patch.crests.iter().flat_map(|c| &c.cautions);
    let of_populations = patch.pattern.populations.iter().flat_map(|p| &p.cautions);
    let of_pattern = of_crests.chain(of_populations);
    let of_findings = of_verdicts.chain(of_winds).chain(of_outcrops).chain(of_pattern);
    for caution in patch.cautions.iter().chain(of_findings) {
        if !all.iter().any(|c| c.text == caution.text) {
            all.push(caution.clone());
        }
    }
    all
}

/// `"Ventifact 0.1.0 · sheet “Sorrel Reach” 1f3a9c2e04b7 · seed 1"`.
pub(super) fn recipe_line(recipe: &Recipe, finding: Option<&str>) -> String {
    let brief = |hash: &str| hash.chars().take(12).collect::<String>();
    let mut line = format!(
        "{} · sheet “{}” {} · seed {}",
        recipe.program,
        recipe.sheet_title,
        brief(&recipe.sheet_fingerprint),
        recipe.seed
    );
    if let Some(finding) = finding {
        line += &format!(" · finding {}", brief(finding));
    }
    line
}

#[cfg(test)]
mod tests {
    use super::*;

    const SOURCE: Source = Source {
        key: "bigun1987",
        authors: "Bigün, J. and Granlund, G. H.",
        year: 1987,
        title: "Optimal orientation detection of linear symmetry",
        published: "ICCV",
        locator: "",
        read: Read::Memory,
    };
    const METHOD: Method = Method {
        id: "orientation.structure-tensor",
        name: "structure tensor",
        question: "",
        formula: "",
        symbols: &[],
        assumptions: &[],
        limits: &[],
        sources: &[
            SOURCE,
            Source {
                authors: "A, B.; C, D.; E, F.",
                year: 2001,
                locator: "eq. 3",
                read: Read::Opened,
                ..SOURCE
            },
        ],
    };

    #[test]
    fn citations_are_short_and_say_how_they_were_read() {
        let text = cited(&["orientation.structure-tensor", "no.such"], &[&METHOD]);
        assert_eq!(
            text,
            "Methods: structure tensor (Bigün & Granlund 1987*; A et al. 2001, eq. 3). * cited from memory."
        );
        assert_eq!(cited(&["no.such"], &[&METHOD]), "");
    }

    #[test]
    fn every_method_a_caption_may_cite_is_known() {
        let known = crate::science::methods();
        let keys = [
            TREND,
            INTERVAL,
            &[BOOTSTRAP, MIXTURE, SEVERAL_OBSTACLES, LIGHT],
            SPECTRUM,
            WINDS,
            VERDICT,
            OBSTACLES,
            SCALES,
            POPULATIONS,
        ]
        .concat();
        for key in keys {
            assert!(known.iter().any(|m| m.id == key), "{key}");
        }
    }

    #[test]
    fn the_recipe_names_program_sheet_and_seed() {
        let recipe = Recipe {
            program: "Ventifact 0.1.0".into(),
            sheet_title: "Sorrel Reach".into(),
            sheet_fingerprint: "0123456789abcdef".into(),
            seed: 7,
        };
        let line = recipe_line(&recipe, Some("ff00"));
        assert_eq!(line, "Ventifact 0.1.0 · sheet “Sorrel Reach” 0123456789ab · seed 7 · finding ff00");
    }
}
