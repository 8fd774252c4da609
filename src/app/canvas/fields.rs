//! Fields over the duct: painted triangles, iso-lines, streamlines, cells, legend. All are built once for a
//! state and range, then only moved with the camera.

use super::camera::Camera;
use crate::app::theme::CanvasColours;
use crate::app::words::{CanvasInput, FieldChoice};
use crate::base::units::Kind;
use crate::base::{Vec2, vec2};
use crate::report::{Field, colour, ticks};
use crate::study::FieldSnapshot;
use egui::{Color32, Mesh, Painter, Pos2, Rect, Shape, Stroke, pos2};
use std::sync::Arc;

/// Iso-lines between the ends of the range.
const ISO_LINES: usize = 11;
/// Distance of streamlines, in cells of the raster.
const APART: f64 = 4.0;
/// Cells of the velocity raster along the longer side.
const RASTER: usize = 360;

/// What is built once.
#[derive(Default)]
pub struct FieldCache {
    key: Option<Key>,
    colours: Vec<Color32>,
    iso: Vec<[Vec2; 2]>,
    streams: Option<(Held, Vec<Vec<Vec2>>)>,
    mesh: Option<(Camera, Rect, Arc<Mesh>)>,
    /// Range painted, SI.
    pub range: [f64; 2],
}

/// A snapshot held so that its address cannot be given to another; equal when it is the same one.
#[derive(Clone)]
struct Held(Arc<FieldSnapshot>);

impl PartialEq for Held {
    fn eq(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.0, &other.0)
    }
}

#[derive(Clone, PartialEq)]
struct Key {
    snapshot: Held,
    field: FieldChoice,
    range: Option<[f64; 2]>,
    stale: bool,
    dark: bool,
}

/// The report layer's field of a choice.
pub fn field_of(choice: FieldChoice) -> Option<Field> {
    match choice {
        FieldChoice::Temperature => Some(Field::Temperature),
        FieldChoice::Speed => Some(Field::Speed),
        FieldChoice::Pressure => Some(Field::Pressure),
        FieldChoice::TotalPressure => Some(Field::TotalPressure),
        FieldChoice::Nothing => None,
    }
}

/// Kind of quantity of a field.
pub fn kind_of(choice: FieldChoice) -> Kind {
    match choice {
        FieldChoice::Temperature => Kind::Temperature,
        FieldChoice::Speed => Kind::Velocity,
        FieldChoice::Pressure | FieldChoice::TotalPressure => Kind::Pressure,
        FieldChoice::Nothing => Kind::Number,
    }
}

impl FieldCache {
    /// Bring the cache up to date.
    pub fn update(
        &mut self,
        shot: &Arc<FieldSnapshot>,
        choice: FieldChoice,
        range: Option<[f64; 2]>,
        stale: bool,
        dark: bool,
    ) {
        let key = Key {
            snapshot: Held(shot.clone()),
            field: choice,
            range,
            stale,
            dark,
        };
        if self.key.as_ref() == Some(&key) {
            return;
        }
        let Some(field) = field_of(choice) else {
            return;
        };
        let values = field.values(shot);
        let [low, high] = range.or_else(|| field.range(shot)).unwrap_or([0.0, 1.0]);
        self.range = [low, high];
        let span = (high - low).max(f64::MIN_POSITIVE);
        self.colours = values
            .iter()
            .map(|&v| {
                let [r, g, b] = colour::of_fraction((f64::from(v) - low) / span);
                let painted = Color32::from_rgb(r, g, b);
                if stale { faded(painted, dark) } else { painted }
            })
            .collect();
        self.iso = (1..=ISO_LINES)
            .flat_map(|i| {
                level(
                    shot,
                    field,
                    &values,
                    low + span * i as f64 / (ISO_LINES + 1) as f64,
                )
            })
            .collect();
        self.mesh = None;
        self.key = Some(key);
    }

    /// Painted triangles.
    pub fn paint(
        &mut self,
        painter: &Painter,
        camera: &Camera,
        rect: Rect,
        shot: &FieldSnapshot,
        choice: FieldChoice,
    ) {
        let Some(field) = field_of(choice) else {
            return;
        };
        let current = self
            .mesh
            .as_ref()
            .is_some_and(|(c, r, _)| c == camera && *r == rect);
        if !current {
            let mut mesh = Mesh::default();
            mesh.vertices.reserve(shot.points_m.len());
            for (p, &c) in shot.points_m.iter().zip(&self.colours) {
                mesh.colored_vertex(place(camera, rect, *p), c);
            }
            for t in field.triangles(shot) {
                mesh.add_triangle(t[0], t[1], t[2]);
            }
            self.mesh = Some((*camera, rect, Arc::new(mesh)));
        }
        if let Some((_, _, mesh)) = &self.mesh {
            painter.add(Shape::mesh(mesh.clone()));
        }
    }

