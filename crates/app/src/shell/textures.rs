//! The pictures egui draws with: its glyph atlas and any image of the interface.

use egui::epaint::{ImageData, ImageDelta, textures::TextureFilter};
use egui::{Color32, Pos2, TextureId};
use std::collections::HashMap;

/// One picture.
#[derive(Debug, Clone, Default)]
pub struct Texture {
    size: [usize; 2],
    pixels: Vec<Color32>,
    smooth: bool,
}

/// All pictures by their id.
#[derive(Debug, Clone, Default)]
pub struct Textures {
    by_id: HashMap<TextureId, Texture>,
}

impl Textures {
    /// The picture with this id.
    pub fn get(&self, id: TextureId) -> Option<&Texture> {
        self.by_id.get(&id)
    }

    /// Sets a whole picture or a patch of it.
    pub fn set(&mut self, id: TextureId, delta: &ImageDelta) {
        let ImageData::Color(image) = &delta.image;
        let [width, height] = image.size;
        let Some([left, top]) = delta.pos else {
            // Glyphs are drawn pixel on pixel: the nearest texel is the right one, and the fastest.
            let smooth = id != TextureId::default() && delta.options.magnification == TextureFilter::Linear;
            self.by_id.insert(id, Texture { size: image.size, pixels: image.pixels.clone(), smooth });
            return;
        };
        let Some(texture) = self.by_id.get_mut(&id) else { return };
        if left + width > texture.size[0] || top + height > texture.size[1] {
            return;
        }
        for (row, pixels) in image.pixels.chunks_exact(width.max(1)).enumerate() {
            let start = (top + row) * texture.size[0] + left;
            texture.pixels[start..start + width].copy_from_slice(pixels);
        }
    }

    /// Forgets a picture.
    pub fn free(&mut self, id: TextureId) {
        self.by_id.remove(&id);
    }
}

impl Texture {
    /// A normalized texture coordinate in texels.
    pub fn position(&self, uv: Pos2) -> [f32; 2] {
        [uv.x * self.size[0] as f32, uv.y * self.size[1] as f32]
    }

    /// The colour at a place in texels.
    pub fn sample(&self, u: f32, v: f32) -> Color32 {
        if self.smooth { self.between(u, v) } else { self.texel(u as isize, v as isize) }
    }

    fn texel(&self, x: isize, y: isize) -> Color32 {
        let x = x.clamp(0, self.size[0] as isize - 1).max(0) as usize;
        let y = y.clamp(0, self.size[1] as isize - 1).max(0) as usize;
        self.pixels.get(y * self.size[0] + x).copied().unwrap_or(Color32::TRANSPARENT)
    }

    fn between(&self, u: f32, v: f32) -> Color32 {
        let (u, v) = (u - 0.5, v - 0.5);
        let (x, y) = (u.floor(), v.floor());
        let (right, down) = (u - x, v - y);
        let (x, y) = (x as isize, y as isize);
        let corners = [
            (0, 0, (1.0 - right) * (1.0 - down)),
            (1, 0, right * (1.0 - down)),
            (0, 1, (1.0 - right) * down),
            (1, 1, right * down),
        ];
        let mut sum = [0.5_f32; 4];
        for (dx, dy, weight) in corners {
            for (total, part) in sum.iter_mut().zip(self.texel(x + dx, y + dy).to_array()) {
                *total += f32::from(part) * weight;
            }
        }
        let [r, g, b, a] = sum.map(|part| part as u8);
        Color32::from_rgba_premultiplied(r, g, b, a)
    }
}
