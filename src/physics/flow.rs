//! Steady incompressible Navier-Stokes flow at a point.

use crate::base::Real;

/// What the equations see at a point.
#[derive(Clone, Copy, Debug)]
pub struct FlowPoint<S> {
    /// Velocity u, m/s.
    pub u: [S; 2],
    /// Its gradient `grad_u[component][direction]`, 1/s.
    pub grad_u: [[S; 2]; 2],
    /// Pressure p, Pa.
    pub p: S,
}

/// Coefficients of the test functions.
#[derive(Clone, Copy, Debug)]
pub struct FlowFlux<S> {
    /// Of v, N/m^3.
    pub v: [S; 2],
    /// Of the gradient of v, Pa.
    pub grad_v: [[S; 2]; 2],
    /// Of q, 1/s.
    pub q: S,
}

/// Momentum and mass, weak form: find (u, p) so that for all (v, q)
///   0 = ∫ ρ (u·∇u)·v + μ ∇u:∇v − p ∇·v − q ∇·u dx + ∫_ports P n·v ds
/// with P the static pressure of the port, or its total pressure less ρ|u|²/2. (Laplacian form: constant
/// viscosity; on no-slip walls its traction is the stress vector's, as ∇uᵀn vanishes there.)
pub fn momentum_and_mass<S: Real>(at: &FlowPoint<S>, rho: f64, mu: f64) -> FlowFlux<S> {
    let FlowPoint { u, grad_u, p } = *at;
    let convection = |c: usize| (u[0] * grad_u[c][0] + u[1] * grad_u[c][1]) * rho;
    let mut grad_v = grad_u.map(|row| row.map(|g| g * mu));
    grad_v[0][0] = grad_v[0][0] - p;
    grad_v[1][1] = grad_v[1][1] - p;
    FlowFlux {
        v: [convection(0), convection(1)],
        grad_v,
        q: -(grad_u[0][0] + grad_u[1][1]),
    }
}

/// Excess of the port's pressure over its static pressure: −ρ|u|²/2 on total-pressure ports, Pa.
pub fn dynamic_part<S: Real>(u: [S; 2], rho: f64) -> S {
    (u[0] * u[0] + u[1] * u[1]) * (-0.5 * rho)
}
