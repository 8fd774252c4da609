//! Flow and heat: fluids, conditions at ports and walls, the equations, the figures and their validity.

pub mod conditions;
pub mod fluid;
pub mod tables;

pub use conditions::{FlowCondition, ThermalCondition};
pub use fluid::Fluid;