    /// Lines of equal value.
    pub fn iso_lines(&self, painter: &Painter, camera: &Camera, rect: Rect) {
        let stroke = Stroke::new(0.7, Color32::from_black_alpha(90));
        for [a, b] in &self.iso {
            painter.line_segment(
                [
                    camera.screen_from_world(rect, *a),
                    camera.screen_from_world(rect, *b),
                ],
                stroke,
            );
        }
    }

    /// Streamlines with arrowheads.
    pub fn streamlines(
        &mut self,
        painter: &Painter,
        camera: &Camera,
        rect: Rect,
        shot: &Arc<FieldSnapshot>,
    ) {
        let id = Held(shot.clone());
        if self.streams.as_ref().is_none_or(|s| s.0 != id) {
            self.streams = Some((
                id,
                Raster::new(shot).map_or(Vec::new(), |r| r.streamlines()),
            ));
        }
        let stroke = Stroke::new(1.0, Color32::from_white_alpha(190));
        let under = Stroke::new(2.2, Color32::from_black_alpha(60));
        for line in self.streams.iter().flat_map(|s| &s.1) {
            let points: Vec<Pos2> = line
                .iter()
                .map(|&p| camera.screen_from_world(rect, p))
                .collect();
            painter.add(Shape::line(points.clone(), under));
            let middle = points.len() / 2;
            if middle > 0 {
                let (a, b) = (points[middle - 1], points[middle]);
                let d = (b - a).normalized() * 6.0;
                let side = egui::vec2(-d.y, d.x) * 0.45;
                painter.add(Shape::convex_polygon(
                    vec![b + d * 0.5, b - d * 0.5 + side, b - d * 0.5 - side],
                    Color32::from_white_alpha(220),
                    Stroke::NONE,
                ));
            }
            painter.add(Shape::line(points, stroke));
        }
    }
}

/// Lines of the mesh's cells.
pub fn cell_lines(painter: &Painter, camera: &Camera, rect: Rect, shot: &FieldSnapshot) {
    let stroke = Stroke::new(0.6, Color32::from_black_alpha(110));
    for [a, b] in &shot.cell_lines {
        let ends = [shot.points_m[*a as usize], shot.points_m[*b as usize]]
            .map(|p| place(camera, rect, p));
        painter.line_segment(ends, stroke);
    }
}

/// Colour bar with round ticks.
pub fn legend(
    painter: &Painter,
    rect: Rect,
    range: [f64; 2],
    colours: &CanvasColours,
    input: &CanvasInput,
) {
    let (choice, inch_based) = (input.options.field, input.inch_based);
    let (stale, dark) = (input.stale, input.dark);
    let Some(field) = field_of(choice) else {
        return;
    };
    let kind = kind_of(choice);
    let bar = Rect::from_min_size(
        pos2(rect.right() - 300.0, rect.top() + 30.0),
        egui::vec2(270.0, 12.0),
    );
    let name = field.legend().split(',').next().unwrap_or("");
    let title = format!(
        "{name}, {}{}",
        kind.shown(inch_based).symbol,
        if stale { " (being computed)" } else { "" }
    );
    let backdrop = Rect::from_min_max(
        bar.left_top() - egui::vec2(12.0, 24.0),
        bar.right_bottom() + egui::vec2(12.0, 22.0),
    );
    painter.rect_filled(backdrop, 4.0, colours.paper.gamma_multiply(0.88));
    painter.text(
        bar.left_top() - egui::vec2(0.0, 5.0),
        egui::Align2::LEFT_BOTTOM,
        title,
        egui::FontId::proportional(12.0),
        colours.ink,
    );
    let mut mesh = Mesh::default();
    const PARTS: u32 = 64;
    for i in 0..=PARTS {
        let s = i as f32 / PARTS as f32;
        let [r, g, b] = colour::of_fraction(f64::from(s));
        let c = Color32::from_rgb(r, g, b);
        let c = if stale { faded(c, dark) } else { c };
        let x = bar.left() + s * bar.width();
        mesh.colored_vertex(pos2(x, bar.top()), c);
        mesh.colored_vertex(pos2(x, bar.bottom()), c);
        if i > 0 {
            let v = 2 * i;
            mesh.add_triangle(v - 2, v - 1, v);
            mesh.add_triangle(v - 1, v, v + 1);
        }
    }
    painter.add(Shape::mesh(mesh));
    painter.rect_stroke(
        bar,
        0.0,
        Stroke::new(0.8, colours.ink),
        egui::StrokeKind::Outside,
    );
    let shown = range.map(|v| kind.number(v, inch_based));
    let marks = ticks::ticks(shown[0], shown[1], 6);
    for (value, label) in marks.iter().zip(ticks::labels(&marks)) {
        let s = (value - shown[0]) / (shown[1] - shown[0]).max(f64::MIN_POSITIVE);
        let x = bar.left() + s as f32 * bar.width();
        painter.line_segment(
            [pos2(x, bar.bottom()), pos2(x, bar.bottom() + 4.0)],
            Stroke::new(0.8, colours.ink),
        );
        painter.text(
            pos2(x, bar.bottom() + 5.0),
            egui::Align2::CENTER_TOP,
            label,
            egui::FontId::proportional(11.0),
            colours.ink,
        );
    }
}

