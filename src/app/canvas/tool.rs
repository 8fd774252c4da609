//! Mouse and keys on the canvas: drag, nudge, add, remove, type coordinates, menu.

use super::camera::Camera;
use super::shapes::grid_step_m;
use super::{CanvasState, pick};
use crate::app::theme::{ACCENT, CanvasColours};
use crate::app::words::{CanvasInput, CanvasOutput, Edit, Gesture, Selection};
use crate::base::units::Kind;
use crate::base::{Vec2, vec2};
use crate::geometry::Segment;
use crate::physics::FlowCondition;
use crate::study::Design;
use egui::{Align2, FontId, Key, PointerButton, Pos2, Rect, Response, Stroke, Ui};

/// A drag in progress.
#[derive(Clone, Debug, Default)]
pub struct Tool {
    drag: Option<Drag>,
    /// The inline coordinate field, when open.
    pub(super) typed: Option<super::typed::Typed>,
    /// Place of the context menu's click, m.
    menu_at: Vec2,
    menu_on: Selection,
    snapped: Option<Vec2>,
    /// Whether an arrow key is held: all it moves is one gesture.
    nudging: bool,
}

#[derive(Clone, Debug)]
struct Drag {
    what: Selection,
    /// Cursor at the start, m.
    from: Vec2,
    /// Place of what is dragged at the start, m.
    start: Vec2,
    /// Last edit's end, m.
    last: Vec2,
}

impl Drag {
    /// The edit that brings what is dragged to a place.
    fn edit(&self, to_m: Vec2) -> Option<Edit> {
        match self.what {
            Selection::Control { insert, control } => Some(Edit::MoveControl {
                insert,
                control,
                to_m,
            }),
            Selection::Corner(piece) => Some(Edit::MoveCorner { piece, to_m }),
            Selection::Insert(insert) => Some(Edit::MoveInsert {
                insert,
                by_m: to_m - self.last,
            }),
            _ => None,
        }
    }
}

impl Tool {
    /// Whether something is being dragged.
    pub fn is_dragging(&self) -> bool {
        self.drag.is_some()
    }

    /// Whether the drawing itself is being dragged.
    pub fn is_panning(&self) -> bool {
        self.drag
            .as_ref()
            .is_some_and(|d| d.what == Selection::Nothing)
    }
}

/// Mouse and keys of one frame.
pub fn act(
    ui: &Ui,
    state: &mut CanvasState,
    camera: &Camera,
    rect: Rect,
    input: &CanvasInput,
    response: &Response,
    output: &mut CanvasOutput,
) {
    let space = ui.input(|i| i.key_down(Key::Space));
    let cursor = response
        .interact_pointer_pos()
        .map(|p| camera.world_from_screen(rect, p));
    if response.drag_started_by(PointerButton::Primary) && !space {
        let origin = ui.input(|i| i.pointer.press_origin()).unwrap_or_default();
        let what = pick::under(camera, rect, input, origin);
        let from = camera.world_from_screen(rect, origin);
        let movable = input.editable && !matches!(what, Selection::Piece(_));
        let what = if movable { what } else { Selection::Nothing };
        let start = place_of(input.design, &what).unwrap_or(from);
        if what != Selection::Nothing {
            output.selection = Some(what.clone());
        }
        state.tool.drag = Some(Drag {
            what,
            from,
            start,
            last: start,
        });
    }
    if let (Some(drag), Some(at)) = (&mut state.tool.drag, cursor) {
        let escaped = ui.input(|i| i.key_pressed(Key::Escape));
        let finished = escaped || !response.dragged_by(PointerButton::Primary);
        let free = drag.start + (at - drag.from);
        let snap = input.options.snap && !ui.input(|i| i.modifiers.shift);
        let mut to = free;
        state.tool.snapped = None;
        if snap && matches!(drag.what, Selection::Control { .. } | Selection::Corner(_)) {
            let snapped = snap_to(free, drag, camera, input);
            if snapped != free {
                state.tool.snapped = Some(snapped);
            }
            to = snapped;
        }
        if escaped {
            to = drag.start;
        }
        let edit = drag.edit(to);
        if let Some(edit) = edit
            && (to != drag.last || finished)
        {
            output.gestures.push(Gesture { edit, finished });
            drag.last = to;
        }
        if finished {
            state.tool.drag = None;
            state.tool.snapped = None;
        }
    } else if state.tool.drag.is_some() && cursor.is_none() {
        // The pointer was lost: end the gesture where it was, whatever is dragged.
        let edit = state.tool.drag.take().and_then(|d| d.edit(d.last));
        output.gestures.extend(edit.map(|edit| Gesture {
            edit,
            finished: true,
        }));
        state.tool.snapped = None;
    }
    // Not `clicked`: Enter on the focused canvas counts as one, and would select what the pointer happens to be over.
    if response.clicked_by(PointerButton::Primary) && output.selection.is_none() {
        output.selection = Some(state.hovered.clone());
        response.request_focus();
    }
    if response.double_clicked() {
        double_click(state, camera, rect, input, response, output);
    }
    if input.editable && ui.memory(|m| m.focused().is_none_or(|f| f == response.id)) {
        keys(ui, state, camera, input, output);
    }
}

