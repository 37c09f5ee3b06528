//! Guards: the house stays as DEVELOPERS.md draws it.

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// Every `.rs` file below `folder`, with its path from the package root and its text.
fn sources(folder: &str) -> Vec<(String, String)> {
    let mut found = Vec::new();
    let mut waiting = vec![root().join(folder)];
    while let Some(path) = waiting.pop() {
        if path.is_dir() {
            waiting.extend(fs::read_dir(&path).unwrap().map(|entry| entry.unwrap().path()));
        } else if path.extension().is_some_and(|e| e == "rs") {
            let name = path.strip_prefix(root()).unwrap().to_string_lossy().replace('\\', "/");
            found.push((name, fs::read_to_string(&path).unwrap()));
        }
    }
    found.sort();
    found
}

/// The floors table of DEVELOPERS.md: floor → floors it may name.
fn floors() -> BTreeMap<String, Vec<String>> {
    let text = fs::read_to_string(root().join("DEVELOPERS.md")).unwrap();
    let table = text.split("```floors\n").nth(1).and_then(|t| t.split("```").next()).expect("a floors table");
    table
        .lines()
        .map(|line| {
            let mut words = line.split_whitespace().map(str::to_owned);
            (words.next().expect("a floor"), words.collect())
        })
        .collect()
}

/// Code without comments and string contents, so that prose may name anything.
fn code(text: &str) -> String {
    text.lines().map(|line| line.split("//").next().unwrap_or("")).collect::<Vec<_>>().join("\n")
}

/// The first path segments named after `prefix` in the code, `{a, b::c}` groups included.
fn named(code: &str, prefix: &str) -> Vec<String> {
    let mut names = Vec::new();
    for (at, _) in code.match_indices(prefix) {
        let before = code[..at].chars().next_back();
        if before.is_some_and(|c| c.is_alphanumeric() || c == '_' || c == ':') {
            continue;
        }
        let rest = &code[at + prefix.len()..];
        if let Some(group) = rest.strip_prefix('{') {
            let mut depth = 0;
            let mut start = true;
            for (i, c) in group.char_indices() {
                match c {
                    '{' => depth += 1,
                    '}' if depth == 0 => break,
                    '}' => depth -= 1,
                    ',' if depth == 0 => start = true,
                    c if start && !c.is_whitespace() => {
                        names.push(word(&group[i..]));
                        start = false;
                    }
                    _ => {}
                }
            }
        } else {
            names.push(word(rest));
        }
    }
    names
}

fn word(text: &str) -> String {
    text.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect()
}

#[test]
fn a_floor_names_only_the_floors_below_it() {
    let floors = floors();
    for (file, text) in sources("src") {
        let Some(floor) = file.strip_prefix("src/").and_then(|f| f.split_once('/')).map(|(f, _)| f) else {
            continue;
        };
        let may = floors.get(floor).unwrap_or_else(|| panic!("{file}: floor {floor} is not in the table"));
        for name in named(&code(&text), "crate::") {
            let fine = name == floor || may.contains(&name) || !floors.contains_key(&name);
            assert!(fine, "{file}: {floor} names {name}; it may name {may:?}");
        }
    }
}

#[test]
fn there_is_no_circle_in_the_table() {
    let floors = floors();
    let mut laid: Vec<&String> = Vec::new();
    while laid.len() < floors.len() {
        let next =
            floors.iter().find(|(f, below)| !laid.contains(f) && below.iter().all(|b| laid.contains(&b)));
        laid.push(next.expect("every floor rests on laid floors").0);
    }
}

#[test]
fn science_families_do_not_name_one_another_except_axial() {
    for (file, text) in sources("src/science") {
        let Some((family, _)) = file.trim_start_matches("src/science/").split_once('/') else { continue };
        for name in named(&code(&text), "crate::science::") {
            assert!(name == family || name == "axial", "{file}: family {family} names {name}");
        }
    }
}

#[test]
fn files_are_short_and_say_what_they_are_for() {
    for (file, text) in sources("src").into_iter().chain(sources("tests")) {
        let lines = text.lines().count();
        assert!(lines <= 500, "{file} has {lines} lines; split it, 500 is the most");
        assert!(text.starts_with("//!"), "{file} does not open with //!");
    }
}

#[test]
fn only_the_window_knows_the_toolkit_and_only_files_touch_the_disk() {
    for (file, text) in sources("src") {
        let code = code(&text);
        let tested = code.split("#[cfg(test)]").next().unwrap_or("");
        for toolkit in ["egui::", "eframe::", "egui_winit::", "winit::"] {
            let inside = file.starts_with("src/window/");
            assert!(inside || named(tested, toolkit).is_empty(), "{file} names {toolkit} outside window");
        }
        let may_read = file.starts_with("src/files/");
        assert!(may_read || !tested.contains("std::fs"), "{file} uses std::fs outside files");
    }
}

#[test]
fn no_globs_and_no_drawers_without_a_name() {
    for (file, text) in sources("src").into_iter().chain(sources("tests")) {
        let code = code(&text);
        for line in code.lines().map(str::trim).filter(|l| l.starts_with("use ") || l.starts_with("pub use "))
        {
            let allowed = ["use super::*;", "prelude::*;"].iter().any(|glob| line.ends_with(glob));
            assert!(!line.contains("::*") || allowed, "{file}: {line}");
        }
        let stem = PathBuf::from(&file).file_stem().unwrap().to_string_lossy().into_owned();
        for drawer in ["utils", "util", "common", "helpers", "helper", "manager", "misc"] {
            assert!(
                stem != drawer && !file.contains(&format!("/{drawer}/")),
                "{file}: name the room after its content"
            );
        }
    }
}
