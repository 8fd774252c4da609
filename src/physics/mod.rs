//! Flow and heat: fluids, conditions at ports and walls, the equations, the figures and their validity.

pub mod cells;
pub mod conditions;
pub mod error;
pub mod figures;
pub mod flow;
pub mod flow_assembly;
pub mod flow_system;
pub mod fluid;
pub mod heat;
pub mod heat_system;
pub mod hints;
pub mod measures;
pub mod quantities;
pub mod solve;
pub mod tables;
pub mod transfer;
pub mod validity;

pub use cells::Cells;
pub use conditions::{FlowCondition, ThermalCondition};
pub use error::PhysicsError;
pub use flow_system::FlowSystem;
pub use fluid::Fluid;
pub use heat_system::HeatSystem;
pub use quantities::Quantities;
pub use solve::{Discretisation, Problem, State, solve};