/// Where the thing stands, m.
pub(super) fn place_of(design: &Design, what: &Selection) -> Option<Vec2> {
    match *what {
        Selection::Control { insert, control } => {
            design.inserts.get(insert)?.points_m.get(control).copied()
        }
        Selection::Corner(piece) => Some(design.duct.get(piece)?.to_m),
        _ => None,
    }
}

/// To the grid, and to the heights and lengths of other corners and of the insert's other points.
fn snap_to(free: Vec2, drag: &Drag, camera: &Camera, input: &CanvasInput) -> Vec2 {
    let reach = camera.world_length(6.0);
    let step = grid_step_m(camera, input.inch_based);
    let to_grid = |v: f64| {
        let g = (v / step).round() * step;
        if (g - v).abs() < reach.min(0.3 * step) {
            g
        } else {
            v
        }
    };
    let mut snapped = vec2(to_grid(free.x), to_grid(free.y));
    let others: Vec<Vec2> = match drag.what {
        Selection::Corner(piece) => input
            .design
            .duct
            .iter()
            .enumerate()
            .filter(|(i, _)| *i != piece)
            .map(|(_, p)| p.to_m)
            .collect(),
        Selection::Control { insert, control } => {
            let points = &input.design.inserts[insert].points_m;
            points
                .iter()
                .enumerate()
                .filter(|(i, _)| *i != control)
                .map(|(_, &p)| p)
                .collect()
        }
        _ => Vec::new(),
    };
    for other in others {
        if (other.x - free.x).abs() < 0.5 * reach {
            snapped.x = other.x;
        }
        if (other.y - free.y).abs() < 0.5 * reach {
            snapped.y = other.y;
        }
    }
    snapped
}

fn double_click(
    state: &mut CanvasState,
    camera: &Camera,
    rect: Rect,
    input: &CanvasInput,
    response: &Response,
    output: &mut CanvasOutput,
) {
    let Some(at) = response.interact_pointer_pos() else {
        return;
    };
    let world = camera.world_from_screen(rect, at);
    match pick::under(camera, rect, input, at) {
        Selection::Insert(insert) if input.editable => {
            if let Some(contour) = pick::contour_of(input, insert) {
                let (t, place) = contour.nearest(world);
                if place.distance(world) < camera.world_length(8.0) {
                    output.gestures.push(Gesture {
                        edit: Edit::AddControl { insert, t },
                        finished: true,
                    });
                }
            }
        }
        Selection::Piece(piece) if input.editable => {
            output.gestures.push(Gesture {
                edit: split_edit(input.design, piece, world),
                finished: true,
            });
        }
        Selection::Nothing => state.fit_asked = true,
        _ => {}
    }
}

fn split_edit(design: &Design, piece: usize, place: Vec2) -> Edit {
    let segment = Segment::new(
        &design.duct[piece].shape,
        design.from_m(piece),
        design.duct[piece].to_m,
    );
    Edit::SplitPiece {
        piece,
        t: pick::nearest_on(&segment, place).0.clamp(0.05, 0.95),
    }
}

