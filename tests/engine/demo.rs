//! Sorrel Reach measured and held against the truth it was made from.

use std::sync::OnceLock;

use ventifact::ground::{Axis, Point, Work};
use ventifact::science::scene::reach::{self, PatchTruth};
use ventifact::study::handover::findings_json;
use ventifact::study::run::{Memo, run};
use ventifact::study::sheet_file::SheetFile;
use ventifact::study::{Birth, Findings, PatchFinding, Sheet, Sources, demo};

/// The demo's sheet and findings, made once for all tests of this file.
pub fn reach_findings() -> &'static (Sheet, Findings, tempfile::TempDir) {
    static MADE: OnceLock<(Sheet, Findings, tempfile::TempDir)> = OnceLock::new();
    MADE.get_or_init(|| {
        let folder = tempfile::tempdir().unwrap();
        let path = demo::lay_out(folder.path()).unwrap();
        let text = std::fs::read_to_string(&path).unwrap();
        let sheet = SheetFile::parse(&text, path.parent().unwrap()).unwrap().sheet;
        let findings = run(&sheet, &Sources::open(&sheet), &Memo::default(), &Work::quiet()).unwrap();
        (sheet, findings, folder)
    })
}

fn patch(name: &str) -> (&'static PatchFinding, PatchTruth) {
    let (_, findings, _) = reach_findings();
    let finding = findings.patches.iter().find(|p| p.name == name).expect("the patch was measured");
    let truth = reach::patches().into_iter().find(|t| t.name == name).expect("the patch has a truth");
    (finding, truth)
}

/// The stated grid trend as a true azimuth at the middle of the patch.
fn true_trend(truth: &PatchTruth, grid_trend: Axis) -> Axis {
    let (sheet, ..) = reach_findings();
    let sources = Sources::open(sheet);
    let place = &sources.rasters[&sheet.rasters[0].id].place;
    let b = truth.outline.bounds().unwrap();
    let frame = place.local_frame(b.centre()).unwrap();
    let (sin, cos) = grid_trend.rad().sin_cos();
    frame.azimuth(sin, -cos).axis()
}

#[test]
fn nothing_of_the_demo_fails() {
    let (_, findings, _) = reach_findings();
    assert_eq!(findings.failures, vec![]);
    assert_eq!(findings.patches.len(), 3);
    assert_eq!(findings.winds.len(), 2);
}

#[test]
fn trends_and_spacings_hold_the_truth_within_their_intervals() {
    for name in ["Long dunes", "Corridor dunes"] {
        let (finding, truth) = patch(name);
        let bedforms = truth.bedforms.unwrap();
        let want = true_trend(&truth, bedforms.grid_trend);
        let trend = &finding.trend;
        assert!(trend.defined, "{name}: {}", finding.sentence);
        let (axis, half) = (trend.axis.unwrap(), trend.ci95_half_deg.unwrap());
        println!("{name}: trend {:.2} ± {half:.2}, truth {:.2}", axis.deg(), want.deg());
        assert!(axis.separation(want) <= half, "{name}: trend {axis:?} ± {half}, truth {want:?}");
        assert!(half < 6.0, "{name}: the interval ± {half}° says too little");
        let (spacing, [low, high]) =
            (finding.spectrum.spacing.unwrap(), finding.spectrum.spacing_ci95.unwrap());
        println!("{name}: spacing {spacing:.0} m ({low:.0} to {high:.0}), truth {}", bedforms.spacing_m);
        assert!(
            (low..=high).contains(&bedforms.spacing_m),
            "{name}: spacing {low} to {high}, truth {}",
            bedforms.spacing_m
        );
        assert!(high - low < 0.3 * spacing, "{name}: spacing interval {low} to {high} says too little");
    }
}

#[test]
fn the_bare_plain_has_no_preferred_trend() {
    let (finding, _) = patch("Bare plain");
    assert!(!finding.trend.defined, "{}", finding.sentence);
    assert_eq!(finding.trend.axis, None);
    assert!(!finding.spectrum.defined, "{}", finding.sentence);
    assert!(finding.sentence.contains("no preferred trend"), "{}", finding.sentence);
    assert!(finding.verdicts.iter().all(|v| v.refused.is_some()), "{}", finding.sentence);
}

#[test]
fn the_classes_are_the_ones_the_winds_were_made_for() {
    for name in ["Long dunes", "Corridor dunes"] {
        let (finding, truth) = patch(name);
        let verdict = &finding.verdicts[0];
        let p = verdict.probabilities.unwrap_or_else(|| panic!("{name}: {:?}", verdict.refused));
        let class =
            ["longitudinal", "oblique", "transverse"][(0..3).max_by(|a, b| p[*a].total_cmp(&p[*b])).unwrap()];
        println!("{name}: {p:?}, obliquity {:?} {:?}", verdict.obliquity_deg, verdict.obliquity_ci95_deg);
        assert_eq!(Some(class), truth.class, "{name}: {}", finding.sentence);
    }
}

