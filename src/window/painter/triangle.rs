//! One triangle: which pixels it covers, and the colour of each.
//!
//! A pixel is covered when its centre lies inside; a centre on an edge belongs to the triangle of
//! which that edge is a top or left one. Edge tests are exact (integers in 1/256 pixel), so two
//! triangles that share an edge never leave a gap nor paint a pixel twice.

use std::ops::Range;

use egui::epaint::Vertex;

use super::texture::{TEXEL, TexelPos, Texture};

/// Sub-pixel steps per pixel.
const STEP: i64 = 256;
/// Farthest vertex, pixels: edge products then stay inside 64 bits.
const FARTHEST: f32 = 2.0e6;

/// A vertex in pixels.
#[derive(Clone, Copy)]
pub struct Corner {
    x: i64,
    y: i64,
    u: f32,
    v: f32,
    color: [u8; 4],
}

/// The first pixel of a horizontal run.
#[derive(Clone, Copy)]
pub struct Span {
    pub x: i64,
    pub y: i64,
}

/// A half plane a·x + b·y + c ≥ 0 in sub-pixel coordinates.
#[derive(Clone, Copy)]
struct Edge {
    a: i64,
    b: i64,
    c: i64,
}

/// A quantity that is linear over the picture: `at` at the origin pixel centre, and its steps.
#[derive(Clone, Copy)]
struct Ramp {
    origin: f32,
    per_x: f32,
    per_y: f32,
}

enum Ink {
    /// One colour, alpha included.
    Flat([u8; 4]),
    /// A colour ramp over one texel.
    Shaded([Ramp; 4]),
    /// Texture positions in texels, times one colour.
    Textured { u: Ramp, v: Ramp, color: [u8; 4], linear: bool },
    /// Both vary.
    Full { u: Ramp, v: Ramp, color: [Ramp; 4], linear: bool },
}

pub struct Triangle {
    edges: [Edge; 3],
    rows: Range<i64>,
    /// Pixel the ramps start from.
    base: Span,
    ink: Ink,
}

impl Corner {
    pub fn new(vertex: &Vertex, pixels_per_point: f32) -> Self {
        let snap = |v: f32| {
            let pixels = (v * pixels_per_point).clamp(-FARTHEST, FARTHEST);
            (f64::from(pixels) * STEP as f64).round() as i64
        };
        Self {
            x: snap(vertex.pos.x),
            y: snap(vertex.pos.y),
            u: vertex.uv.x,
            v: vertex.uv.y,
            color: vertex.color.to_array(),
        }
    }
}

impl Edge {
    /// The edge from `p` to `q` of a triangle whose inside lies where the value is positive.
    fn new(p: Corner, q: Corner) -> Self {
        let (a, b) = (p.y - q.y, q.x - p.x);
        let c = -(a * p.x + b * p.y);
        // With y down and a positive inside, a left edge goes up (a > 0) and a top edge goes right.
        let owns_its_points = a > 0 || (a == 0 && b > 0);
        Self { a, b, c: if owns_its_points { c } else { c - 1 } }
    }
}

impl Triangle {
    /// `None` when it has no area, or not a finite place.
    pub fn new(corners: [Corner; 3], texture: &Texture) -> Option<Self> {
        let [p, mut q, mut r] = corners;
        let doubled = |q: Corner, r: Corner| (q.x - p.x) * (r.y - p.y) - (q.y - p.y) * (r.x - p.x);
        let mut area = doubled(q, r);
        if area < 0 {
            (q, r) = (r, q);
            area = -area;
        }
        if area == 0 {
            return None;
        }
        let top = p.y.min(q.y).min(r.y);
        let bottom = p.y.max(q.y).max(r.y);
        // Centres at STEP/2 past the pixel's corner.
        let rows = (top - STEP / 2 + STEP - 1).div_euclid(STEP)..(bottom - STEP / 2).div_euclid(STEP) + 1;
        let base = Span { x: p.x.div_euclid(STEP), y: p.y.div_euclid(STEP) };
        Some(Self {
            edges: [Edge::new(p, q), Edge::new(q, r), Edge::new(r, p)],
            rows,
            base,
            ink: Ink::new([p, q, r], area, base, texture),
        })
    }

    pub fn rows(&self) -> Range<i64> {
        self.rows.clone()
    }

    /// Columns [from, to) covered in pixel row `y`.
    pub fn columns(&self, y: i64) -> Option<(i64, i64)> {
        let centre = y * STEP + STEP / 2;
        let (mut from, mut to) = (i64::MIN, i64::MAX);
        for edge in &self.edges {
            // a·X + k ≥ 0 with X = x·STEP + STEP/2.
            let k = edge.b * centre + edge.c + edge.a * (STEP / 2);
            let step = edge.a * STEP;
            match edge.a.signum() {
                1 => from = from.max(-(k.div_euclid(step))),
                -1 => to = to.min(k.div_euclid(-step) + 1),
                _ if k < 0 => return None,
                _ => {}
            }
        }
        (from < to).then_some((from, to))
    }

