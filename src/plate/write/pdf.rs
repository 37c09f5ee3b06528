//! Figures as PDF: one page of the figure's size, text as text in embedded subsets of the bundled
//! typeface, images without loss. Everything is written in a fixed order, so that the same figure
//! gives the same bytes.

use std::collections::BTreeSet;

use pdf_writer::types::{LineCapStyle, LineJoinStyle};
use pdf_writer::{Content, Filter, Finish as _, Name, Pdf, Rect, Ref, TextStr};

use crate::ground::Point;
use crate::plate::font::{self, Segment};
use crate::plate::{Figure, Fill, HALO, Item, Rgba, Stroke, TextAnchor};

use super::WriteError;
use super::pdf_font::{Embedding, natural_width};

/// PDF points per millimetre.
const POINT_PER_MM: f64 = 72.0 / 25.4;

/// The figure as a one-page PDF.
///
/// # Errors
/// [`WriteError`]: no area, or a typeface that cannot be embedded.
pub fn pdf(figure: &Figure) -> Result<Vec<u8>, WriteError> {
    super::check_area(figure)?;
    let mut page = Page {
        content: Content::new(),
        fonts: Default::default(),
        alphas: BTreeSet::new(),
        images: Vec::new(),
    };
    let k = POINT_PER_MM as f32;
    let height = (figure.height_mm * POINT_PER_MM) as f32;
    page.content.transform([k, 0.0, 0.0, -k, 0.0, height]);
    page.content.set_line_join(LineJoinStyle::RoundJoin);
    page.content.set_line_cap(LineCapStyle::ButtCap);
    page.items(&figure.items);
    page.finish(figure)
}

/// What one page gathers while it is drawn.
struct Page {
    content: Content,
    /// Regular and bold.
    fonts: [Embedding; 2],
    /// Opacities in use, as stored in a colour.
    alphas: BTreeSet<u8>,
    images: Vec<Picture>,
}

struct Picture {
    width: usize,
    height: usize,
    rgb: Vec<u8>,
    /// Opacity, where any pixel is not opaque.
    alpha: Option<Vec<u8>>,
}

impl Page {
    fn items(&mut self, items: &[Item]) {
        for item in items {
            self.item(item);
        }
    }

    fn item(&mut self, item: &Item) {
        match item {
            Item::Path { points, closed, fill, stroke } if points.len() > 1 => {
                self.trace(points, *closed);
                self.paint(*fill, *stroke, |page| page.trace(points, *closed));
            }
            Item::Path { .. } => {}
            Item::Circle { centre, radius_mm, fill, stroke } => {
                self.round(*centre, *radius_mm);
                self.paint(*fill, *stroke, |page| page.round(*centre, *radius_mm));
            }
            Item::Text { at, text, size_mm, bold, color, anchor, turn_deg, halo } => {
                let line = Line { at: *at, text, size_mm: *size_mm, bold: *bold, turn_deg: *turn_deg };
                self.text(&line, *anchor, *color, *halo);
            }
            Item::Image { min, max, width, height, rgba } => {
                self.image(*min, *max, *width, *height, rgba);
            }
            Item::Clip { min, max, items } => {
                self.content.save_state();
                let (x, y) = (min.x as f32, min.y as f32);
                self.content.rect(x, y, max.x as f32 - x, max.y as f32 - y);
                self.content.clip_nonzero().end_path();
                self.items(items);
                self.content.restore_state();
            }
        }
    }

    fn trace(&mut self, points: &[Point], closed: bool) {
        for (i, p) in points.iter().enumerate() {
            let (x, y) = (p.x as f32, p.y as f32);
            if i == 0 {
                self.content.move_to(x, y)
            } else {
                self.content.line_to(x, y)
            };
        }
        if closed {
            self.content.close_path();
        }
    }

