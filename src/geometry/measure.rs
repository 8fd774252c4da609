//! Measures of an insert in its duct, with the places where the smallest ones stand.

use super::limits::{curvature, gap, thickness::Chords};
use super::{Curve, Domain};
use crate::base::Vec2;

/// Measures of one insert.
#[derive(Clone, Debug, PartialEq)]
pub struct InsertMeasures {
    /// Area, m^2.
    pub area_m2: f64,
    /// Perimeter, m.
    pub perimeter_m: f64,
    /// Centroid of the area, m.
    pub centroid_m: Vec2,
    /// Lower left and upper right corner of its box, m.
    pub box_m: [Vec2; 2],
    /// Smallest gap to walls and other inserts, m, and its place on the contour.
    pub min_gap_m: (f64, Vec2),
    /// Smallest radius of curvature, m, and its place.
    pub min_radius_m: (f64, Vec2),
    /// Smallest thickness, m, and its place.
    pub min_thickness_m: (f64, Vec2),
}

/// Measure an insert of a domain.
pub fn insert_measures(domain: &Domain, insert: usize) -> InsertMeasures {
    let contour = &domain.inserts[insert].contour;
    let mut gap = gap::smallest_to_walls(contour, &gap::Walls::new(&domain.outline));
    for (i, other) in domain.inserts.iter().enumerate() {
        if i != insert {
            let between = gap::smallest_between(contour, &other.contour);
            if between.1 < gap.1 {
                gap = between;
            }
        }
    }
    let radius = curvature::smallest_radius(contour);
    let thickness = Chords::new(contour).smallest();
    let placed = |(t, value): (f64, f64)| (value, contour.point(t));
    InsertMeasures {
        area_m2: contour.area(),
        perimeter_m: contour.perimeter(),
        centroid_m: contour.centroid(),
        box_m: contour.bounding_box(),
        min_gap_m: placed(gap),
        min_radius_m: placed(radius),
        min_thickness_m: placed(thickness),
    }
}
