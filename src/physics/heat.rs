//! Convection and conduction of heat at a point.

use crate::base::Real;

/// What the equation sees at a point.
#[derive(Clone, Copy, Debug)]
pub struct HeatPoint<S> {
    /// Velocity u, m/s (zero in solids).
    pub u: [S; 2],
    /// Temperature gradient, K/m.
    pub grad_t: [S; 2],
}

/// Coefficients of the test function.
#[derive(Clone, Copy, Debug)]
pub struct HeatFlux<S> {
    /// Of v, W/m^3.
    pub v: S,
    /// Of the gradient of v, W/m^2.
    pub grad_v: [S; 2],
}

/// Medium of a region.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Medium {
    /// Heat capacity of a volume rho c_p, J/(m^3 K); zero in solids (nothing flows there).
    pub capacity_j_m3_k: f64,
    /// Conductivity k, W/(m K).
    pub conductivity_w_m_k: f64,
    /// Source, W/m^3.
    pub source_w_m3: f64,
}

/// Energy, weak form: find T so that for all v
///   0 = ∫ (ρ c_p u·∇T − q) v + k ∇T·∇v dx − ∫_walls (flux into the fluid) v ds                     [W/m]
pub fn energy<S: Real>(at: &HeatPoint<S>, medium: &Medium) -> HeatFlux<S> {
    let HeatPoint { u, grad_t } = *at;
    let convection = (u[0] * grad_t[0] + u[1] * grad_t[1]) * medium.capacity_j_m3_k;
    HeatFlux {
        v: convection + (-medium.source_w_m3),
        grad_v: grad_t.map(|g| g * medium.conductivity_w_m_k),
    }
}
