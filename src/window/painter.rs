//! Draws egui's tessellated output on the processor: for machines without OpenGL, for window
//! pictures in tests, and for the pictures of the documents.
//!
//! Blending is the one egui expects: premultiplied alpha in gamma space, eight bits a channel.
//! Geometry is snapped to 1/256 pixel and covered by exact integer edge tests, so a picture is
//! the same byte for byte on every run and with any number of threads.

mod texture;
mod triangle;

use std::collections::HashMap;

use egui::epaint::{ClippedPrimitive, Mesh, Primitive};
use egui::{Color32, Rect, TextureId, TexturesDelta};
use rayon::prelude::{IndexedParallelIterator, ParallelIterator, ParallelSliceMut};

use texture::Texture;
use triangle::{Corner, Span, Triangle};

/// Rows drawn by one task.
const STRIP: usize = 64;

/// A picture in memory: opaque or premultiplied RGBA, row by row from the top.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Picture {
    width: usize,
    height: usize,
    pixels: Vec<[u8; 4]>,
}

/// Keeps egui's textures and paints its triangles.
#[derive(Default)]
pub struct CpuPainter {
    textures: HashMap<TextureId, Texture>,
    /// Freed by the last delta; still wanted by the frame that came with it.
    leaving: Vec<TextureId>,
}

/// Pixel box [x0, x1) × [y0, y1).
#[derive(Clone, Copy)]
struct PixelBox {
    x0: i64,
    y0: i64,
    x1: i64,
    y1: i64,
}

impl Picture {
    /// A picture of one colour.
    pub fn filled(width: usize, height: usize, color: Color32) -> Self {
        Self { width, height, pixels: vec![color.to_array(); width * height] }
    }

    pub fn width(&self) -> usize {
        self.width
    }

    pub fn height(&self) -> usize {
        self.height
    }

    /// RGBA pixels, row by row from the top.
    pub fn pixels(&self) -> &[[u8; 4]] {
        &self.pixels
    }

    /// The same as one run of bytes.
    pub fn bytes(&self) -> &[u8] {
        self.pixels.as_flattened()
    }
}

impl CpuPainter {
    /// Takes over everything in `delta` and leaves it empty. Textures freed by it stay until the
    /// next call, because the frame that freed them may still show them.
    pub fn take_textures(&mut self, delta: &mut TexturesDelta) {
        for id in self.leaving.drain(..) {
            self.textures.remove(&id);
        }
        // The map's order does not matter: each texture has its own list, kept in order.
        for (id, images) in delta.set.drain() {
            for image in &images {
                match image.pos {
                    None => {
                        self.textures.insert(id, Texture::new(&image.image, image.options));
                    }
                    Some(at) => {
                        if let Some(texture) = self.textures.get_mut(&id) {
                            texture.update(at, &image.image);
                        }
                    }
                }
            }
        }
        self.leaving.extend(delta.free.drain());
    }

    /// Paints `primitives` over `picture`, whose pixels are `pixels_per_point` to a point.
    /// Callbacks to a graphics card are passed over: there is none.
    pub fn paint(&self, picture: &mut Picture, pixels_per_point: f32, primitives: &[ClippedPrimitive]) {
        let (width, height) = (picture.width, picture.height);
        if width == 0 || height == 0 {
            return;
        }
        let meshes: Vec<(PixelBox, &Mesh, &Texture)> = primitives
            .iter()
            .filter_map(|primitive| {
                let Primitive::Mesh(mesh) = &primitive.primitive else { return None };
                let clip = PixelBox::of(primitive.clip_rect, pixels_per_point, width, height);
                let texture = self.textures.get(&mesh.texture_id)?;
                (!clip.is_empty()).then_some((clip, mesh, texture))
            })
            .collect();
        picture.pixels.par_chunks_mut(STRIP * width).enumerate().for_each(|(index, pixels)| {
            let top = (index * STRIP) as i64;
            let rows = (pixels.len() / width) as i64;
            for (clip, mesh, texture) in &meshes {
                let clip = PixelBox { y0: clip.y0.max(top), y1: clip.y1.min(top + rows), ..*clip };
                if !clip.is_empty() {
                    paint_mesh(pixels, width, top, clip, mesh, texture, pixels_per_point);
                }
            }
        });
    }
}

