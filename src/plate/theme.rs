//! The look: paper and ink, one accent per meaning, text sizes and stroke widths. Plates and the
//! window read the same tokens.
//!
//! The accents stay apart for readers who cannot tell red from green or blue from yellow: every
//! pair differs in lightness or along the axis that each kind of colour blindness keeps, and a test
//! simulates the three kinds. Meaning never rests on colour alone: measured things are solid,
//! predicted things are dashed or needles, cautions carry a mark.

use super::{Rgba, Stroke};

/// Colours, sizes and widths of one look.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Theme {
    pub is_dark: bool,
    /// The ground everything lies on.
    pub paper: Rgba,
    /// A slightly raised ground, for rows and chips.
    pub panel: Rgba,
    pub ink: Rgba,
    /// Secondary text and axes.
    pub ink_soft: Rgba,
    /// Thin rules and grids.
    pub rule: Rgba,
    pub measured: Rgba,
    pub predicted: Rgba,
    pub water: Rgba,
    pub caution: Rgba,
    /// Strokes over an image, whatever the look: dark ink, and the light halo under it.
    pub over_image: Rgba,
    pub halo: Rgba,
    pub text: TextSizes,
    pub widths: Widths,
}

/// Sizes of type, millimetres.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TextSizes {
    pub title: f64,
    pub heading: f64,
    pub body: f64,
    pub small: f64,
}

/// Widths of lines, millimetres.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Widths {
    pub hair: f64,
    pub thin: f64,
    pub line: f64,
    pub bold: f64,
}

const TEXT: TextSizes = TextSizes { title: 4.4, heading: 2.9, body: 2.5, small: 2.15 };
const WIDTHS: Widths = Widths { hair: 0.12, thin: 0.2, line: 0.35, bold: 0.8 };

impl Theme {
    /// Warm paper: the window by day.
    pub const fn light() -> Self {
        Self {
            is_dark: false,
            paper: rgb(0xFB, 0xF8, 0xF1),
            panel: rgb(0xF2, 0xEC, 0xE0),
            ink: rgb(0x26, 0x22, 0x1C),
            ink_soft: rgb(0x69, 0x61, 0x55),
            rule: rgb(0xCF, 0xC6, 0xB6),
            measured: rgb(0x93, 0x30, 0x1A),
            predicted: rgb(0x2B, 0x4C, 0xA6),
            water: rgb(0x0B, 0x7F, 0x88),
            caution: rgb(0x94, 0x6B, 0x00),
            over_image: rgb(0x1E, 0x1A, 0x15),
            halo: rgb(0xFD, 0xFB, 0xF6),
            text: TEXT,
            widths: WIDTHS,
        }
    }

    /// The same ink at night.
    pub const fn dark() -> Self {
        Self {
            is_dark: true,
            paper: rgb(0x1C, 0x1A, 0x17),
            panel: rgb(0x28, 0x25, 0x21),
            ink: rgb(0xEC, 0xE5, 0xD8),
            ink_soft: rgb(0xA9, 0xA0, 0x91),
            rule: rgb(0x4B, 0x45, 0x3C),
            measured: rgb(0xF0, 0x8A, 0x62),
            predicted: rgb(0x8F, 0xB0, 0xF5),
            water: rgb(0x3F, 0xB9, 0xBE),
            caution: rgb(0xEA, 0xC2, 0x57),
            over_image: rgb(0x1E, 0x1A, 0x15),
            halo: rgb(0xFD, 0xFB, 0xF6),
            text: TEXT,
            widths: WIDTHS,
        }
    }

    /// The light look on white, as journals ask for.
    pub const fn print() -> Self {
        let mut theme = Self::light();
        theme.paper = rgb(0xFF, 0xFF, 0xFF);
        theme.panel = rgb(0xF6, 0xF3, 0xEC);
        theme
    }

    /// A solid line.
    pub const fn stroke(&self, color: Rgba, width_mm: f64) -> Stroke {
        Stroke { color, width_mm, dash_mm: None }
    }

    /// A dashed line: how predicted things are drawn.
    pub const fn dashed(&self, color: Rgba, width_mm: f64) -> Stroke {
        Stroke { color, width_mm, dash_mm: Some([1.1, 0.7]) }
    }

