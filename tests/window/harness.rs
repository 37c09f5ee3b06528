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
