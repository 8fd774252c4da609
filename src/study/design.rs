//! What a project file holds. Keys carry units; unknown keys are refused; numbers round-trip to the last bit.

use crate::base::Vec2;
use crate::geometry::PieceShape;
use crate::physics::{FlowCondition, Fluid, ThermalCondition};
use serde::{Deserialize, Serialize};

/// Version of the file format written by this program.
pub const VERSION: u32 = 1;

/// Most pieces of an outline: far more than a drawing needs; bounds time and memory of its checks.
pub const MOST_PIECES: usize = 500;
/// Most inserts (also in a variant), for the same reason.
pub const MOST_INSERTS: usize = 100;
/// Most control points of an insert or points of a spline, for the same reason.
pub const MOST_POINTS: usize = 500;
/// Most limits.
pub const MOST_LIMITS: usize = 200;
/// Most kept alternatives.
pub const MOST_VARIANTS: usize = 200;
/// Longest name, characters: still fits a line on the screen.
pub const MOST_CHARACTERS_IN_NAME: usize = 200;
/// Longest notes, characters: some thirty pages.
pub const MOST_NOTES: usize = 100_000;

/// A study as stored in one JSON file.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Project {
    /// Format version, [`VERSION`].
    pub version: u32,
    /// Title of the study.
    pub name: String,
    /// Free text of the designer.
    #[serde(default)]
    pub notes: String,
    /// What is studied.
    pub design: Design,
    /// How it is computed.
    #[serde(default)]
    pub run: RunSettings,
    /// Kept alternatives of the inserts.
    #[serde(default)]
    pub variants: Vec<Variant>,
}

/// Everything that undo restores.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Design {
    /// The fluid.
    pub fluid: Fluid,
    /// Pieces of the outline in order, counter-clockwise; each starts where the one before ends.
    pub duct: Vec<DuctPiece>,
    /// Inserts in the stream.
    pub inserts: Vec<Insert>,
    /// What improvement is after.
    pub aim: Aim,
    /// What it must respect.
    #[serde(default)]
    pub limits: Vec<Limit>,
}

/// One piece of the outline.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct DuctPiece {
    /// Name, unique in the outline.
    pub name: String,
    /// Its end, m (its start is the end of the piece before).
    pub to_m: Vec2,
    /// Shape between its ends.
    pub shape: PieceShape,
    /// Wall, symmetry plane or port.
    pub flow: FlowCondition,
    /// Thermal condition; on ports a fixed temperature is that of the incoming fluid.
    pub thermal: ThermalCondition,
}

/// One insert.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Insert {
    /// Name, unique among the inserts.
    pub name: String,
    /// Control points of its closed spline, counter-clockwise, m.
    pub points_m: Vec<Vec2>,
    /// Whether improvement leaves it as it is.
    #[serde(default)]
    pub frozen: bool,
    /// Thermal condition on its contour.
    pub thermal: ThermalCondition,
}

/// A kept alternative.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Variant {
    /// Name given by the user.
    pub name: String,
    /// Its inserts.
    pub inserts: Vec<Insert>,
}

/// What improvement is after.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case", deny_unknown_fields)]
pub enum Aim {
    /// Most heat from the inserts into the fluid at the given ports, W/m.
    MostHeat {},
    /// Least flow-weighted total pressure loss between inlets and outlets, Pa.
    LeastTotalPressureLoss {},
    /// Least total pressure loss times flow rate, W/m.
    LeastPumpingPower {},
    /// Most heat from the inserts per pumping power (dimensionless).
    MostHeatPerPumpingPower {},
    /// Least peak surface temperature of the inserts (a smooth maximum), K.
    LeastPeakTemperature {},
    /// Least drag of the inserts along the duct's x axis, N/m.
    LeastDrag {},
}

/// What improvement must respect. `insert: None` means every free insert.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case", deny_unknown_fields)]
pub enum Limit {
    /// Area of the cross-section.
    Area {
        /// Which insert.
        insert: Option<String>,
        /// Exactly this, m^2.
        equal_m2: Option<f64>,
        /// No less than this, m^2.
        at_least_m2: Option<f64>,
        /// No more than this, m^2.
        at_most_m2: Option<f64>,
    },
    /// Length of the contour.
    Perimeter {
        /// Which insert.
        insert: Option<String>,
        /// No less than this, m.
        at_least_m: Option<f64>,
        /// No more than this, m.
        at_most_m: Option<f64>,
    },
    /// Gap between an insert and the duct's walls.
    WallGap {
        /// Which insert.
        insert: Option<String>,
        /// No less than this, m.
        at_least_m: f64,
    },
    /// Gap between any two inserts.
    InsertGap {
        /// No less than this, m.
        at_least_m: f64,
    },
    /// Radius of curvature of the contour, convex and concave.
    CurvatureRadius {
        /// Which insert.
        insert: Option<String>,
        /// No less than this, m.
        at_least_m: f64,
    },
    /// Thickness of the cross-section along its inward normals.
    Thickness {
        /// Which insert.
        insert: Option<String>,
        /// No less than this, m.
        at_least_m: f64,
    },
    /// Box that the insert stays in.
    BoundingBox {
        /// Which insert.
        insert: Option<String>,
        /// Lower left corner, m.
        lower_left_m: Vec2,
        /// Upper right corner, m.
        upper_right_m: Vec2,
    },
    /// Centroid that stays where it is told.
    Centroid {
        /// Which insert.
        insert: String,
        /// Place, m.
        at_m: Vec2,
    },
    /// Heat from the inserts.
    Heat {
        /// No less than this, W/m.
        at_least_w_m: f64,
    },
    /// Total pressure drop between inlets and outlets.
    TotalPressureDrop {
        /// No more than this, Pa.
        at_most_pa: f64,
    },
}

impl Limit {
    /// In words, without numbers.
    pub fn words(&self) -> &'static str {
        match self {
            Self::Area { .. } => "area",
            Self::Perimeter { .. } => "perimeter",
            Self::WallGap { .. } => "gap to the walls",
            Self::InsertGap { .. } => "gap between inserts",
            Self::CurvatureRadius { .. } => "radius of curvature",
            Self::Thickness { .. } => "thickness",
            Self::BoundingBox { .. } => "bounding box",
            Self::Centroid { .. } => "centroid",
            Self::Heat { .. } => "heat",
            Self::TotalPressureDrop { .. } => "total pressure drop",
        }
    }
}

/// Three fixed rules of fineness.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Accuracy {
    /// For sketching.
    Draft,
    /// For deciding.
    #[default]
    Design,
    /// For the record.
    Final,
}

/// How a study is computed.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct RunSettings {
    /// Order k of velocity, temperature and geometry, 2 to 5 (pressure k - 1).
    pub order: usize,
    /// Fineness of the mesh.
    pub accuracy: Accuracy,
    /// Most triangles that a mesh may have.
    pub most_triangles: usize,
    /// Most steps of an improvement.
    pub steps: usize,
}

impl Default for RunSettings {
    fn default() -> Self {
        Self {
            order: 4,
            accuracy: Accuracy::Design,
            most_triangles: 20_000,
            steps: 30,
        }
    }
}
