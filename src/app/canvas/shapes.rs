//! The drawing: duct, ports, inserts, handles, ghosts, dimensions, rulers and marks.

use super::camera::Camera;
use super::clip::dashed;
use crate::app::theme::{ACCENT, CanvasColours};
use crate::app::words::{CanvasInput, Selection};
use crate::base::units::{Kind, significant};
use crate::base::{Vec2, vec2};
use crate::geometry::{ClosedSpline, Curve, Segment};
use crate::physics::FlowCondition;
use egui::{Align2, Color32, FontId, Painter, Pos2, Rect, Shape, Stroke, pos2};

/// Chords of a bent piece and of an insert's span on the screen.
const PER_PIECE: usize = 48;
const PER_SPAN: usize = 10;
/// Radius of a handle, points.
const HANDLE: f32 = 4.0;

/// Drawing surface with its scale and colours.
pub struct Pen<'a> {
    /// Where to draw.
    pub painter: &'a Painter,
    /// Scale.
    pub camera: &'a Camera,
    /// Area of the canvas.
    pub rect: Rect,
    /// Colours.
    pub colours: &'a CanvasColours,
    /// Units.
    pub inch_based: bool,
}

impl Pen<'_> {
    fn at(&self, p: Vec2) -> Pos2 {
        self.camera.screen_from_world(self.rect, p)
    }

    fn label(&self, at: Pos2, anchor: Align2, text: &str, colour: Color32) {
        let galley =
            self.painter
                .layout_no_wrap(text.to_owned(), FontId::proportional(11.5), colour);
        let area = anchor.anchor_size(at, galley.size());
        self.painter.rect_filled(
            area.expand(2.0),
            2.0,
            self.colours.paper.gamma_multiply(0.85),
        );
        self.painter.galley(area.min, galley, colour);
    }

    /// Grid with lines a round number of millimetres or of parts of an inch apart, and rulers along two sides.
    pub fn grid(&self, rulers: bool) {
        let unit = Kind::Length.shown(self.inch_based);
        let step = grid_step_m(self.camera, self.inch_based);
        let [low, high] = [
            self.camera
                .world_from_screen(self.rect, self.rect.left_bottom()),
            self.camera
                .world_from_screen(self.rect, self.rect.right_top()),
        ];
        let stroke = Stroke::new(1.0, self.colours.grid);
        let range =
            |a: f64, b: f64| ((a / step).ceil() as i64..=(b / step).floor() as i64).take(400);
        for i in range(low.x, high.x) {
            let x = self.at(vec2(i as f64 * step, 0.0)).x;
            self.painter.line_segment(
                [pos2(x, self.rect.top()), pos2(x, self.rect.bottom())],
                stroke,
            );
        }
        for i in range(low.y, high.y) {
            let y = self.at(vec2(0.0, i as f64 * step)).y;
            self.painter.line_segment(
                [pos2(self.rect.left(), y), pos2(self.rect.right(), y)],
                stroke,
            );
        }
        if !rulers {
            return;
        }
        let font = FontId::proportional(10.5);
        // A label about every 60 points, at every second, fifth or tenth line.
        let apart = self.camera.scale * step;
        let every = [2, 5, 10, 20]
            .into_iter()
            .find(|&k| apart * f64::from(k) > 60.0)
            .map_or(20, i64::from);
        let text = |i: i64| {
            let value = i as f64 * step / unit.factor;
            let decimals = (-(step / unit.factor).log10().floor()).max(0.0) as usize;
            format!("{value:.decimals$}")
        };
        for i in range(low.x, high.x).filter(|i| i.rem_euclid(every) == 0) {
            let x = self.at(vec2(i as f64 * step, 0.0)).x;
            if x < self.rect.left() + 44.0 {
                continue; // the unit stands there
            }
            let base = pos2(x, self.rect.bottom());
            self.painter.line_segment(
                [base, base - egui::vec2(0.0, 5.0)],
                Stroke::new(1.0, self.colours.faint),
            );
            self.painter.text(
                base - egui::vec2(0.0, 6.0),
                Align2::CENTER_BOTTOM,
                text(i),
                font.clone(),
                self.colours.faint,
            );
        }
        for i in range(low.y, high.y).filter(|i| i.rem_euclid(every) == 0) {
            let y = self.at(vec2(0.0, i as f64 * step)).y;
            if y > self.rect.bottom() - 26.0 {
                continue;
            }
            let base = pos2(self.rect.left(), y);
            self.painter.line_segment(
                [base, base + egui::vec2(5.0, 0.0)],
                Stroke::new(1.0, self.colours.faint),
            );
            self.painter.text(
                base + egui::vec2(7.0, 0.0),
                Align2::LEFT_CENTER,
                text(i),
                font.clone(),
                self.colours.faint,
            );
        }
        self.painter.text(
            self.rect.left_bottom() + egui::vec2(6.0, -4.0),
            Align2::LEFT_BOTTOM,
            unit.symbol,
            font,
            self.colours.faint,
        );
    }

    /// The outline: walls thick, symmetry planes dash-dotted, ports thin with arrows and a label.
    pub fn duct(&self, input: &CanvasInput, reversed: &dyn Fn(usize) -> bool) {
        for (i, piece) in input.design.duct.iter().enumerate() {
            let segment = Segment::new(&piece.shape, input.design.from_m(i), piece.to_m);
            let cuts = if matches!(segment, Segment::Line { .. }) {
                1
            } else {
                PER_PIECE
            };
            let points: Vec<Pos2> = (0..=cuts)
                .map(|k| self.at(segment.point(k as f64 / cuts as f64)))
                .collect();
            let selected = matches!(input.selection, Selection::Piece(s) if *s == i);
            let colour = if selected { ACCENT } else { self.colours.ink };
            match piece.flow {
                FlowCondition::Wall {} => {
                    self.painter.add(Shape::line(
                        points,
                        Stroke::new(if selected { 4.0 } else { 2.6 }, colour),
                    ));
                }
                FlowCondition::Symmetry {} => {
                    self.painter.extend(dashed(
                        &points,
                        self.painter.clip_rect(),
                        Stroke::new(if selected { 2.6 } else { 1.4 }, colour),
                        &[12.0, 2.0],
                        &[4.0, 4.0],
                    ));
                }
                _ => self.port(input, i, &segment, &points, selected, reversed(i)),
            }
        }
        for (i, piece) in input.design.duct.iter().enumerate() {
            let selected = matches!(input.selection, Selection::Corner(s) if *s == i);
            let colour = if selected { ACCENT } else { self.colours.ink };
            self.painter.rect_filled(
                Rect::from_center_size(self.at(piece.to_m), egui::Vec2::splat(6.0)),
                0.0,
                colour,
            );
        }
    }

    fn port(
        &self,
        input: &CanvasInput,
        i: usize,
        segment: &Segment,
        points: &[Pos2],
        selected: bool,
        out: bool,
    ) {
        let colour = if selected { ACCENT } else { self.colours.port };
        self.painter.extend(dashed(
            points,
            self.painter.clip_rect(),
            Stroke::new(if selected { 2.6 } else { 1.6 }, colour),
            &[6.0],
            &[4.0],
        ));
        // Arrows across the port, outside the duct.
        for s in [0.25, 0.5, 0.75] {
            let outward = segment.derivative(s).right().normalized();
            let direction = egui::vec2(outward.x as f32, -outward.y as f32);
            let (base, tip) = if out {
                (
                    self.at(segment.point(s)) + direction * 4.0,
                    self.at(segment.point(s)) + direction * 22.0,
                )
            } else {
                (
                    self.at(segment.point(s)) + direction * 22.0,
                    self.at(segment.point(s)) + direction * 4.0,
                )
            };
            self.painter
                .line_segment([base, tip], Stroke::new(1.4, colour));
            let d = (tip - base).normalized() * 6.0;
            let side = egui::vec2(-d.y, d.x) * 0.5;
            self.painter.add(Shape::convex_polygon(
                vec![tip, tip - d + side, tip - d - side],
                colour,
                Stroke::NONE,
            ));
        }
        if input.options.dimensions {
            let piece = &input.design.duct[i];
            let end = segment.point(1.0);
            let start = segment.point(0.0);
            // Inlets are labelled above, outlets below, so that the two never meet over a short duct.
            let upper = (end.y > start.y) != out;
            let corner = if upper { end } else { start };
            let text = format!(
                "{}: {}",
                piece.name,
                flow_words(&piece.flow, self.inch_based)
            );
            let outward = segment.derivative(0.5).right().normalized();
            let side = if outward.x < -0.3 {
                egui::Align::Min
            } else if outward.x > 0.3 {
                egui::Align::Max
            } else {
                egui::Align::Center
            };
            let rise = if out { 9.0 } else { -9.0 };
            let vertical = if out {
                egui::Align::Min
            } else {
                egui::Align::Max
            };
            self.label(
                self.at(corner) + egui::vec2(0.0, rise),
                Align2([side, vertical]),
                &text,
                colour,
            );
        }
    }

    /// Contours of earlier steps, paler with age.
    pub fn ghosts(&self, ghosts: &[Vec<Vec<Vec2>>]) {
        let count = ghosts.len().max(1) as f32;
        for (k, step) in ghosts.iter().enumerate() {
            let strength = 0.15 + 0.45 * (k as f32 + 1.0) / count;
            let first = k == 0;
            let stroke = Stroke::new(
                if first { 1.4 } else { 0.9 },
                self.colours
                    .ink
                    .gamma_multiply(if first { 0.8 } else { strength }),
            );
            for points in step.iter().filter(|p| p.len() >= 4) {
                let line = self.contour_points(&ClosedSpline::new(points.clone()));
                if first {
                    self.painter.extend(dashed(
                        &line,
                        self.painter.clip_rect(),
                        stroke,
                        &[5.0],
                        &[4.0],
                    ));
                } else {
                    self.painter.add(Shape::line(line, stroke));
                }
            }
        }
    }

    fn contour_points(&self, contour: &ClosedSpline) -> Vec<Pos2> {
        let n = contour.len() * PER_SPAN;
        (0..=n)
            .map(|i| self.at(contour.point(i as f64 / n as f64)))
            .collect()
    }

    /// Inserts with their handles.
    pub fn inserts(&self, input: &CanvasInput, hovered: &Selection) {
        for (i, insert) in input.design.inserts.iter().enumerate() {
            if insert.points_m.len() < 3 || !insert.points_m.iter().all(|p| p.is_finite()) {
                continue;
            }
            let points = self.contour_points(&ClosedSpline::new(insert.points_m.clone()));
            let solid_meshed = matches!(
                insert.thermal,
                crate::physics::ThermalCondition::Solid { .. }
            );
            if !(solid_meshed && input.snapshot.is_some()) {
                let rough: Vec<Pos2> = points.iter().step_by(2).copied().collect();
                self.fill(&rough);
            }
            let selected = matches!(input.selection, Selection::Insert(s) | Selection::Control { insert: s, .. } if *s == i);
            let near = matches!(hovered, Selection::Insert(s) | Selection::Control { insert: s, .. } if *s == i);
            let colour = if selected || near {
                ACCENT
            } else {
                self.colours.ink
            };
            self.painter.add(Shape::line(
                points,
                Stroke::new(if selected { 2.2 } else { 1.6 }, colour),
            ));
            if !input.editable {
                continue;
            }
            let n = insert.points_m.len();
            let nearest = (0..n)
                .map(|c| {
                    self.at(insert.points_m[c])
                        .distance(self.at(insert.points_m[(c + 1) % n]))
                })
                .fold(f32::INFINITY, f32::min);
            let usual =
                (0.3 * nearest).clamp(1.6, HANDLE) * if selected || near { 1.0 } else { 0.65 };
            for (c, &p) in insert.points_m.iter().enumerate() {
                let mine = Selection::Control {
                    insert: i,
                    control: c,
                };
                let strong = *input.selection == mine || *hovered == mine;
                let fill = if insert.frozen {
                    self.colours.faint
                } else if strong {
                    ACCENT
                } else {
                    self.colours.paper
                };
                let radius = if strong { usual + 2.0 } else { usual };
                self.painter.circle(
                    self.at(p),
                    radius,
                    fill,
                    Stroke::new(
                        1.4,
                        if insert.frozen {
                            self.colours.faint
                        } else {
                            ACCENT
                        },
                    ),
                );
            }
        }
    }

    /// Fill a closed screen polygon of any shape by triangles of its ears.
    fn fill(&self, points: &[Pos2]) {
        let mut mesh = egui::Mesh::default();
        let ring = &points[..points.len() - 1];
        for p in ring {
            mesh.colored_vertex(*p, self.colours.solid);
        }
        for t in ears(ring) {
            mesh.add_triangle(t[0], t[1], t[2]);
        }
        self.painter.add(Shape::mesh(mesh));
    }

    /// Dimensions of duct and inserts.
    pub fn dimensions(&self, input: &CanvasInput) {
        let [low, high] = super::camera::bounds(input.design.duct.iter().map(|p| p.to_m));
        if !(low.is_finite() && high.is_finite()) {
            return;
        }
        self.dimension(low, vec2(high.x, low.y), egui::vec2(0.0, 30.0));
        self.dimension(vec2(high.x, low.y), high, egui::vec2(66.0, 0.0));
        for (insert, m) in input.design.inserts.iter().zip(input.measures) {
            let [a, b] = m.box_m;
            let across = self.at(a).distance(self.at(b));
            if across < SMALLEST_DIMENSIONED {
                continue;
            }
            self.dimension(vec2(a.x, a.y), vec2(b.x, a.y), egui::vec2(0.0, 22.0));
            self.dimension(vec2(b.x, a.y), b, egui::vec2(34.0, 0.0));
            let (gap, place) = m.min_gap_m;
            let contour = insert.contour();
            let (t, _) = contour.nearest(place);
            let outward = contour.derivative(t).right().normalized();
            let ends = [self.at(place), self.at(place + outward * gap)];
            self.painter
                .line_segment(ends, Stroke::new(1.2, self.colours.faint));
            let text = format!("gap {}", Kind::Length.text(gap, self.inch_based));
            self.label(
                ends[0] + (ends[1] - ends[0]) * 0.5 + egui::vec2(6.0, 0.0),
                Align2::LEFT_CENTER,
                &text,
                self.colours.faint,
            );
        }
    }

    /// A length between two points, drawn aside.
    fn dimension(&self, a: Vec2, b: Vec2, aside: egui::Vec2) {
        let (p, q) = (self.at(a) + aside, self.at(b) + aside);
        if (q - p).length() < 24.0 {
            return;
        }
        let stroke = Stroke::new(0.9, self.colours.faint);
        for (from, to) in [(self.at(a), p), (self.at(b), q)] {
            let direction = (to - from).normalized();
            self.painter
                .line_segment([from + direction * 4.0, to + direction * 4.0], stroke);
        }
        self.painter.line_segment([p, q], stroke);
        let d = (q - p).normalized() * 7.0;
        let side = egui::vec2(-d.y, d.x) * 0.35;
        for (tip, sign) in [(p, 1.0), (q, -1.0)] {
            let back = tip + d * sign;
            self.painter.add(Shape::convex_polygon(
                vec![tip, back + side, back - side],
                self.colours.faint,
                Stroke::NONE,
            ));
        }
        let number = Kind::Length.number(a.distance(b), self.inch_based);
        let text = format!(
            "{} {}",
            significant(number, 4),
            Kind::Length.shown(self.inch_based).symbol
        );
        self.label(
            p + (q - p) * 0.5,
            Align2::CENTER_CENTER,
            &text,
            self.colours.faint,
        );
    }

    /// Pins at faults and cautions; the sentence when the cursor is near.
    pub fn marks(&self, input: &CanvasInput, cursor: Option<Pos2>) {
        for mark in input.marks {
            let at = self.at(mark.place_m);
            self.painter
                .circle_stroke(at, 9.0, Stroke::new(2.0, self.colours.fault));
            self.painter.text(
                at,
                Align2::CENTER_CENTER,
                "!",
                FontId::proportional(13.0),
                self.colours.fault,
            );
            if cursor.is_some_and(|c| c.distance(at) < 16.0) {
                self.label(
                    at + egui::vec2(14.0, -14.0),
                    Align2::LEFT_BOTTOM,
                    &mark.text,
                    self.colours.fault,
                );
            }
        }
    }
}

