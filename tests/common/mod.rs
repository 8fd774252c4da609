//! What several tests share: domains built by hand.
#![allow(dead_code)]

use flumeloft::base::{Vec2, vec2};
use flumeloft::geometry::{ClosedSpline, Domain, DomainInsert, Outline, OutlinePiece, Segment};

/// Rectangle with its lower left corner at the origin: pieces bottom, right (port), top, left (port).
pub fn rectangle(length: f64, height: f64) -> Outline {
    let corners = [
        vec2(0.0, 0.0),
        vec2(length, 0.0),
        vec2(length, height),
        vec2(0.0, height),
    ];
    let names = ["bottom", "right", "top", "left"];
    Outline {
        pieces: (0..4)
            .map(|i| OutlinePiece {
                name: names[i].into(),
                segment: Segment::Line {
                    from: corners[i],
                    to: corners[(i + 1) % 4],
                },
                is_port: i % 2 == 1,
            })
            .collect(),
    }
}

/// Circle of `n` control points.
pub fn circle(centre: Vec2, radius: f64, n: usize) -> DomainInsert {
    let controls = (0..n)
        .map(|i| {
            centre + Vec2::from_angle(2.0 * std::f64::consts::PI * i as f64 / n as f64) * radius
        })
        .collect();
    DomainInsert {
        name: "circle".into(),
        contour: ClosedSpline::new(controls),
        solid: false,
        cell_size_m: None,
    }
}

/// The channel of the cylinder benchmark: Schaefer and Turek, Benchmark computations of laminar flow around a
/// cylinder, Notes on Numerical Fluid Mechanics 52, 547 (1996).
pub fn benchmark_channel() -> Domain {
    Domain {
        outline: rectangle(2.2, 0.41),
        inserts: vec![circle(vec2(0.2, 0.2), 0.05, 64)],
    }
}
