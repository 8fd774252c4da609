//! Where the wall shear changes its sign.

use flumeloft::base::Vec2;
use flumeloft::fem::table::EDGE_DIRECTION;
use flumeloft::fem::{PointMap, Table};
use flumeloft::geometry::BoundaryTag;
use flumeloft::physics::State;

/// Places (x) along a horizontal wall at height `y`, between `from` and `most`, where the shear goes from back
/// flow to forward flow, ascending.
pub fn sign_changes(state: &State, y: f64, from: f64, most: f64) -> Vec<f64> {
    let cells = &state.discretisation.cells;
    let mut edges = Vec::new();
    for b in &cells.mesh.boundary {
        let [p, q] = cells.mesh.edges[b.edge as usize].map(|v| cells.mesh.points[v as usize]);
        let level = (p.y - y).abs() + (q.y - y).abs() < 1e-12;
        if level
            && matches!(b.tag, BoundaryTag::Piece(_))
            && p.x.max(q.x) > from
            && p.x.min(q.x) < most
        {
            edges.push((p.x.min(q.x), b.triangle as usize, b.local_edge as usize));
        }
    }
    edges.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut changes = Vec::new();
    let mut last: Option<(f64, f64)> = None;
    for (_, triangle, edge) in edges {
        let mut samples: Vec<(f64, f64)> = Vec::new();
        const SAMPLES: usize = 40;
        for i in 0..=SAMPLES {
            samples.push(shear(state, triangle, edge, i as f64 / SAMPLES as f64));
        }
        samples.sort_by(|a, b| a.0.total_cmp(&b.0));
        for now in samples {
            if let Some(before) = last
                && before.1 < 0.0
                && now.1 >= 0.0
                && now.0 > from
                && now.0 < most
            {
                changes.push(before.0 + (now.0 - before.0) * before.1 / (before.1 - now.1));
            }
            last = Some(now);
        }
    }
    changes
}

/// (x, shear-like sign du_tangential/dn towards +x) at a fraction of an edge.
fn shear(state: &State, triangle: usize, edge: usize, s: f64) -> (f64, f64) {
    let cells = &state.discretisation.cells;
    let starts = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];
    let d = EDGE_DIRECTION[edge];
    let place = [starts[edge][0] + s * d[0], starts[edge][1] + s * d[1]];
    let table = Table::at(cells.order, &[(place, 0.0)]);
    let map = PointMap::new(&state.mesh, triangle, &table, 0);
    let inward: Vec2 = map.along(d).left().normalized();
    let (by_x, by_y) = table.derivative_rows(0);
    let mut slope = [0.0; 2];
    for (i, &n) in cells.element(triangle).iter().enumerate() {
        let [gx, gy] = map.gradient(by_x[i], by_y[i]);
        slope[0] += state.velocity[n as usize][0] * gx;
        slope[1] += state.velocity[n as usize][0] * gy;
    }
    (map.place.x, slope[0] * inward.x + slope[1] * inward.y)
}
