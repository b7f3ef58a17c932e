//! The CPU shell: winit's window, egui's meshes rasterised here, shown through softbuffer. Needs no OpenGL.

use super::raster::{self, Frame};
use super::textures::Textures;
use super::{Interface, MakeInterface};
use egui::{ViewportBuilder, ViewportCommand, ViewportEvent, ViewportId, ViewportInfo};
use egui_winit::ActionRequested;
use egui_winit::winit::application::ApplicationHandler;
use egui_winit::winit::event::{StartCause, WindowEvent};
use egui_winit::winit::event_loop::{ActiveEventLoop, ControlFlow, EventLoop, EventLoopProxy};
use egui_winit::winit::window::{Window, WindowId};
use std::num::NonZeroU32;
use std::rc::Rc;
use std::sync::Arc;
use std::time::{Duration, Instant};

/// What other threads tell the event loop.
#[derive(Debug)]
enum Wake {
    /// Draw again, at this time.
    Repaint(Instant),
    /// Something from an assistive technology.
    Access(egui_winit::accesskit_winit::Event),
}

impl From<egui_winit::accesskit_winit::Event> for Wake {
    fn from(event: egui_winit::accesskit_winit::Event) -> Self {
        Self::Access(event)
    }
}

/// Shows the interface until its window is closed. The error is one line for a person.
pub fn run(builder: ViewportBuilder, make: MakeInterface) -> Result<(), String> {
    let event_loop = EventLoop::<Wake>::with_user_event().build().map_err(|e| one_line(&e))?;
    let mut shell = Shell {
        builder,
        proxy: event_loop.create_proxy(),
        make: Some(make),
        context: egui::Context::default(),
        open: None,
        repaint_at: None,
        failure: None,
    };
    event_loop.run_app(&mut shell).map_err(|e| one_line(&e))?;
    if let Some(open) = &mut shell.open {
        open.interface.closed();
    }
    shell.failure.map_or(Ok(()), Err)
}

/// The size of the largest monitor in points; unbounded where none is known.
fn largest_monitor(event_loop: &ActiveEventLoop) -> egui::Vec2 {
    let sizes = event_loop.available_monitors().map(|monitor| {
        let size = monitor.size().to_logical::<f32>(monitor.scale_factor());
        egui::vec2(size.width, size.height)
    });
    sizes.reduce(egui::Vec2::max).filter(|size| size.min_elem() > 0.0).unwrap_or(egui::Vec2::INFINITY)
}

fn one_line(error: &dyn std::fmt::Display) -> String {
    error.to_string().lines().collect::<Vec<_>>().join(" ")
}

/// Everything that exists once there is a window. The surface is declared before the window it draws on.
struct Open {
    surface: softbuffer::Surface<Rc<Window>, Rc<Window>>,
    input: egui_winit::State,
    window: Rc<Window>,
    info: ViewportInfo,
    textures: Textures,
    interface: Box<dyn Interface>,
    shown: bool,
}

struct Shell {
    builder: ViewportBuilder,
    proxy: EventLoopProxy<Wake>,
    make: Option<MakeInterface>,
    context: egui::Context,
    open: Option<Open>,
    repaint_at: Option<Instant>,
    failure: Option<String>,
}