/// Paints the part of a mesh inside `clip` into a strip whose first row is `top`.
fn paint_mesh(
    strip: &mut [[u8; 4]],
    width: usize,
    top: i64,
    clip: PixelBox,
    mesh: &Mesh,
    texture: &Texture,
    pixels_per_point: f32,
) {
    for index in mesh.indices.as_chunks::<3>().0 {
        let corners = index.map(|i| Corner::new(&mesh.vertices[i as usize], pixels_per_point));
        let Some(triangle) = Triangle::new(corners, texture) else { continue };
        let rows = triangle.rows();
        for y in rows.start.max(clip.y0)..rows.end.min(clip.y1) {
            let Some((from, to)) = triangle.columns(y) else { continue };
            let (from, to) = (from.max(clip.x0), to.min(clip.x1));
            if from < to {
                let start = (y - top) as usize * width;
                let row = &mut strip[start + from as usize..start + to as usize];
                triangle.fill(row, Span { x: from, y }, texture);
            }
        }
    }
}

impl PixelBox {
    /// A clip rectangle in points, rounded to whole pixels as the OpenGL painter does.
    fn of(rect: Rect, pixels_per_point: f32, width: usize, height: usize) -> Self {
        let edge = |v: f32, max: usize| ((v * pixels_per_point).round() as i64).clamp(0, max as i64);
        Self {
            x0: edge(rect.min.x, width),
            y0: edge(rect.min.y, height),
            x1: edge(rect.max.x, width),
            y1: edge(rect.max.y, height),
        }
    }

