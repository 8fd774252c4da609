//! The canvas: duct and inserts to scale under the field, with handles to shape them.

mod camera;
mod clip;
mod fields;
mod pick;
mod shapes;
mod tool;
mod typed;

pub use fields::field_of;
pub use shapes::flow_words;

use super::theme::CanvasColours;
use super::words::{CanvasInput, CanvasOutput, FieldChoice, Selection};
use crate::base::Vec2;
use crate::base::units::Kind;
use camera::Camera;
use egui::{Rect, Sense, Ui};
use fields::FieldCache;
use shapes::Pen;

/// What the canvas keeps between frames.
#[derive(Default)]
pub struct CanvasState {
    camera: Option<Camera>,
    /// Scale of the fitted drawing: bounds the zoom.
    fitted: f64,
    fields: FieldCache,
    tool: tool::Tool,
    hovered: Selection,
    /// Ask for the whole drawing at the next frame.
    pub fit_asked: bool,
    /// Screen area of the last frame.
    pub rect: Option<Rect>,
}

impl CanvasState {
    /// Screen place of a point at the last frame (for tests and for panels that point at the drawing).
    pub fn screen_from_world(&self, place_m: Vec2) -> Option<egui::Pos2> {
        Some(self.camera?.screen_from_world(self.rect?, place_m))
    }
}

/// Draw one frame and collect what the user asked for.
pub fn show(ui: &mut Ui, state: &mut CanvasState, input: &CanvasInput) -> CanvasOutput {
    let rect = ui.available_rect_before_wrap();
    let response = ui.allocate_rect(rect, Sense::click_and_drag());
    let response = response.on_hover_cursor(
        if matches!(
            state.hovered,
            Selection::Control { .. } | Selection::Corner(_)
        ) {
            egui::CursorIcon::Grab
        } else {
            egui::CursorIcon::Crosshair
        },
    );
    // Arrows nudge what is selected; they do not walk to the next widget.
    let arrows = egui::EventFilter {
        horizontal_arrows: true,
        vertical_arrows: true,
        ..Default::default()
    };
    ui.memory_mut(|m| m.set_focus_lock_filter(response.id, arrows));
    let colours = CanvasColours::new(input.dark);
    let painter = ui.painter_at(rect);
    painter.rect_filled(rect, 0.0, colours.paper);
    fit_when_asked(state, input, rect);
    let Some(mut camera) = state.camera else {
        return CanvasOutput::default();
    };
    let mut output = CanvasOutput::default();
    let cursor = response.hover_pos().filter(|p| rect.contains(*p));
    navigate(ui, state, &mut camera, rect, cursor, &response);
    if !state.tool.is_dragging() {
        state.hovered = cursor.map_or(Selection::Nothing, |c| pick::under(&camera, rect, input, c));
    }
    tool::act(ui, state, &camera, rect, input, &response, &mut output);
    state.camera = Some(camera);
    state.rect = Some(rect);
    draw(state, input, &colours, &painter, &camera, rect, cursor);
    if let (Some(shot), Some(c)) = (input.snapshot, cursor) {
        output.probe = probe_words(shot, camera.world_from_screen(rect, c), input);
    }
    typed::show(ui, state, &camera, rect, input, &mut output);
    tool::menu(&response, state, &camera, rect, input, &mut output);
    output
}

fn fit_when_asked(state: &mut CanvasState, input: &CanvasInput, rect: Rect) {
    let bounds = camera::bounds(input.design.duct.iter().map(|p| p.to_m));
    if (state.camera.is_none() || state.fit_asked)
        && bounds[1].x >= bounds[0].x
        && rect.width() > 40.0
    {
        let camera = Camera::fit(bounds, rect);
        state.fitted = camera.scale;
        state.camera = Some(camera);
        state.fit_asked = false;
    }
}

