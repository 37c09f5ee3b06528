//! Runs a piece of the window without a screen: the test harness draws through the CPU painter.

use egui_kittest::{Harness, HarnessBuilder, TestRenderer};
use ventifact::window::painter::{CpuPainter, Picture};

/// Gives the harness its pictures.
#[derive(Default)]
pub struct CpuRenderer {
    painter: CpuPainter,
}

impl TestRenderer for CpuRenderer {
    fn handle_delta(&mut self, delta: &mut egui::TexturesDelta) {
        self.painter.take_textures(delta);
    }

    fn render(&mut self, ctx: &egui::Context, output: &egui::FullOutput) -> Result<image::RgbaImage, String> {
        let size = ctx.content_rect().size() * output.pixels_per_point;
        let (width, height) = (size.x.round() as usize, size.y.round() as usize);
        let mut picture = Picture::filled(width, height, ctx.global_style().visuals.panel_fill);
        let primitives = ctx.tessellate(output.shapes.clone(), output.pixels_per_point);
        self.painter.paint(&mut picture, output.pixels_per_point, &primitives);
        image::RgbaImage::from_raw(width as u32, height as u32, picture.bytes().to_vec())
            .ok_or_else(|| format!("{width} × {height} pixels do not make a picture"))
    }
}

/// A harness of a window of `size` points that can be pictured.
pub fn window<State>(size: [f32; 2], theme: egui::Theme) -> HarnessBuilder<State> {
    Harness::builder()
        .with_size(size)
        .with_theme(theme)
        .with_step_dt(1.0 / 60.0)
        .renderer(CpuRenderer::default())
}

/// Compares a picture with the one kept at `path` (from the package's root), or writes it there
/// when `UPDATE_PICTURES` is set.
///
/// The painter is exact; the scenes go through the system's sine and logarithm, whose last bit may
/// differ from one system to another. So a grey step of 3 is let pass, and one pixel in 2000.
pub fn compare(got: &image::RgbaImage, path: &str) {
    let kept = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join(path);
    if std::env::var_os("UPDATE_PICTURES").is_some() {
        std::fs::create_dir_all(kept.parent().expect("a folder")).expect("the folder can be made");
        got.save(&kept).expect("the picture can be written");
        return;
    }
    let want = image::open(&kept)
        .unwrap_or_else(|why| panic!("{path}: {why}; make it with UPDATE_PICTURES=1"))
        .into_rgba8();
    assert_eq!(got.dimensions(), want.dimensions(), "{path}: size");
    let differs =
        |(a, b): (&image::Rgba<u8>, &image::Rgba<u8>)| a.0.iter().zip(b.0).any(|(a, b)| a.abs_diff(b) > 3);
    let count = got.pixels().zip(want.pixels()).filter(|pair| differs(*pair)).count();
    let bound = want.pixels().len() / 2000;
    if count > bound {
        let new = std::env::temp_dir().join(kept.file_name().expect("a name"));
        got.save(&new).expect("the picture can be written");
        panic!("{path}: {count} pixels differ, bound {bound}; what was drawn is in {}", new.display());
    }
}
