//! The program from the outside: exit codes, what goes where, files that are bad.

use std::fs;
use std::path::Path;
use std::process::{Command, Output};

use ventifact::files::raster::write_tiff;
use ventifact::ground::Grid;

fn ventifact(args: &[&str], folder: &Path) -> Output {
    Command::new(env!("CARGO_BIN_EXE_ventifact"))
        .args(args)
        .current_dir(folder)
        .env_remove("DISPLAY")
        .env_remove("WAYLAND_DISPLAY")
        .output()
        .expect("the binary runs")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

#[test]
fn the_demo_prints_its_findings_and_leaves_everything_behind() {
    let folder = tempfile::tempdir().unwrap();
    let output = ventifact(&["demo", "--no-window", "--out", "reach"], folder.path());
    let (out, err) = (text(&output.stdout), text(&output.stderr));
    assert_eq!(output.status.code(), Some(0), "{out}\n{err}");
    for words in ["Long dunes: trend", "Corridor dunes: trend", "Bare plain: no preferred trend"] {
        assert!(out.contains(words), "{words} is missing in\n{out}");
    }
    let findings = folder.path().join("reach/findings");
    for file in [
        "findings.json",
        "patches.csv",
        "nodes.csv",
        "winds.csv",
        "findings.gpkg",
        "overview-1-radar-mosaic.svg",
        "overview-1-radar-mosaic.png",
        "patch-5-long-dunes.pdf",
    ] {
        assert!(
            findings.join(file).is_file(),
            "{file} is missing; there is {:?}",
            fs::read_dir(&findings).unwrap().map(|e| e.unwrap().file_name()).collect::<Vec<_>>()
        );
    }
    let json: serde_json::Value =
        serde_json::from_str(&fs::read_to_string(findings.join("findings.json")).unwrap()).unwrap();
    assert_eq!(json["format"], 1);
    assert_eq!(json["patches"].as_array().unwrap().len(), 3);
    // The sheet it left gives the same findings again.
    let again = ventifact(&["run", "reach/sorrel-reach.sheet.json", "--out", "again"], folder.path());
    assert_eq!(again.status.code(), Some(0), "{}", text(&again.stderr));
    assert_eq!(
        fs::read(findings.join("findings.json")).unwrap(),
        fs::read(folder.path().join("again/findings.json")).unwrap()
    );
    let check = ventifact(&["check", "reach/sorrel-reach.sheet.json"], folder.path());
    assert_eq!(check.status.code(), Some(0), "{}", text(&check.stdout));
}

#[test]
fn a_file_that_is_no_raster_is_refused_in_words() {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("notes.tif"), "these are notes").unwrap();
    for args in [
        vec!["look", "notes.tif"],
        vec!["measure", "notes.tif"],
        vec!["look", "absent.tif"],
        vec!["run", "notes.tif"],
    ] {
        let output = ventifact(&args, folder.path());
        let err = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{args:?}: {err}");
        assert!(output.stdout.is_empty(), "{args:?}");
        assert!(err.contains(args[1]) && !err.contains("panicked"), "{args:?}: {err}");
    }
}

#[test]
fn wrong_words_are_wrong_use() {
    let folder = tempfile::tempdir().unwrap();
    let output = ventifact(&["measure"], folder.path());
    assert_eq!(output.status.code(), Some(2));
}

#[test]
fn methods_print_with_their_sources() {
    let folder = tempfile::tempdir().unwrap();
    let output = ventifact(&["methods"], folder.path());
    let page = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("docs/methods.md")).unwrap();
    assert_eq!(text(&output.stdout), page);
    let bibliography = text(&ventifact(&["methods", "--bibtex"], folder.path()).stdout);
    assert!(bibliography.contains("@misc{"), "{bibliography}");
}

#[test]
fn measure_takes_crests_of_ones_own() {
    let folder = tempfile::tempdir().unwrap();
    let waves = Grid::from_fn(320, 240, |c, r| ((c + 3 * r) % 16) as f32);
    write_tiff(&folder.path().join("dunes.tif"), &waves, None).unwrap();
    let lines = r#"{"type":"FeatureCollection","frame":"pixel","features":[{"type":"Feature","properties":{},
        "geometry":{"type":"MultiLineString","coordinates":[[[20,40],[300,40]],[[-50,90],[500,90]]]}}]}"#;
    fs::write(folder.path().join("own.geojson"), lines).unwrap();
    let measure = |file: &str| {
        let args = ["measure", "dunes.tif", "--crests", file, "--crests-only", "--out", "out"];
        ventifact(&args, folder.path())
    };
    let output = measure("own.geojson");
    let said = text(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{said}");
    assert!(said.contains("2 laid into Whole raster"), "{said}");
    let found = fs::read_to_string(folder.path().join("out/findings.json")).unwrap();
    let json: serde_json::Value = serde_json::from_str(&found).unwrap();
    let crests = &json["patches"][0]["crests"];
    assert_eq!((&crests["count"], &crests["origins"]["imported"]), (&2.into(), &2.into()));
    // The second is cut at the raster's sides.
    assert_eq!(crests["length"], 280.0 + 320.0);
    fs::write(folder.path().join("bad.geojson"), lines.replace("[20,40]", "[20,null]")).unwrap();
    let output = measure("bad.geojson");
    let said = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2), "{said}");
    assert!(said.contains("bad.geojson") && said.contains("feature 1: the position [20,null]"), "{said}");
}
