//! The page of a composed plate: margins, title, columns filled from the top, notes at the foot.

use crate::ground::{Caution, Point};

use super::caption::{Recipe, recipe_line};
use super::sketch::{Sketch, Type};
use super::{Figure, TextAnchor, Theme, font};

/// White space around everything, millimetres.
pub(super) const MARGIN_MM: f64 = 7.0;
pub(super) const GAP_MM: f64 = 6.5;

/// A plate that grows downward.
pub(super) struct Page<'a> {
    pub theme: &'a Theme,
    width_mm: f64,
    /// First free line below everything that spans the page.
    pub y: f64,
    sketch: Sketch,
}

/// A part of a plate under a small heading.
pub(super) struct Block {
    pub heading: String,
    pub figure: Figure,
}

impl<'a> Page<'a> {
    pub fn new(width_mm: f64, theme: &'a Theme) -> Self {
        Self { theme, width_mm, y: MARGIN_MM, sketch: Sketch::default() }
    }

    /// Width between the margins.
    pub fn room(&self) -> f64 {
        self.width_mm - 2.0 * MARGIN_MM
    }

    /// Title at the left, a remark at the right on the same line, a rule beneath.
    pub fn title(&mut self, title: &str, remark: &str) {
        let (size, small) = (self.theme.text.title, self.theme.text.small);
        let remark = font::shortened(remark, small, false, 0.6 * self.room());
        let room = self.room() - font::text_width(&remark, small, false) - 4.0;
        let base = self.y + font::CAP_HEIGHT * size;
        let title = font::shortened(title, size, true, room);
        self.sketch.text(Point::new(MARGIN_MM, base), title, Type::new(size, self.theme.ink).bold());
        let look = Type::new(small, self.theme.ink_soft).anchored(TextAnchor::End);
        self.sketch.text(Point::new(MARGIN_MM + self.room(), base), remark, look);
        self.y = base + 2.2;
        self.rule();
        self.y += 1.4;
    }

    /// A paragraph over the whole width.
    pub fn paragraph(&mut self, text: &str, look: Type) {
        if !text.is_empty() {
            self.y += self.sketch.paragraph(Point::new(MARGIN_MM, self.y), text, look, self.room());
        }
    }

    pub fn space(&mut self, mm: f64) {
        self.y += mm;
    }

    fn rule(&mut self) {
        let (from, to) = (Point::new(MARGIN_MM, self.y), Point::new(MARGIN_MM + self.room(), self.y));
        self.sketch.line(from, to, self.theme.stroke(self.theme.rule, self.theme.widths.thin));
    }

    /// A figure at `x` from the left margin and `y` from the top.
    pub fn put(&mut self, figure: &Figure, x: f64, y: f64) {
        self.sketch.place(figure, Point::new(MARGIN_MM + x, y));
    }

    /// Blocks into equal columns: each goes where it ends highest. `tops` are the first free lines;
    /// the page goes on below the longest column.
    pub fn columns(&mut self, blocks: &[Block], width_mm: f64, tops: &mut [f64]) {
        for block in blocks.iter().filter(|b| b.figure.height_mm > 0.0) {
            let shortest = (0..tops.len()).min_by(|a, b| tops[*a].total_cmp(&tops[*b])).unwrap_or(0);
            let x = shortest as f64 * (width_mm + GAP_MM);
            let y = tops[shortest];
            let head = self.heading(&block.heading, x, y, width_mm);
            self.put(&block.figure, x, y + head);
            tops[shortest] = y + head + block.figure.height_mm + 0.8 * GAP_MM;
        }
        self.y = tops.iter().copied().fold(self.y, f64::max);
    }

    /// A rule with a word beneath; returns the height used.
    pub fn heading(&mut self, text: &str, x: f64, y: f64, width_mm: f64) -> f64 {
        let theme = self.theme;
        let (left, size) = (MARGIN_MM + x, theme.text.body);
        let rule = theme.stroke(theme.rule, theme.widths.thin);
        self.sketch.line(Point::new(left, y), Point::new(left + width_mm, y), rule);
        let text = font::shortened(text, size, true, width_mm);
        let base = y + 1.3 + font::CAP_HEIGHT * size;
        self.sketch.text(Point::new(left, base), text, Type::new(size, theme.ink).bold());
        base - y + 1.8
    }

    /// Each caution with its mark.
    pub fn cautions(&mut self, cautions: &[Caution]) {
        let theme = self.theme;
        let size = theme.text.body;
        for caution in cautions {
            let at = Point::new(MARGIN_MM, self.y);
            caution_mark(&mut self.sketch, Point::new(at.x + 1.2, at.y + 0.68 * size), theme);
            let beside = Point::new(at.x + 3.6, at.y);
            let look = Type::new(size, theme.ink);
            self.y += self.sketch.paragraph(beside, &caution.text, look, self.room() - 3.6);
        }
    }

    /// Caption, safety line and recipe in small type, then the finished figure on its paper.
    pub fn finish(mut self, notes: &[String], recipe: &Recipe, finding: Option<&str>) -> Figure {
        let theme = self.theme;
        self.y += 1.2;
        self.rule();
        self.y += 0.8;
        for note in notes {
            self.paragraph(note, Type::new(theme.text.small, theme.ink_soft));
        }
        self.y += 0.6;
        self.paragraph(&recipe_line(recipe, finding), Type::new(theme.text.small, theme.ink_soft).bold());
        let height = self.y + MARGIN_MM - 1.0;
        let mut figure = Figure::blank(self.width_mm, height, theme.paper);
        figure.items.extend(self.sketch.items);
        figure
    }
}

/// A small triangle with a stroke: a caution, also without colour.
fn caution_mark(sketch: &mut Sketch, centre: Point, theme: &Theme) {
    let at = |x: f64, y: f64| Point::new(centre.x + x, centre.y + y);
    let corners = vec![at(0.0, -1.15), at(1.25, 0.95), at(-1.25, 0.95)];
    let stroke = theme.stroke(theme.caution, theme.widths.thin);
    sketch.polygon(corners, Some(theme.tint(theme.caution, 0.25)), Some(stroke));
    let bold = theme.stroke(theme.caution, 1.4 * theme.widths.thin);
    sketch.line(at(0.0, -0.45), at(0.0, 0.25), bold);
    sketch.circle(at(0.0, 0.6), 0.16, Some(theme.caution), None);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn blocks_go_to_the_shortest_column_and_none_overlap() {
        let theme = Theme::print();
        let block = |height| Block {
            heading: "x".into(),
            figure: Figure { width_mm: 20.0, height_mm: height, items: Vec::new() },
        };
        let mut page = Page::new(100.0, &theme);
        let mut tops = [10.0, 10.0];
        page.columns(&[block(50.0), block(10.0), block(10.0), block(0.0)], 20.0, &mut tops);
        assert!(tops[0] > 60.0 && tops[0] < 75.0, "one long block: {tops:?}");
        assert!(tops[1] > 30.0 && tops[1] < 60.0, "two short ones: {tops:?}");
        assert_eq!(page.y, tops[0]);
    }
}
