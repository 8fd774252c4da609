//! The figures that aims and limits are made of: each a function of measures, with its derivatives.

use super::measures::{self, Measured};
use super::solve::State;
use crate::geometry::BoundaryTag;

/// Ports by the direction of the flow through them, each with its inflow.
pub struct Ports {
    /// Where the flow comes in: (port, inflow m^2/s).
    pub inlets: Vec<(BoundaryTag, Measured)>,
    /// Where it leaves: (port, outflow m^2/s).
    pub outlets: Vec<(BoundaryTag, Measured)>,
}

impl Ports {
    /// Measure all ports.
    pub fn new(state: &State) -> Self {
        let (mut inlets, mut outlets) = (Vec::new(), Vec::new());
        for port in state.discretisation.problem.ports() {
            let inflow = measures::inflow(state, port);
            if inflow.value >= 0.0 {
                inlets.push((port, inflow));
            } else {
                outlets.push((port, Measured::combine(-inflow.value, &[(-1.0, &inflow)])));
            }
        }
        Self { inlets, outlets }
    }

    /// Flow rate through the inlets, m^2/s.
    pub fn flow_rate(&self) -> Measured {
        Measured::sum(
            &self
                .inlets
                .iter()
                .map(|(_, m)| m.clone())
                .collect::<Vec<_>>(),
        )
    }
}

/// Ratio of two measures.
fn ratio(a: &Measured, b: &Measured) -> Measured {
    let value = a.value / b.value;
    Measured::combine(value, &[(1.0 / b.value, a), (-value / b.value, b)])
}

fn difference(a: &Measured, b: &Measured) -> Measured {
    Measured::combine(a.value - b.value, &[(1.0, a), (-1.0, b)])
}

fn product(a: &Measured, b: &Measured) -> Measured {
    Measured::combine(a.value * b.value, &[(b.value, a), (a.value, b)])
}

/// Mean over a group of ports of `integral / weight`, both summed first.
fn group_mean(
    group: &[(BoundaryTag, Measured)],
    integral: impl Fn(BoundaryTag) -> Measured,
    weight: impl Fn(BoundaryTag, &Measured) -> Measured,
) -> Measured {
    if group.is_empty() {
        return Measured::constant(0.0);
    }
    let sums: Vec<Measured> = group.iter().map(|(tag, _)| integral(*tag)).collect();
    let weights: Vec<Measured> = group.iter().map(|(tag, flow)| weight(*tag, flow)).collect();
    ratio(&Measured::sum(&sums), &Measured::sum(&weights))
}

/// Static pressure averaged over the inlets' width less that over the outlets' width, Pa.
pub fn static_pressure_drop(state: &State, ports: &Ports) -> Measured {
    let mean = |group: &[(BoundaryTag, Measured)]| {
        group_mean(
            group,
            |t| measures::static_pressure(state, t),
            |t, _| measures::length(state, t),
        )
    };
    difference(&mean(&ports.inlets), &mean(&ports.outlets))
}

/// Total pressure averaged over the inlets' width less that over the outlets' width, Pa.
pub fn total_pressure_drop_by_width(state: &State, ports: &Ports) -> Measured {
    let mean = |group: &[(BoundaryTag, Measured)]| {
        group_mean(
            group,
            |t| measures::total_pressure(state, t),
            |t, _| measures::length(state, t),
        )
    };
    difference(&mean(&ports.inlets), &mean(&ports.outlets))
}

/// Total pressure weighted with the flow, inlets less outlets, Pa: what a fan or pump has to deliver.
pub fn total_pressure_drop(state: &State, ports: &Ports) -> Measured {
    let inlet = group_mean(
        &ports.inlets,
        |t| measures::mechanical_power(state, t),
        |_, m| m.clone(),
    );
    let outlet = group_mean(
        &ports.outlets,
        |t| {
            let power = measures::mechanical_power(state, t);
            Measured::combine(-power.value, &[(-1.0, &power)])
        },
        |_, m| m.clone(),
    );
    difference(&inlet, &outlet)
}

