//! The pages that are made from records stay fresh: `UPDATE_DOCS=1 cargo test --test engine docs`
//! writes them anew.

use std::fs;
use std::path::Path;

use ventifact::study::handover::methods_markdown;
use ventifact::study::{SettingKind, SettingValue, Settings, all_settings};

fn fresh(name: &str, want: &str) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("docs").join(name);
    if std::env::var_os("UPDATE_DOCS").is_some() {
        fs::write(&path, want).unwrap();
    }
    let got = fs::read_to_string(&path).unwrap_or_default();
    assert!(got == want, "docs/{name} is out of date; run UPDATE_DOCS=1 cargo test --test engine docs");
}

#[test]
fn the_methods_page_is_fresh() {
    fresh("methods.md", &methods_markdown());
}

#[test]
fn the_settings_page_is_fresh() {
    let mut page = String::from(
        "# Settings\n\nMade from the records in `src/study/records.rs`. Every key stands under `settings` in a sheet \
         file; what is absent has its default.\n\n| key | default | range | unit | meaning |\n|---|---|---|---|---|\n",
    );
    for s in all_settings() {
        let default = match (s.get)(&Settings::default()) {
            SettingValue::Number(v) => v.to_string(),
            SettingValue::Auto(None) => "from the data".into(),
            SettingValue::Auto(Some(v)) => v.to_string(),
            SettingValue::Whole(v) => v.to_string(),
            SettingValue::Choice(key) => key.into(),
        };
        let range = match s.kind {
            SettingKind::Number { least, greatest } | SettingKind::Auto { least, greatest } => {
                format!("{least} to {greatest}")
            }
            SettingKind::Whole { least, greatest } => format!("{least} to {greatest}"),
            SettingKind::Choice(options) => {
                options.iter().map(|(key, _)| *key).collect::<Vec<_>>().join(", ")
            }
        };
        let unit = if s.unit == "1" { "" } else { s.unit };
        page.push_str(&format!("| `{}` | {default} | {range} | {unit} | {} |\n", s.key, s.help));
    }
    fresh("settings.md", &page);
}
