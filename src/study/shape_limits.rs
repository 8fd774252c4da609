//! Shape limits of a design as rows for the optimiser and as lines of a report.

use super::{Design, Limit, LimitReport};
use crate::base::Vec2;
use crate::geometry::limits::{self, Sample, curvature, gap, thickness::Chords};
use crate::geometry::{ClosedSpline, Curve, Outline};
use crate::optimise::{Geometry, Row};

/// Part of the insert's size that it always keeps from the outline and from other inserts, and that it is thick,
/// so that a step never leaves the duct and never crosses itself.
const ALWAYS: f64 = 0.02;

/// All shape limits of a design.
pub struct ShapeLimits {
    limits: Vec<Limit>,
    walls: gap::Walls,
    names: Vec<String>,
    /// Whether each insert is free.
    free: Vec<bool>,
    /// First variable of each insert, where it is free.
    first: Vec<usize>,
    variables: usize,
    /// Length that makes variables dimensionless, m.
    size_m: f64,
    /// Limits that always hold, behind those of the design.
    always_from: usize,
}

impl ShapeLimits {
    /// Prepare the limits of a design whose inserts have these numbers of control points.
    pub fn new(design: &Design, outline: &Outline, counts: &[usize], size_m: f64) -> Self {
        let mut limits = design.limits.clone();
        let always_from = limits.len();
        limits.push(Limit::WallGap {
            insert: None,
            at_least_m: ALWAYS * size_m,
        });
        limits.push(Limit::InsertGap {
            at_least_m: ALWAYS * size_m,
        });
        limits.push(Limit::Thickness {
            insert: None,
            at_least_m: ALWAYS * size_m,
        });
        let mut first = Vec::new();
        let mut variables = 0;
        for (insert, &count) in design.inserts.iter().zip(counts) {
            first.push(variables);
            if !insert.frozen {
                variables += 2 * count;
            }
        }
        Self {
            limits,
            walls: gap::Walls::new(outline),
            names: design.inserts.iter().map(|i| i.name.clone()).collect(),
            free: design.inserts.iter().map(|i| !i.frozen).collect(),
            first,
            variables,
            size_m,
            always_from,
        }
    }

    /// Number of variables: two a control point of each free insert.
    pub fn variables(&self) -> usize {
        self.variables
    }

    /// Name of a limit by its number, for sentences.
    pub fn name(&self, limit: usize) -> String {
        self.limits[limit].words().into()
    }

    fn concerns(&self, wanted: &Option<String>, insert: usize) -> bool {
        match wanted {
            None => self.free[insert],
            Some(name) => *name == self.names[insert],
        }
    }

    /// Spread a gradient by control points (m or whatever per m) over the variables (per size).
    fn spread(&self, insert: usize, by_controls: &[Vec2], factor: f64, row: &mut [f64]) {
        if !self.free[insert] {
            return;
        }
        for (j, g) in by_controls.iter().enumerate() {
            row[self.first[insert] + 2 * j] += factor * self.size_m * g.x;
            row[self.first[insert] + 2 * j + 1] += factor * self.size_m * g.y;
        }
    }

    /// All rows at these contours that could become active when variables move by `reach` sizes.
    pub fn rows(&self, contours: &[ClosedSpline], reach: f64) -> Geometry {
        let mut geometry = Geometry::default();
        for (number, limit) in self.limits.iter().enumerate() {
            for insert in 0..contours.len() {
                self.rows_of(number, limit, insert, contours, reach, &mut geometry);
            }
        }
        // A row that moves by no more than its slack cannot become active.
        geometry
            .inequalities
            .retain(|r| r.value + reach * r.gradient.iter().map(|g| g.abs()).sum::<f64>() > 0.0);
        geometry
    }

