//! Flow and heat states: from rest by continuation in the fluid's inertia, or from a near state.

use super::cells::Cells;
use super::conditions::{FlowCondition, ThermalCondition};
use super::error::PhysicsError;
use super::flow_assembly::FlowOn;
use super::flow_system::FlowSystem;
use super::fluid::Fluid;
use super::heat::Medium;
use super::heat_system::{HeatOn, HeatSystem};
use crate::base::Watch;
use crate::fem::newton::{self, Nonlinear};
use crate::fem::{FemError, Linearised};
use crate::geometry::BoundaryTag;
use crate::mesh::CurvedMesh;
use std::sync::{Arc, OnceLock};

/// What is to be solved, apart from the mesh.
#[derive(Clone, Debug, PartialEq)]
pub struct Problem {
    /// The fluid.
    pub fluid: Fluid,
    /// Flow condition of each piece of the outline.
    pub flow: Vec<FlowCondition>,
    /// Thermal condition of each piece of the outline.
    pub piece_thermal: Vec<ThermalCondition>,
    /// Thermal condition of each insert.
    pub insert_thermal: Vec<ThermalCondition>,
}

impl Problem {
    /// Ports, in the order of the outline.
    pub fn ports(&self) -> Vec<BoundaryTag> {
        (0..self.flow.len())
            .filter(|&i| self.flow[i].is_port())
            .map(|i| BoundaryTag::Piece(i as u32))
            .collect()
    }

    /// Thermal conditions by curve.
    pub fn thermal(&self) -> Vec<(BoundaryTag, ThermalCondition)> {
        let pieces = self.piece_thermal.iter().enumerate();
        let inserts = self.insert_thermal.iter().enumerate();
        pieces
            .map(|(i, c)| (BoundaryTag::Piece(i as u32), c.clone()))
            .chain(inserts.map(|(i, c)| (BoundaryTag::Insert(i as u32), c.clone())))
            .collect()
    }

    fn media(&self) -> Vec<Medium> {
        let fluid = &self.fluid;
        let fluid = Medium {
            capacity_j_m3_k: fluid.density_kg_m3 * fluid.heat_capacity_j_kg_k,
            conductivity_w_m_k: fluid.conductivity_w_m_k,
            source_w_m3: 0.0,
        };
        let solids = self.insert_thermal.iter().map(|c| match *c {
            ThermalCondition::Solid {
                conductivity_w_m_k,
                source_w_m3,
            } => Medium {
                capacity_j_m3_k: 0.0,
                conductivity_w_m_k,
                source_w_m3,
            },
            _ => fluid,
        });
        std::iter::once(fluid).chain(solids).collect()
    }
}

/// Everything that depends on topology and conditions only: shared by all meshes moved from one another.
pub struct Discretisation {
    /// The problem.
    pub problem: Problem,
    /// Spaces.
    pub cells: Arc<Cells>,
    /// Flow unknowns.
    pub flow: FlowSystem,
    /// Heat unknowns.
    pub heat: HeatSystem,
}

impl Discretisation {
    /// Set up for a mesh.
    ///
    /// # Errors
    /// From the analysis of the patterns.
    pub fn new(mesh: &CurvedMesh, problem: Problem) -> Result<Self, PhysicsError> {
        let cells = Arc::new(Cells::new(mesh));
        let fluid = &problem.fluid;
        let flow = FlowSystem::new(
            mesh,
            &cells,
            &problem.flow,
            fluid.density_kg_m3,
            fluid.viscosity_pa_s,
        )?;
        let heat = HeatSystem::new(
            &cells,
            &problem.thermal(),
            &problem.ports(),
            problem.media(),
        )?;
        Ok(Self {
            problem,
            cells,
            flow,
            heat,
        })
    }
}

/// Flow and temperature on one mesh, with the factors that adjoints reuse.
pub struct State {
    /// Topology and conditions.
    pub discretisation: Arc<Discretisation>,
    /// Mesh.
    pub mesh: CurvedMesh,
    /// Flow unknowns in the nodes' frames, shape `(flow.layout.total,)`.
    pub flow: Vec<f64>,
    /// Temperatures at the nodes, K.
    pub temperature: Vec<f64>,
    /// Velocity at the nodes in x and y, m/s.
    pub velocity: Vec<[f64; 2]>,
    /// Newton steps taken.
    pub newton_steps: usize,
    /// Residual rows of the flow: reactions at fixed unknowns.
    pub flow_reactions: Vec<f64>,
    /// Residual rows of heat: reactions at fixed unknowns.
    pub heat_reactions: Vec<f64>,
    flow_jacobian: OnceLock<Linearised>,
    /// Factorised Jacobian of heat at the state.
    pub heat_jacobian: Linearised,
}