    /// A circle as four cubic arcs, off by at most 0.03 % of the radius.
    fn round(&mut self, centre: Point, radius: f64) {
        const K: f32 = 0.552_284_8;
        let (x, y, r) = (centre.x as f32, centre.y as f32, radius as f32);
        self.content.move_to(x + r, y);
        for (c, s) in [(1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0f32)] {
            // From direction (c, s) to (−s, c).
            self.content.cubic_to(
                x + r * (c - K * s),
                y + r * (s + K * c),
                x + r * (K * c - s),
                y + r * (K * s + c),
                x - r * s,
                y + r * c,
            );
        }
        self.content.close_path();
    }

    /// Fills, then strokes, the path already traced; `again` traces it a second time, because each
    /// has its own opacity.
    fn paint(&mut self, fill: Option<Fill>, stroke: Option<Stroke>, again: impl Fn(&mut Self)) {
        if let Some(color) = fill {
            self.alpha(color);
            let [r, g, b] = unit(color);
            self.content.set_fill_rgb(r, g, b).fill_nonzero();
        }
        let Some(Stroke { color, width_mm, dash_mm }) = stroke else {
            if fill.is_none() {
                self.content.end_path();
            }
            return;
        };
        if fill.is_some() {
            again(self);
        }
        self.alpha(color);
        let [r, g, b] = unit(color);
        self.content.set_stroke_rgb(r, g, b).set_line_width(width_mm as f32);
        let dash = dash_mm.map_or(Vec::new(), |d| d.map(|v| v as f32).to_vec());
        self.content.set_dash_pattern(dash, 0.0).stroke();
    }

    /// Sets the opacity of what follows.
    fn alpha(&mut self, Rgba([.., alpha]): Rgba) {
        self.alphas.insert(alpha);
        self.content.set_parameters(Name(alpha_name(alpha).as_bytes()));
    }

    fn text(&mut self, line: &Line, anchor: TextAnchor, color: Rgba, halo: Option<Rgba>) {
        let glyphs = font::shape(line.text, line.bold);
        let width = glyphs.iter().map(|g| g.advance).sum::<f64>() / 1000.0 * line.size_mm;
        let start = match anchor {
            TextAnchor::Start => 0.0,
            TextAnchor::Middle => -0.5 * width,
            TextAnchor::End => -width,
        };
        let (sin, cos) = line.turn_deg.to_radians().sin_cos();
        let (x, y) = (line.at.x + start * cos, line.at.y + start * sin);
        if let Some(halo) = halo {
            // Outlines and not text, or the words would be found and copied twice.
            self.content.save_state();
            let turn = [cos, sin, -sin, cos, x, y].map(|v| v as f32);
            self.content.transform(turn);
            self.outline(&font::outline(line.text, line.size_mm, line.bold));
            self.alpha(halo);
            let [r, g, b] = unit(halo);
            self.content.set_stroke_rgb(r, g, b).set_line_width((2.0 * HALO * line.size_mm) as f32);
            self.content.set_dash_pattern(Vec::new(), 0.0).stroke();
            self.content.restore_state();
        }
        self.alpha(color);
        let [r, g, b] = unit(color);
        self.content.set_fill_rgb(r, g, b);
        self.content.begin_text();
        self.content.set_font(Name(FONT_NAMES[usize::from(line.bold)]), line.size_mm as f32);
        self.content.set_text_matrix([cos, sin, sin, -cos, x, y].map(|v| v as f32));
        let embedding = &mut self.fonts[usize::from(line.bold)];
        let natural = |glyph| natural_width(line.bold, glyph);
        embedding.show(&glyphs, natural, line.size_mm, &mut self.content);
        self.content.end_text();
    }

