//! Whether the ports together pose a flow that exists and is one: the reason is told where not.

use super::fault::Fault;
use super::{Caution, CautionLevel, Design};
use crate::base::Vec2;
use crate::geometry::{Curve, Segment};
use crate::physics::{FlowCondition, ThermalCondition};

/// Relative to the flow in: what sums of typed flow rates may miss by rounding (nine digits are typed at most).
const FLOW_ROUNDING: f64 = 1e-9;

/// Lowest temperature taken as surely meant in kelvin, K: below, degrees Celsius were probably typed.
const COLDEST_LIKELY_K: f64 = 150.0;

impl Design {
    /// Start of a piece of the outline, m.
    pub fn from_m(&self, piece: usize) -> Vec2 {
        let n = self.duct.len();
        self.duct[(piece + n - 1) % n].to_m
    }

    /// Middle of a piece of the outline, m.
    pub fn middle_m(&self, piece: usize) -> Vec2 {
        let shape = &self.duct[piece].shape;
        Segment::new(shape, self.from_m(piece), self.duct[piece].to_m).point(0.5)
    }

    /// Flow into the duct that a piece is given, m^2/s: none at pressure ports, zero at walls.
    ///
    /// For a velocity that is the same all along the piece: `-u . n L` with the outward normal, which depends
    /// on the piece's ends only.
    pub fn given_inflow_m2_s(&self, piece: usize) -> Option<f64> {
        match self.duct[piece].flow {
            FlowCondition::Wall {} | FlowCondition::Symmetry {} => Some(0.0),
            FlowCondition::FlowRate { flow_rate_m2_s } => Some(flow_rate_m2_s),
            FlowCondition::Velocity { velocity_m_s } => {
                let outward = (self.duct[piece].to_m - self.from_m(piece)).right();
                Some(-Vec2::from(velocity_m_s).dot(outward))
            }
            FlowCondition::TotalPressure { .. } | FlowCondition::StaticPressure { .. } => None,
        }
    }

    /// Whether no port fixes how much flows: the flow follows from pressures alone.
    pub fn is_at_fixed_head(&self) -> bool {
        (0..self.duct.len()).all(|i| self.given_inflow_m2_s(i).is_none_or(|q| q == 0.0))
    }

    /// What is allowed but probably not meant.
    pub fn input_cautions(&self) -> Vec<Caution> {
        let mut cautions = Vec::new();
        let mut say = |text: String, place_m| {
            cautions.push(Caution {
                level: CautionLevel::Caution,
                text,
                place_m,
            });
        };
        let pressures: Vec<f64> = self
            .duct
            .iter()
            .filter_map(|p| pressure_pa(&p.flow))
            .collect();
        if self.is_at_fixed_head()
            && let Some(&first) = pressures.first()
            && pressures.iter().all(|&p| p == first)
        {
            say(
                format!(
                    "All ports are at the same pressure of {first} Pa, so nothing flows; raise one of them."
                ),
                None,
            );
        }
        let pieces = (0..self.duct.len()).map(|i| {
            (
                &self.duct[i].name,
                &self.duct[i].thermal,
                Some(self.middle_m(i)),
            )
        });
        let inserts = self
            .inserts
            .iter()
            .map(|i| (&i.name, &i.thermal, i.points_m.first().copied()));
        let mut temperatures = Vec::new();
        let mut heated = false;
        for (name, thermal, place_m) in pieces.chain(inserts) {
            let kelvin = match *thermal {
                ThermalCondition::FixedTemperature { temperature_k } => temperature_k,
                ThermalCondition::Convection { ambient_k, .. } => ambient_k,
                ThermalCondition::FixedFlux { flux_w_m2 } => {
                    heated |= flux_w_m2 != 0.0;
                    continue;
                }
                ThermalCondition::Solid { source_w_m3, .. } => {
                    heated |= source_w_m3 != 0.0;
                    continue;
                }
                ThermalCondition::Adiabatic {} => continue,
            };
            if kelvin < COLDEST_LIKELY_K {
                say(
                    format!(
                        "\"{name}\" is at {kelvin} K, which is {:.0} degrees Celsius; temperatures are in kelvin.",
                        kelvin - 273.15
                    ),
                    place_m,
                );
            }
            temperatures.push(kelvin);
        }
        heated |= temperatures.windows(2).any(|pair| pair[0] != pair[1]);
        if !heated {
            say(
                "Nothing is hotter or colder than the fluid that comes in, so no heat is moved."
                    .into(),
                None,
            );
        }
        cautions
    }
}

/// Pressure that a port is given, Pa.
fn pressure_pa(flow: &FlowCondition) -> Option<f64> {
    match *flow {
        FlowCondition::TotalPressure { pressure_pa }
        | FlowCondition::StaticPressure { pressure_pa } => Some(pressure_pa),
        _ => None,
    }
}

pub(super) fn check(design: &Design, faults: &mut Vec<Fault>) {
    let n = design.duct.len();
    if n < 2 {
        let sentence = format!(
            "the duct has {n} pieces, but a closed outline needs at least 2: add walls and ports"
        );
        faults.push(Fault::new("design.duct", sentence));
        return;
    }
    if !design.duct.iter().all(|p| p.to_m.is_finite()) {
        return;
    }
    balance(design, faults);
    for i in 0..n {
        corner(design, i, (i + 1) % n, faults);
    }
    incoming_temperature(design, faults);
}