    /// Blends the triangle's colour over `row`, whose first pixel is `start`.
    pub fn fill(&self, row: &mut [[u8; 4]], start: Span, texture: &Texture) {
        let (x, y) = ((start.x - self.base.x) as f32, (start.y - self.base.y) as f32);
        match &self.ink {
            Ink::Flat(color) => fill_flat(row, *color),
            Ink::Shaded(ramps) => {
                let ramps = ramps.map(|ramp| (ramp.at(x, y), ramp.per_x));
                for (i, pixel) in row.iter_mut().enumerate() {
                    blend(pixel, ramps.map(|(from, step)| to_byte(from + i as f32 * step)));
                }
            }
            Ink::Textured { u, v, color, linear } => {
                let (u0, v0) = (u.at(x, y), v.at(x, y));
                for (i, pixel) in row.iter_mut().enumerate() {
                    let at = texel_pos(u0 + i as f32 * u.per_x, v0 + i as f32 * v.per_x);
                    let texel = if *linear { texture.linear(at) } else { texture.nearest(at) };
                    if texel != [0; 4] {
                        blend(pixel, tint(texel, *color));
                    }
                }
            }
            Ink::Full { u, v, color, linear } => {
                let (u0, v0) = (u.at(x, y), v.at(x, y));
                let ramps = color.map(|ramp| (ramp.at(x, y), ramp.per_x));
                for (i, pixel) in row.iter_mut().enumerate() {
                    let at = texel_pos(u0 + i as f32 * u.per_x, v0 + i as f32 * v.per_x);
                    let texel = if *linear { texture.linear(at) } else { texture.nearest(at) };
                    let color = ramps.map(|(from, step)| to_byte(from + i as f32 * step));
                    blend(pixel, tint(texel, color));
                }
            }
        }
    }
}

impl Ramp {
    /// The linear function through three values at the corners of a triangle of doubled `area`.
    fn new([p, q, r]: [Corner; 3], area: i64, base: Span, [vp, vq, vr]: [f64; 3]) -> Self {
        let area = area as f64;
        let (dq, dr) = (vq - vp, vr - vp);
        let per_x = (dq * (r.y - p.y) as f64 - dr * (q.y - p.y) as f64) / area;
        let per_y = (dr * (q.x - p.x) as f64 - dq * (r.x - p.x) as f64) / area;
        let to_centre_x = (base.x * STEP + STEP / 2 - p.x) as f64;
        let to_centre_y = (base.y * STEP + STEP / 2 - p.y) as f64;
        let step = STEP as f64;
        Self {
            origin: (vp + per_x * to_centre_x + per_y * to_centre_y) as f32,
            per_x: (per_x * step) as f32,
            per_y: (per_y * step) as f32,
        }
    }

    fn at(self, x: f32, y: f32) -> f32 {
        self.origin + self.per_x * x + self.per_y * y
    }
}

impl Ink {
    fn new(corners: [Corner; 3], area: i64, base: Span, texture: &Texture) -> Self {
        let [p, q, r] = corners;
        let ramp = |values: [f64; 3]| Ramp::new(corners, area, base, values);
        let colors = || std::array::from_fn(|i| ramp([p.color[i], q.color[i], r.color[i]].map(f64::from)));
        let one_color = p.color == q.color && q.color == r.color;
        let one_texel = p.u == q.u && q.u == r.u && p.v == q.v && q.v == r.v;
        let (width, height) = (texture.width() as f64, texture.height() as f64);
        if one_texel {
            let at = texel_pos(p.u * width as f32, p.v * height as f32);
            let texel = texture.linear(at);
            if one_color {
                return Self::Flat(tint(texel, p.color));
            }
            if texel == [255; 4] {
                return Self::Shaded(colors());
            }
        }
        let u = ramp(corners.map(|c| f64::from(c.u) * width));
        let v = ramp(corners.map(|c| f64::from(c.v) * height));
        let stride = u.per_x.hypot(v.per_x).max(u.per_y.hypot(v.per_y));
        let linear = texture.is_linear(stride);
        if one_color {
            Self::Textured { u, v, color: p.color, linear }
        } else {
            Self::Full { u, v, color: colors(), linear }
        }
    }
}

fn texel_pos(u: f32, v: f32) -> TexelPos {
    let scale = TEXEL as f32;
    TexelPos { u: (u * scale).round() as i64, v: (v * scale).round() as i64 }
}

fn to_byte(value: f32) -> u8 {
    (value + 0.5) as u8
}

/// a·b/255, rounded.
fn product(a: u8, b: u8) -> u8 {
    let t = u32::from(a) * u32::from(b) + 128;
    ((t + (t >> 8)) >> 8) as u8
}

fn tint(texel: [u8; 4], color: [u8; 4]) -> [u8; 4] {
    match (texel, color) {
        (_, [255, 255, 255, 255]) => texel,
        ([255, 255, 255, 255], _) => color,
        _ => std::array::from_fn(|i| product(texel[i], color[i])),
    }
}

/// `color` over `pixel`, both premultiplied.
fn blend(pixel: &mut [u8; 4], color: [u8; 4]) {
    if color[3] == 255 {
        *pixel = color;
        return;
    }
    let through = 255 - color[3];
    for i in 0..4 {
        pixel[i] = color[i].saturating_add(product(pixel[i], through));
    }
}

fn fill_flat(row: &mut [[u8; 4]], color: [u8; 4]) {
    match color {
        [0, 0, 0, 0] => {}
        [_, _, _, 255] => row.fill(color),
        _ => row.iter_mut().for_each(|pixel| blend(pixel, color)),
    }
}