/// The long dunes were made to follow the flow round both outcrops: 0° to the wind.
#[test]
fn the_outcrops_tell_the_obliquity_they_were_made_with() {
    let (finding, _) = patch("Long dunes");
    let found = finding.obstacles.as_ref().expect("the patch has outcrops");
    let truths = reach::outcrops();
    assert_eq!(found.outcrops.len(), truths.len());
    for (outcrop, truth) in found.outcrops.iter().zip(&truths) {
        let test = outcrop.outcome.as_ref().unwrap_or_else(|why| panic!("{}: {why}", truth.name));
        let o = &test.obliquity;
        println!(
            "{}: {o:?}, {:?}, pattern p {}, null {:?}, dipole {:?}",
            truth.name, test.estimate, test.pattern_p, test.null, test.dipole
        );
        assert_eq!(test.undecided, None, "{}", truth.name);
        let half = o.half_deg.unwrap();
        let off = Axis::from_deg(o.signed_deg).separation(Axis::from_deg(truth.obliquity_deg));
        assert!(off <= half, "{}: {off:.1}° off, half width {half:.1}°", truth.name);
        assert!(half < 20.0, "{}: ± {half}° says too little", truth.name);
    }
    let combined = found.combined.unwrap();
    println!("together: {combined:?}");
    assert!(combined.obliquity.folded_deg() <= combined.obliquity.half_deg.unwrap());
    assert!(finding.sentence.contains("between crests and wind"), "{}", finding.sentence);
    let (_, findings, _) = reach_findings();
    let others = findings.patches.iter().filter(|p| p.name != "Long dunes");
    assert!(
        others.into_iter().all(|p| p.obstacles.is_none()),
        "outcrops belong to the patch round them only"
    );
}

/// The long dunes were laid along the direction in which their winds extend crests; a bed covered with sand
/// would have raised them more than 20° away.
#[test]
fn the_long_dunes_are_told_to_be_fingers_and_the_threshold_could_change_that() {
    let (finding, _) = patch("Long dunes");
    let verdict = &finding.verdicts[0];
    for theory in &verdict.theories {
        println!(
            "{:<34} {:?} {:.2} {:.3}",
            theory.name, theory.axis, theory.ln_bayes_factor, theory.posterior
        );
    }
    let best = verdict.theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior)).unwrap();
    assert_eq!(best.name, "fingering", "{}", finding.sentence);
    assert!(verdict.building.extended > 0.8, "{:?}", verdict.building);
    assert!(verdict.supply_ln.unwrap() < -2.0, "starved ground: {:?}", verdict.supply_ln);
    for flip in &verdict.flips {
        println!("{} now {} at {}: {} ({:?})", flip.parameter, flip.now, flip.at, flip.change, flip.reach);
    }
    assert!(verdict.flips.iter().any(|f| f.parameter == "threshold"), "{:?}", verdict.flips);
    assert!(finding.sentence.contains("fingering"), "{}", finding.sentence);
}

#[test]
fn one_thread_and_two_give_the_same_bits_and_so_does_the_memo() {
    let (sheet, findings, _) = reach_findings();
    let sources = Sources::open(sheet);
    let memo = Memo::default();
    let with = |threads: usize, memo: &Memo| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| run(sheet, &sources, memo, &Work::quiet()).unwrap())
    };
    same_bits(&with(1, &memo), findings, "one thread");
    same_bits(&with(2, &memo), findings, "from the memo");
    same_bits(&with(2, &Memo::default()), findings, "two threads");
}

/// Written out with every digit, since a missing cell of a picture is NaN and so equals nothing.
fn same_bits(got: &Findings, want: &Findings, what: &str) {
    let (got, want) = (format!("{got:?}"), format!("{want:?}"));
    if let Some(at) = got.bytes().zip(want.bytes()).position(|(a, b)| a != b) {
        let around = |text: &str| text.chars().skip(at.saturating_sub(80)).take(160).collect::<String>();
        panic!("{what}: got …{}…, want …{}…", around(&got), around(&want));
    }
    assert_eq!(got.len(), want.len(), "{what}");
}

#[test]
fn nodes_lie_inside_their_patch() {
    let (sheet, findings, _) = reach_findings();
    for finding in &findings.patches {
        let outline = &sheet.patch(finding.id).unwrap().outline;
        assert!(
            finding.trend.nodes.iter().all(|n| outline.contains(Point::new(n.at.x, n.at.y))),
            "{}",
            finding.name
        );
    }
}

/// Kilometre dunes are no first dunes; what starts the sand is handed over with its range.
#[test]
fn the_long_dunes_are_grown_and_the_thresholds_go_out_with_their_ranges() {
    let (sheet, findings, _) = reach_findings();
    let (long, _) = patch("Long dunes");
    let birth = long.birth.first().expect("the mast's air is known");
    assert_eq!(birth.standing, Birth::Grown, "{}", birth.sentence);
    let spacing = long.spectrum.spacing.expect("a spacing");
    assert!(birth.ratio[0] < spacing / 9.0 && spacing / 9.0 < birth.ratio[1], "{:?}", birth.ratio);

    let text = findings_json(sheet, findings);
    let json: serde_json::Value = serde_json::from_str(&text).expect("a document");
    let sand = &json["winds"][0]["sand"];
    let laws: Vec<_> = sand["thresholds"].as_array().expect("a list").iter().map(|t| &t["law"]).collect();
    assert_eq!(laws, ["Bagnold", "Iversen–White", "Shao–Lu"]);
    let chosen = sand["thresholds"][2]["ustar_m_per_s"]["value"].as_f64();
    assert_eq!(chosen, json["winds"][0]["threshold_ustar_m_per_s"].as_f64(), "the threshold used");
    assert_eq!(json["patches"][0]["birth"][0]["standing"], "grown");
    assert!(json["patches"][2]["birth"].as_array().expect("a list").is_empty(), "no spacing, no birth");
}
