//! The domain to be meshed: the duct's outline and the inserts in it.

use super::{ClosedSpline, Curve, Segment};
use crate::base::Vec2;

/// Which curve a boundary edge or node lies on.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum BoundaryTag {
    /// Piece of the outline, by index.
    Piece(u32),
    /// Contour of an insert, by index.
    Insert(u32),
}

/// A named piece of the outline.
#[derive(Clone, Debug, PartialEq)]
pub struct OutlinePiece {
    /// Name, unique among the pieces.
    pub name: String,
    /// Its curve.
    pub segment: Segment,
    /// Whether it is an opening for the fluid (mesh is graded towards where it meets a wall).
    pub is_port: bool,
}

/// Closed chain of pieces, counter-clockwise (the fluid lies on the left).
#[derive(Clone, Debug, PartialEq)]
pub struct Outline {
    /// Pieces in order; each starts where the one before ends.
    pub pieces: Vec<OutlinePiece>,
}

/// An insert as the mesher sees it.
#[derive(Clone, Debug, PartialEq)]
pub struct DomainInsert {
    /// Name, unique among the inserts.
    pub name: String,
    /// Contour, counter-clockwise.
    pub contour: ClosedSpline,
    /// Whether the inside is meshed as well (heat conduction in the solid).
    pub solid: bool,
    /// A cell size asked for along the contour, m, besides the automatic rules.
    pub cell_size_m: Option<f64>,
}

/// Outline and inserts.
#[derive(Clone, Debug, PartialEq)]
pub struct Domain {
    /// The duct.
    pub outline: Outline,
    /// What stands in it.
    pub inserts: Vec<DomainInsert>,
}

impl Domain {
    /// The curve behind a tag.
    ///
    /// # Panics
    /// Never for tags made from this domain.
    pub fn curve(&self, tag: BoundaryTag) -> &dyn Curve {
        match tag {
            BoundaryTag::Piece(i) => &self.outline.pieces[i as usize].segment,
            BoundaryTag::Insert(i) => &self.inserts[i as usize].contour,
        }
    }

    /// Point of a tagged curve, m.
    pub fn point(&self, tag: BoundaryTag, t: f64) -> Vec2 {
        self.curve(tag).point(t)
    }
}

impl Outline {
    /// Enclosed area, m^2, positive counter-clockwise: exact for lines, to quadrature for the rest.
    pub fn area(&self) -> f64 {
        // Composite Gauss-Legendre, three points on each of 64 parts: exact for quintics a part.
        const GAUSS: [(f64, f64); 3] = [
            (0.112_701_665_379_258_3, 5.0 / 18.0),
            (0.5, 8.0 / 18.0),
            (0.887_298_334_620_741_7, 5.0 / 18.0),
        ];
        const PARTS: usize = 64;
        let mut area = 0.0;
        for piece in &self.pieces {
            for part in 0..PARTS {
                for (x, w) in GAUSS {
                    let t = (part as f64 + x) / PARTS as f64;
                    let d = piece.segment.derivative(t);
                    area += 0.5 * w / PARTS as f64 * piece.segment.point(t).cross(d);
                }
            }
        }
        area
    }
}