    fn outline(&mut self, outline: &[Segment]) {
        let mut last = [0.0; 2];
        for segment in outline {
            match *segment {
                Segment::Move(p) => {
                    self.content.move_to(p[0] as f32, p[1] as f32);
                    last = p;
                }
                Segment::Line(p) => {
                    self.content.line_to(p[0] as f32, p[1] as f32);
                    last = p;
                }
                Segment::Quad(c, p) => {
                    // The same curve as a cubic.
                    let near = |end: f64, control: f64| (end + 2.0 * (control - end) / 3.0) as f32;
                    let (a, b) = ([0, 1].map(|i| near(last[i], c[i])), [0, 1].map(|i| near(p[i], c[i])));
                    self.content.cubic_to(a[0], a[1], b[0], b[1], p[0] as f32, p[1] as f32);
                    last = p;
                }
                Segment::Cubic(c, d, p) => {
                    let [c, d, q] = [c, d, p].map(|v| v.map(|x| x as f32));
                    self.content.cubic_to(c[0], c[1], d[0], d[1], q[0], q[1]);
                    last = p;
                }
                Segment::Close => {
                    self.content.close_path();
                }
            }
        }
    }

    fn image(&mut self, min: Point, max: Point, width: usize, height: usize, rgba: &[u8]) {
        if width == 0 || height == 0 || rgba.len() != width * height * 4 {
            return;
        }
        let opaque = rgba.chunks_exact(4).all(|p| p[3] == 255);
        let alpha = (!opaque).then(|| rgba.chunks_exact(4).map(|p| p[3]).collect());
        let rgb = rgba.chunks_exact(4).flat_map(|p| [p[0], p[1], p[2]]).collect();
        self.alpha(Rgba([0, 0, 0, 255]));
        self.content.save_state();
        // The unit square of an image has its origin below.
        let place = [max.x - min.x, 0.0, 0.0, min.y - max.y, min.x, max.y].map(|v| v as f32);
        self.content.transform(place);
        self.content.x_object(Name(image_name(self.images.len()).as_bytes()));
        self.content.restore_state();
        self.images.push(Picture { width, height, rgb, alpha });
    }

    fn finish(self, figure: &Figure) -> Result<Vec<u8>, WriteError> {
        let mut next = 0;
        let mut fresh = || {
            next += 1;
            Ref::new(next)
        };
        let (catalog, tree, page_ref, stream, info) = (fresh(), fresh(), fresh(), fresh(), fresh());
        let mut pdf = Pdf::new();
        pdf.catalog(catalog).pages(tree).lang(TextStr("en"));
        pdf.pages(tree).count(1).kids([page_ref]);
        pdf.document_info(info).creator(TextStr("Ventifact")).producer(TextStr("Ventifact"));

        let font_refs: Vec<Option<Ref>> =
            self.fonts.iter().map(|f| (!f.is_empty()).then(&mut fresh)).collect();
        let image_refs: Vec<(Ref, Option<Ref>)> =
            self.images.iter().map(|i| (fresh(), i.alpha.is_some().then(&mut fresh))).collect();

        let mut page = pdf.page(page_ref);
        let [w, h] = [figure.width_mm, figure.height_mm].map(|mm| (mm * POINT_PER_MM) as f32);
        page.media_box(Rect::new(0.0, 0.0, w, h)).parent(tree).contents(stream);
        let mut resources = page.resources();
        let mut fonts = resources.fonts();
        for (name, font) in FONT_NAMES.iter().zip(&font_refs) {
            if let Some(font) = font {
                fonts.pair(Name(name), *font);
            }
        }
        fonts.finish();
        let mut images = resources.x_objects();
        for (i, (image, _)) in image_refs.iter().enumerate() {
            images.pair(Name(image_name(i).as_bytes()), *image);
        }
        images.finish();
        let mut states = resources.ext_g_states();
        for alpha in &self.alphas {
            let share = f32::from(*alpha) / 255.0;
            states
                .insert(Name(alpha_name(*alpha).as_bytes()))
                .start::<pdf_writer::writers::ExtGraphicsState>()
                .stroking_alpha(share)
                .non_stroking_alpha(share);
        }
        states.finish();
        resources.finish();
        page.finish();

        let content = super::deflated(&self.content.finish());
        pdf.stream(stream, &content).filter(Filter::FlateDecode);
        for (bold, (font, reference)) in self.fonts.iter().zip(&font_refs).enumerate() {
            if let Some(reference) = reference {
                font.write(bold == 1, *reference, &mut pdf, &mut fresh)?;
            }
        }
        for (image, (reference, mask)) in self.images.iter().zip(&image_refs) {
            image.write(*reference, *mask, &mut pdf);
        }
        Ok(pdf.finish())
    }
}