fn place(camera: &Camera, rect: Rect, p: [f32; 2]) -> Pos2 {
    camera.screen_from_world(rect, vec2(f64::from(p[0]), f64::from(p[1])))
}

/// Grey and pale: a state that belongs to an older drawing.
fn faded(c: Color32, dark: bool) -> Color32 {
    let grey = (0.3 * f32::from(c.r()) + 0.59 * f32::from(c.g()) + 0.11 * f32::from(c.b())) as u8;
    let towards = if dark { 40 } else { 235 };
    let mix = |channel: u8| ((u16::from(channel) + 2 * u16::from(grey) + 2 * towards) / 5) as u8;
    Color32::from_rgb(mix(c.r()), mix(c.g()), mix(c.b()))
}

/// Pieces of the line where the field has a value (marching triangles).
fn level(shot: &FieldSnapshot, field: Field, values: &[f32], at: f64) -> Vec<[Vec2; 2]> {
    let at = at as f32;
    let world = |i: u32| {
        vec2(
            f64::from(shot.points_m[i as usize][0]),
            f64::from(shot.points_m[i as usize][1]),
        )
    };
    let mut pieces = Vec::new();
    for t in field.triangles(shot) {
        let mut ends = [Vec2::ZERO; 2];
        let mut count = 0;
        for e in 0..3 {
            let (i, j) = (t[e], t[(e + 1) % 3]);
            let (a, b) = (values[i as usize], values[j as usize]);
            if (a < at) != (b < at) && count < 2 {
                ends[count] = world(i).lerp(world(j), f64::from((at - a) / (b - a)));
                count += 1;
            }
        }
        if count == 2 {
            pieces.push(ends);
        }
    }
    pieces
}

/// Velocity on a regular raster.
struct Raster {
    low: Vec2,
    step: f64,
    size: [usize; 2],
    velocity: Vec<Option<Vec2>>,
}

impl Raster {
    fn new(shot: &FieldSnapshot) -> Option<Self> {
        let all = shot
            .points_m
            .iter()
            .map(|p| vec2(f64::from(p[0]), f64::from(p[1])));
        let [low, high] = super::camera::bounds(all);
        let extent = high - low;
        let step = extent.x.max(extent.y) / RASTER as f64;
        if !(step > 0.0 && step.is_finite()) {
            return None;
        }
        let size = [
            (extent.x / step).ceil() as usize + 1,
            (extent.y / step).ceil() as usize + 1,
        ];
        let mut raster = Self {
            low,
            step,
            size,
            velocity: vec![None; size[0] * size[1]],
        };
        for t in &shot.triangles[..shot.fluid_triangles] {
            let corners = t.map(|i| {
                let p = shot.points_m[i as usize];
                vec2(f64::from(p[0]), f64::from(p[1]))
            });
            let speeds = t.map(|i| {
                let u = shot.velocity_m_s[i as usize];
                vec2(f64::from(u[0]), f64::from(u[1]))
            });
            raster.fill(corners, speeds);
        }
        Some(raster)
    }

    fn fill(&mut self, [a, b, c]: [Vec2; 3], u: [Vec2; 3]) {
        let [low, high] = super::camera::bounds([a, b, c]);
        let area = (b - a).cross(c - a);
        let index = |v: f64| (v / self.step).max(0.0) as usize;
        let (i0, i1) = (index(low.x - self.low.x), index(high.x - self.low.x) + 1);
        let (j0, j1) = (index(low.y - self.low.y), index(high.y - self.low.y) + 1);
        for j in j0..=j1.min(self.size[1] - 1) {
            for i in i0..=i1.min(self.size[0] - 1) {
                let p = self.low + vec2(i as f64, j as f64) * self.step;
                let (x, y) = ((p - a).cross(c - a) / area, (b - a).cross(p - a) / area);
                if x >= -1e-6 && y >= -1e-6 && x + y <= 1.0 + 1e-6 {
                    self.velocity[j * self.size[0] + i] =
                        Some(u[0] * (1.0 - x - y) + u[1] * x + u[2] * y);
                }
            }
        }
    }

