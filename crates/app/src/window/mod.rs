//! The window: a workbench of plan sentence, law cards, finding and linked figures.
//!
//! [`Workbench`] is the whole interface and knows nothing of what draws it; [`run`] shows it in a shell. The
//! model changes in one place only, `actions`; panels draw and return what was asked for; all computing is done
//! by the worker in [`work`].

mod actions;
pub mod command;
pub mod figures;
mod files;
mod fonts;
pub mod model;
pub mod numbers;
pub mod panels;
mod play;
pub mod session;
pub mod tokens;
pub mod work;
mod workbench;

#[cfg(test)]
mod tests;

pub use workbench::Workbench;

use crate::shell;
use std::path::PathBuf;
use std::sync::Arc;

/// How the window is to be opened.
#[derive(Debug, Clone, Default)]
pub struct WindowRequest {
    /// The scenario to open; the last session without one.
    pub scenario: Option<PathBuf>,
    /// How the window is drawn.
    pub renderer: shell::Renderer,
}

/// Opens the window and returns when it was closed. The error is one line for a person.
pub fn run(request: WindowRequest) -> Result<(), String> {
    let builder = egui::ViewportBuilder::default()
        .with_title("Gaussgap")
        .with_app_id("gaussgap")
        .with_inner_size([1400.0, 900.0])
        .with_min_inner_size([480.0, 360.0])
        .with_drag_and_drop(true);
    let make: shell::MakeInterface = Box::new(move |context| {
        Workbench::prepare(context);
        let mut workbench = Workbench::new(session::load(), Arc::new(gaussgap_conclusions::assess));
        if let Some(path) = &request.scenario {
            workbench.open_file(path);
        }
        workbench.keep_session();
        Box::new(workbench)
    });
    shell::show(request.renderer, builder, make)
}

impl shell::Interface for Workbench {
    fn logic(&mut self, context: &egui::Context) {
        Workbench::logic(self, context);
    }

    fn ui(&mut self, ui: &mut egui::Ui) {
        Workbench::ui(self, ui);
    }

    fn closed(&mut self) {
        Workbench::closed(self);
    }
}