    fn is_empty(self) -> bool {
        self.x0 >= self.x1 || self.y0 >= self.y1
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use egui::epaint::{ImageDelta, Vertex, WHITE_UV};
    use egui::{ColorImage, TextureOptions, pos2};

    const TEXTURE: TextureId = TextureId::Managed(0);

    fn painter(size: [usize; 2], pixels: Vec<Color32>, options: TextureOptions) -> CpuPainter {
        let mut delta = TexturesDelta::default();
        delta.push(TEXTURE, ImageDelta::full(ColorImage::new(size, pixels), options));
        let mut painter = CpuPainter::default();
        painter.take_textures(&mut delta);
        assert!(delta.is_empty(), "the delta must be drained");
        painter
    }

    fn clipped(mesh: Mesh, clip: Rect) -> ClippedPrimitive {
        ClippedPrimitive { clip_rect: clip, primitive: Primitive::Mesh(mesh) }
    }

    fn fan(points: &[[f32; 2]], color: Color32) -> Mesh {
        let mut mesh = Mesh::with_texture(TEXTURE);
        mesh.vertices =
            points.iter().map(|[x, y]| Vertex { pos: pos2(*x, *y), uv: WHITE_UV, color }).collect();
        for i in 1..points.len() as u32 - 1 {
            mesh.add_triangle(0, i, i + 1);
        }
        mesh
    }

    #[test]
    fn triangles_that_share_an_edge_cover_each_pixel_once() {
        let painter = painter([1, 1], vec![Color32::WHITE], TextureOptions::LINEAR);
        let half = Color32::from_rgba_premultiplied(0, 0, 0, 128);
        // A fan round an inner point, corners off the pixel grid: any double cover is darker.
        let mesh = fan(
            &[
                [17.3, 15.1],
                [-4.0, -4.0],
                [20.7, -4.0],
                [44.0, -4.0],
                [44.0, 44.0],
                [9.2, 44.0],
                [-4.0, 44.0],
                [-4.0, -4.0],
            ],
            half,
        );
        let mut picture = Picture::filled(40, 40, Color32::WHITE);
        painter.paint(&mut picture, 1.0, &[clipped(mesh, Rect::EVERYTHING)]);
        assert!(picture.pixels().iter().all(|p| *p == [127, 127, 127, 255]), "{:?}", picture.pixels()[0]);
    }

    #[test]
    fn clip_and_scale_are_in_pixels() {
        let painter = painter([1, 1], vec![Color32::WHITE], TextureOptions::LINEAR);
        let mesh = fan(&[[0.0, 0.0], [50.0, 0.0], [50.0, 50.0], [0.0, 50.0]], Color32::RED);
        let mut picture = Picture::filled(20, 100, Color32::BLACK);
        let clip = Rect::from_min_max(pos2(1.0, 2.0), pos2(4.0, 45.0));
        painter.paint(&mut picture, 2.0, &[clipped(mesh, clip)]);
        for y in 0..100 {
            for x in 0..20 {
                let inside = (2..8).contains(&x) && (4..90).contains(&y);
                let want = if inside { [255, 0, 0, 255] } else { [0, 0, 0, 255] };
                assert_eq!(picture.pixels()[y * 20 + x], want, "at {x}, {y}");
            }
        }
    }

    fn textured(size: f32) -> Mesh {
        let mut mesh = Mesh::with_texture(TEXTURE);
        mesh.add_rect_with_uv(
            Rect::from_min_max(pos2(0.0, 0.0), pos2(size, size)),
            Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0)),
            Color32::WHITE,
        );
        mesh
    }

    #[test]
    fn one_texel_to_one_pixel_is_exact() {
        let texels: Vec<Color32> = (0..64).map(|i| Color32::from_rgb(i * 4, 255 - i * 3, i)).collect();
        let painter = painter([8, 8], texels.clone(), TextureOptions::LINEAR);
        let mut picture = Picture::filled(8, 8, Color32::BLACK);
        painter.paint(&mut picture, 1.0, &[clipped(textured(8.0), Rect::EVERYTHING)]);
        let want: Vec<[u8; 4]> = texels.iter().map(Color32::to_array).collect();
        assert_eq!(picture.pixels(), want);
    }

    #[test]
    fn nearest_makes_blocks_and_linear_makes_ramps() {
        let texels = vec![Color32::BLACK, Color32::WHITE, Color32::BLACK, Color32::WHITE];
        let row = |options| {
            let painter = painter([2, 2], texels.clone(), options);
            let mut picture = Picture::filled(8, 8, Color32::RED);
            painter.paint(&mut picture, 1.0, &[clipped(textured(8.0), Rect::EVERYTHING)]);
            picture.pixels()[..8].iter().map(|p| p[0]).collect::<Vec<u8>>()
        };
        assert_eq!(row(TextureOptions::NEAREST), [0, 0, 0, 0, 255, 255, 255, 255]);
        // Pixel centres at texel position −0.375, −0.125, 0.125, .. between the texel centres.
        assert_eq!(row(TextureOptions::LINEAR), [0, 0, 32, 96, 159, 223, 255, 255]);
    }

    #[test]
    fn colours_blend_premultiplied_in_gamma_space() {
        let painter = painter([1, 1], vec![Color32::WHITE], TextureOptions::LINEAR);
        let mesh = fan(
            &[[0.0, 0.0], [4.0, 0.0], [4.0, 4.0], [0.0, 4.0]],
            Color32::from_rgba_premultiplied(100, 10, 0, 100),
        );
        let mut picture = Picture::filled(4, 4, Color32::from_rgb(200, 100, 50));
        painter.paint(&mut picture, 1.0, &[clipped(mesh, Rect::EVERYTHING)]);
        // 100 + 200·155/255 = 221.6, 10 + 100·155/255 = 70.8, 50·155/255 = 30.4.
        assert_eq!(picture.pixels()[5], [222, 71, 30, 255]);
    }

    #[test]
    fn a_freed_texture_lives_through_its_last_frame() {
        let mut painter = painter([1, 1], vec![Color32::WHITE], TextureOptions::LINEAR);
        let mut delta = TexturesDelta::default();
        delta.free(TEXTURE);
        painter.take_textures(&mut delta);
        assert_eq!(painter.textures.len(), 1);
        painter.take_textures(&mut TexturesDelta::default());
        assert_eq!(painter.textures.len(), 0);
    }
}
