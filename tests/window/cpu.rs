//! Paints a frame without a GPU: the triangles that egui makes, blended in gamma space with premultiplied alpha.
//! Textures are clamped at their edges; paint callbacks are left out, for the window has none.

use std::collections::HashMap;

use eframe::egui::epaint::{ImageData, Primitive, Vertex};
use eframe::egui::{
    Color32, Context, FullOutput, Pos2, Rect, TextureFilter, TextureId, TexturesDelta, pos2, vec2,
};

struct Texture {
    width: usize,
    height: usize,
    pixels: Vec<Color32>,
    nearest: bool,
}

/// The painter of the tests.
#[derive(Default)]
pub struct CpuRenderer {
    textures: HashMap<TextureId, Texture>,
}

impl egui_kittest::TestRenderer for CpuRenderer {
    fn handle_delta(&mut self, delta: &mut TexturesDelta) {
        for (id, changes) in delta.set.drain() {
            for change in changes {
                let ImageData::Color(image) = &change.image;
                let [w, h] = image.size;
                let nearest = change.options.magnification == TextureFilter::Nearest;
                match change.pos {
                    None => {
                        let pixels = image.pixels.clone();
                        self.textures.insert(id, Texture { width: w, height: h, pixels, nearest });
                    }
                    Some([x0, y0]) => {
                        let texture = self.textures.get_mut(&id).expect("patch of an unknown texture");
                        for y in 0..h {
                            let to = (y0 + y) * texture.width + x0;
                            texture.pixels[to..to + w].copy_from_slice(&image.pixels[y * w..(y + 1) * w]);
                        }
                    }
                }
            }
        }
        for id in delta.free.drain() {
            self.textures.remove(&id);
        }
    }

    fn render(&mut self, ctx: &Context, output: &FullOutput) -> Result<image::RgbaImage, String> {
        let scale = ctx.pixels_per_point();
        let size = ctx.content_rect().size() * scale;
        let (w, h) = (size.x.round() as usize, size.y.round() as usize);
        let screen = Rect::from_min_size(Pos2::ZERO, vec2(w as f32, h as f32));
        let mut pixels = vec![Color32::TRANSPARENT; w * h];
        for part in ctx.tessellate(output.shapes.clone(), scale) {
            let Primitive::Mesh(mesh) = part.primitive else { continue };
            let Some(texture) = self.textures.get(&mesh.texture_id) else { continue };
            let clip = Rect::from_min_max(
                (part.clip_rect.min * scale).round(),
                (part.clip_rect.max * scale).round(),
            )
            .intersect(screen);
            if clip.is_positive() {
                for corners in mesh.indices.chunks_exact(3) {
                    let corners = [0, 1, 2].map(|i| mesh.vertices[corners[i] as usize]);
                    triangle(&mut pixels, w, clip, scale, texture, corners);
                }
            }
        }
        let bytes: Vec<u8> = pixels.iter().flat_map(Color32::to_srgba_unmultiplied).collect();
        image::RgbaImage::from_raw(w as u32, h as u32, bytes).ok_or_else(|| "no picture".to_owned())
    }
}

/// Twice the area of a triangle, with its sign.
fn area(a: Pos2, b: Pos2, c: Pos2) -> f32 {
    (b.x - a.x) * (c.y - a.y) - (b.y - a.y) * (c.x - a.x)
}

fn triangle(
    pixels: &mut [Color32],
    width: usize,
    clip: Rect,
    scale: f32,
    texture: &Texture,
    mut v: [Vertex; 3],
) {
    let mut p = v.map(|v| pos2(v.pos.x * scale, v.pos.y * scale));
    let mut whole = area(p[0], p[1], p[2]);
    if whole == 0.0 || !whole.is_finite() {
        return;
    }
    if whole < 0.0 {
        p.swap(1, 2);
        v.swap(1, 2);
        whole = -whole;
    }
    let bounds = Rect::from_points(&p).intersect(clip);
    // The top-left rule, so that a pixel on a common edge is blended once.
    let owns = |a: Pos2, b: Pos2| (a.y == b.y && b.x > a.x) || b.y < a.y;
    let owned = [owns(p[1], p[2]), owns(p[2], p[0]), owns(p[0], p[1])];
    let one_colour =
        v[0].color == v[1].color && v[1].color == v[2].color && v[0].uv == v[1].uv && v[1].uv == v[2].uv;
    let colours = v.map(|v| v.color.to_array().map(f32::from));
    for y in bounds.min.y.floor() as i64..bounds.max.y.ceil() as i64 {
        for x in bounds.min.x.floor() as i64..bounds.max.x.ceil() as i64 {
            let at = pos2(x as f32 + 0.5, y as f32 + 0.5);
            if at.x < clip.min.x || at.x >= clip.max.x || at.y < clip.min.y || at.y >= clip.max.y {
                continue;
            }
            let edges = [area(p[1], p[2], at), area(p[2], p[0], at), area(p[0], p[1], at)];
            if (0..3).any(|k| edges[k] < 0.0 || edges[k] == 0.0 && !owned[k]) {
                continue;
            }
            let share = edges.map(|e| e / whole);
            let mix = |values: [f32; 3]| (0..3).map(|k| share[k] * values[k]).sum::<f32>();
            let u = mix(v.map(|v| v.uv.x));
            let w = mix(v.map(|v| v.uv.y));
            let texel = texture.at(u, w);
            let source: [f32; 4] = std::array::from_fn(|k| {
                let colour = if one_colour { colours[0][k] } else { mix(colours.map(|c| c[k])) };
                colour * texel[k] / 255.0
            });
            let target = &mut pixels[y as usize * width + x as usize];
            let old = target.to_array();
            let [r, g, b, a] = std::array::from_fn(|k| {
                (source[k] + f32::from(old[k]) * (1.0 - source[3] / 255.0) + 0.5).clamp(0.0, 255.0) as u8
            });
            *target = Color32::from_rgba_premultiplied(r, g, b, a);
        }
    }
}

impl Texture {
    fn texel(&self, x: i64, y: i64) -> [f32; 4] {
        let (x, y) = (x.clamp(0, self.width as i64 - 1), y.clamp(0, self.height as i64 - 1));
        self.pixels[y as usize * self.width + x as usize].to_array().map(f32::from)
    }

    fn at(&self, u: f32, v: f32) -> [f32; 4] {
        let (x, y) = (u * self.width as f32, v * self.height as f32);
        if self.nearest {
            return self.texel(x.floor() as i64, y.floor() as i64);
        }
        let (x, y) = (x - 0.5, y - 0.5);
        let (x0, y0) = (x.floor() as i64, y.floor() as i64);
        let (dx, dy) = (x - x.floor(), y - y.floor());
        if dx == 0.0 && dy == 0.0 {
            return self.texel(x0, y0);
        }
        let corners = [(0, 0), (1, 0), (0, 1), (1, 1)].map(|(i, j)| self.texel(x0 + i, y0 + j));
        std::array::from_fn(|k| {
            let top = corners[0][k] * (1.0 - dx) + corners[1][k] * dx;
            let bottom = corners[2][k] * (1.0 - dx) + corners[3][k] * dx;
            top * (1.0 - dy) + bottom * dy
        })
    }
}
