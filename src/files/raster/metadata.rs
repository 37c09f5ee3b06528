//! The XML of tag 42112: named items, some about one band. Only plain items are read; whatever else
//! stands there is passed over.

/// `<Item name="SCALE" sample="0" role="scale">0.01</Item>`
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Item {
    pub(super) name: String,
    /// The band it is about, counted from 0.
    pub(super) sample: Option<usize>,
    pub(super) role: Option<String>,
    pub(super) text: String,
}

/// All items of the text, in order. Broken XML ends the list.
pub(super) fn items(xml: &str) -> Vec<Item> {
    let mut found = Vec::new();
    let mut rest = xml;
    while let Some(start) = rest.find("<Item") {
        rest = &rest[start + "<Item".len()..];
        let Some(head_end) = rest.find('>') else { break };
        let head = &rest[..head_end];
        rest = &rest[head_end + 1..];
        if head.ends_with('/') || !head.starts_with(char::is_whitespace) {
            continue;
        }
        let Some(text_end) = rest.find("</Item>") else { break };
        let text = plain(rest[..text_end].trim());
        rest = &rest[text_end..];
        if let Some(name) = attribute(head, "name") {
            let sample = attribute(head, "sample").and_then(|s| s.trim().parse().ok());
            found.push(Item { name, sample, role: attribute(head, "role"), text });
        }
    }
    found
}

fn attribute(head: &str, name: &str) -> Option<String> {
    let mut rest = head;
    while let Some(equals) = rest.find('=') {
        let key = rest[..equals].trim();
        let value = rest[equals + 1..].trim_start();
        let quote = value.chars().next().filter(|c| matches!(c, '"' | '\''))?;
        let end = value[1..].find(quote)?;
        if key == name {
            return Some(plain(&value[1..=end]));
        }
        rest = &value[end + 2..];
    }
    None
}

fn plain(text: &str) -> String {
    text.replace("&lt;", "<")
        .replace("&gt;", ">")
        .replace("&quot;", "\"")
        .replace("&apos;", "'")
        .replace("&amp;", "&")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn items_keep_their_band_and_role() {
        let xml = r#"<Set><Item name="A&amp;B">x &lt; y</Item>
            <Item name='OFFSET' sample="1" role="offset">-2.5</Item><Item/><Item name="open">"#;
        let got = items(xml);
        assert_eq!(got.len(), 2);
        assert_eq!((got[0].name.as_str(), got[0].text.as_str()), ("A&B", "x < y"));
        assert_eq!(
            (got[1].sample, got[1].role.as_deref(), got[1].text.as_str()),
            (Some(1), Some("offset"), "-2.5")
        );
    }
}
