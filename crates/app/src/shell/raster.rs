//! Draws egui's triangle meshes into a plain frame of pixels, on the CPU.
//!
//! Positions are rounded to 1/256 pixel; a pixel belongs to a triangle when its centre does, with the top-left
//! rule on shared edges, so that neighbouring translucent triangles never paint a pixel twice. Colours blend in
//! gamma space with premultiplied alpha, as egui expects. The frame is cut into horizontal bands drawn by
//! several threads; each pixel is written by one thread only, so the picture is the same for any number.

use super::textures::{Texture, Textures};
use egui::epaint::{ClippedPrimitive, Primitive, Vertex};
use egui::{Color32, Rect};
use rayon::prelude::*;

/// A frame of pixels as `0x00RRGGBB`, row by row.
#[derive(Debug)]
pub struct Frame<'a> {
    /// The pixels; `width·height` of them.
    pub pixels: &'a mut [u32],
    /// Pixels in a row.
    pub width: usize,
    /// Rows.
    pub height: usize,
}

/// Fills the frame with `background` and draws the primitives over it.
pub fn paint(
    frame: &mut Frame<'_>,
    background: Color32,
    primitives: &[ClippedPrimitive],
    pixels_per_point: f32,
    textures: &Textures,
) {
    let (width, height) = (frame.width, frame.height);
    if width == 0 || height == 0 || frame.pixels.len() < width * height {
        return;
    }
    let bands = (rayon::current_num_threads() * 4).clamp(1, 32);
    let rows = height.div_ceil(bands);
    let clear = opaque(background);
    frame.pixels[..width * height].par_chunks_mut(rows * width).enumerate().for_each(|(index, pixels)| {
        pixels.fill(clear);
        let top = index * rows;
        let mut band = Band { pixels, width, top, bottom: (top + rows).min(height) };
        for primitive in primitives {
            band.primitive(primitive, pixels_per_point, textures);
        }
    });
}

fn opaque(colour: Color32) -> u32 {
    let [r, g, b, _] = colour.to_array();
    u32::from_be_bytes([0, r, g, b])
}

/// Subpixel steps per pixel.
const SUB: i64 = 256;

/// The rows `top..bottom` of the frame.
struct Band<'a> {
    pixels: &'a mut [u32],
    width: usize,
    top: usize,
    bottom: usize,
}

/// A clip rectangle in whole pixels: `left..right`, `top..bottom`.
#[derive(Clone, Copy)]
struct Clip {
    left: i64,
    right: i64,
    top: i64,
    bottom: i64,
}

/// A vertex in subpixels.
#[derive(Clone, Copy)]
struct Corner {
    x: i64,
    y: i64,
}

impl Band<'_> {
    fn clip(&self, rect: Rect, scale: f32) -> Option<Clip> {
        let whole = |value: f32| (value * scale).round().clamp(0.0, 1e6) as i64;
        let clip = Clip {
            left: whole(rect.min.x),
            right: whole(rect.max.x).min(self.width as i64),
            top: whole(rect.min.y).max(self.top as i64),
            bottom: whole(rect.max.y).min(self.bottom as i64),
        };
        (clip.left < clip.right && clip.top < clip.bottom).then_some(clip)
    }

    fn primitive(&mut self, primitive: &ClippedPrimitive, scale: f32, textures: &Textures) {
        let Some(clip) = self.clip(primitive.clip_rect, scale) else { return };
        // Paint callbacks need a graphics API; the interface uses none.
        let Primitive::Mesh(mesh) = &primitive.primitive else { return };
        let Some(texture) = textures.get(mesh.texture_id) else { return };
        for indices in mesh.indices.chunks_exact(3) {
            let corner = |index: usize| mesh.vertices.get(indices[index] as usize);
            if let (Some(a), Some(b), Some(c)) = (corner(0), corner(1), corner(2)) {
                self.triangle([a, b, c], scale, clip, texture);
            }
        }
    }

    fn triangle(&mut self, vertices: [&Vertex; 3], scale: f32, clip: Clip, texture: &Texture) {
        let mut vertices = vertices;
        if vertices.iter().any(|v| !(v.pos.x.abs() < 1e6 && v.pos.y.abs() < 1e6)) {
            return;
        }
        let corner = |v: &Vertex| Corner {
            x: (f64::from(v.pos.x * scale) * SUB as f64).round() as i64,
            y: (f64::from(v.pos.y * scale) * SUB as f64).round() as i64,
        };
        let mut corners = vertices.map(corner);
        let mut area = cross(corners[0], corners[1], corners[2]);
        if area == 0 {
            return;
        }
        if area < 0 {
            vertices.swap(1, 2);
            corners.swap(1, 2);
            area = -area;
        }
        let lowest = corners.iter().map(|c| c.y).min().unwrap_or(0);
        let highest = corners.iter().map(|c| c.y).max().unwrap_or(0);
        let first = lowest.div_euclid(SUB).max(clip.top);
        let last = (highest.div_euclid(SUB) + 1).min(clip.bottom);
        if first >= last {
            return;
        }
        let edges = [
            Edge::new(corners[1], corners[2]),
            Edge::new(corners[2], corners[0]),
            Edge::new(corners[0], corners[1]),
        ];
        let shade = Shade::new(vertices, edges, area, texture);
        for row in first..last {
            let y = row * SUB + SUB / 2;
            let (mut from, mut to) = (clip.left, clip.right);
            for edge in &edges {
                edge.narrow(y, &mut from, &mut to);
            }
            if from < to {
                let start = (row as usize - self.top) * self.width;
                let pixels = &mut self.pixels[start + from as usize..start + to as usize];
                shade.span(pixels, from * SUB + SUB / 2, y, texture);
            }
        }
    }
}

