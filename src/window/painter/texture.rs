//! Textures of the CPU painter: premultiplied RGBA, sampled nearest or linear.

use egui::{ImageData, TextureFilter, TextureOptions, TextureWrapMode};

/// A texture and how it is sampled.
pub struct Texture {
    width: usize,
    height: usize,
    texels: Vec<[u8; 4]>,
    options: TextureOptions,
}

/// A texel position in 1/256 texel; (0, 0) is the outer corner of the first texel.
#[derive(Clone, Copy)]
pub struct TexelPos {
    pub u: i64,
    pub v: i64,
}

/// One texel in [`TexelPos`] units.
pub const TEXEL: i64 = 256;

impl Texture {
    pub fn new(image: &ImageData, options: TextureOptions) -> Self {
        let ImageData::Color(image) = image;
        let texels = image.pixels.iter().map(|c| c.to_array()).collect();
        Self { width: image.size[0], height: image.size[1], texels, options }
    }

    /// Replaces the texels from column and row `at` on; what reaches outside is dropped.
    pub fn update(&mut self, at: [usize; 2], image: &ImageData) {
        let ImageData::Color(image) = image;
        let width = image.size[0].min(self.width.saturating_sub(at[0]));
        let height = image.size[1].min(self.height.saturating_sub(at[1]));
        for row in 0..height {
            let from = &image.pixels[row * image.size[0]..][..width];
            let start = (at[1] + row) * self.width + at[0];
            for (texel, color) in self.texels[start..start + width].iter_mut().zip(from) {
                *texel = color.to_array();
            }
        }
    }

    pub fn width(&self) -> usize {
        self.width
    }

    pub fn height(&self) -> usize {
        self.height
    }

    /// Whether to interpolate when one pixel spans `texels_per_pixel` texels.
    pub fn is_linear(&self, texels_per_pixel: f32) -> bool {
        let filter =
            if texels_per_pixel > 1.0 { self.options.minification } else { self.options.magnification };
        filter == TextureFilter::Linear
    }

    /// The texel under `at`.
    pub fn nearest(&self, at: TexelPos) -> [u8; 4] {
        self.texel(at.u.div_euclid(TEXEL), at.v.div_euclid(TEXEL))
    }

    /// The four texels round `at`, weighted by area.
    pub fn linear(&self, at: TexelPos) -> [u8; 4] {
        let (u, v) = (at.u - TEXEL / 2, at.v - TEXEL / 2);
        let (col, row) = (u.div_euclid(TEXEL), v.div_euclid(TEXEL));
        let (right, down) = (u.rem_euclid(TEXEL) as u32, v.rem_euclid(TEXEL) as u32);
        if right == 0 && down == 0 {
            return self.texel(col, row);
        }
        let (a, b) = (self.texel(col, row), self.texel(col + 1, row));
        let (c, d) = (self.texel(col, row + 1), self.texel(col + 1, row + 1));
        let (left, up) = (256 - right, 256 - down);
        std::array::from_fn(|i| {
            let upper = u32::from(a[i]) * left + u32::from(b[i]) * right;
            let lower = u32::from(c[i]) * left + u32::from(d[i]) * right;
            ((upper * up + lower * down + (1 << 15)) >> 16) as u8
        })
    }

    fn texel(&self, col: i64, row: i64) -> [u8; 4] {
        let (width, height) = (self.width as i64, self.height as i64);
        let inside = (0..width).contains(&col) && (0..height).contains(&row);
        let (col, row) = if inside { (col, row) } else { (self.wrap(col, width), self.wrap(row, height)) };
        // An empty texture has no texel to show.
        self.texels.get((row * width + col) as usize).copied().unwrap_or([0; 4])
    }

    fn wrap(&self, index: i64, len: i64) -> i64 {
        if len == 0 {
            return 0;
        }
        match self.options.wrap_mode {
            TextureWrapMode::ClampToEdge => index.clamp(0, len - 1),
            TextureWrapMode::Repeat => index.rem_euclid(len),
            TextureWrapMode::MirroredRepeat => {
                let at = index.rem_euclid(2 * len);
                at.min(2 * len - 1 - at)
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use egui::{Color32, ColorImage};

    fn ramp(wrap_mode: TextureWrapMode) -> Texture {
        let pixels = (0..4).map(|i| Color32::from_gray(i * 10)).collect();
        let options = TextureOptions { wrap_mode, ..TextureOptions::NEAREST };
        Texture::new(&ImageData::Color(ColorImage::new([4, 1], pixels).into()), options)
    }

    fn reds(texture: &Texture) -> Vec<u8> {
        (-3..7).map(|i| texture.nearest(TexelPos { u: i * TEXEL + 7, v: 0 })[0]).collect()
    }

    #[test]
    fn outside_is_clamped_repeated_or_mirrored() {
        assert_eq!(reds(&ramp(TextureWrapMode::ClampToEdge)), [0, 0, 0, 0, 10, 20, 30, 30, 30, 30]);
        assert_eq!(reds(&ramp(TextureWrapMode::Repeat)), [10, 20, 30, 0, 10, 20, 30, 0, 10, 20]);
        assert_eq!(reds(&ramp(TextureWrapMode::MirroredRepeat)), [20, 10, 0, 0, 10, 20, 30, 30, 20, 10]);
    }

    #[test]
    fn an_update_past_the_edge_is_cut() {
        let mut texture = ramp(TextureWrapMode::ClampToEdge);
        let patch = ColorImage::filled([3, 3], Color32::WHITE);
        texture.update([2, 0], &ImageData::Color(patch.into()));
        assert_eq!(texture.texels.iter().map(|t| t[0]).collect::<Vec<_>>(), [0, 10, 255, 255]);
    }
}
