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
