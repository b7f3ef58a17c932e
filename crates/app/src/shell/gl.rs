//! The OpenGL shell: eframe with glow, for machines whose OpenGL is real.

use super::{Interface, MakeInterface};
use eframe::glow::{self, HasContext as _};
use egui::ViewportBuilder;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Why the OpenGL shell did not show the interface.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum GlFailure {
    /// OpenGL is there, but drawn in software: the CPU shell is several times faster.
    Software(String),
    /// There is no usable OpenGL, or the window could not be opened.
    Unusable(String),
}

struct Adapter(Box<dyn Interface>);

impl eframe::App for Adapter {
    fn logic(&mut self, context: &egui::Context, _: &mut eframe::Frame) {
        self.0.logic(context);
    }

    fn ui(&mut self, ui: &mut egui::Ui, _: &mut eframe::Frame) {
        self.0.ui(ui);
    }

    fn on_exit(&mut self, _: Option<&glow::Context>) {
        self.0.closed();
    }

    fn clear_color(&self, visuals: &egui::Visuals) -> [f32; 4] {
        visuals.panel_fill.to_normalized_gamma_f32()
    }
}

/// Shows the interface until its window is closed. With `only_hardware`, refuses a software renderer before
/// the interface is made.
pub fn run(builder: ViewportBuilder, only_hardware: bool, make: MakeInterface) -> Result<(), GlFailure> {
    let options = eframe::NativeOptions {
        viewport: builder,
        renderer: eframe::Renderer::Glow,
        run_and_return: true,
        ..Default::default()
    };
    let software = Arc::new(AtomicBool::new(false));
    let seen = Arc::clone(&software);
    let creator: eframe::AppCreator<'_> = Box::new(move |creation| {
        if only_hardware
            && let Some(gl) = &creation.gl
            && let Some(name) = renderer_name(gl)
            && is_software(&name)
        {
            seen.store(true, Ordering::Relaxed);
            return Err(name.into());
        }
        Ok(Box::new(Adapter(make(&creation.egui_ctx))))
    });
    eframe::run_native("gaussgap", options, creator).map_err(|error| {
        let message = error.to_string().lines().collect::<Vec<_>>().join(" ");
        if software.load(Ordering::Relaxed) {
            GlFailure::Software(message)
        } else {
            GlFailure::Unusable(message)
        }
    })
}

fn renderer_name(gl: &glow::Context) -> Option<String> {
    // SAFETY: the context is current while eframe creates the application; a string query has no preconditions.
    #[allow(unsafe_code, reason = "the only way glow offers to ask for the renderer's name")]
    let name = unsafe { gl.get_parameter_string(glow::RENDERER) };
    (!name.is_empty()).then_some(name)
}

/// Whether an OpenGL renderer of this name draws on the CPU.
pub fn is_software(renderer: &str) -> bool {
    let name = renderer.to_ascii_lowercase();
    ["llvmpipe", "softpipe", "swrast", "software", "swiftshader", "lavapipe"]
        .iter()
        .any(|word| name.contains(word))
}

#[cfg(test)]
mod tests {
    use super::is_software;

    #[test]
    fn software_renderers_are_recognized_by_name() {
        assert!(is_software("llvmpipe (LLVM 15.0.6, 256 bits)"));
        assert!(is_software("Software Rasterizer"));
        assert!(!is_software("Some Vendor HD Graphics 620 (KBL GT2)"));
    }
}
