//! A near state as the start on another mesh.

use super::solve::{Discretisation, State};
use crate::mesh::{CurvedMesh, Locator, reference};

/// Flow unknowns of a near state carried to a new mesh by interpolation; none when the problems differ too much.
pub fn carried(near: &State, to: &Discretisation, mesh: &CurvedMesh) -> Option<Vec<f64>> {
    if near.discretisation.problem.flow.len() != to.problem.flow.len()
        || near.mesh.order != mesh.order
    {
        return None;
    }
    let locator = Locator::new(&near.mesh);
    let old = &near.discretisation;
    let mut x = to.flow.start.clone();
    let pressure_basis = reference::Reference::new(mesh.order - 1);
    let pressure_places = reference::nodes(mesh.order - 1);
    let nodes = to.cells.node_count;
    for (i, &place) in mesh.nodes.iter().enumerate() {
        let Some((t, at)) = locator.find(place) else {
            continue;
        };
        let mut u = [0.0; 2];
        for (&n, v) in old.cells.element(t).iter().zip(locator.values(at)) {
            u[0] += v * near.velocity[n as usize][0];
            u[1] += v * near.velocity[n as usize][1];
        }
        let framed = to.flow.into_frame(u, i);
        for c in 0..2 {
            if !to.flow.layout.fixed[2 * i + c] {
                x[2 * i + c] = framed[c];
            }
        }
    }
    for &t in &to.cells.fluid {
        let [a, b, c] = mesh.mesh.triangles[t as usize].map(|v| mesh.mesh.points[v as usize]);
        for (&n, [s, r]) in to
            .cells
            .pressure_element(t as usize)
            .iter()
            .zip(&pressure_places)
        {
            let place = a * (1.0 - s - r) + b * *s + c * *r;
            if let Some((old_t, at)) = locator.find(place) {
                let values = pressure_basis.values(at);
                let p: f64 = old
                    .cells
                    .pressure_element(old_t)
                    .iter()
                    .zip(values)
                    .map(|(&m, v)| v * old.flow.pressure(&near.flow, m as usize))
                    .sum();
                x[2 * nodes + n as usize] = p;
            }
        }
    }
    Some(x)
}
