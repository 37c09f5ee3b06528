//! The bundled typeface inside a PDF: the glyphs used, as a subset, with the way back to characters
//! so that text can be searched and copied.

use std::collections::BTreeMap;

use pdf_writer::types::{CidFontType, FontFlags, SystemInfo, UnicodeCmap};
use pdf_writer::{Content, Filter, Finish as _, Name, Pdf, Rect, Ref, Str};
use rustybuzz::ttf_parser::GlyphId;
use sha2::{Digest as _, Sha256};
use subsetter::GlyphRemapper;

use crate::plate::font::{self, Glyph};

use super::WriteError;

const SYSTEM: SystemInfo = SystemInfo { registry: Str(b"Adobe"), ordering: Str(b"Identity"), supplement: 0 };

/// The glyphs of one face that a document uses.
#[derive(Default)]
pub(super) struct Embedding {
    remapper: GlyphRemapper,
    /// Glyph in the subset → characters.
    characters: BTreeMap<u16, String>,
}

impl Embedding {
    pub fn is_empty(&self) -> bool {
        self.characters.is_empty()
    }

    /// Shows shaped glyphs from the current text position.
    pub fn show(
        &mut self,
        glyphs: &[Glyph],
        natural: impl Fn(u16) -> f64,
        size_mm: f64,
        content: &mut Content,
    ) {
        let mut rise = 0.0;
        // Adjustments of the pen to the left, thousandths of the size, owed before the next glyph.
        let mut owed = 0.0;
        for glyph in glyphs {
            let id = self.remapper.remap(glyph.id);
            self.characters.entry(id).or_insert_with(|| glyph.text.clone());
            if glyph.offset.1 != rise {
                rise = glyph.offset.1;
                content.set_rise((rise / 1000.0 * size_mm) as f32);
            }
            owed -= glyph.offset.0;
            let mut positioned = content.show_positioned();
            let mut items = positioned.items();
            if owed != 0.0 {
                items.adjust(owed as f32);
            }
            items.show(Str(&id.to_be_bytes()));
            owed = natural(glyph.id) - glyph.advance + glyph.offset.0;
        }
        if rise != 0.0 {
            content.set_rise(0.0);
        }
    }

    /// Writes the font objects of the face.
    ///
    /// # Errors
    /// [`WriteError::Render`] when the face cannot be cut down to the glyphs used.
    pub fn write(
        &self,
        bold: bool,
        reference: Ref,
        pdf: &mut Pdf,
        fresh: &mut impl FnMut() -> Ref,
    ) -> Result<(), WriteError> {
        let fail = || WriteError::Render("the typeface could not be embedded".into());
        let face = font::face(bold).ok_or_else(fail)?;
        let bytes = if bold { font::BOLD } else { font::REGULAR };
        let subset = subsetter::subset(bytes, 0, &self.remapper).map_err(|_| fail())?;
        let name = self.name(bold);
        let (cid, descriptor, to_unicode, data) = (fresh(), fresh(), fresh(), fresh());

        pdf.type0_font(reference)
            .base_font(Name(name.as_bytes()))
            .encoding_predefined(Name(b"Identity-H"))
            .descendant_font(cid)
            .to_unicode(to_unicode);

        let scale = 1000.0 / face.units_per_em() as f32;
        let mut object = pdf.cid_font(cid);
        object.subtype(CidFontType::Type2).base_font(Name(name.as_bytes())).system_info(SYSTEM);
        object.font_descriptor(descriptor).default_width(0.0).cid_to_gid_map_predefined(Name(b"Identity"));
        let widths = self.remapper.remapped_gids().map(|id| natural_width(bold, id) as f32);
        object.widths().consecutive(0, widths);
        object.finish();

        let bounds = face.global_bounding_box();
        let [x0, y0, x1, y1] =
            [bounds.x_min, bounds.y_min, bounds.x_max, bounds.y_max].map(|v| f32::from(v) * scale);
        pdf.font_descriptor(descriptor)
            .name(Name(name.as_bytes()))
            .flags(FontFlags::SYMBOLIC)
            .bbox(Rect::new(x0, y0, x1, y1))
            .italic_angle(0.0)
            .ascent(f32::from(face.ascender()) * scale)
            .descent(f32::from(face.descender()) * scale)
            .cap_height(1000.0 * font::CAP_HEIGHT as f32)
            .stem_v(if bold { 140.0 } else { 85.0 })
            .font_file2(data);

        let mut map = UnicodeCmap::new(Name(b"Ventifact"), SYSTEM);
        for (id, text) in self.characters.iter().filter(|(_, text)| !text.is_empty()) {
            map.pair_with_multiple(*id, text.chars());
        }
        pdf.cmap(to_unicode, &super::deflated(&map.finish())).filter(Filter::FlateDecode);
        pdf.stream(data, &super::deflated(&subset))
            .filter(Filter::FlateDecode)
            .pair(Name(b"Length1"), subset.len() as i32);
        Ok(())
    }

    /// Subsets carry six letters of their own; these come from the glyphs used.
    fn name(&self, bold: bool) -> String {
        let mut hash = Sha256::new();
        for id in self.remapper.remapped_gids() {
            hash.update(id.to_be_bytes());
        }
        let tag: String = hash.finalize().iter().take(6).map(|b| char::from(b'A' + b % 26)).collect();
        format!("{tag}+IBMPlexSans{}", if bold { "-Bold" } else { "" })
    }
}

/// Advance of a glyph before kerning, thousandths of the size.
pub(super) fn natural_width(bold: bool, glyph: u16) -> f64 {
    let Some(face) = font::face(bold) else { return 0.0 };
    let units = face.glyph_hor_advance(GlyphId(glyph)).unwrap_or(0);
    f64::from(units) * 1000.0 / f64::from(face.units_per_em())
}