impl Picture {
    fn write(&self, reference: Ref, mask: Option<Ref>, pdf: &mut Pdf) {
        let (width, height) = (self.width as i32, self.height as i32);
        let data = super::deflated(&self.rgb);
        let mut object = pdf.image_xobject(reference, &data);
        object.width(width).height(height).bits_per_component(8).filter(Filter::FlateDecode);
        object.interpolate(true);
        object.color_space().device_rgb();
        if let Some(mask) = mask {
            object.s_mask(mask);
        }
        object.finish();
        if let Some((mask, alpha)) = mask.zip(self.alpha.as_ref()) {
            let data = super::deflated(alpha);
            let mut object = pdf.image_xobject(mask, &data);
            object.width(width).height(height).bits_per_component(8).filter(Filter::FlateDecode);
            object.color_space().device_gray();
        }
    }
}

/// A text item without its colours.
struct Line<'a> {
    at: Point,
    text: &'a str,
    size_mm: f64,
    bold: bool,
    turn_deg: f64,
}

const FONT_NAMES: [&[u8]; 2] = [b"Regular", b"Bold"];

fn alpha_name(alpha: u8) -> String {
    format!("A{alpha}")
}

fn image_name(index: usize) -> String {
    format!("I{index}")
}

fn unit(Rgba([r, g, b, _]): Rgba) -> [f32; 3] {
    [r, g, b].map(|v| f32::from(v) / 255.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn page() -> Figure {
        let ink = Rgba([20, 20, 20, 255]);
        let text = |text: &str, bold, halo| Item::Text {
            at: Point::new(5.0, 5.0),
            text: text.into(),
            size_mm: 3.0,
            bold,
            color: ink,
            anchor: TextAnchor::Middle,
            turn_deg: 12.0,
            halo,
        };
        let rgba = [255, 0, 0, 255, 0, 255, 0, 128].into();
        let image =
            Item::Image { min: Point::new(1.0, 1.0), max: Point::new(3.0, 2.0), width: 2, height: 1, rgba };
        let mut items = vec![text("Trend 84°", false, None), text("R\u{304} fi", true, Some(ink)), image];
        items.push(Item::Circle {
            centre: Point::new(5.0, 5.0),
            radius_mm: 2.0,
            fill: Some(ink.with_alpha(90)),
            stroke: Some(Stroke { color: ink, width_mm: 0.2, dash_mm: Some([1.0, 0.5]) }),
        });
        Figure { width_mm: 20.0, height_mm: 10.0, items }
    }

    #[test]
    fn the_same_figure_gives_the_same_bytes() {
        let first = pdf(&page()).expect("a PDF");
        for _ in 0..5 {
            assert!(pdf(&page()).expect("a PDF") == first);
        }
    }

    #[test]
    fn the_page_is_as_large_as_the_figure() {
        let bytes = pdf(&page()).expect("a PDF");
        let text = String::from_utf8_lossy(&bytes);
        // 20 mm × 10 mm in points.
        assert!(text.contains("/MediaBox [0 0 56.692"), "media box");
        assert!(text.contains("/SMask") && text.contains("/ToUnicode") && text.contains("+IBMPlexSans-Bold"));
    }

    #[test]
    fn a_page_without_area_is_refused() {
        assert!(matches!(pdf(&Figure { width_mm: f64::NAN, ..page() }), Err(WriteError::NoArea { .. })));
    }
}
