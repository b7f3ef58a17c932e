//! What draws the window. The interface is an [`Interface`] and does not know which shell shows it: real OpenGL
//! through eframe, or the CPU shell where there is none.

pub mod cpu;
pub mod display;
pub mod gl;
pub mod raster;
pub mod textures;

use egui::ViewportBuilder;

/// A whole user interface, ignorant of what draws it.
pub trait Interface {
    /// Takes in finished work; called before every frame and while the window is hidden.
    fn logic(&mut self, context: &egui::Context);
    /// Draws one frame. May run twice a frame; has no side effects but on its own state.
    fn ui(&mut self, ui: &mut egui::Ui);
    /// Called once when the window has closed.
    fn closed(&mut self);
}

/// Builds the interface once the drawing context exists.
pub type MakeInterface = Box<dyn FnOnce(&egui::Context) -> Box<dyn Interface>>;

/// How the window is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, clap::ValueEnum)]
pub enum Renderer {
    /// OpenGL where it is real, the CPU otherwise.
    #[default]
    Auto,
    /// OpenGL, even a software one.
    Gl,
    /// The CPU.
    Cpu,
}

/// Shows the interface until its window is closed. The error is one line for a person.
///
/// A process can have only one event loop, so `Auto` starts the program again in CPU mode where OpenGL fails.
pub fn show(renderer: Renderer, builder: ViewportBuilder, make: MakeInterface) -> Result<(), String> {
    if let Some(obstacle) = display::obstacle() {
        return Err(obstacle);
    }
    match renderer {
        Renderer::Cpu => cpu::run(builder, make),
        Renderer::Gl => gl::run(builder, false, make).map_err(|failure| match failure {
            gl::GlFailure::Software(message) | gl::GlFailure::Unusable(message) => {
                format!("OpenGL cannot be used here ({message}); try --renderer cpu")
            }
        }),
        Renderer::Auto if !graphics_device() => cpu::run(builder, make),
        Renderer::Auto => match gl::run(builder, true, make) {
            Ok(()) => Ok(()),
            Err(_) => start_again_on_the_cpu(),
        },
    }
}

/// Whether there is a device OpenGL could draw with; without one, trying costs a third of a second for nothing.
fn graphics_device() -> bool {
    if cfg!(not(target_os = "linux")) {
        return true;
    }
    let remote = std::env::var("LIBGL_ALWAYS_SOFTWARE").is_ok_and(|value| value == "1" || value == "true");
    let nvidia = std::path::Path::new("/dev/nvidiactl").exists();
    let render_node = std::fs::read_dir("/dev/dri").is_ok_and(|entries| {
        entries.flatten().any(|entry| entry.file_name().to_string_lossy().starts_with("renderD"))
    });
    !remote && (nvidia || render_node)
}

/// Replaces this process by the same program with `--renderer cpu`.
fn start_again_on_the_cpu() -> Result<(), String> {
    let program = std::env::current_exe().map_err(|e| format!("cannot find this program: {e}"))?;
    let mut command = std::process::Command::new(program);
    let mut arguments: Vec<std::ffi::OsString> = std::env::args_os().skip(1).collect();
    if let Some(place) = arguments.iter().position(|argument| argument == "--renderer") {
        arguments.drain(place..(place + 2).min(arguments.len()));
    }
    arguments.retain(|argument| !argument.to_string_lossy().starts_with("--renderer="));
    arguments.extend(["--renderer".into(), "cpu".into()]);
    command.args(arguments);
    #[cfg(unix)]
    {
        use std::os::unix::process::CommandExt as _;
        let error = command.exec();
        Err(format!("cannot start again in CPU mode: {error}"))
    }
    #[cfg(not(unix))]
    {
        let status = command.status().map_err(|e| format!("cannot start again in CPU mode: {e}"))?;
        if status.success() { Ok(()) } else { Err("the window could not be shown in CPU mode".to_owned()) }
    }
}