fn cross(a: Corner, b: Corner, c: Corner) -> i64 {
    (b.x - a.x) * (c.y - a.y) - (b.y - a.y) * (c.x - a.x)
}

/// The half-plane function of an edge a→b: value(x, y) = dx·(y − a.y) − dy·(x − a.x), ≥ 0 inside.
#[derive(Clone, Copy)]
struct Edge {
    a: Corner,
    dx: i64,
    dy: i64,
    /// 0 where points on the edge belong to the triangle, 1 where they don't.
    exclude: i64,
}

impl Edge {
    fn new(a: Corner, b: Corner) -> Self {
        let (dx, dy) = (b.x - a.x, b.y - a.y);
        let inclusive = dy < 0 || (dy == 0 && dx > 0);
        Self { a, dx, dy, exclude: i64::from(!inclusive) }
    }

    fn value(&self, x: i64, y: i64) -> i64 {
        self.dx * (y - self.a.y) - self.dy * (x - self.a.x)
    }

    /// Narrows the pixels `from..to` of the row through `y` to those whose centres are inside the edge.
    fn narrow(&self, y: i64, from: &mut i64, to: &mut i64) {
        // value(centre of pixel 0) − exclude, falling by dy·SUB a pixel.
        let start = self.value(SUB / 2, y) - self.exclude;
        let step = self.dy * SUB;
        match step.cmp(&0) {
            std::cmp::Ordering::Greater => *to = (*to).min(start.div_euclid(step) + 1),
            std::cmp::Ordering::Less => *from = (*from).max(-(start.div_euclid(-step))),
            std::cmp::Ordering::Equal if start < 0 => *to = *from,
            std::cmp::Ordering::Equal => {}
        }
    }
}

/// How a triangle's pixels get their colour.
enum Shade {
    /// One colour, nothing to look up.
    Flat(Color32),
    /// Colours run between the corners, the texture is one white pixel.
    Gradient(Gradient<4>),
    /// One colour times a texture.
    Textured { tint: Color32, uv: Gradient<2> },
    /// Both.
    Full { colour: Gradient<4>, uv: Gradient<2> },
}

/// Linear functions of the pixel position.
struct Gradient<const N: usize> {
    origin: [f32; N],
    per_x: [f32; N],
    per_y: [f32; N],
    anchor: Corner,
}

impl<const N: usize> Gradient<N> {
    fn new(values: [[f32; N]; 3], edges: [Edge; 3], area: i64) -> Self {
        let area = area as f32;
        let anchor = edges[0].a;
        let mut gradient = Self { origin: [0.0; N], per_x: [0.0; N], per_y: [0.0; N], anchor };
        for (value, edge) in values.iter().zip(&edges) {
            // The weight of a corner is the value of the opposite edge over the doubled area.
            let weight = edge.value(anchor.x, anchor.y) as f32 / area;
            let (x, y) = (-edge.dy as f32 / area, edge.dx as f32 / area);
            for (index, &v) in value.iter().enumerate() {
                gradient.origin[index] += v * weight;
                gradient.per_x[index] += v * x;
                gradient.per_y[index] += v * y;
            }
        }
        gradient
    }

