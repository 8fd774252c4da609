//! Discrete adjoints and shape derivatives: from a scalar of the state to the control points.
//!
//! Each arrow is the transpose of one that the state used: heat, flow, node places, mesh motion, spline.

pub mod adjoint;
pub mod chain;
pub mod node_derivative;

pub use adjoint::shape_gradient;
pub use chain::ControlChain;
