//! What holds on each piece of the outline and on each insert, as stored in a project file.

use serde::{Deserialize, Serialize};

/// Flow condition on a piece of the outline.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case", deny_unknown_fields)]
pub enum FlowCondition {
    /// No slip: u = 0.
    Wall {},
    /// Symmetry plane: no flow through, no shear.
    Symmetry {},
    /// Tangential velocity 0 and p + rho |u|^2 / 2 = value.
    TotalPressure {
        /// Total pressure, Pa.
        pressure_pa: f64,
    },
    /// Tangential velocity 0 and p = value.
    StaticPressure {
        /// Static pressure, Pa.
        pressure_pa: f64,
    },
    /// Parabolic normal velocity with this flow rate into the duct.
    FlowRate {
        /// Flow into the duct per metre of depth, m^2/s; negative draws out.
        flow_rate_m2_s: f64,
    },
    /// Given velocity, the same along the piece (an open stream).
    Velocity {
        /// Components of the velocity, m/s.
        velocity_m_s: [f64; 2],
    },
}

impl FlowCondition {
    /// Whether fluid can pass.
    pub fn is_port(&self) -> bool {
        !matches!(self, Self::Wall {} | Self::Symmetry {})
    }
}

/// Thermal condition on a piece of the outline or on an insert's contour.
///
/// On ports: `FixedTemperature` is the temperature of what comes in; `Adiabatic` (no conduction through the
/// port) is what an outlet takes.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case", deny_unknown_fields)]
pub enum ThermalCondition {
    /// No heat passes by conduction.
    Adiabatic {},
    /// Given temperature.
    FixedTemperature {
        /// Temperature, K.
        temperature_k: f64,
    },
    /// Given heat flux into the fluid.
    FixedFlux {
        /// Heat flux into the fluid, W/m^2.
        flux_w_m2: f64,
    },
    /// Heat exchange with surroundings: flux into the fluid = h (T_ambient - T).
    Convection {
        /// Heat transfer coefficient h, W/(m^2 K).
        coefficient_w_m2_k: f64,
        /// Temperature of the surroundings, K.
        ambient_k: f64,
    },
    /// Inserts only: a solid with a heat source, conducting to the fluid.
    Solid {
        /// Conductivity of the solid, W/(m K).
        conductivity_w_m_k: f64,
        /// Heat source, W/m^3.
        source_w_m3: f64,
    },
}
