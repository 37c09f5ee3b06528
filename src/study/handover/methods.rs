//! The method records as a page and as a bibliography.

use std::collections::BTreeMap;

use crate::ground::{Method, Read, Source};
use crate::science;

/// `docs/methods.md`: what is computed, from which source, under which assumptions.
pub fn methods_markdown() -> String {
    let mut page = String::from(
        "# Methods\n\nMade from the method records in `src/science` (`UPDATE_DOCS=1 cargo test --test engine docs`); \
         `ventifact methods` prints the same. “Cited from memory” marks a source whose text nobody opened for this \
         program; its formula was checked by derivation or simulation.\n",
    );
    for method in science::methods() {
        page.push_str(&markdown(method));
    }
    page.push_str(&super::bodies::bodies_markdown());
    page
}

fn markdown(m: &Method) -> String {
    let mut text = format!("\n## {}\n\n`{}` — {}\n\n```text\n{}\n```\n", m.name, m.id, m.question, m.formula);
    if !m.symbols.is_empty() {
        text.push_str("\n| symbol | meaning | unit |\n|---|---|---|\n");
        for s in m.symbols {
            text.push_str(&format!("| {} | {} | {} |\n", cell(s.symbol), cell(s.meaning), cell(s.unit)));
        }
    }
    for (title, lines) in [("Assumes", m.assumptions), ("Limits", m.limits)] {
        if !lines.is_empty() {
            text.push_str(&format!("\n{title}:\n"));
            for line in lines {
                text.push_str(&format!("- {line}\n"));
            }
        }
    }
    if !m.sources.is_empty() {
        text.push_str("\nSources:\n");
        for s in m.sources {
            text.push_str(&format!("- {}\n", citation(s)));
        }
    }
    text
}

/// A bar would end a table cell.
fn cell(text: &str) -> String {
    text.replace('|', "\\|")
}

/// One line: authors, year, title, where, locator, and how it was read.
pub fn citation(s: &Source) -> String {
    let locator = if s.locator.is_empty() { String::new() } else { format!(", {}", s.locator) };
    let remark = s.read.remark();
    let remark = if remark.is_empty() { String::new() } else { format!(" [{remark}]") };
    format!("{} {}. {}. {}{locator}.{remark}", s.authors, s.year, s.title, s.published)
}

/// Every published source once, as BibTeX.
pub fn bibtex() -> String {
    let mut sources: BTreeMap<&str, &Source> = BTreeMap::new();
    for source in science::methods().into_iter().flat_map(|m| m.sources) {
        if source.read != Read::Derived {
            sources.entry(source.key).or_insert(source);
        }
    }
    sources.values().map(|s| entry(s)).collect::<Vec<_>>().join("\n")
}

fn entry(s: &Source) -> String {
    let mut fields = vec![
        ("author", s.authors.replace("; ", " and ")),
        ("year", s.year.to_string()),
        ("title", s.title.to_owned()),
        ("howpublished", s.published.to_owned()),
    ];
    let remark =
        [s.locator, s.read.remark()].iter().filter(|t| !t.is_empty()).copied().collect::<Vec<_>>().join("; ");
    if !remark.is_empty() {
        fields.push(("note", remark));
    }
    let body: Vec<_> = fields.iter().map(|(key, value)| format!("  {key} = {{{value}}}")).collect();
    format!("@misc{{{},\n{}\n}}\n", s.key, body.join(",\n"))
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeSet;

    #[test]
    fn method_ids_are_unique_and_every_record_is_filled() {
        let methods = science::methods();
        let ids: BTreeSet<_> = methods.iter().map(|m| m.id).collect();
        assert_eq!(ids.len(), methods.len());
        for m in methods {
            assert!(![m.name, m.question, m.formula].contains(&""), "{}", m.id);
            assert!(!m.sources.is_empty(), "{} has no source", m.id);
            for s in m.sources {
                assert!(![s.key, s.authors, s.title, s.published].contains(&""), "{}: {}", m.id, s.key);
            }
        }
    }

    #[test]
    fn one_key_means_one_publication() {
        let mut seen: BTreeMap<&str, &Source> = BTreeMap::new();
        for source in science::methods().into_iter().flat_map(|m| m.sources) {
            let first = seen.entry(source.key).or_insert(source);
            assert_eq!((first.authors, first.year), (source.authors, source.year), "{}", source.key);
        }
    }
}