fn navigate(
    ui: &Ui,
    state: &mut CanvasState,
    camera: &mut Camera,
    rect: Rect,
    cursor: Option<egui::Pos2>,
    response: &egui::Response,
) {
    let (scroll, pinch, space, ctrl) = ui.input(|i| {
        (
            i.smooth_scroll_delta,
            i.zoom_delta(),
            i.key_down(egui::Key::Space),
            i.modifiers.command,
        )
    });
    if let Some(at) = cursor {
        if (pinch - 1.0).abs() > 1e-4 {
            camera.zoom(rect, at, f64::from(pinch), state.fitted);
        } else if scroll.y != 0.0 && !ctrl {
            camera.zoom(rect, at, f64::from(scroll.y / 420.0).exp(), state.fitted);
        }
        if scroll.x != 0.0 {
            camera.pan(egui::vec2(scroll.x, 0.0));
        }
    }
    let middle = response.dragged_by(egui::PointerButton::Middle);
    let with_space = space && response.dragged_by(egui::PointerButton::Primary);
    if middle || with_space || state.tool.is_panning() {
        camera.pan(response.drag_delta());
    }
}

fn draw(
    state: &mut CanvasState,
    input: &CanvasInput,
    colours: &CanvasColours,
    painter: &egui::Painter,
    camera: &Camera,
    rect: Rect,
    cursor: Option<egui::Pos2>,
) {
    let options = input.options;
    let pen = Pen {
        painter,
        camera,
        rect,
        colours,
        inch_based: input.inch_based,
    };
    pen.grid(options.dimensions);
    let painted = options.field != FieldChoice::Nothing;
    if let Some(shot) = input.snapshot {
        state.fields.update(
            shot,
            options.field,
            options.fixed_range,
            input.stale,
            input.dark,
        );
        state
            .fields
            .paint(painter, camera, rect, shot, options.field);
        if options.iso_lines && painted && !input.stale {
            state.fields.iso_lines(painter, camera, rect);
        }
        if options.mesh {
            fields::cell_lines(painter, camera, rect, shot);
        }
        if options.streamlines && !input.stale {
            state.fields.streamlines(painter, camera, rect, shot);
        }
    }
    let is_outlet = |i: usize| is_outlet(input, i);
    pen.duct(input, &is_outlet);
    pen.ghosts(input.ghosts_m);
    pen.inserts(input, &state.hovered);
    if options.dimensions {
        pen.dimensions(input);
    }
    pen.marks(input, cursor);
    if let (Some(_), true) = (input.snapshot, painted) {
        let range = state.fields.range;
        fields::legend(painter, rect, range, colours, input);
    }
    tool::hint(painter, state, camera, rect, colours, input);
}

/// Whether a port lets the flow out, as far as its condition or the solved profile tells.
fn is_outlet(input: &CanvasInput, piece: usize) -> bool {
    use crate::physics::FlowCondition as Flow;
    let name = &input.design.duct[piece].name;
    if let Some(shot) = input.snapshot
        && let Some(profile) = shot.port_velocity.iter().find(|p| p.name == *name)
    {
        return profile.value.iter().sum::<f64>() < 0.0;
    }
    match input.design.duct[piece].flow {
        Flow::StaticPressure { .. } => true,
        Flow::FlowRate { flow_rate_m2_s } => flow_rate_m2_s < 0.0,
        _ => false,
    }
}

fn probe_words(
    shot: &crate::study::FieldSnapshot,
    at: Vec2,
    input: &CanvasInput,
) -> Option<String> {
    let inch = input.inch_based;
    let place = format!(
        "x {}  y {}",
        Kind::Length.text(at.x, inch),
        Kind::Length.text(at.y, inch)
    );
    let Some((temperature, flow)) = fields::probe(shot, at) else {
        return Some(place);
    };
    let temperature = Kind::Temperature.text(temperature, inch);
    let flow = flow.map_or(String::new(), |[u, p, total]| {
        format!(
            "   speed {}   static pressure {}   total pressure {}",
            Kind::Velocity.text(u, inch),
            Kind::Pressure.text(p, inch),
            Kind::Pressure.text(total, inch)
        )
    });
    let note = if input.stale {
        "   (older drawing)"
    } else {
        ""
    };
    Some(format!("{place}   {temperature}{flow}{note}"))
}