/// There are ports, what they are given adds up, and one of them sets the level of pressure.
fn balance(design: &Design, faults: &mut Vec<Fault>) {
    let ports: Vec<usize> = (0..design.duct.len())
        .filter(|&i| design.duct[i].flow.is_port())
        .collect();
    let all = "design.duct";
    match ports[..] {
        [] => {
            let sentence =
                "no piece is a port, so nothing can flow: make one the inlet and one the outlet";
            faults.push(Fault::new(all, sentence));
            return;
        }
        [only] => {
            let sentence = format!(
                "\"{}\" is the only port, so nothing can flow through: make another piece a port",
                design.duct[only].name
            );
            faults.push(Fault::new(all, sentence).at(design.middle_m(only)));
            return;
        }
        _ => {}
    }
    let inflows: Vec<f64> = ports
        .iter()
        .filter_map(|&i| design.given_inflow_m2_s(i))
        .collect();
    if inflows.len() < ports.len() {
        return;
    }
    let sum: f64 = inflows.iter().sum();
    let into: f64 = inflows.iter().filter(|q| **q > 0.0).sum();
    let mut sentence = String::from(
        "every port is given its flow and none a pressure, so the level of pressure is undefined",
    );
    if sum.abs() > FLOW_ROUNDING * into.max(-sum) {
        sentence += &format!(", and {sum:.6} m^2/s more comes in than goes out");
    }
    sentence += ": make an outlet a static pressure port";
    faults.push(Fault::new(all, sentence));
}

/// Velocities on both sides of the corner at the end of a piece agree.
fn corner(design: &Design, before: usize, after: usize, faults: &mut Vec<Fault>) {
    for (port, other) in [(before, after), (after, before)] {
        let FlowCondition::Velocity { velocity_m_s } = design.duct[port].flow else {
            continue;
        };
        let u = Vec2::from(velocity_m_s);
        let neighbour = &design.duct[other];
        let start = design.from_m(other);
        let curve = Segment::new(&neighbour.shape, start, neighbour.to_m);
        let tangent = curve
            .derivative(if other == after { 0.0 } else { 1.0 })
            .normalized();
        let off = |part: f64| part.abs() > FLOW_ROUNDING * u.norm();
        let name = &neighbour.name;
        let reason = match neighbour.flow {
            FlowCondition::Wall {} if off(u.norm()) => {
                format!(
                    "the wall \"{name}\", where the fluid must stand still: make that a symmetry plane or a velocity piece, or this a flow rate port"
                )
            }
            FlowCondition::FlowRate { .. } if off(u.norm()) => {
                format!(
                    "the flow rate port \"{name}\", whose parabola is zero there: give both a velocity"
                )
            }
            FlowCondition::Symmetry {} if off(u.cross(tangent)) => {
                format!(
                    "the symmetry plane \"{name}\", which it would cross: turn the velocity along that plane"
                )
            }
            FlowCondition::TotalPressure { .. } | FlowCondition::StaticPressure { .. }
                if off(u.dot(tangent)) =>
            {
                format!(
                    "the pressure port \"{name}\", which fluid passes straight only: turn the velocity square to that port"
                )
            }
            // Told once, from the first of the two.
            FlowCondition::Velocity { velocity_m_s: v }
                if port == before && off((u - Vec2::from(v)).norm()) =>
            {
                format!("\"{name}\" with another velocity: give both the same")
            }
            _ => continue,
        };
        let sentence = format!(
            "the velocity ({}, {}) m/s of \"{}\" would jump where it meets {reason}",
            u.x, u.y, design.duct[port].name
        );
        let key = format!("design.duct[{port}].flow");
        faults.push(Fault::new(key, sentence).at(design.duct[before].to_m));
    }
}

/// Ports through which fluid surely comes in have its temperature, and no port has a condition of a wall.
fn incoming_temperature(design: &Design, faults: &mut Vec<Fault>) {
    let pressures = || design.duct.iter().filter_map(|p| pressure_pa(&p.flow));
    let highest = pressures().fold(f64::NEG_INFINITY, f64::max);
    let lowest = pressures().fold(f64::INFINITY, f64::min);
    let mut any_temperature = false;
    let mut told = false;
    for (i, piece) in design
        .duct
        .iter()
        .enumerate()
        .filter(|(_, p)| p.flow.is_port())
    {
        let key = format!("design.duct[{i}].thermal");
        match piece.thermal {
            ThermalCondition::FixedTemperature { .. } => any_temperature = true,
            ThermalCondition::Adiabatic {} => {
                let comes_in = match design.given_inflow_m2_s(i) {
                    Some(inflow) => inflow > 0.0,
                    None => {
                        design.is_at_fixed_head()
                            && lowest < highest
                            && pressure_pa(&piece.flow) == Some(highest)
                    }
                };
                if comes_in {
                    told = true;
                    let sentence = format!(
                        "fluid comes in through \"{}\", so its temperature must be given: use \"fixed_temperature\"",
                        piece.name
                    );
                    faults.push(Fault::new(key, sentence).at(design.middle_m(i)));
                }
            }
            _ => {
                told = true;
                let sentence = format!(
                    "the port \"{}\" is open to the fluid: use \"fixed_temperature\" where it comes in, \"adiabatic\" where it leaves",
                    piece.name
                );
                faults.push(Fault::new(key, sentence).at(design.middle_m(i)));
            }
        }
    }
    if !any_temperature && !told && design.duct.iter().any(|p| p.flow.is_port()) {
        let sentence = "no port has a temperature, so that of the fluid coming in is unknown: give the inlet a \"fixed_temperature\"";
        faults.push(Fault::new("design.duct", sentence));
    }
}
