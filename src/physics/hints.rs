//! Where the mesh must be finer for reasons of physics, not of geometry.

use super::{Problem, ThermalCondition};
use crate::base::Vec2;
use crate::geometry::{Curve, Outline};

/// Corners of the outline at which the thermal condition jumps: the temperature's gradient is singular there
/// where a fixed temperature ends (like r^-1/2: Grisvard, Elliptic Problems in Nonsmooth Domains, 1985), and
/// kinked where a flux does.
pub fn thermal_jumps(problem: &Problem, outline: &Outline) -> Vec<Vec2> {
    let n = outline.pieces.len();
    let acts = |c: &ThermalCondition| !matches!(c, ThermalCondition::Adiabatic {});
    (0..n)
        .filter(|&i| {
            let next = (i + 1) % n;
            let (a, b) = (&problem.piece_thermal[i], &problem.piece_thermal[next]);
            let walls = !problem.flow[i].is_port() && !problem.flow[next].is_port();
            walls && a != b && (acts(a) || acts(b))
        })
        .map(|i| outline.pieces[i].segment.point(1.0))
        .collect()
}
