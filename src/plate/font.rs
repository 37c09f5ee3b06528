//! The bundled typeface, and the width of text in it as the shaper will set it.
//!
//! IBM Plex Sans under the SIL Open Font License (fonts/OFL.txt): figures are tabular as they
//! stand, and Greek and mathematical signs are there.

use std::sync::LazyLock;

use rustybuzz::ttf_parser::{GlyphId, OutlineBuilder};
use rustybuzz::{BufferClusterLevel, Face, UnicodeBuffer};

/// The family name written into SVG.
pub const FAMILY: &str = "IBM Plex Sans";
pub const REGULAR: &[u8] = include_bytes!("fonts/IBMPlexSans-Regular.ttf");
pub const BOLD: &[u8] = include_bytes!("fonts/IBMPlexSans-Bold.ttf");

/// Height of capitals and figures in text sizes.
pub const CAP_HEIGHT: f64 = 0.698;

static FACES: LazyLock<[Option<Face<'static>>; 2]> =
    LazyLock::new(|| [Face::from_slice(REGULAR, 0), Face::from_slice(BOLD, 0)]);

/// One glyph of a shaped line, in thousandths of the text size.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Glyph {
    pub id: u16,
    /// The characters it stands for.
    pub text: String,
    pub advance: f64,
    /// Where it is drawn relative to the pen, y up.
    pub offset: (f64, f64),
}

/// The parsed face.
pub(super) fn face(bold: bool) -> Option<&'static Face<'static>> {
    FACES[usize::from(bold)].as_ref()
}

/// One line of text as glyphs from left to right, kerned.
pub(super) fn shape(text: &str, bold: bool) -> Vec<Glyph> {
    // The bytes are part of the program, so the faces always parse (a test says so).
    let Some(face) = face(bold) else { return Vec::new() };
    let mut buffer = UnicodeBuffer::new();
    buffer.set_cluster_level(BufferClusterLevel::Characters);
    buffer.push_str(text);
    let shaped = rustybuzz::shape(face, &[], buffer);
    let scale = 1000.0 / f64::from(face.units_per_em());
    let (infos, positions) = (shaped.glyph_infos(), shaped.glyph_positions());
    let mut starts: Vec<usize> = infos.iter().map(|g| g.cluster as usize).collect();
    starts.push(text.len());
    starts.sort_unstable();
    starts.dedup();
    let part = |start: usize| {
        let end = starts.iter().copied().find(|s| *s > start).unwrap_or(text.len());
        text.get(start..end).unwrap_or_default().to_owned()
    };
    infos
        .iter()
        .zip(positions)
        .map(|(glyph, at)| Glyph {
            id: u16::try_from(glyph.glyph_id).unwrap_or(0),
            text: part(glyph.cluster as usize),
            advance: f64::from(at.x_advance) * scale,
            offset: (f64::from(at.x_offset) * scale, f64::from(at.y_offset) * scale),
        })
        .collect()
}

/// Advance width of one line of text, millimetres.
pub fn text_width(text: &str, size_mm: f64, bold: bool) -> f64 {
    shape(text, bold).iter().map(|g| g.advance).sum::<f64>() / 1000.0 * size_mm
}

/// A step of a letter's outline, millimetres, y down.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Segment {
    Move([f64; 2]),
    Line([f64; 2]),
    Quad([f64; 2], [f64; 2]),
    Cubic([f64; 2], [f64; 2], [f64; 2]),
    Close,
}

/// The outlines of one line's letters, from the anchor (0, 0) on the baseline.
pub(super) fn outline(text: &str, size_mm: f64, bold: bool) -> Vec<Segment> {
    let Some(face) = face(bold) else { return Vec::new() };
    let to_units = f64::from(face.units_per_em()) / 1000.0;
    let scale = size_mm / f64::from(face.units_per_em());
    let mut pen = OutlinePen { segments: Vec::new(), scale, x: 0.0, y: 0.0 };
    let mut x = 0.0;
    for glyph in shape(text, bold) {
        (pen.x, pen.y) = ((x + glyph.offset.0) * to_units, glyph.offset.1 * to_units);
        face.outline_glyph(GlyphId(glyph.id), &mut pen);
        x += glyph.advance;
    }
    pen.segments
}

/// Collects the outlines of glyphs set side by side.
struct OutlinePen {
    segments: Vec<Segment>,
    scale: f64,
    x: f64,
    y: f64,
}

