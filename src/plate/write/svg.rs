//! The SVG writer: millimetres as user units, text as text, images as embedded PNG.

use std::fmt::Write as _;

use crate::ground::Point;
use crate::plate::font::{self, Segment};
use crate::plate::{Figure, Fill, HALO, Item, Rgba, Stroke, TextAnchor};

/// The figure as an SVG document. The same figure gives the same bytes.
pub fn svg(figure: &Figure) -> String {
    let (w, h) = (number(figure.width_mm), number(figure.height_mm));
    let mut out = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" xmlns:xlink=\"http://www.w3.org/1999/xlink\" \
         width=\"{w}mm\" height=\"{h}mm\" viewBox=\"0 0 {w} {h}\" \
         font-family=\"'{}', sans-serif\" stroke-linejoin=\"round\">\n",
        font::FAMILY
    );
    let mut writer = Writer { out: &mut out, clips: 0 };
    writer.items(&figure.items);
    out.push_str("</svg>\n");
    out
}

struct Writer<'a> {
    out: &'a mut String,
    clips: usize,
}

impl Writer<'_> {
    fn items(&mut self, items: &[Item]) {
        for item in items {
            self.item(item);
        }
    }

    fn item(&mut self, item: &Item) {
        match item {
            Item::Path { points, closed, fill, stroke } => self.path(points, *closed, *fill, *stroke),
            Item::Circle { centre, radius_mm, fill, stroke } => {
                self.push("<circle cx=\"");
                self.out.push_str(&number(centre.x));
                self.push("\" cy=\"");
                self.out.push_str(&number(centre.y));
                self.push("\" r=\"");
                self.out.push_str(&number(*radius_mm));
                self.push("\"");
                self.paint(*fill, *stroke);
                self.push("/>\n");
            }
            Item::Text { at, text, size_mm, bold, color, anchor, turn_deg, halo } => {
                let look = TextLook { size_mm: *size_mm, bold: *bold, color: *color, halo: *halo };
                self.text(*at, text, look, *anchor, *turn_deg);
            }
            Item::Image { min, max, width, height, rgba } => self.image(*min, *max, *width, *height, rgba),
            Item::Clip { min, max, items } => {
                self.clips += 1;
                let id = self.clips;
                let rect = format!(
                    "<clipPath id=\"clip{id}\"><rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\"/></clipPath>\n",
                    number(min.x),
                    number(min.y),
                    number(max.x - min.x),
                    number(max.y - min.y)
                );
                self.push(&rect);
                self.push(&format!("<g clip-path=\"url(#clip{id})\">\n"));
                self.items(items);
                self.push("</g>\n");
            }
        }
    }

    fn push(&mut self, text: &str) {
        self.out.push_str(text);
    }

    fn path(&mut self, points: &[Point], closed: bool, fill: Option<Fill>, stroke: Option<Stroke>) {
        if points.len() < 2 {
            return;
        }
        self.push("<path d=\"");
        for (i, p) in points.iter().enumerate() {
            let letter = if i == 0 { 'M' } else { 'L' };
            let _infallible = write!(self.out, "{letter}{} {}", number(p.x), number(p.y));
        }
        self.push(if closed { "Z\"" } else { "\"" });
        self.paint(fill, stroke);
        self.push("/>\n");
    }

    fn paint(&mut self, fill: Option<Fill>, stroke: Option<Stroke>) {
        match fill {
            Some(color) => self.color("fill", color),
            None => self.push(" fill=\"none\""),
        }
        if let Some(Stroke { color, width_mm, dash_mm }) = stroke {
            self.color("stroke", color);
            self.push(&format!(" stroke-width=\"{}\"", number(width_mm)));
            if let Some([on, off]) = dash_mm {
                self.push(&format!(" stroke-dasharray=\"{} {}\"", number(on), number(off)));
            }
        }
    }

    fn color(&mut self, name: &str, Rgba([r, g, b, a]): Rgba) {
        self.push(&format!(" {name}=\"#{r:02x}{g:02x}{b:02x}\""));
        if a != 255 {
            self.push(&format!(" {name}-opacity=\"{}\"", number(f64::from(a) / 255.0)));
        }
    }

    fn text(&mut self, at: Point, text: &str, look: TextLook, anchor: TextAnchor, turn_deg: f64) {
        if let Some(halo) = look.halo {
            // The halo is outlines only and not text, or it would be found and copied twice.
            self.halo(at, text, look, halo, anchor, turn_deg);
        }
        let (x, y) = (number(at.x), number(at.y));
        self.push(&format!("<text x=\"{x}\" y=\"{y}\" font-size=\"{}\"", number(look.size_mm)));
        if look.bold {
            self.push(" font-weight=\"bold\"");
        }
        match anchor {
            TextAnchor::Start => {}
            TextAnchor::Middle => self.push(" text-anchor=\"middle\""),
            TextAnchor::End => self.push(" text-anchor=\"end\""),
        }
        if turn_deg != 0.0 {
            self.push(&format!(" transform=\"rotate({} {x} {y})\"", number(turn_deg)));
        }
        self.color("fill", look.color);
        self.push(" xml:space=\"preserve\">");
        escape(text, self.out);
        self.push("</text>\n");
    }

    /// The letters' outlines, stroked and filled in the halo's colour.
    fn halo(&mut self, at: Point, text: &str, look: TextLook, halo: Rgba, anchor: TextAnchor, turn_deg: f64) {
        let data = path_data(&font::outline(text, look.size_mm, look.bold));
        if data.is_empty() {
            return;
        }
        let width = font::text_width(text, look.size_mm, look.bold);
        let shift = match anchor {
            TextAnchor::Start => 0.0,
            TextAnchor::Middle => -0.5 * width,
            TextAnchor::End => -width,
        };
        self.push(&format!("<path d=\"{data}\" transform=\"translate({} {})", number(at.x), number(at.y)));
        if turn_deg != 0.0 {
            self.push(&format!(" rotate({})", number(turn_deg)));
        }
        self.push(&format!(" translate({} 0)\"", number(shift)));
        let stroke = Stroke { color: halo, width_mm: 2.0 * HALO * look.size_mm, dash_mm: None };
        self.paint(Some(halo), Some(stroke));
        self.push("/>\n");
    }

    fn image(&mut self, min: Point, max: Point, width: usize, height: usize, rgba: &[u8]) {
        let Some(bytes) = super::bitmap::encode(rgba, width, height, None) else { return };
        self.push(&format!(
            "<image x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" preserveAspectRatio=\"none\" xlink:href=\"data:image/png;base64,",
            number(min.x),
            number(min.y),
            number(max.x - min.x),
            number(max.y - min.y)
        ));
        base64(&bytes, self.out);
        self.push("\"/>\n");
    }
}