/// Solve flow on a mesh from `start` (a near state) or from rest.
///
/// # Errors
/// [`PhysicsError::Stalled`] with how far continuation came.
pub fn solve_flow(
    discretisation: &Discretisation,
    mesh: &CurvedMesh,
    start: Option<&[f64]>,
    watch: &Watch,
) -> Result<(Vec<f64>, usize), PhysicsError> {
    let system = &discretisation.flow;
    let on = |inertia| FlowOn {
        system,
        mesh,
        inertia,
    };
    if let Some(near) = start {
        match newton::solve(&on(1.0), near.to_vec(), watch) {
            Ok(done) => return Ok(done),
            Err(FemError::Stalled { .. } | FemError::Linear(_)) => {}
            Err(other) => return Err(other.into()),
        }
    }
    let (mut x, mut steps) = newton::solve(&on(0.0), system.start.clone(), watch)?;
    // Continuation: the fraction of the inertia grows by a factor that adapts to success.
    let (mut reached, mut next) = (0.0, 1.0);
    while reached < 1.0 {
        match newton::solve(&on(next), x.clone(), watch) {
            Ok((solved, taken)) => {
                x = solved;
                steps += taken;
                let ratio = if reached > 0.0 {
                    (next / reached).min(4.0)
                } else {
                    4.0
                };
                reached = next;
                next = (reached * ratio).min(1.0);
            }
            Err(FemError::Stalled {
                residual,
                steps: taken,
            }) => {
                steps += taken;
                next = if reached > 0.0 {
                    (reached * next).sqrt()
                } else {
                    next / 8.0
                };
                if next < SMALLEST_INERTIA || (reached > 0.0 && next / reached < SMALLEST_RATIO) {
                    return Err(PhysicsError::Stalled {
                        fraction: reached,
                        residual,
                    });
                }
            }
            Err(other) => return Err(other.into()),
        }
    }
    Ok((x, steps))
}

/// Below this fraction of the density the flow creeps: a failure there is not due to inertia.
const SMALLEST_INERTIA: f64 = 1e-5;
/// Continuation steps shorter than this ratio crawl: a steady flow beyond is unlikely.
const SMALLEST_RATIO: f64 = 1.02;

/// Solve flow, then heat, and keep the factors.
///
/// # Errors
/// As [`solve_flow`]; [`PhysicsError::NotFinite`].
pub fn solve(
    discretisation: &Arc<Discretisation>,
    mesh: CurvedMesh,
    start: Option<&[f64]>,
    watch: &Watch,
) -> Result<State, PhysicsError> {
    let (flow, newton_steps) = solve_flow(discretisation, &mesh, start, watch)?;
    solve_heat(discretisation, mesh, flow, newton_steps, watch)
}

/// Heat in a solved flow: linear, one solve.
///
/// # Errors
/// From the factorisation; [`PhysicsError::NotFinite`].
pub fn solve_heat(
    discretisation: &Arc<Discretisation>,
    mesh: CurvedMesh,
    flow: Vec<f64>,
    newton_steps: usize,
    watch: &Watch,
) -> Result<State, PhysicsError> {
    let flow_reactions = FlowOn {
        system: &discretisation.flow,
        mesh: &mesh,
        inertia: 1.0,
    }
    .residual(&flow)
    .rows;
    let velocity: Vec<[f64; 2]> = (0..discretisation.cells.node_count)
        .map(|i| discretisation.flow.velocity(&flow, i))
        .collect();
    let heat = HeatOn {
        system: &discretisation.heat,
        mesh: &mesh,
        velocity: &velocity,
    };
    let mut temperature = discretisation.heat.start.clone();
    let (residual, heat_jacobian) = heat.linearise(&temperature, watch)?;
    for (t, d) in temperature
        .iter_mut()
        .zip(heat_jacobian.solve(&residual.rows))
    {
        *t -= d;
    }
    let heat_reactions = heat.residual(&temperature).rows;
    if !flow.iter().chain(&temperature).all(|x| x.is_finite()) {
        return Err(PhysicsError::NotFinite);
    }
    Ok(State {
        discretisation: discretisation.clone(),
        mesh,
        flow,
        temperature,
        velocity,
        newton_steps,
        flow_reactions,
        heat_reactions,
        flow_jacobian: OnceLock::new(),
        heat_jacobian,
    })
}

impl State {
    /// Factorised Jacobian of the flow at the state: computed at the first call, for adjoints.
    ///
    /// # Errors
    /// From the factorisation, or the watch's stop.
    pub fn flow_jacobian(&self, watch: &Watch) -> Result<&Linearised, PhysicsError> {
        if let Some(ready) = self.flow_jacobian.get() {
            return Ok(ready);
        }
        let on = FlowOn {
            system: &self.discretisation.flow,
            mesh: &self.mesh,
            inertia: 1.0,
        };
        let (_, jacobian) = on.linearise(&self.flow, watch)?;
        Ok(self.flow_jacobian.get_or_init(|| jacobian))
    }
}