impl Shell {
    fn open(&mut self, event_loop: &ActiveEventLoop) -> Result<(), String> {
        let Some(make) = self.make.take() else { return Ok(()) };
        let context = &self.context;
        // Hidden until the first frame is painted, so that it never flashes empty.
        let mut builder = self.builder.clone().with_visible(false);
        builder.inner_size = builder.inner_size.map(|size| size.min(largest_monitor(event_loop)));
        let window = egui_winit::create_window(context, event_loop, &builder).map_err(|e| one_line(&e))?;
        egui_winit::apply_viewport_builder_to_window(context, &window, &builder);
        let window = Rc::new(window);
        let display = softbuffer::Context::new(Rc::clone(&window)).map_err(|e| one_line(&e))?;
        let surface = softbuffer::Surface::new(&display, Rc::clone(&window)).map_err(|e| one_line(&e))?;
        let mut input = egui_winit::State::new(
            context.clone(),
            ViewportId::ROOT,
            event_loop,
            Some(window.scale_factor() as f32),
            window.theme(),
            Some(8192),
        );
        input.init_accesskit(event_loop, &window, self.proxy.clone());
        let proxy = self.proxy.clone();
        context.set_request_repaint_callback(move |info| {
            // A far future (no repaint wanted) would overflow the clock.
            if let Some(when) = Instant::now().checked_add(info.delay.min(Duration::from_secs(3600))) {
                let _ = proxy.send_event(Wake::Repaint(when));
            }
        });
        let mut info = ViewportInfo::default();
        egui_winit::update_viewport_info(&mut info, context, &window, true);
        context.input_mut(|input| input.raw.viewports.insert(ViewportId::ROOT, info.clone()));
        let interface = make(context);
        let textures = Textures::default();
        self.open = Some(Open { surface, input, window, info, textures, interface, shown: false });
        self.draw(event_loop);
        Ok(())
    }

    fn draw(&mut self, event_loop: &ActiveEventLoop) {
        self.repaint_at = None;
        let Some(open) = &mut self.open else { return };
        match open.draw(&self.context, event_loop) {
            Ok(true) => {}
            Ok(false) => event_loop.exit(),
            Err(message) => {
                self.failure = Some(message);
                event_loop.exit();
            }
        }
    }

    fn repaint_by(&mut self, when: Instant) {
        self.repaint_at = Some(self.repaint_at.map_or(when, |earlier| earlier.min(when)));
    }
}

impl Open {
    /// One frame; whether to go on.
    fn draw(&mut self, context: &egui::Context, event_loop: &ActiveEventLoop) -> Result<bool, String> {
        egui_winit::update_viewport_info(&mut self.info, context, &self.window, false);
        let mut raw = self.input.take_egui_input(&self.window);
        raw.viewports.insert(ViewportId::ROOT, self.info.clone());
        let closing = self.info.close_requested();
        self.info.events.clear();

        let interface = &mut self.interface;
        let mut output = context.run_ui(raw, |ui| {
            interface.logic(ui.ctx());
            interface.ui(ui);
        });
        self.input.handle_platform_output_with_event_loop(&self.window, event_loop, output.platform_output);

        for (id, deltas) in output.textures_delta.set.drain() {
            for delta in &deltas {
                self.textures.set(id, delta);
            }
        }
        let primitives = context.tessellate(output.shapes, output.pixels_per_point);
        let background = context.global_style().visuals.panel_fill;
        self.paint(&primitives, output.pixels_per_point, background)?;
        for id in output.textures_delta.free.drain() {
            self.textures.free(id);
        }

        let mut actions = Vec::new();
        let mut keep_open = !closing;
        if let Some(viewport) = output.viewport_output.remove(&ViewportId::ROOT) {
            if viewport.commands.contains(&ViewportCommand::CancelClose) {
                keep_open = true;
            }
            let close = viewport.commands.contains(&ViewportCommand::Close);
            let commands = viewport.commands;
            egui_winit::process_viewport_commands(
                context,
                &mut self.info,
                commands,
                &self.window,
                &mut actions,
            );
            if close && !self.info.events.contains(&ViewportEvent::Close) {
                self.info.events.push(ViewportEvent::Close);
                context.request_repaint();
            }
        }
        for action in actions {
            match action {
                ActionRequested::Screenshot(callback) => {
                    callback.complete(Arc::new(self.picture(
                        &primitives,
                        output.pixels_per_point,
                        background,
                    )));
                }
                ActionRequested::Cut => self.input.egui_input_mut().events.push(egui::Event::Cut),
                ActionRequested::Copy => self.input.egui_input_mut().events.push(egui::Event::Copy),
                ActionRequested::Paste => {
                    if let Some(text) = self.input.clipboard_text() {
                        let text = text.replace("\r\n", "\n");
                        self.input.egui_input_mut().events.push(egui::Event::Paste(text));
                    }
                }
                ActionRequested::PaintWhileHidden => {}
            }
        }
        if !self.shown {
            self.window.set_visible(true);
            self.shown = true;
        }
        Ok(keep_open)
    }