#[derive(Clone, Copy)]
struct TextLook {
    size_mm: f64,
    bold: bool,
    color: Rgba,
    halo: Option<Rgba>,
}

fn path_data(outline: &[Segment]) -> String {
    let mut data = String::new();
    for segment in outline {
        let (letter, points): (char, &[[f64; 2]]) = match segment {
            Segment::Move(p) => ('M', &[*p]),
            Segment::Line(p) => ('L', &[*p]),
            Segment::Quad(c, p) => ('Q', &[*c, *p]),
            Segment::Cubic(c, d, p) => ('C', &[*c, *d, *p]),
            Segment::Close => ('Z', &[]),
        };
        data.push(letter);
        let numbers: Vec<String> = points.iter().flatten().map(|v| number(*v)).collect();
        data.push_str(&numbers.join(" "));
    }
    data
}

/// Ten-thousandths of a millimetre, without trailing zeros; what is not finite becomes 0.
fn number(value: f64) -> String {
    let value = if value.is_finite() { value } else { 0.0 };
    let text = format!("{value:.4}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".into() } else { text.into() }
}

/// XML text; control characters, which XML forbids, are dropped.
fn escape(text: &str, out: &mut String) {
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            c if c.is_control() || ('\u{fffe}'..='\u{ffff}').contains(&c) => {}
            c => out.push(c),
        }
    }
}

/// RFC 4648 with padding.
fn base64(bytes: &[u8], out: &mut String) {
    const ALPHABET: &[u8; 64] = b"ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    out.reserve(bytes.len().div_ceil(3) * 4);
    for chunk in bytes.chunks(3) {
        let group = chunk.iter().fold(0u32, |g, b| g << 8 | u32::from(*b)) << (8 * (3 - chunk.len()));
        for i in 0..4 {
            let c = if i <= chunk.len() { ALPHABET[(group >> (18 - 6 * i) & 63) as usize] } else { b'=' };
            out.push(char::from(c));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn base64_follows_the_standard() {
        // RFC 4648, section 10.
        for (plain, coded) in
            [("", ""), ("f", "Zg=="), ("fo", "Zm8="), ("foo", "Zm9v"), ("foobar", "Zm9vYmFy")]
        {
            let mut out = String::new();
            base64(plain.as_bytes(), &mut out);
            assert_eq!(out, coded);
        }
    }

    #[test]
    fn markup_in_names_is_escaped() {
        let figure = Figure {
            width_mm: 10.0,
            height_mm: 5.0,
            items: vec![Item::Text {
                at: Point::new(1.0, 2.0),
                text: "A<b> & \u{1}\"c\"".into(),
                size_mm: 2.0,
                bold: false,
                color: Rgba([0, 0, 0, 255]),
                anchor: TextAnchor::Start,
                turn_deg: 0.0,
                halo: None,
            }],
        };
        let out = svg(&figure);
        assert!(out.contains(">A&lt;b&gt; &amp; \"c\"</text>"), "{out}");
        assert!(out.contains("width=\"10mm\""), "{out}");
    }

    #[test]
    fn numbers_are_short_and_finite() {
        assert_eq!(number(-0.000_01), "0");
        assert_eq!(number(1.5), "1.5");
        assert_eq!(number(f64::NAN), "0");
    }
}
