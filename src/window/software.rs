//! The window without OpenGL: the same application drawn by the CPU painter and handed to the
//! screen as plain pixels.

use std::num::NonZeroU32;
use std::sync::Arc;
use std::time::{Duration, Instant};

use egui::{Context, Ui, ViewportBuilder, ViewportId, ViewportInfo};
use winit::application::ApplicationHandler;
use winit::event::{StartCause, WindowEvent};
use winit::event_loop::{ActiveEventLoop, ControlFlow, EventLoop, EventLoopProxy, OwnedDisplayHandle};
use winit::window::{Window, WindowId};

use super::painter::{CpuPainter, Picture};

/// Longest side of a texture the painter is asked for.
const LARGEST_TEXTURE: usize = 4096;

/// An application that draws itself into egui.
pub trait Face {
    /// Takes in what background work has answered; called before each frame.
    fn take_in(&mut self, ctx: &Context);
    /// Draws one frame.
    fn show(&mut self, ui: &mut Ui);
}

/// The window could not be opened or was lost.
#[derive(Debug, thiserror::Error)]
pub enum SoftwareError {
    #[error("no window could be opened: {0}")]
    EventLoop(#[from] winit::error::EventLoopError),
    #[error("no window could be opened: {0}")]
    Window(#[from] winit::error::OsError),
    #[error("the picture could not be handed to the screen: {0}")]
    Surface(#[from] softbuffer::SoftBufferError),
}

/// Opens a window and runs `make`'s application in it until it is closed.
///
/// # Errors
/// [`SoftwareError`] when there is no screen, or it takes no pixels.
pub fn run<F: Face>(
    viewport: ViewportBuilder,
    make: impl FnOnce(&Context) -> F,
) -> Result<(), SoftwareError> {
    let event_loop = EventLoop::<Nudge>::with_user_event().build()?;
    let ctx = Context::default();
    let proxy = event_loop.create_proxy();
    let waker = proxy.clone();
    ctx.set_request_repaint_callback(move |request| {
        // A delay too long for the clock means never.
        if let Some(due) = Instant::now().checked_add(request.delay) {
            // A closed loop no longer draws; then the nudge is lost on purpose.
            let _ = waker.send_event(Nudge::Repaint(due));
        }
    });
    let face = make(&ctx);
    let screen = softbuffer::Context::new(event_loop.owned_display_handle())?;
    let mut app = App {
        ctx,
        face,
        viewport,
        screen,
        proxy,
        open: None,
        info: ViewportInfo::default(),
        due: None,
        failure: None,
    };
    event_loop.run_app(&mut app)?;
    app.failure.map_or(Ok(()), Err)
}

/// What wakes the loop from elsewhere.
#[derive(Debug)]
enum Nudge {
    Repaint(Instant),
    Accessibility(egui_winit::accesskit_winit::Event),
}

impl From<egui_winit::accesskit_winit::Event> for Nudge {
    fn from(event: egui_winit::accesskit_winit::Event) -> Self {
        Self::Accessibility(event)
    }
}

struct App<F> {
    ctx: Context,
    face: F,
    viewport: ViewportBuilder,
    screen: softbuffer::Context<OwnedDisplayHandle>,
    proxy: EventLoopProxy<Nudge>,
    open: Option<Open>,
    info: ViewportInfo,
    /// When the next frame is due.
    due: Option<Instant>,
    failure: Option<SoftwareError>,
}

/// An open window.
struct Open {
    window: Arc<Window>,
    surface: softbuffer::Surface<OwnedDisplayHandle, Arc<Window>>,
    input: egui_winit::State,
    painter: CpuPainter,
}

impl<F: Face> App<F> {
    fn open(&self, event_loop: &ActiveEventLoop) -> Result<Open, SoftwareError> {
        let attributes =
            egui_winit::create_winit_window_attributes(&self.ctx, self.viewport.clone()).with_visible(false);
        let window = Arc::new(event_loop.create_window(attributes)?);
        let surface = softbuffer::Surface::new(&self.screen, Arc::clone(&window))?;
        let scale = window.scale_factor() as f32;
        let mut input = egui_winit::State::new(
            self.ctx.clone(),
            ViewportId::ROOT,
            &window,
            Some(scale),
            window.theme(),
            Some(LARGEST_TEXTURE),
        );
        // The adapter must know the window before it is first seen.
        input.init_accesskit(event_loop, &window, self.proxy.clone());
        window.set_visible(true);
        window.request_redraw();
        Ok(Open { window, surface, input, painter: CpuPainter::default() })
    }

    /// One frame: input, application, picture, screen. Whether the window stays open.
    fn frame(&mut self, event_loop: &ActiveEventLoop) -> Result<bool, SoftwareError> {
        let Some(open) = &mut self.open else { return Ok(true) };
        self.due = None;
        egui_winit::update_viewport_info(&mut self.info, &self.ctx, &open.window, false);
        let mut raw = open.input.take_egui_input(&open.window);
        raw.viewports.insert(ViewportId::ROOT, self.info.clone());
        self.info.events.clear();
        self.face.take_in(&self.ctx);
        let mut output = self.ctx.run_ui(raw, |ui| self.face.show(ui));
        open.input.handle_platform_output_with_event_loop(&open.window, event_loop, output.platform_output);
        open.painter.take_textures(&mut output.textures_delta);

        let size = open.window.inner_size();
        if let (Some(width), Some(height)) = (NonZeroU32::new(size.width), NonZeroU32::new(size.height)) {
            let ground = self.ctx.global_style().visuals.panel_fill;
            let mut picture = Picture::filled(size.width as usize, size.height as usize, ground);
            let primitives = self.ctx.tessellate(output.shapes, output.pixels_per_point);
            open.painter.paint(&mut picture, output.pixels_per_point, &primitives);
            open.surface.resize(width, height)?;
            let mut buffer = open.surface.buffer_mut()?;
            for (out, [r, g, b, _]) in buffer.iter_mut().zip(picture.pixels()) {
                *out = u32::from_be_bytes([0, *r, *g, *b]);
            }
            open.window.pre_present_notify();
            buffer.present()?;
        }

        let mut stays = true;
        if let Some(viewport) = output.viewport_output.remove(&ViewportId::ROOT) {
            let asked = self.info.close_requested();
            let cancelled = viewport.commands.iter().any(|c| matches!(c, egui::ViewportCommand::CancelClose));
            let closes = viewport.commands.iter().any(|c| matches!(c, egui::ViewportCommand::Close));
            stays = !(closes || (asked && !cancelled));
            let mut asides = Vec::new();
            let commands =
                viewport.commands.into_iter().filter(|c| !matches!(c, egui::ViewportCommand::Close));
            egui_winit::process_viewport_commands(
                &self.ctx,
                &mut self.info,
                commands,
                &open.window,
                &mut asides,
            );
            self.due = Instant::now().checked_add(viewport.repaint_delay);
        }
        Ok(stays)
    }

    fn wait(&mut self, event_loop: &ActiveEventLoop) {
        let now = Instant::now();
        // Far off means never: the loop then sleeps until something happens.
        match self.due.filter(|due| *due < now + Duration::from_secs(3600)) {
            Some(due) if due <= now => {
                if let Some(open) = &self.open {
                    open.window.request_redraw();
                }
                event_loop.set_control_flow(ControlFlow::Wait);
            }
            Some(due) => event_loop.set_control_flow(ControlFlow::WaitUntil(due)),
            None => event_loop.set_control_flow(ControlFlow::Wait),
        }
    }
}

impl<F: Face> ApplicationHandler<Nudge> for App<F> {
    fn resumed(&mut self, event_loop: &ActiveEventLoop) {
        if self.open.is_none() {
            match self.open(event_loop) {
                Ok(open) => self.open = Some(open),
                Err(failure) => {
                    self.failure = Some(failure);
                    event_loop.exit();
                }
            }
        }
    }

    fn new_events(&mut self, event_loop: &ActiveEventLoop, _: StartCause) {
        self.wait(event_loop);
    }

    fn user_event(&mut self, event_loop: &ActiveEventLoop, nudge: Nudge) {
        match nudge {
            Nudge::Repaint(due) => self.due = Some(self.due.map_or(due, |known| known.min(due))),
            Nudge::Accessibility(event) => {
                use egui_winit::accesskit_winit::WindowEvent as Wish;
                if let Some(open) = &mut self.open {
                    match event.window_event {
                        Wish::InitialTreeRequested => self.ctx.enable_accesskit(),
                        Wish::ActionRequested(request) => open.input.on_accesskit_action_request(request),
                        Wish::AccessibilityDeactivated => self.ctx.disable_accesskit(),
                    }
                    open.window.request_redraw();
                }
            }
        }
        self.wait(event_loop);
    }

    fn window_event(&mut self, event_loop: &ActiveEventLoop, _: WindowId, event: WindowEvent) {
        let Some(open) = &mut self.open else { return };
        match event {
            WindowEvent::RedrawRequested => match self.frame(event_loop) {
                Ok(true) => {}
                Ok(false) => return event_loop.exit(),
                Err(failure) => {
                    self.failure = Some(failure);
                    return event_loop.exit();
                }
            },
            WindowEvent::CloseRequested => {
                self.info.events.push(egui::ViewportEvent::Close);
                open.window.request_redraw();
            }
            event => {
                if open.input.on_window_event(&open.window, &event).repaint {
                    open.window.request_redraw();
                }
            }
        }
        self.wait(event_loop);
    }
}