/// Delete, nudge, walk through the handles, open the coordinate field.
fn keys(
    ui: &Ui,
    state: &mut CanvasState,
    camera: &Camera,
    input: &CanvasInput,
    output: &mut CanvasOutput,
) {
    let pressed = |key| ui.input(|i| i.key_pressed(key));
    let remove = pressed(Key::Delete) || pressed(Key::Backspace);
    match input.selection.clone() {
        Selection::Control { insert, control } => {
            if remove {
                output.gestures.push(Gesture {
                    edit: Edit::RemoveControl { insert, control },
                    finished: true,
                });
                output.selection = Some(Selection::Insert(insert));
            }
            let count = input
                .design
                .inserts
                .get(insert)
                .map_or(0, |i| i.points_m.len());
            if pressed(Key::N) && count > 0 {
                output.selection = Some(Selection::Control {
                    insert,
                    control: (control + 1) % count,
                });
            }
            if pressed(Key::A) {
                let t = (control as f64 + 0.5) / count.max(1) as f64;
                output.gestures.push(Gesture {
                    edit: Edit::AddControl { insert, t },
                    finished: true,
                });
            }
        }
        Selection::Insert(insert) => {
            if remove {
                output.gestures.push(Gesture {
                    edit: Edit::RemoveInsert { insert },
                    finished: true,
                });
                output.selection = Some(Selection::Nothing);
            }
            if pressed(Key::N) {
                output.selection = Some(Selection::Control { insert, control: 0 });
            }
        }
        Selection::Corner(piece) => {
            if remove {
                output.gestures.push(Gesture {
                    edit: Edit::RemoveCorner { piece },
                    finished: true,
                });
                output.selection = Some(Selection::Nothing);
            }
            if pressed(Key::N) {
                output.selection = Some(Selection::Corner(
                    (piece + 1) % input.design.duct.len().max(1),
                ));
            }
        }
        Selection::Nothing if pressed(Key::N) && !input.design.inserts.is_empty() => {
            output.selection = Some(Selection::Insert(0));
        }
        _ => {}
    }
    let fine = match ui.input(|i| (i.modifiers.shift, i.modifiers.alt)) {
        (true, _) => 10.0,
        (_, true) => 0.1,
        _ => 1.0,
    };
    let step = camera.world_length(1.0) * fine;
    let mut by = Vec2::ZERO;
    let mut held = false;
    for (key, direction) in [
        (Key::ArrowLeft, vec2(-1.0, 0.0)),
        (Key::ArrowRight, vec2(1.0, 0.0)),
        (Key::ArrowUp, vec2(0.0, 1.0)),
        (Key::ArrowDown, vec2(0.0, -1.0)),
    ] {
        held |= ui.input(|i| i.key_down(key));
        if pressed(key) {
            by += direction * step;
        }
    }
    if by != Vec2::ZERO || (state.tool.nudging && !held) {
        let place = place_of(input.design, input.selection).unwrap_or_default();
        let moved = Drag {
            what: input.selection.clone(),
            from: place,
            start: place,
            last: place,
        };
        output
            .gestures
            .extend(moved.edit(place + by).map(|edit| Gesture {
                edit,
                finished: !held,
            }));
        state.tool.nudging = held;
    }
    if pressed(Key::Enter)
        && let Some(p) = place_of(input.design, input.selection)
    {
        state.tool.typed = Some(super::typed::Typed::at(p, input.inch_based));
    }
}

