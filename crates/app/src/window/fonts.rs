//! The faces of the window: DejaVu Sans, which has the mathematical characters the labels use.

use egui::{FontData, FontDefinitions, FontFamily};
use std::sync::Arc;

const REGULAR: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSans.ttf");
const BOLD: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSans-Bold.ttf");

/// Makes DejaVu Sans the face of everything; the default faces stay behind it for symbols and other scripts.
pub fn install(ctx: &egui::Context) {
    let mut fonts = FontDefinitions::default();
    fonts.font_data.insert("regular".to_owned(), Arc::new(FontData::from_static(REGULAR)));
    fonts.font_data.insert("bold".to_owned(), Arc::new(FontData::from_static(BOLD)));
    let fallback = fonts.families.get(&FontFamily::Proportional).cloned().unwrap_or_default();
    let with =
        |first: &str| std::iter::once(first.to_owned()).chain(fallback.iter().cloned()).collect::<Vec<_>>();
    fonts.families.insert(FontFamily::Proportional, with("regular"));
    fonts.families.insert(FontFamily::Name("bold".into()), with("bold"));
    ctx.set_fonts(fonts);
}
