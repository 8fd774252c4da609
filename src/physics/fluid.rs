//! A fluid with constant properties.

use serde::{Deserialize, Serialize};

/// Constant properties, as stored in a project file.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Fluid {
    /// Name shown to the user.
    pub name: String,
    /// Density rho, kg/m^3.
    pub density_kg_m3: f64,
    /// Dynamic viscosity mu, Pa s.
    pub viscosity_pa_s: f64,
    /// Thermal conductivity k, W/(m K).
    pub conductivity_w_m_k: f64,
    /// Heat capacity at constant pressure c_p, J/(kg K).
    pub heat_capacity_j_kg_k: f64,
}

impl Fluid {
    /// Prandtl number mu c_p / k.
    pub fn prandtl(&self) -> f64 {
        self.viscosity_pa_s * self.heat_capacity_j_kg_k / self.conductivity_w_m_k
    }
}