    fn rows_of(
        &self,
        number: usize,
        limit: &Limit,
        insert: usize,
        contours: &[ClosedSpline],
        reach: f64,
        geometry: &mut Geometry,
    ) {
        let contour = &contours[insert];
        let size = self.size_m;
        // Lengths can change by about twice the reach of both ends.
        let window = 4.0 * reach * size;
        let mut add =
            |key: u64, value: f64, parts: &[(usize, &[Vec2])], factor: f64, equality: bool| {
                let mut gradient = vec![0.0; self.variables];
                for (i, g) in parts {
                    self.spread(*i, g, factor, &mut gradient);
                }
                let row = Row {
                    limit: number,
                    key,
                    value,
                    gradient,
                };
                if equality {
                    geometry.equalities.push(row)
                } else {
                    geometry.inequalities.push(row)
                }
            };
        let n = contour.len();
        let key_of = move |t: f64| {
            (insert as u64) << 32 | (t * (n * limits::PER_SPAN) as f64 * 16.0).round() as u64
        };
        match limit {
            Limit::Area {
                insert: of,
                equal_m2,
                at_least_m2,
                at_most_m2,
            } if self.concerns(of, insert) => {
                let (area, gradient) = (contour.area(), contour.area_gradient());
                let unit = 1.0 / (size * size);
                for (kind, (bound, sign)) in
                    [(equal_m2, 1.0), (at_least_m2, -1.0), (at_most_m2, 1.0)]
                        .into_iter()
                        .enumerate()
                {
                    if let Some(bound) = bound {
                        let value = sign * (area - bound) * unit;
                        add(
                            (kind + 4 * insert) as u64,
                            value,
                            &[(insert, &gradient)],
                            sign * unit,
                            kind == 0,
                        );
                    }
                }
            }
            Limit::Perimeter {
                insert: of,
                at_least_m,
                at_most_m,
            } if self.concerns(of, insert) => {
                let (length, gradient) = (contour.perimeter(), contour.perimeter_gradient());
                for (kind, (bound, sign)) in [(at_least_m, -1.0), (at_most_m, 1.0)]
                    .into_iter()
                    .enumerate()
                {
                    if let Some(bound) = bound {
                        let value = sign * (length - bound) / size;
                        add(
                            (kind + 4 * insert) as u64,
                            value,
                            &[(insert, &gradient)],
                            sign / size,
                            false,
                        );
                    }
                }
            }
            Limit::WallGap {
                insert: of,
                at_least_m,
            } if self.concerns(of, insert) => {
                let mut samples = gap::to_walls(contour, &self.walls, at_least_m + window);
                let (t, value) = gap::smallest_to_walls(contour, &self.walls);
                if value < at_least_m + window {
                    let place = contour.point(t);
                    let (value, direction) = self.walls.distance(place);
                    let gradient = contour
                        .weights(t)
                        .into_iter()
                        .map(|w| direction * w)
                        .collect();
                    samples.push(Sample {
                        t,
                        place,
                        value,
                        gradient,
                        partner: None,
                    });
                }
                for s in samples {
                    add(
                        key_of(s.t),
                        (at_least_m - s.value) / size,
                        &[(insert, &s.gradient)],
                        -1.0 / size,
                        false,
                    );
                }
            }
            Limit::InsertGap { at_least_m } => {
                for other in 0..insert {
                    if !(self.free[insert] || self.free[other]) {
                        continue;
                    }
                    for s in gap::to_contour(contour, &contours[other], other, at_least_m + window)
                    {
                        let partner = s.partner.as_ref().map_or(&[][..], |p| &p.1[..]);
                        let value = (at_least_m - s.value) / size;
                        let parts = [(insert, &s.gradient[..]), (other, partner)];
                        add(
                            key_of(s.t) | (other as u64) << 48,
                            value,
                            &parts,
                            -1.0 / size,
                            false,
                        );
                    }
                }
            }
            Limit::CurvatureRadius {
                insert: of,
                at_least_m: radius,
            } if self.concerns(of, insert) => {
                let mut samples = curvature::sharper_than(contour, 0.4 / radius);
                let (t, _) = curvature::smallest_radius(contour);
                samples.push(curvature::at(contour, t));
                for s in samples {
                    let sign = s.value.signum();
                    add(
                        key_of(s.t),
                        sign * s.value * radius - 1.0,
                        &[(insert, &s.gradient)],
                        sign * radius,
                        false,
                    );
                }
            }
            Limit::Thickness {
                insert: of,
                at_least_m,
            } if self.concerns(of, insert) => {
                let chords = Chords::new(contour);
                let mut samples = chords.thinner_than(at_least_m + window);
                samples.extend(chords.at(chords.smallest().0));
                for s in samples {
                    add(
                        key_of(s.t),
                        (at_least_m - s.value) / size,
                        &[(insert, &s.gradient)],
                        -1.0 / size,
                        false,
                    );
                }
            }
            Limit::BoundingBox {
                insert: of,
                lower_left_m,
                upper_right_m,
            } if self.concerns(of, insert) => {
                for t in limits::parameters(n) {
                    let p = contour.point(t);
                    let weights = contour.weights(t);
                    for (kind, (value, normal)) in [
                        (lower_left_m.x - p.x, Vec2 { x: -1.0, y: 0.0 }),
                        (lower_left_m.y - p.y, Vec2 { x: 0.0, y: -1.0 }),
                        (p.x - upper_right_m.x, Vec2 { x: 1.0, y: 0.0 }),
                        (p.y - upper_right_m.y, Vec2 { x: 0.0, y: 1.0 }),
                    ]
                    .into_iter()
                    .enumerate()
                    {
                        if value > -window {
                            let gradient: Vec<Vec2> = weights.iter().map(|&w| normal * w).collect();
                            let key = key_of(t) | (kind as u64) << 56;
                            add(key, value / size, &[(insert, &gradient)], 1.0 / size, false);
                        }
                    }
                }
            }
            Limit::Centroid { insert: of, at_m } if *of == self.names[insert] => {
                let c = contour.centroid();
                let [by_x, by_y] = contour.centroid_gradient();
                add(
                    0,
                    (c.x - at_m.x) / size,
                    &[(insert, &by_x)],
                    1.0 / size,
                    true,
                );
                add(
                    1,
                    (c.y - at_m.y) / size,
                    &[(insert, &by_y)],
                    1.0 / size,
                    true,
                );
            }
            _ => {}
        }
    }