/// Menu of the thing under a right click.
pub fn menu(
    response: &Response,
    state: &mut CanvasState,
    camera: &Camera,
    rect: Rect,
    input: &CanvasInput,
    output: &mut CanvasOutput,
) {
    if response.secondary_clicked()
        && let Some(at) = response.interact_pointer_pos()
    {
        state.tool.menu_at = camera.world_from_screen(rect, at);
        state.tool.menu_on = pick::under(camera, rect, input, at);
        output.selection = Some(state.tool.menu_on.clone());
    }
    if !input.editable {
        return;
    }
    let (on, place) = (state.tool.menu_on.clone(), state.tool.menu_at);
    let mut edit = None;
    let mut fit = false;
    response.context_menu(|ui| match on {
        Selection::Insert(insert) | Selection::Control { insert, .. } => {
            let Some(now) = input.design.inserts.get(insert) else {
                return;
            };
            if ui.button("Add a point here").clicked() {
                edit = pick::contour_of(input, insert).map(|c| Edit::AddControl {
                    insert,
                    t: c.nearest(place).0,
                });
            }
            if let Selection::Control { control, .. } = on
                && ui.button("Remove this point").clicked()
            {
                edit = Some(Edit::RemoveControl { insert, control });
            }
            if ui
                .button(if now.frozen {
                    "Let it be improved"
                } else {
                    "Freeze its shape"
                })
                .clicked()
            {
                let mut to = now.clone();
                to.frozen = !to.frozen;
                edit = Some(Edit::SetInsert { insert, to });
            }
            if ui.button("Even out its points").clicked() {
                let mut to = now.clone();
                to.points_m = now
                    .contour()
                    .respaced(now.points_m.len())
                    .0
                    .controls()
                    .to_vec();
                edit = Some(Edit::SetInsert { insert, to });
            }
            if ui.button("Duplicate").clicked() {
                let mut to = now.clone();
                let [low, high] = now.contour().bounding_box();
                to.points_m
                    .iter_mut()
                    .for_each(|p| p.x += 1.3 * (high.x - low.x));
                let taken = |n: &str| input.design.inserts.iter().any(|i| i.name == n);
                to.name = (2..)
                    .map(|i| format!("{} {i}", now.name))
                    .find(|n| !taken(n))
                    .unwrap_or_default();
                edit = Some(Edit::SetInsert {
                    insert: input.design.inserts.len(),
                    to,
                });
            }
            if ui.button("Remove insert").clicked() {
                edit = Some(Edit::RemoveInsert { insert });
            }
        }
        Selection::Piece(piece) => {
            if ui.button("Add a corner here").clicked() {
                edit = Some(split_edit(input.design, piece, place));
            }
            if ui.button("Make it a wall").clicked() {
                edit = Some(Edit::SetFlow {
                    piece,
                    to: FlowCondition::Wall {},
                });
            }
            if ui.button("Make it a symmetry plane").clicked() {
                edit = Some(Edit::SetFlow {
                    piece,
                    to: FlowCondition::Symmetry {},
                });
            }
            if ui.button("Make it a pressure port").clicked() {
                edit = Some(Edit::SetFlow {
                    piece,
                    to: FlowCondition::StaticPressure { pressure_pa: 0.0 },
                });
            }
        }
        Selection::Corner(piece) => {
            if ui.button("Remove this corner").clicked() {
                edit = Some(Edit::RemoveCorner { piece });
            }
        }
        Selection::Nothing => {
            if ui.button("Fit drawing").clicked() {
                fit = true;
            }
        }
    });
    state.fit_asked |= fit;
    output.gestures.extend(edit.map(|edit| Gesture {
        edit,
        finished: true,
    }));
}

/// The snapped place, while dragging.
pub fn hint(
    painter: &egui::Painter,
    state: &CanvasState,
    camera: &Camera,
    rect: Rect,
    colours: &CanvasColours,
    input: &CanvasInput,
) {
    if let Some(p) = state.tool.snapped {
        let at = camera.screen_from_world(rect, p);
        let stroke = Stroke::new(1.0, ACCENT.gamma_multiply(0.6));
        painter.line_segment(
            [Pos2::new(rect.left(), at.y), Pos2::new(rect.right(), at.y)],
            stroke,
        );
        painter.line_segment(
            [Pos2::new(at.x, rect.top()), Pos2::new(at.x, rect.bottom())],
            stroke,
        );
    }
    if let Some(drag) = &state.tool.drag
        && let Some(p) = place_of(input.design, &drag.what)
    {
        let at = camera.screen_from_world(rect, p) + egui::vec2(12.0, 14.0);
        let text = format!(
            "{}; {}",
            Kind::Length.text(p.x, input.inch_based),
            Kind::Length.text(p.y, input.inch_based)
        );
        painter.text(
            at,
            Align2::LEFT_TOP,
            text,
            FontId::proportional(11.5),
            colours.ink,
        );
    }
}