    fn at(&self, p: Vec2) -> Option<Vec2> {
        let q = (p - self.low) / self.step;
        let (i, j) = (q.x.floor(), q.y.floor());
        if i < 0.0 || j < 0.0 {
            return None;
        }
        let (i, j) = (i as usize, j as usize);
        if i + 1 >= self.size[0] || j + 1 >= self.size[1] {
            return None;
        }
        let v = |i: usize, j: usize| self.velocity[j * self.size[0] + i];
        let (x, y) = (q.x - i as f64, q.y - j as f64);
        let below = v(i, j)?.lerp(v(i + 1, j)?, x);
        let above = v(i, j + 1)?.lerp(v(i + 1, j + 1)?, x);
        Some(below.lerp(above, y))
    }

    /// Lines through evenly spread seeds, each kept away from those before.
    fn streamlines(&self) -> Vec<Vec<Vec2>> {
        let extent = vec2(self.size[0] as f64, self.size[1] as f64) * self.step;
        let apart = APART * self.step;
        let cells = [
            (extent.x / apart).ceil() as usize + 1,
            (extent.y / apart).ceil() as usize + 1,
        ];
        let mut taken = vec![false; cells[0] * cells[1]];
        let cell = |p: Vec2| {
            let q = (p - self.low) / apart;
            (q.y.max(0.0) as usize).min(cells[1] - 1) * cells[0]
                + (q.x.max(0.0) as usize).min(cells[0] - 1)
        };
        let mut lines = Vec::new();
        for i in 0..cells[0] {
            for j in 0..cells[1] {
                let seed = self.low + vec2(i as f64 + 0.5, j as f64 + 0.5) * apart;
                if taken[cell(seed)] || self.at(seed).is_none() {
                    continue;
                }
                let mut line: Vec<Vec2> = self
                    .trace(seed, -1.0, &taken, &cell)
                    .into_iter()
                    .rev()
                    .collect();
                line.extend(self.trace(seed, 1.0, &taken, &cell));
                for p in &line {
                    taken[cell(*p)] = true;
                }
                if line.len() > 12 {
                    lines.push(line);
                }
            }
        }
        lines
    }

    fn trace(
        &self,
        seed: Vec2,
        sign: f64,
        taken: &[bool],
        cell: &impl Fn(Vec2) -> usize,
    ) -> Vec<Vec2> {
        let mut line = vec![seed];
        let mut p = seed;
        let own = cell(seed);
        for _ in 0..2 * RASTER {
            let Some(u) = self.at(p).filter(|u| u.norm() > 0.0) else {
                break;
            };
            let half = p + u.normalized() * (0.5 * sign * self.step);
            let Some(v) = self.at(half).filter(|v| v.norm() > 0.0) else {
                break;
            };
            p += v.normalized() * (sign * self.step);
            let here = cell(p);
            if here != own && taken[here] {
                break;
            }
            line.push(p);
        }
        line
    }
}

/// Values at a place: (temperature, velocity, pressure, total pressure).
pub fn probe(shot: &FieldSnapshot, at: Vec2) -> Option<(f64, Option<[f64; 3]>)> {
    let world = |i: u32| {
        vec2(
            f64::from(shot.points_m[i as usize][0]),
            f64::from(shot.points_m[i as usize][1]),
        )
    };
    for (k, t) in shot.triangles.iter().enumerate() {
        let [a, b, c] = t.map(world);
        let area = (b - a).cross(c - a);
        let (x, y) = ((at - a).cross(c - a) / area, (b - a).cross(at - a) / area);
        if x >= 0.0 && y >= 0.0 && x + y <= 1.0 {
            let mix = |f: &dyn Fn(usize) -> f32| {
                let [p, q, r] = t.map(|i| f64::from(f(i as usize)));
                p * (1.0 - x - y) + q * x + r * y
            };
            let temperature = mix(&|i| shot.temperature_k[i]);
            let flow = (k < shot.fluid_triangles).then(|| {
                let u = mix(&|i| shot.velocity_m_s[i][0]).hypot(mix(&|i| shot.velocity_m_s[i][1]));
                [
                    u,
                    mix(&|i| shot.pressure_pa[i]),
                    mix(&|i| shot.total_pressure_pa[i]),
                ]
            });
            return Some((temperature, flow));
        }
    }
    None
}