    fn paint(
        &mut self,
        primitives: &[egui::ClippedPrimitive],
        pixels_per_point: f32,
        background: egui::Color32,
    ) -> Result<(), String> {
        let size = self.window.inner_size();
        let (Some(width), Some(height)) = (NonZeroU32::new(size.width), NonZeroU32::new(size.height)) else {
            return Ok(()); // minimized
        };
        self.surface.resize(width, height).map_err(|e| one_line(&e))?;
        let mut buffer = self.surface.buffer_mut().map_err(|e| one_line(&e))?;
        let (width, height) = (size.width as usize, size.height as usize);
        let mut frame = Frame { pixels: &mut buffer, width, height };
        raster::paint(&mut frame, background, primitives, pixels_per_point, &self.textures);
        self.window.pre_present_notify();
        buffer.present().map_err(|e| one_line(&e))
    }

    fn picture(
        &self,
        primitives: &[egui::ClippedPrimitive],
        pixels_per_point: f32,
        background: egui::Color32,
    ) -> egui::ColorImage {
        let size = self.window.inner_size();
        let (width, height) = (size.width as usize, size.height as usize);
        let mut pixels = vec![0; width * height];
        let mut frame = Frame { pixels: &mut pixels, width, height };
        raster::paint(&mut frame, background, primitives, pixels_per_point, &self.textures);
        let colours = pixels
            .iter()
            .map(|pixel| {
                let [_, r, g, b] = pixel.to_be_bytes();
                egui::Color32::from_rgb(r, g, b)
            })
            .collect();
        egui::ColorImage::new([width, height], colours)
    }
}

impl ApplicationHandler<Wake> for Shell {
    fn resumed(&mut self, event_loop: &ActiveEventLoop) {
        if self.open.is_none()
            && let Err(message) = self.open(event_loop)
        {
            self.failure = Some(message);
            event_loop.exit();
        }
    }

    fn new_events(&mut self, _: &ActiveEventLoop, cause: StartCause) {
        if let StartCause::ResumeTimeReached { .. } = cause
            && let Some(open) = &self.open
        {
            open.window.request_redraw();
        }
    }

    fn user_event(&mut self, event_loop: &ActiveEventLoop, event: Wake) {
        use egui_winit::accesskit_winit::WindowEvent as Access;
        match event {
            Wake::Repaint(when) => self.repaint_by(when),
            Wake::Access(event) => {
                let Some(open) = &mut self.open else { return };
                match event.window_event {
                    Access::InitialTreeRequested => {
                        self.context.enable_accesskit();
                        self.draw(event_loop);
                    }
                    Access::ActionRequested(request) => {
                        open.input.on_accesskit_action_request(request);
                        self.repaint_by(Instant::now());
                    }
                    Access::AccessibilityDeactivated => self.context.disable_accesskit(),
                }
            }
        }
    }

    fn window_event(&mut self, event_loop: &ActiveEventLoop, _: WindowId, event: WindowEvent) {
        if matches!(event, WindowEvent::RedrawRequested) {
            // Never shown to egui-winit: it would answer every frame with another one.
            self.draw(event_loop);
            return;
        }
        let Some(open) = &mut self.open else { return };
        if matches!(event, WindowEvent::CloseRequested) {
            open.info.events.push(ViewportEvent::Close);
            self.repaint_by(Instant::now());
            return;
        }
        let resized = matches!(event, WindowEvent::Resized(_));
        let response = open.input.on_window_event(&open.window, &event);
        if response.repaint || resized {
            self.repaint_by(Instant::now());
        }
    }

    fn about_to_wait(&mut self, event_loop: &ActiveEventLoop) {
        match (self.repaint_at, &self.open) {
            (Some(when), Some(open)) if when <= Instant::now() => {
                self.repaint_at = None;
                open.window.request_redraw();
                event_loop.set_control_flow(ControlFlow::Wait);
            }
            (Some(when), _) => event_loop.set_control_flow(ControlFlow::WaitUntil(when)),
            (None, _) => event_loop.set_control_flow(ControlFlow::Wait),
        }
    }
}