    /// The accent as a pale opaque fill on the paper; `share` of it in [0, 1].
    pub fn tint(&self, accent: Rgba, share: f64) -> Rgba {
        let mut mixed = self.paper;
        for (m, a) in mixed.0.iter_mut().zip(accent.0).take(3) {
            *m = (f64::from(*m) + share * (f64::from(a) - f64::from(*m))).round() as u8;
        }
        mixed
    }
}

impl Rgba {
    /// The same colour, `alpha` in [0, 255].
    pub const fn with_alpha(self, alpha: u8) -> Self {
        Self([self.0[0], self.0[1], self.0[2], alpha])
    }
}

const fn rgb(r: u8, g: u8, b: u8) -> Rgba {
    Rgba([r, g, b, 255])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn linear(c: Rgba) -> [f64; 3] {
        [0, 1, 2].map(|i| {
            let v = f64::from(c.0[i]) / 255.0;
            if v <= 0.040_45 { v / 12.92 } else { ((v + 0.055) / 1.055).powf(2.4) }
        })
    }

    /// Contrast ratio of WCAG 2 (1 to 21).
    fn contrast(a: Rgba, b: Rgba) -> f64 {
        let luminance = |c| {
            let [r, g, b] = linear(c);
            0.2126 * r + 0.7152 * g + 0.0722 * b
        };
        let (x, y): (f64, f64) = (luminance(a), luminance(b));
        (x.max(y) + 0.05) / (x.min(y) + 0.05)
    }

    /// CIE L*a*b* (D65) of linear sRGB.
    fn lab(rgb: [f64; 3]) -> [f64; 3] {
        let [r, g, b] = rgb.map(|v| v.clamp(0.0, 1.0));
        let f = |t: f64| if t > 0.008_856 { t.cbrt() } else { 7.787 * t + 16.0 / 116.0 };
        let x = f((0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.950_47);
        let y = f(0.2126 * r + 0.7152 * g + 0.0722 * b);
        let z = f((0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.088_83);
        [116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)]
    }

    /// Machado, Oliveira & Fernandes 2009, severity 1 (cited from memory): protan, deutan, tritan.
    const BLINDNESS: [[[f64; 3]; 3]; 3] = [
        [
            [0.152_286, 1.052_583, -0.204_868],
            [0.114_503, 0.786_281, 0.099_216],
            [-0.003_882, -0.048_116, 1.051_998],
        ],
        [
            [0.367_322, 0.860_646, -0.227_968],
            [0.280_085, 0.672_501, 0.047_413],
            [-0.011_820, 0.042_940, 0.968_881],
        ],
        [
            [1.255_528, -0.076_749, -0.178_779],
            [-0.078_411, 0.930_809, 0.147_602],
            [0.004_733, 0.691_367, 0.303_900],
        ],
    ];

    #[test]
    fn accents_stay_apart_under_each_colour_blindness() {
        for theme in [Theme::light(), Theme::dark(), Theme::print()] {
            let accents = [theme.measured, theme.predicted, theme.water, theme.caution];
            for (kind, m) in BLINDNESS.iter().enumerate() {
                let seen = accents.map(|c| {
                    let v = linear(c);
                    lab(m.map(|row| row.iter().zip(v).map(|(a, b)| a * b).sum()))
                });
                for i in 0..4 {
                    for j in 0..i {
                        let de = (0..3).map(|k| (seen[i][k] - seen[j][k]).powi(2)).sum::<f64>().sqrt();
                        // ΔE 15 is six times a just noticeable difference of about 2.3.
                        assert!(
                            de > 15.0,
                            "dark {}, kind {kind}: accents {i} and {j} differ by ΔE {de:.1}",
                            theme.is_dark
                        );
                    }
                }
            }
        }
    }

    #[test]
    fn text_is_readable_on_paper_and_panel() {
        for theme in [Theme::light(), Theme::dark(), Theme::print()] {
            for ground in [theme.paper, theme.panel] {
                assert!(contrast(theme.ink, ground) > 7.0);
                for c in [theme.ink_soft, theme.measured, theme.predicted, theme.water, theme.caution] {
                    let ratio = contrast(c, ground);
                    assert!(ratio >= 4.0, "{c:?} on {ground:?}: {ratio:.2}");
                }
            }
        }
    }

    #[test]
    fn a_tint_lies_between_paper_and_accent() {
        let theme = Theme::print();
        assert_eq!(theme.tint(theme.ink, 0.0), theme.paper);
        assert_eq!(theme.tint(theme.ink, 1.0), theme.ink);
    }
}