    fn at(&self, x: i64, y: i64) -> [f32; N] {
        let (dx, dy) = ((x - self.anchor.x) as f32, (y - self.anchor.y) as f32);
        std::array::from_fn(|i| self.origin[i] + self.per_x[i] * dx + self.per_y[i] * dy)
    }

    fn step(&self) -> [f32; N] {
        self.per_x.map(|slope| slope * SUB as f32)
    }
}

impl Shade {
    fn new(vertices: [&Vertex; 3], edges: [Edge; 3], area: i64, texture: &Texture) -> Self {
        let same_colour = vertices.iter().all(|v| v.color == vertices[0].color);
        let same_uv = vertices.iter().all(|v| v.uv == vertices[0].uv);
        let colours = || vertices.map(|v| v.color.to_array().map(f32::from));
        let uvs = || vertices.map(|v| texture.position(v.uv));
        match (same_colour, same_uv) {
            (true, true) => {
                let [u, v] = texture.position(vertices[0].uv);
                Self::Flat(multiply(vertices[0].color, texture.sample(u, v)))
            }
            // Untextured shapes of egui point at the white pixel: only the colour runs.
            (false, true) => Self::Gradient(Gradient::new(colours(), edges, area)),
            (true, false) => {
                Self::Textured { tint: vertices[0].color, uv: Gradient::new(uvs(), edges, area) }
            }
            (false, false) => Self::Full {
                colour: Gradient::new(colours(), edges, area),
                uv: Gradient::new(uvs(), edges, area),
            },
        }
    }

    fn span(&self, pixels: &mut [u32], x: i64, y: i64, texture: &Texture) {
        match self {
            Self::Flat(colour) if colour.a() == 255 => pixels.fill(opaque(*colour)),
            Self::Flat(colour) => {
                if *colour != Color32::TRANSPARENT {
                    for pixel in pixels {
                        *pixel = blend(*pixel, *colour);
                    }
                }
            }
            Self::Gradient(gradient) => {
                let (mut value, step) = (gradient.at(x, y), gradient.step());
                for pixel in pixels {
                    *pixel = blend(*pixel, colour_of(value));
                    add(&mut value, step);
                }
            }
            Self::Textured { tint, uv } => {
                let (mut place, step) = (uv.at(x, y), uv.step());
                for pixel in pixels {
                    *pixel = blend(*pixel, multiply(*tint, texture.sample(place[0], place[1])));
                    add(&mut place, step);
                }
            }
            Self::Full { colour, uv } => {
                let (mut value, value_step) = (colour.at(x, y), colour.step());
                let (mut place, place_step) = (uv.at(x, y), uv.step());
                for pixel in pixels {
                    let tint = colour_of(value);
                    *pixel = blend(*pixel, multiply(tint, texture.sample(place[0], place[1])));
                    add(&mut value, value_step);
                    add(&mut place, place_step);
                }
            }
        }
    }
}

fn add<const N: usize>(value: &mut [f32; N], step: [f32; N]) {
    for (v, s) in value.iter_mut().zip(step) {
        *v += s;
    }
}

fn colour_of(value: [f32; 4]) -> Color32 {
    // `as` saturates: interpolation may leave 0..=255 by a rounding error.
    let [r, g, b, a] = value.map(|v| (v + 0.5) as u8);
    Color32::from_rgba_premultiplied(r, g, b, a)
}

/// Component-wise product of two colours, 255 being one.
fn multiply(a: Color32, b: Color32) -> Color32 {
    if b == Color32::WHITE {
        return a;
    }
    let (a, b) = (a.to_array(), b.to_array());
    let product = |i: usize| {
        let p = u32::from(a[i]) * u32::from(b[i]) + 128;
        ((p + (p >> 8)) >> 8) as u8
    };
    Color32::from_rgba_premultiplied(product(0), product(1), product(2), product(3))
}

