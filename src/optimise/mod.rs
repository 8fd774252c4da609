//! Sequential quadratic programming on an abstract problem; knows no physics and no geometry.

pub mod curvature;
pub mod gradient_check;
pub mod problem;
pub mod qp;
pub mod record;
pub mod restore;
pub mod sqp;

pub use problem::{Evaluation, Geometry, Problem, Refusal, Row, Settled};
pub use record::{Outcome, Record, Stop};
pub use sqp::{Settings, minimise};
