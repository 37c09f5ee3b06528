//! The bundled typeface, and the width of text in it as the shaper will set it.
//!
//! IBM Plex Sans under the SIL Open Font License (fonts/OFL.txt): figures are tabular as they
//! stand, and Greek and mathematical signs are there.

use std::sync::LazyLock;

use rustybuzz::ttf_parser::{GlyphId, OutlineBuilder};
use rustybuzz::{Face, UnicodeBuffer};

/// The family name written into SVG.
pub const FAMILY: &str = "IBM Plex Sans";
pub const REGULAR: &[u8] = include_bytes!("fonts/IBMPlexSans-Regular.ttf");
pub const BOLD: &[u8] = include_bytes!("fonts/IBMPlexSans-Bold.ttf");

/// Height of capitals and figures in text sizes.
pub const CAP_HEIGHT: f64 = 0.698;

static FACES: LazyLock<[Option<Face<'static>>; 2]> =
    LazyLock::new(|| [Face::from_slice(REGULAR, 0), Face::from_slice(BOLD, 0)]);

/// Advance width of one line of text, millimetres.
pub fn text_width(text: &str, size_mm: f64, bold: bool) -> f64 {
    // The bytes are part of the program, so the faces always parse (a test says so).
    let Some(face) = &FACES[usize::from(bold)] else { return 0.0 };
    let mut buffer = UnicodeBuffer::new();
    buffer.push_str(text);
    let shaped = rustybuzz::shape(face, &[], buffer);
    let advance: i64 = shaped.glyph_positions().iter().map(|g| i64::from(g.x_advance)).sum();
    advance as f64 / f64::from(face.units_per_em()) * size_mm
}

/// The letters of one line as SVG path data in millimetres, y down, from the anchor (0, 0).
pub(super) fn outline(text: &str, size_mm: f64, bold: bool) -> String {
    let Some(face) = &FACES[usize::from(bold)] else { return String::new() };
    let mut buffer = UnicodeBuffer::new();
    buffer.push_str(text);
    let shaped = rustybuzz::shape(face, &[], buffer);
    let scale = size_mm / f64::from(face.units_per_em());
    let mut pen = OutlinePen { data: String::new(), scale, x: 0.0, y: 0.0 };
    let (mut x, mut y) = (0i32, 0i32);
    for (glyph, at) in shaped.glyph_infos().iter().zip(shaped.glyph_positions()) {
        (pen.x, pen.y) = (f64::from(x + at.x_offset), f64::from(y + at.y_offset));
        if let Ok(id) = u16::try_from(glyph.glyph_id) {
            face.outline_glyph(GlyphId(id), &mut pen);
        }
        (x, y) = (x + at.x_advance, y + at.y_advance);
    }
    pen.data
}

/// Collects glyph outlines as path data.
struct OutlinePen {
    data: String,
    scale: f64,
    x: f64,
    y: f64,
}

impl OutlinePen {
    fn push(&mut self, letter: char, points: &[(f32, f32)]) {
        self.data.push(letter);
        for (i, (x, y)) in points.iter().enumerate() {
            let (px, py) = ((self.x + f64::from(*x)) * self.scale, -(self.y + f64::from(*y)) * self.scale);
            let blank = if i == 0 { "" } else { " " };
            self.data.push_str(&format!("{blank}{px:.4} {py:.4}"));
        }
    }
}

impl OutlineBuilder for OutlinePen {
    fn move_to(&mut self, x: f32, y: f32) {
        self.push('M', &[(x, y)]);
    }

    fn line_to(&mut self, x: f32, y: f32) {
        self.push('L', &[(x, y)]);
    }

    fn quad_to(&mut self, x1: f32, y1: f32, x: f32, y: f32) {
        self.push('Q', &[(x1, y1), (x, y)]);
    }

    fn curve_to(&mut self, x1: f32, y1: f32, x2: f32, y2: f32, x: f32, y: f32) {
        self.push('C', &[(x1, y1), (x2, y2), (x, y)]);
    }

    fn close(&mut self) {
        self.data.push('Z');
    }
}

/// Breaks text into lines no wider than `width_mm`. Breaks at blanks; a word too long for a line is
/// broken inside. Line feeds in the text are kept.
pub fn wrap(text: &str, size_mm: f64, bold: bool, width_mm: f64) -> Vec<String> {
    let fits = |line: &str| text_width(line, size_mm, bold) <= width_mm;
    let mut lines = Vec::new();
    for paragraph in text.split('\n') {
        let mut line = String::new();
        for word in paragraph.split_whitespace() {
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
