//! The discrete adjoint of a scalar of the state.
//!
//! With J(U, T, X), R_T(U, T, X) = 0 on free rows, R_U(U, X) = 0 on free rows, and J = ... + w · R for reactions:
//!   K_T^T λ_T = −(∂J/∂T + K_T^T w_T),                       ψ_T = w_T + λ_T
//!   K_U^T λ_U = −(∂J/∂U + K_U^T w_U + (∂R_T/∂U)^T ψ_T),     ψ_U = w_U + λ_U
//!   dJ/dX = ∂J/∂X + ψ_T · ∂R_T/∂X + ψ_U · ∂R_U/∂X
//! (Giles and Pierce, Flow, Turbulence and Combustion 65, 393, 2000; reactions as weights of rows whose unknowns
//! are fixed.)

use super::node_derivative;
use crate::base::{Vec2, Watch};
use crate::linalg::dense::axpy;
use crate::physics::measures::Measured;
use crate::physics::{PhysicsError, State};

/// Derivative of a scalar by the place of every geometry node, shape `(node_count,)`, SI per metre.
///
/// # Errors
/// From the flow's factorisation, or the watch's stop.
pub fn shape_gradient(
    state: &State,
    scalar: &Measured,
    watch: &Watch,
) -> Result<Vec<Vec2>, PhysicsError> {
    let discretisation = &state.discretisation;
    let mut by_nodes = if scalar.nodes.is_empty() {
        vec![Vec2::ZERO; discretisation.cells.node_count]
    } else {
        scalar.nodes.clone()
    };
    let heat_matters = !scalar.heat.is_empty() || !scalar.heat_test.is_empty();
    let heat_weights =
        heat_matters.then(|| weights(&state.heat_jacobian, &scalar.heat, &scalar.heat_test, &[]));
    watch.check()?;
    let coupling = match &heat_weights {
        Some(psi) => {
            node_derivative::add_heat(state, psi, &mut by_nodes);
            node_derivative::heat_by_flow(state, psi)
        }
        None => Vec::new(),
    };
    watch.check()?;
    if heat_matters || !scalar.flow.is_empty() || !scalar.flow_test.is_empty() {
        let psi = weights(
            state.flow_jacobian(watch)?,
            &scalar.flow,
            &scalar.flow_test,
            &coupling,
        );
        node_derivative::add_flow(state, &psi, &mut by_nodes);
    }
    Ok(by_nodes)
}

/// ψ = w + λ of one equation.
fn weights(
    jacobian: &crate::fem::Linearised,
    derivative: &[f64],
    test: &[f64],
    coupling: &[f64],
) -> Vec<f64> {
    let total = jacobian.layout.total;
    let mut right = if test.is_empty() {
        vec![0.0; total]
    } else {
        jacobian.apply_transposed(test)
    };
    for part in [derivative, coupling] {
        if !part.is_empty() {
            axpy(1.0, part, &mut right);
        }
    }
    let mut psi = if test.is_empty() {
        vec![0.0; total]
    } else {
        test.to_vec()
    };
    axpy(-1.0, &jacobian.solve_transposed(&right), &mut psi);
    psi
}