/// Inserts smaller than this on the screen, points, carry no dimensions: they would hide the shape.
const SMALLEST_DIMENSIONED: f32 = 90.0;

/// Distance of grid lines, m: 1, 2 or 5 times a power of ten of the unit, at least 14 points apart.
pub fn grid_step_m(camera: &Camera, inch_based: bool) -> f64 {
    let unit = Kind::Length.shown(inch_based).factor;
    let least = camera.world_length(14.0) / unit;
    let power = 10f64.powf(least.log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .find(|s| s * power >= least)
        .unwrap_or(10.0)
        * power;
    step * unit
}

/// A flow condition in words.
pub fn flow_words(flow: &FlowCondition, inch_based: bool) -> String {
    match flow {
        FlowCondition::Wall {} => "wall".into(),
        FlowCondition::Symmetry {} => "symmetry plane".into(),
        FlowCondition::TotalPressure { pressure_pa } => {
            format!(
                "total pressure {}",
                Kind::Pressure.text(*pressure_pa, inch_based)
            )
        }
        FlowCondition::StaticPressure { pressure_pa } => {
            format!(
                "static pressure {}",
                Kind::Pressure.text(*pressure_pa, inch_based)
            )
        }
        FlowCondition::FlowRate { flow_rate_m2_s } => {
            format!(
                "flow rate {}",
                Kind::FlowRate.text(*flow_rate_m2_s, inch_based)
            )
        }
        FlowCondition::Velocity {
            velocity_m_s: [u, v],
        } => {
            format!("velocity {}", Kind::Velocity.text(u.hypot(*v), inch_based))
        }
    }
}

/// Triangles of a simple polygon by cutting ears (Meisters, Amer. Math. Monthly 82, 648, 1975).
fn ears(ring: &[Pos2]) -> Vec<[u32; 3]> {
    let cross = |a: Pos2, b: Pos2, c: Pos2| (b.x - a.x) * (c.y - a.y) - (b.y - a.y) * (c.x - a.x);
    let area: f32 = (0..ring.len())
        .map(|i| {
            let (a, b) = (ring[i], ring[(i + 1) % ring.len()]);
            a.x * b.y - b.x * a.y
        })
        .sum();
    let sign = area.signum();
    let mut left: Vec<u32> = (0..ring.len() as u32).collect();
    let mut triangles = Vec::with_capacity(ring.len());
    while left.len() > 3 {
        let n = left.len();
        let ear = (0..n).find(|&i| {
            let (a, b, c) = (left[(i + n - 1) % n], left[i], left[(i + 1) % n]);
            let (p, q, r) = (ring[a as usize], ring[b as usize], ring[c as usize]);
            cross(p, q, r) * sign > 0.0
                && left
                    .iter()
                    .filter(|&&v| v != a && v != b && v != c)
                    .all(|&v| {
                        let x = ring[v as usize];
                        cross(p, q, x) * sign < 0.0
                            || cross(q, r, x) * sign < 0.0
                            || cross(r, p, x) * sign < 0.0
                    })
        });
        let i = ear.unwrap_or(0);
        triangles.push([left[(i + n - 1) % n], left[i], left[(i + 1) % n]]);
        left.remove(i);
    }
    if let [a, b, c] = left[..] {
        triangles.push([a, b, c]);
    }
    triangles
}