/// `over` with premultiplied alpha: source + (1 − alpha)·destination.
fn blend(destination: u32, source: Color32) -> u32 {
    let [r, g, b, a] = source.to_array();
    if a == 255 {
        return u32::from_be_bytes([0, r, g, b]);
    }
    if source == Color32::TRANSPARENT {
        return destination;
    }
    let keep = 255 - u32::from(a);
    let [_, dr, dg, db] = destination.to_be_bytes();
    let mix = |s: u8, d: u8| {
        let p = u32::from(d) * keep + 128;
        (u32::from(s) + ((p + (p >> 8)) >> 8)).min(255) as u8
    };
    u32::from_be_bytes([0, mix(r, dr), mix(g, dg), mix(b, db)])
}

#[cfg(test)]
mod tests {
    use super::*;
    use egui::epaint::{ImageData, ImageDelta, Mesh, textures::TextureOptions};
    use egui::{ColorImage, Pos2, TextureId, pos2};
    use std::sync::Arc;

    fn white() -> Textures {
        let mut textures = Textures::default();
        let image = ColorImage::filled([2, 2], Color32::WHITE);
        let delta = ImageDelta::full(ImageData::Color(Arc::new(image)), TextureOptions::NEAREST);
        textures.set(TextureId::default(), &delta);
        textures
    }

    fn draw(mesh: Mesh, size: usize) -> Vec<u32> {
        let mut pixels = vec![0; size * size];
        let clip_rect = Rect::from_min_max(Pos2::ZERO, pos2(size as f32, size as f32));
        let primitive = ClippedPrimitive { clip_rect, primitive: Primitive::Mesh(mesh) };
        let mut frame = Frame { pixels: &mut pixels, width: size, height: size };
        paint(&mut frame, Color32::BLACK, &[primitive], 1.0, &white());
        pixels
    }

    #[test]
    fn a_rectangle_covers_its_pixels_once() {
        let mut mesh = Mesh::default();
        let half = Color32::from_rgba_premultiplied(100, 0, 0, 128);
        mesh.add_colored_rect(Rect::from_min_max(pos2(2.0, 3.0), pos2(7.0, 9.0)), half);
        let pixels = draw(mesh, 12);
        for y in 0..12 {
            for x in 0..12 {
                let inside = (2..7).contains(&x) && (3..9).contains(&y);
                let expected = if inside { 0x0064_0000 } else { 0 };
                assert_eq!(pixels[y * 12 + x], expected, "at {x}, {y}");
            }
        }
    }

    #[test]
    fn a_fan_of_translucent_triangles_has_no_seams() {
        // A polygon cut into thin triangles: every inside pixel is painted exactly once.
        let mut mesh = Mesh::default();
        let colour = Color32::from_rgba_premultiplied(0, 50, 0, 90);
        mesh.colored_vertex(pos2(32.3, 31.7), colour);
        let corners = 57;
        for k in 0..corners {
            let angle = k as f32 / corners as f32 * std::f32::consts::TAU;
            mesh.colored_vertex(pos2(32.3 + 25.0 * angle.cos(), 31.7 + 25.0 * angle.sin()), colour);
        }
        for k in 0..corners {
            mesh.add_triangle(0, 1 + k, 1 + (k + 1) % corners);
        }
        let pixels = draw(mesh, 64);
        let painted = pixels.iter().filter(|&&p| p != 0).count();
        assert!(pixels.iter().all(|&p| p == 0 || p == 0x0000_3200), "a pixel was painted twice");
        let area = 0.5 * 57.0 * 25.0_f64.powi(2) * (std::f64::consts::TAU / 57.0).sin();
        assert!((painted as f64 - area).abs() < 60.0, "{painted} pixels for an area of {area}");
    }

    #[test]
    fn absurd_positions_are_ignored() {
        let mut mesh = Mesh::default();
        for x in [f32::NAN, f32::INFINITY, 1e30] {
            mesh.colored_vertex(pos2(x, 1.0), Color32::WHITE);
        }
        mesh.add_triangle(0, 1, 2);
        assert!(draw(mesh, 8).iter().all(|&p| p == 0));
    }

    #[test]
    fn blending_keeps_the_ends_exact() {
        assert_eq!(blend(0x0012_3456, Color32::TRANSPARENT), 0x0012_3456);
        assert_eq!(blend(0x0012_3456, Color32::WHITE), 0x00ff_ffff);
        assert_eq!(blend(0x00ff_ffff, Color32::from_rgba_premultiplied(0, 0, 0, 128)), 0x007f_7f7f);
    }
}
