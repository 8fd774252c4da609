//! Duct templates: outlines from a few dimensions, to be edited freely afterwards.

use super::PieceShape;
use crate::base::{Vec2, vec2};

/// A template.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Template {
    /// Straight duct.
    Straight,
    /// Smooth contraction to half the height.
    Contraction,
    /// Sudden step to twice the height.
    Step,
    /// Quarter bend.
    Bend,
    /// Open stream between symmetry planes.
    OpenStream,
}

/// What a piece of a template is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// No-slip wall.
    Wall,
    /// Where the flow comes in.
    Inlet,
    /// Where it leaves.
    Outlet,
    /// Symmetry plane.
    Symmetry,
}

/// A piece of a template; it starts where the one before ends.
#[derive(Clone, Debug, PartialEq)]
pub struct TemplatePiece {
    /// Name.
    pub name: &'static str,
    /// Shape.
    pub shape: PieceShape,
    /// End, m.
    pub to: Vec2,
    /// Role.
    pub role: Role,
}

impl Template {
    /// All templates.
    pub fn all() -> [Self; 5] {
        [
            Self::Straight,
            Self::Contraction,
            Self::Step,
            Self::Bend,
            Self::OpenStream,
        ]
    }

    /// Name.
    pub fn name(self) -> &'static str {
        match self {
            Self::Straight => "straight duct",
            Self::Contraction => "contraction",
            Self::Step => "step",
            Self::Bend => "bend",
            Self::OpenStream => "open stream",
        }
    }

    /// What it is, in a sentence.
    pub fn help(self) -> &'static str {
        match self {
            Self::Straight => "Two parallel walls, seven heights long",
            Self::Contraction => "Walls that narrow smoothly to half the height",
            Self::Step => "A sudden step down to twice the inlet's height",
            Self::Bend => "A quarter bend with straight legs",
            Self::OpenStream => "An insert in a wide stream between symmetry planes",
        }
    }

    /// Pieces for a height (inlet width), m, counter-clockwise.
    pub fn pieces(self, height_m: f64) -> Vec<TemplatePiece> {
        let h = height_m;
        let line = |name, x: f64, y: f64, role| TemplatePiece {
            name,
            shape: PieceShape::Line {},
            to: vec2(x * h, y * h),
            role,
        };
        // Half a cosine by eleven points, from (x0, y0) to (x1, y1) in heights.
        let wave = |name, x0: f64, y0: f64, x1: f64, y1: f64| {
            let at = |s: f64| {
                vec2(
                    (x0 + (x1 - x0) * s) * h,
                    (y0 + (y1 - y0) * 0.5 * (1.0 - (std::f64::consts::PI * s).cos())) * h,
                )
            };
            let through_m = (1..12).map(|i| at(f64::from(i) / 12.0)).collect();
            TemplatePiece {
                name,
                shape: PieceShape::Spline { through_m },
                to: at(1.0),
                role: Role::Wall,
            }
        };
        use Role::{Inlet, Outlet, Symmetry, Wall};
        match self {
            Self::Straight => vec![
                line("floor", 7.0, 0.0, Wall),
                line("outlet", 7.0, 1.0, Outlet),
                line("ceiling", 0.0, 1.0, Wall),
                line("inlet", 0.0, 0.0, Inlet),
            ],
            Self::Contraction => vec![
                line("floor wide", 1.0, 0.0, Wall),
                wave("floor contraction", 1.0, 0.0, 2.5, 0.25),
                line("floor narrow", 6.0, 0.25, Wall),
                line("outlet", 6.0, 0.75, Outlet),
                line("ceiling narrow", 2.5, 0.75, Wall),
                wave("ceiling contraction", 2.5, 0.75, 1.0, 1.0),
                line("ceiling wide", 0.0, 1.0, Wall),
                line("inlet", 0.0, 0.0, Inlet),
            ],
            Self::Step => vec![
                line("step face", 4.0, -1.0, Wall),
                line("floor", 24.0, -1.0, Wall),
                line("outlet", 24.0, 1.0, Outlet),
                line("ceiling", 0.0, 1.0, Wall),
                line("inlet", 0.0, 0.0, Inlet),
                line("floor before the step", 4.0, 0.0, Wall),
            ],
            Self::Bend => {
                let arc = |name, through: Vec2, x: f64, y: f64| TemplatePiece {
                    name,
                    shape: PieceShape::Arc {
                        through_m: through * h,
                    },
                    to: vec2(x * h, y * h),
                    role: Wall,
                };
                let corner = vec2(3.0, 2.0);
                let diagonal = vec2(0.5f64.sqrt(), -(0.5f64.sqrt()));
                vec![
                    line("outer wall in", 3.0, 0.0, Wall),
                    arc("outer bend", corner + diagonal * 2.0, 5.0, 2.0),
                    line("outer wall out", 5.0, 5.0, Wall),
                    line("outlet", 4.0, 5.0, Outlet),
                    line("inner wall out", 4.0, 2.0, Wall),
                    arc("inner bend", corner + diagonal, 3.0, 1.0),
                    line("inner wall in", 0.0, 1.0, Wall),
                    line("inlet", 0.0, 0.0, Inlet),
                ]
            }
            Self::OpenStream => vec![
                line("lower side", 3.0, 0.0, Symmetry),
                line("outlet", 3.0, 1.0, Outlet),
                line("upper side", 0.0, 1.0, Symmetry),
                line("inlet", 0.0, 0.0, Inlet),
            ],
        }
    }

    /// A good place for an insert, m.
    pub fn insert_place(self, height_m: f64) -> Vec2 {
        let (x, y) = match self {
            Self::Straight => (2.0, 0.5),
            Self::Contraction => (3.4, 0.5),
            Self::Step => (10.0, 0.0),
            Self::Bend => (3.0 + 1.5 * 0.5f64.sqrt(), 2.0 - 1.5 * 0.5f64.sqrt()),
            Self::OpenStream => (1.0, 0.5),
        };
        vec2(x, y) * height_m
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::{Domain, Outline, OutlinePiece, Segment, check};

    #[test]
    fn every_template_is_sound() {
        for template in Template::all() {
            let pieces = template.pieces(0.01);
            let outline = Outline {
                pieces: (0..pieces.len())
                    .map(|i| OutlinePiece {
                        name: pieces[i].name.into(),
                        segment: Segment::new(
                            &pieces[i].shape,
                            pieces[(i + pieces.len() - 1) % pieces.len()].to,
                            pieces[i].to,
                        ),
                        is_port: matches!(pieces[i].role, Role::Inlet | Role::Outlet),
                    })
                    .collect(),
            };
            assert!(outline.area() > 0.0, "{template:?}");
            assert_eq!(
                check(&Domain {
                    outline,
                    inserts: vec![]
                }),
                vec![],
                "{template:?}"
            );
        }
    }
}
