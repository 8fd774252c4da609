//! What a solve and an improvement report: the keys of the headless JSON, SI units, per metre of depth.

use serde::Serialize;

/// Seconds spent by stage (wall clock; the only figures that differ between equal runs).
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
pub struct Seconds {
    /// Geometry checks.
    pub geometry: f64,
    /// Mesh.
    pub mesh: f64,
    /// Flow.
    pub flow: f64,
    /// Heat.
    pub heat: f64,
    /// Figures, adjoints and pictures.
    pub figures: f64,
    /// All of it.
    pub total: f64,
}

/// How well conservation holds.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
pub struct Balance {
    /// Net flow through all ports over the flow in.
    pub mass_relative: f64,
    /// Heat in from walls, inserts and ports less heat carried out, over the largest of them.
    pub heat_relative: f64,
    /// Viscous dissipation less the pressure work of the ports, over the pressure work.
    pub energy_relative: f64,
    /// Mesh area less the exact area of the drawn domain, over the exact area.
    pub area_relative: f64,
}

pub use crate::physics::validity::{Caution, CautionLevel};

/// Figures of one insert.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct InsertReport {
    /// Name.
    pub name: String,
    /// Heat from the insert into the fluid, W/m.
    pub heat_w_m: f64,
    /// Force of the fluid along +x, N/m.
    pub drag_n_m: f64,
    /// Force of the fluid along +y, N/m.
    pub lift_n_m: f64,
    /// Highest temperature on the contour (or in the solid), K.
    pub max_temperature_k: f64,
    /// Mean temperature on the contour (or in the solid), K.
    pub mean_temperature_k: f64,
    /// Area, m^2.
    pub area_m2: f64,
    /// Perimeter, m.
    pub perimeter_m: f64,
    /// Smallest gap to walls and other inserts, m.
    pub min_gap_m: f64,
    /// Smallest radius of curvature, m.
    pub min_radius_m: f64,
    /// Smallest thickness, m.
    pub min_thickness_m: f64,
}

/// The report of a solve.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct SolveReport {
    /// Triangles of the mesh.
    pub triangles: usize,
    /// Unknowns of the flow after condensation.
    pub unknowns: usize,
    /// Newton steps of the flow.
    pub newton_steps: usize,
    /// Time by stage.
    pub seconds: Seconds,
    /// Flow rate through the inlets, m^2/s.
    pub flow_rate_m2_s: f64,
    /// Mean velocity over the inlets, m/s.
    pub mean_velocity_m_s: f64,
    /// Reynolds number rho U (2 H)/mu on the inlet's hydraulic diameter.
    pub reynolds: f64,
    /// Width-averaged static pressure, inlets less outlets, Pa.
    pub static_pressure_drop_pa: f64,
    /// Flow-weighted total pressure, inlets less outlets, Pa.
    pub total_pressure_drop_pa: f64,
    /// Total pressure drop times flow rate, W/m.
    pub pumping_power_w_m: f64,
    /// Heat from all inserts into the fluid, W/m.
    pub heat_w_m: f64,
    /// Heat from all duct walls into the fluid, W/m.
    pub wall_heat_w_m: f64,
    /// Mixed-mean temperature at the outlets, K.
    pub outlet_bulk_temperature_k: f64,
    /// Highest speed, m/s.
    pub max_speed_m_s: f64,
    /// Highest temperature in the domain, K.
    pub max_temperature_k: f64,
    /// One entry an insert.
    pub inserts: Vec<InsertReport>,
    /// Conservation.
    pub balance: Balance,
    /// Cautions, worst first.
    pub cautions: Vec<Caution>,
}

/// One limit's state.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct LimitReport {
    /// Name in words with the insert, such as `area of tube at least`.
    pub name: String,
    /// Unit of value, bound and slack (SI).
    pub unit: String,
    /// Present value.
    pub value: f64,
    /// Bound.
    pub bound: f64,
    /// How far inside the bound (negative when violated), same unit.
    pub slack: f64,
    /// Whether it holds the design back.
    pub active: bool,
}

/// The report of an improvement.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ImproveReport {
    /// The design as it came.
    pub start: SolveReport,
    /// The best design that met its limits.
    pub r#final: SolveReport,
    /// Aim in words.
    pub aim: String,
    /// Value of the aim at the start (SI).
    pub aim_start: f64,
    /// Value of the aim at the end (SI).
    pub aim_final: f64,
    /// All limits at the end.
    pub limits: Vec<LimitReport>,
    /// Accepted steps.
    pub steps: usize,
    /// States computed with all their gradients.
    pub evaluations: usize,
    /// Why it stopped, in one sentence.
    pub stop_reason: String,
    /// Gradient of the aim against central differences on the moved mesh at the start, relative.
    pub gradient_check: f64,
}
