//! From the design to the geometry that is meshed.

use super::fault::Fault;
use super::{Design, Insert};
use crate::base::Vec2;
use crate::geometry::{ClosedSpline, Domain, DomainInsert, Outline, OutlinePiece, Segment};
use crate::physics::ThermalCondition;

impl Insert {
    /// Its contour, counter-clockwise: where the control points run clockwise their order is turned, the
    /// first staying first.
    pub fn contour(&self) -> ClosedSpline {
        let mut points = self.points_m.clone();
        if signed_area(&points) < 0.0 {
            points[1..].reverse();
        }
        ClosedSpline::new(points)
    }
}

/// Area inside the polygon of the points, m^2, positive counter-clockwise (Gauss's area formula).
fn signed_area(points: &[Vec2]) -> f64 {
    let next = points.iter().cycle().skip(1);
    0.5 * points
        .iter()
        .zip(next)
        .map(|(p, q)| p.cross(*q))
        .sum::<f64>()
}

impl Design {
    /// Outline and inserts as drawn, without any check (fewer than two pieces or an insert of fewer than four
    /// points still give curves). For display while dragging.
    pub fn sketch(&self) -> Domain {
        let pieces = self.duct.iter().enumerate().map(|(i, piece)| OutlinePiece {
            name: piece.name.clone(),
            segment: Segment::new(&piece.shape, self.from_m(i), piece.to_m),
            is_port: piece.flow.is_port(),
        });
        let inserts = self.inserts.iter().filter(|i| !i.points_m.is_empty());
        Domain {
            outline: Outline {
                pieces: pieces.collect(),
            },
            inserts: inserts
                .map(|insert| DomainInsert {
                    name: insert.name.clone(),
                    contour: insert.contour(),
                    solid: matches!(insert.thermal, ThermalCondition::Solid { .. }),
                    cell_size_m: None,
                })
                .collect(),
        }
    }

    /// What is meshed.
    ///
    /// # Errors
    /// All faults of the design and its geometry.
    pub fn domain(&self) -> Result<Domain, Vec<Fault>> {
        let faults = self.faults();
        if faults.is_empty() {
            Ok(self.sketch())
        } else {
            Err(faults)
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::geometry::{BoundaryTag, Curve};
    use crate::study::test_design::channel_with_tube;

    #[test]
    fn the_outline_closes_and_contours_run_counter_clockwise() {
        let mut design = channel_with_tube();
        design.inserts[0].points_m[1..].reverse();
        let first = design.inserts[0].points_m[0];
        let domain = design.domain().expect("sound");
        for i in 0..4 {
            let next = BoundaryTag::Piece((i + 1) % 4);
            assert_eq!(
                domain.point(BoundaryTag::Piece(i), 1.0),
                domain.point(next, 0.0)
            );
        }
        let contour = &domain.inserts[0].contour;
        assert_eq!(contour.controls()[0], first);
        assert!(contour.curvature(0.3) > 0.0);
        assert!(domain.outline.pieces[1].is_port && !domain.outline.pieces[0].is_port);
    }

    #[test]
    fn faults_are_told_instead_of_a_domain() {
        let mut design = channel_with_tube();
        design.fluid.density_kg_m3 = -1.0;
        design.duct[0].name.clear();
        assert_eq!(design.domain().expect_err("faults").len(), 2);
    }
}