impl OutlinePen {
    fn at(&self, x: f32, y: f32) -> [f64; 2] {
        [(self.x + f64::from(x)) * self.scale, -(self.y + f64::from(y)) * self.scale]
    }
}

impl OutlineBuilder for OutlinePen {
    fn move_to(&mut self, x: f32, y: f32) {
        self.segments.push(Segment::Move(self.at(x, y)));
    }

    fn line_to(&mut self, x: f32, y: f32) {
        self.segments.push(Segment::Line(self.at(x, y)));
    }

    fn quad_to(&mut self, x1: f32, y1: f32, x: f32, y: f32) {
        self.segments.push(Segment::Quad(self.at(x1, y1), self.at(x, y)));
    }

    fn curve_to(&mut self, x1: f32, y1: f32, x2: f32, y2: f32, x: f32, y: f32) {
        self.segments.push(Segment::Cubic(self.at(x1, y1), self.at(x2, y2), self.at(x, y)));
    }

    fn close(&mut self) {
        self.segments.push(Segment::Close);
    }
}

/// Breaks text into lines no wider than `width_mm`. Breaks at blanks but not at no-break ones; a word too long for a line is
/// broken inside. Line feeds in the text are kept.
pub fn wrap(text: &str, size_mm: f64, bold: bool, width_mm: f64) -> Vec<String> {
    let fits = |line: &str| text_width(line, size_mm, bold) <= width_mm;
    let mut lines = Vec::new();
    for paragraph in text.split('\n') {
        let mut line = String::new();
        for word in paragraph.split([' ', '\t']).filter(|w| !w.is_empty()) {
            let longer = if line.is_empty() { word.to_owned() } else { format!("{line} {word}") };
            if fits(&longer) {
                line = longer;
                continue;
            }
            if !line.is_empty() {
                lines.push(std::mem::take(&mut line));
            }
            for c in word.chars() {
                line.push(c);
                if !fits(&line) && line.chars().count() > 1 {
                    line.pop();
                    lines.push(std::mem::replace(&mut line, c.to_string()));
                }
            }
        }
        lines.push(line);
    }
    lines
}

/// The text, or as much of it as fits followed by "…".
pub fn shortened(text: &str, size_mm: f64, bold: bool, width_mm: f64) -> String {
    if text_width(text, size_mm, bold) <= width_mm {
        return text.to_owned();
    }
    let mut kept: Vec<char> = text.chars().collect();
    while kept.pop().is_some() {
        let line = format!("{}…", kept.iter().collect::<String>().trim_end());
        if text_width(&line, size_mm, bold) <= width_mm {
            return line;
        }
    }
    "…".to_owned()
}

/// Whether the typeface has a glyph for every character.
pub fn covers(text: &str) -> bool {
    FACES.iter().all(|face| face.as_ref().is_some_and(|f| text.chars().all(|c| f.glyph_index(c).is_some())))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn the_bundled_faces_parse_and_cover_what_plates_say() {
        assert!(covers("κχφλρσθμΔ±×°≥≤·–—−²³½√π→←″′…R\u{304}“”"));
    }

    #[test]
    fn glyphs_know_their_characters() {
        let said: String = shape("R\u{304} fi 84°", false).iter().map(|g| g.text.as_str()).collect();
        assert_eq!(said, "R\u{304} fi 84°");
        let macron = &shape("R\u{304}", false)[1];
        assert_eq!((macron.advance, macron.text.as_str()), (0.0, "\u{304}"));
    }

    #[test]
    fn figures_are_tabular_in_both_weights() {
        for bold in [false, true] {
            for digit in "0123456789".chars() {
                // 600 of 1000 units, as the face's horizontal metrics table says.
                assert_close!(text_width(&digit.to_string(), 10.0, bold), 6.0, 1e-9, "{digit} bold {bold}");
            }
        }
    }

    #[test]
    fn wrapped_lines_fit_and_lose_no_word() {
        let text = "Trend 84° ± 3° with an exceptionallylongunbreakableword in the middle of it";
        let lines = wrap(text, 2.5, false, 25.0);
        assert!(lines.iter().all(|l| text_width(l, 2.5, false) <= 25.0), "{lines:?}");
        let letters = |s: &str| s.chars().filter(|c| !c.is_whitespace()).collect::<String>();
        assert_eq!(letters(&lines.concat()), letters(text));
    }

    #[test]
    fn shortened_text_fits() {
        let line = shortened("The long dunes of the western reach", 2.5, true, 20.0);
        assert!(line.ends_with('…') && text_width(&line, 2.5, true) <= 20.0, "{line}");
    }
}
