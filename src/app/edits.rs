//! What each edit does to a design: the only code that changes one.

use super::words::Edit;
use crate::base::Vec2;
use crate::geometry::{ClosedSpline, Curve, PieceShape, Segment};
use crate::study::{Design, DuctPiece, RunSettings};

/// Fewest points left when one is removed.
const FEWEST_POINTS: usize = crate::geometry::spline::FEWEST_CONTROLS;

/// Apply an edit; returns its name for the undo list, or none when it does not fit the design.
pub fn apply(design: &mut Design, run: &mut RunSettings, edit: &Edit) -> Option<String> {
    match edit {
        Edit::MoveControl {
            insert,
            control,
            to_m,
        } => {
            *design
                .inserts
                .get_mut(*insert)?
                .points_m
                .get_mut(*control)? = *to_m;
            Some("move point".into())
        }
        Edit::AddControl { insert, t } => {
            let points = &mut design.inserts.get_mut(*insert)?.points_m;
            let n = points.len();
            let place = ClosedSpline::new(points.clone()).point(*t);
            points.insert(
                ((t.rem_euclid(1.0) * n as f64).floor() as usize).min(n - 1) + 1,
                place,
            );
            Some("add point".into())
        }
        Edit::RemoveControl { insert, control } => {
            let points = &mut design.inserts.get_mut(*insert)?.points_m;
            if points.len() <= FEWEST_POINTS || *control >= points.len() {
                return None;
            }
            points.remove(*control);
            Some("remove point".into())
        }
        Edit::MoveInsert { insert, by_m } => {
            let insert = design.inserts.get_mut(*insert)?;
            insert.points_m.iter_mut().for_each(|p| *p += *by_m);
            Some(format!("move {}", insert.name))
        }
        Edit::TurnInsert {
            insert,
            angle_rad,
            factor,
        } => {
            let insert = design.inserts.get_mut(*insert)?;
            let centre = insert.contour().centroid();
            for p in &mut insert.points_m {
                *p = centre + (*p - centre).rotated(*angle_rad) * *factor;
            }
            Some(format!("turn or scale {}", insert.name))
        }
        Edit::SetInsert { insert, to } => {
            if *insert == design.inserts.len() {
                design.inserts.push(to.clone());
                return Some(format!("add {}", to.name));
            }
            *design.inserts.get_mut(*insert)? = to.clone();
            Some(format!("change {}", to.name))
        }
        Edit::RemoveInsert { insert } => {
            if *insert >= design.inserts.len() {
                return None;
            }
            let name = design.inserts.remove(*insert).name;
            design.limits.retain(|l| l.insert() != Some(name.as_str()));
            Some(format!("remove {name}"))
        }
        Edit::MoveCorner { piece, to_m } => {
            design.duct.get_mut(*piece)?.to_m = *to_m;
            Some("move corner".into())
        }
        Edit::SplitPiece { piece, t } => split(design, *piece, *t),
        Edit::RemoveCorner { piece } => {
            if design.duct.len() <= 3 || *piece >= design.duct.len() {
                return None;
            }
            // The piece ends where the next one did.
            let next = (*piece + 1) % design.duct.len();
            design.duct[*piece].to_m = design.duct[next].to_m;
            design.duct[*piece].shape = PieceShape::Line {};
            design.duct.remove(next);
            Some("remove corner".into())
        }
        Edit::SetPieceShape { piece, to } => {
            design.duct.get_mut(*piece)?.shape = to.clone();
            Some("bend piece".into())
        }
        Edit::RenamePiece { piece, to } => {
            design.duct.get_mut(*piece)?.name = to.clone();
            Some("rename piece".into())
        }
        Edit::SetFlow { piece, to } => {
            design.duct.get_mut(*piece)?.flow = to.clone();
            Some("change port or wall".into())
        }
        Edit::SetPieceThermal { piece, to } => {
            design.duct.get_mut(*piece)?.thermal = to.clone();
            Some("change thermal condition".into())
        }
        Edit::SetFluid(fluid) => {
            design.fluid = fluid.clone();
            Some("change fluid".into())
        }
        Edit::SetAim(aim) => {
            design.aim = aim.clone();
            Some("change aim".into())
        }
        Edit::SetLimits(limits) => {
            design.limits = limits.clone();
            Some("change limits".into())
        }
        Edit::SetRun(settings) => {
            *run = settings.clone();
            Some("change settings".into())
        }
        Edit::Replace { to, name } => {
            *design = (**to).clone();
            Some(name.clone())
        }
    }
}

fn split(design: &mut Design, piece: usize, t: f64) -> Option<String> {
    let from = design.from_m(piece);
    let old = design.duct.get(piece)?.clone();
    let segment = Segment::new(&old.shape, from, old.to_m);
    let middle = segment.point(t);
    // Each half keeps the curve by a point of it.
    let shape = |a: f64, b: f64| match &old.shape {
        PieceShape::Line {} => PieceShape::Line {},
        PieceShape::Arc { .. } => PieceShape::Arc {
            through_m: segment.point(0.5 * (a + b)),
        },
        PieceShape::Spline { .. } => {
            let through_m: Vec<Vec2> = (1..8)
                .map(|i| segment.point(a + (b - a) * f64::from(i) / 8.0))
                .collect();
            PieceShape::Spline { through_m }
        }
    };
    let taken = |name: &str| design.duct.iter().any(|p| p.name == name);
    let name = (2..)
        .map(|i| format!("{} {i}", old.name))
        .find(|n| !taken(n))?;
    let second = DuctPiece {
        name,
        shape: shape(t, 1.0),
        ..old.clone()
    };
    design.duct[piece].shape = shape(0.0, t);
    design.duct[piece].to_m = middle;
    design.duct.insert(piece + 1, second);
    Some("split piece".into())
}