/// Total pressure drop times flow rate, W/m.
pub fn pumping_power(state: &State, ports: &Ports) -> Measured {
    product(&total_pressure_drop(state, ports), &ports.flow_rate())
}

/// Heat from one insert into the fluid, W/m. A solid insert gives off what its source makes.
pub fn insert_heat(state: &State, insert: usize) -> Measured {
    let tag = BoundaryTag::Insert(insert as u32);
    match state.discretisation.problem.insert_thermal[insert] {
        super::ThermalCondition::Solid { source_w_m3, .. } => {
            let area = measures::region_area(state, insert as u16 + 1);
            Measured::combine(area.value * source_w_m3, &[(source_w_m3, &area)])
        }
        _ => measures::heat_through(state, tag),
    }
}

/// Heat from all inserts into the fluid, W/m.
pub fn heat(state: &State) -> Measured {
    let inserts = state.discretisation.problem.insert_thermal.len();
    Measured::sum(
        &(0..inserts)
            .map(|i| insert_heat(state, i))
            .collect::<Vec<_>>(),
    )
}

/// Heat from all inserts per pumping power.
pub fn heat_per_pumping_power(state: &State, ports: &Ports) -> Measured {
    ratio(&heat(state), &pumping_power(state, ports))
}

/// Force of the fluid on all inserts along a direction, N/m.
pub fn drag(state: &State, direction: [f64; 2]) -> Measured {
    let inserts = state.discretisation.problem.insert_thermal.len() as u32;
    Measured::sum(
        &(0..inserts)
            .map(|i| measures::force(state, i, direction))
            .collect::<Vec<_>>(),
    )
}

/// Width of the smooth maximum in parts of the temperature range: at a fiftieth it lies a few per cent of the
/// range below the true peak, and its gradient spreads over the hottest tenth of the contour.
const SMOOTH_PART: f64 = 0.02;

/// Smooth maximum of the surface temperature of all inserts, K:
/// T_0 + w ln( integral of exp((T - T_0)/w) over the mean contour length ) (Kreisselmeier and Steinhauser, 1979),
/// with T_0 the true maximum and w a fiftieth of the temperature range at the state, both held fixed.
pub fn peak_temperature(state: &State, scale: &PeakScale) -> Measured {
    let tags: Vec<BoundaryTag> = (0..state.discretisation.problem.insert_thermal.len())
        .map(|i| BoundaryTag::Insert(i as u32))
        .collect();
    let sum = |f: &dyn Fn(BoundaryTag) -> Measured| {
        Measured::sum(&tags.iter().map(|&t| f(t)).collect::<Vec<_>>())
    };
    let exponentials =
        sum(&|t| measures::surface_exponential(state, t, scale.reference_k, scale.width_k));
    let lengths = sum(&|t| measures::length(state, t));
    let mean = ratio(&exponentials, &lengths);
    let value = scale.reference_k + scale.width_k * mean.value.ln();
    Measured::combine(value, &[(scale.width_k / mean.value, &mean)])
}

/// Reference and width of the smooth maximum: kept through an improvement, so that its aim stays one function.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PeakScale {
    /// Reference T_0, K.
    pub reference_k: f64,
    /// Width w, K.
    pub width_k: f64,
}

impl PeakScale {
    /// From a state's own peak and range.
    pub fn new(state: &State) -> Self {
        let lowest = state
            .temperature
            .iter()
            .copied()
            .fold(f64::INFINITY, f64::min);
        let highest = state
            .temperature
            .iter()
            .copied()
            .fold(f64::NEG_INFINITY, f64::max);
        let width_k = (SMOOTH_PART * (highest - lowest)).max(f64::MIN_POSITIVE);
        Self {
            reference_k: highest,
            width_k,
        }
    }
}