    /// Lines of the report for the shape limits of the design (not those that always hold).
    pub fn reports(&self, contours: &[ClosedSpline]) -> Vec<LimitReport> {
        let mut lines = Vec::new();
        for limit in &self.limits[..self.always_from] {
            for insert in 0..contours.len() {
                self.report(limit, insert, contours, &mut lines);
            }
        }
        lines
    }

    fn report(
        &self,
        limit: &Limit,
        insert: usize,
        contours: &[ClosedSpline],
        lines: &mut Vec<LimitReport>,
    ) {
        let contour = &contours[insert];
        let name = &self.names[insert];
        let mut say = |text: String, unit: &str, value: f64, bound: f64, sign: f64| {
            lines.push(line(text, unit, value, bound, sign));
        };
        match limit {
            Limit::Area {
                insert: of,
                equal_m2,
                at_least_m2,
                at_most_m2,
            } if self.concerns(of, insert) => {
                for (words, bound, sign) in [
                    ("equal to", equal_m2, 0.0),
                    ("at least", at_least_m2, 1.0),
                    ("at most", at_most_m2, -1.0),
                ] {
                    if let Some(bound) = bound {
                        say(
                            format!("area of {name} {words}"),
                            "m^2",
                            contour.area(),
                            *bound,
                            sign,
                        );
                    }
                }
            }
            Limit::Perimeter {
                insert: of,
                at_least_m,
                at_most_m,
            } if self.concerns(of, insert) => {
                for (words, bound, sign) in
                    [("at least", at_least_m, 1.0), ("at most", at_most_m, -1.0)]
                {
                    if let Some(bound) = bound {
                        say(
                            format!("perimeter of {name} {words}"),
                            "m",
                            contour.perimeter(),
                            *bound,
                            sign,
                        );
                    }
                }
            }
            Limit::WallGap {
                insert: of,
                at_least_m,
            } if self.concerns(of, insert) => {
                let value = gap::smallest_to_walls(contour, &self.walls).1;
                say(
                    format!("gap from {name} to the walls at least"),
                    "m",
                    value,
                    *at_least_m,
                    1.0,
                );
            }
            Limit::InsertGap { at_least_m } => {
                for other in 0..insert {
                    let value = gap::smallest_between(contour, &contours[other]).1;
                    let text = format!("gap between {name} and {} at least", self.names[other]);
                    say(text, "m", value, *at_least_m, 1.0);
                }
            }
            Limit::CurvatureRadius {
                insert: of,
                at_least_m,
            } if self.concerns(of, insert) => {
                let value = curvature::smallest_radius(contour).1;
                say(
                    format!("radius of curvature of {name} at least"),
                    "m",
                    value,
                    *at_least_m,
                    1.0,
                );
            }
            Limit::Thickness {
                insert: of,
                at_least_m,
            } if self.concerns(of, insert) => {
                let value = Chords::new(contour).smallest().1;
                say(
                    format!("thickness of {name} at least"),
                    "m",
                    value,
                    *at_least_m,
                    1.0,
                );
            }
            Limit::BoundingBox {
                insert: of,
                lower_left_m,
                upper_right_m,
            } if self.concerns(of, insert) => {
                let [low, high] = contour.bounding_box();
                say(
                    format!("left end of {name} right of"),
                    "m",
                    low.x,
                    lower_left_m.x,
                    1.0,
                );
                say(
                    format!("lower end of {name} above"),
                    "m",
                    low.y,
                    lower_left_m.y,
                    1.0,
                );
                say(
                    format!("right end of {name} left of"),
                    "m",
                    high.x,
                    upper_right_m.x,
                    -1.0,
                );
                say(
                    format!("upper end of {name} below"),
                    "m",
                    high.y,
                    upper_right_m.y,
                    -1.0,
                );
            }
            Limit::Centroid { insert: of, at_m } if of == name => {
                let c = contour.centroid();
                say(format!("centroid x of {name} at"), "m", c.x, at_m.x, 0.0);
                say(format!("centroid y of {name} at"), "m", c.y, at_m.y, 0.0);
            }
            _ => {}
        }
    }
}

/// Slack below this part of the bound counts as active.
const ACTIVE: f64 = 1e-3;

/// One line: `sign` 1 for at least, -1 for at most, 0 for equal.
pub fn line(name: String, unit: &str, value: f64, bound: f64, sign: f64) -> LimitReport {
    let slack = if sign == 0.0 {
        -(value - bound).abs()
    } else {
        sign * (value - bound)
    };
    LimitReport {
        name,
        unit: unit.into(),
        value,
        bound,
        slack,
        active: sign == 0.0 || slack < ACTIVE * bound.abs(),
    }
}
