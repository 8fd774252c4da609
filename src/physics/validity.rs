//! Cautions: where the model's assumptions end, each with the number that says so.
//!
//! Thresholds marked 'common practice' have no source; those from memory say so.

use super::{Problem, Quantities, ThermalCondition};
use crate::base::Vec2;
use serde::Serialize;

/// How much a caution matters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum CautionLevel {
    /// Good to know.
    Note,
    /// Figures may be off.
    Caution,
    /// Figures should not be used as they are, or someone may get hurt.
    Warning,
}

/// A live, specific caution: its text names the number that triggers it.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Caution {
    /// How much it matters.
    pub level: CautionLevel,
    /// One or two sentences with the number.
    pub text: String,
    /// Place on the drawing, m, if it has one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub place_m: Option<Vec2>,
}

/// What the cautions need to know of an insert's shape.
#[derive(Clone, Debug, PartialEq)]
pub struct InsertExtent {
    /// Name.
    pub name: String,
    /// Centroid, m.
    pub centroid_m: Vec2,
    /// Extent across the inlet's flow direction, m.
    pub across_m: f64,
    /// Perimeter, m.
    pub perimeter_m: f64,
}

/// Transition in long ducts, Re on the hydraulic diameter: common practice, no source.
const LAMINAR_LIMIT: f64 = 2300.0;
/// Onset of shedding behind a cylinder midway between plates, (D/H, Re on maximum velocity and D): computed
/// values of the project's check values, section 6; published by Sahin and Owens, Phys. Fluids 16, 1305 (2004).
const SHEDDING: [(f64, f64); 7] = [
    (0.0, 46.7),
    (0.1, 50.74),
    (0.2, 69.32),
    (0.3, 94.32),
    (0.5, 123.64),
    (0.7, 109.96),
    (0.8, 109.86),
];
/// Part of the onset above which steadiness is doubtful for other shapes than a cylinder.
const SHEDDING_MARGIN: f64 = 0.7;
/// Standard gravity, m/s^2.
const GRAVITY: f64 = 9.80665;
/// Gr/Re^2 below which buoyancy is small: common practice, no source.
const SMALL_RICHARDSON: f64 = 0.1;
/// Volume expansion of liquids, 1/K: about that of oils, two to three times that of water at room temperature
/// (from memory); used as an upper estimate.
const LIQUID_EXPANSION: f64 = 7e-4;
/// Densities below are gases at ordinary pressure, kg/m^3.
const GAS_DENSITY: f64 = 50.0;
/// Mach number below which a gas flows as if incompressible: common practice, no source.
const SMALL_MACH: f64 = 0.3;
/// Brinkman number below which viscous heating is small: common practice, no source.
const SMALL_BRINKMAN: f64 = 0.01;
/// Standard atmosphere, Pa.
const ATMOSPHERE: f64 = 101_325.0;
/// Temperature differences beyond which constant properties are doubtful, K: a gas changes its viscosity by 10 %
/// in about 40 K, water in 5 K and oil in 2 K; common practice, no source.
const SMALL_DIFFERENCE: [(bool, f64); 2] = [(true, 40.0), (false, 10.0)];
/// Bare metal burns the skin at contact: within ten minutes at 48 C, within a second at about 65 C
/// (ISO 13732-1, from memory; refer to the standard).
const TOUCH_MINUTES_K: f64 = 321.15;
const TOUCH_SECOND_K: f64 = 338.15;
/// Gauge pressure above which rules for pressure equipment may apply, Pa (from memory: 0.5 bar in the European
/// directive; refer to local codes).
const PRESSURE_RULES: f64 = 50_000.0;
/// Stefan-Boltzmann constant, W/(m^2 K^4) (CODATA 2018).
const STEFAN_BOLTZMANN: f64 = 5.670_374_419e-8;
/// Radiation below this part of the convective coefficient is left out: common practice, no source.
const SMALL_RADIATION: f64 = 0.05;
/// Balances worse than this ask for a finer mesh.
const GOOD_BALANCE: f64 = 5e-3;

/// All cautions of a state, worst first.
pub fn cautions(
    problem: &Problem,
    q: &Quantities,
    inserts: &[InsertExtent],
    area_relative: f64,
) -> Vec<Caution> {
    let mut list = Vec::new();
    let fluid = &problem.fluid;
    let gas = fluid.density_kg_m3 < GAS_DENSITY;
    let mut say = |level, text: String, place_m| {
        list.push(Caution {
            level,
            text,
            place_m,
        })
    };
    use CautionLevel::{Caution as Doubt, Note, Warning};

    if q.reynolds > LAMINAR_LIMIT {
        say(
            Warning,
            format!(
                "Re = {:.0} on the hydraulic diameter exceeds about {LAMINAR_LIMIT:.0}: a long duct would be \
                 turbulent, and these laminar figures do not hold.",
                q.reynolds
            ),
            None,
        );
    }
    for insert in inserts {
        let peak = 1.5 * q.mean_velocity_m_s;
        let re = fluid.density_kg_m3 * peak * insert.across_m / fluid.viscosity_pa_s;
        let onset = shedding_onset(insert.across_m / q.inlet_width_m);
        if re > SHEDDING_MARGIN * onset {
            let level = if re > onset { Warning } else { Doubt };
            let reading = if re > onset {
                "would shed vortices"
            } else {
                "is close to shedding vortices"
            };
            say(
                level,
                format!(
                    "Re = {re:.0} on the height of {} and the peak inflow: a round tube as high {reading} (onset \
                     at {onset:.0}); whether this flow stays steady is not known.",
                    insert.name
                ),
                Some(insert.centroid_m),
            );
        }
    }
    let [cold, hot] = q.temperature_range_k;
    let difference = hot - cold;
    let velocity = q.mean_velocity_m_s;
    if difference > 0.0 && velocity > 0.0 {
        let expansion = if gas {
            1.0 / (0.5 * (hot + cold))
        } else {
            LIQUID_EXPANSION
        };
        let richardson = GRAVITY * expansion * difference * q.inlet_width_m / velocity.powi(2);
        if richardson > SMALL_RICHARDSON {
            let level = if richardson > 1.0 { Warning } else { Doubt };
            say(
                level,
                format!(
                    "Ri = Gr/Re² = {richardson:.2} exceeds {SMALL_RICHARDSON}: buoyancy, which is left out, would \
                     change flow and heat (expansion {expansion:.1e} 1/K{}).",
                    if gas {
                        ""
                    } else {
                        ", an upper estimate for liquids"
                    }
                ),
                None,
            );
        }
        let brinkman =
            fluid.viscosity_pa_s * velocity.powi(2) / (fluid.conductivity_w_m_k * difference);
        if brinkman > SMALL_BRINKMAN {
            say(
                Doubt,
                format!(
                    "Br = {brinkman:.3} exceeds {SMALL_BRINKMAN}: viscous heating, which is left out, matters."
                ),
                None,
            );
        }
        let allowed = SMALL_DIFFERENCE
            .iter()
            .find(|s| s.0 == gas)
            .map_or(f64::INFINITY, |s| s.1);
        if difference > allowed {
            say(
                Doubt,
                format!(
                    "Temperatures differ by {difference:.0} K, more than the {allowed:.0} K over which a {} keeps its \
                     viscosity within about a tenth: properties are taken as constant.",
                    if gas { "gas" } else { "liquid" }
                ),
                None,
            );
        }
    }
    if gas {
        let specific = ATMOSPHERE / (fluid.density_kg_m3 * cold.max(1.0));
        let ratio = fluid.heat_capacity_j_kg_k / (fluid.heat_capacity_j_kg_k - specific).max(1e-9);
        let mach = q.max_speed_m_s / (ratio * specific * cold.max(1.0)).sqrt();
        if mach > SMALL_MACH {
            say(
                Warning,
                format!(
                    "Ma = {mach:.2} exceeds {SMALL_MACH}: the gas would be compressed, which is left out."
                ),
                None,
            );
        }
    }
    radiation(q, inserts, gas, &mut say);
    hazards(q, inserts, &mut say);
    for (insert, thermal) in inserts.iter().zip(&problem.insert_thermal) {
        if heats_by_itself(thermal) {
            say(
                Note,
                format!(
                    "{} gives off its heat whatever the flow: if the flow fails, it gets far hotter than shown; plan a \
                     safeguard against lost cooling.",
                    insert.name
                ),
                Some(insert.centroid_m),
            );
        }
    }
    for (name, value) in [
        ("dissipation against pressure times flow", q.energy_relative),
        ("heat in against heat out", q.heat_relative),
        ("mesh area against drawn area", area_relative),
    ] {
        if value.abs() > GOOD_BALANCE {
            say(
                Doubt,
                format!(
                    "The balance of {name} is off by {:.2} %: use a finer accuracy.",
                    100.0 * value
                ),
                None,
            );
        }
    }
    say(
        Note,
        format!(
            "Two-dimensional and per metre of depth: fair where the depth exceeds about five times the duct's {:.3} m; \
             end walls are left out (common practice, no source).",
            q.inlet_width_m
        ),
        None,
    );
    list.sort_by_key(|c| std::cmp::Reverse(c.level));
    list
}

fn radiation(
    q: &Quantities,
    inserts: &[InsertExtent],
    gas: bool,
    say: &mut impl FnMut(CautionLevel, String, Option<Vec2>),
) {
    if !gas {
        return;
    }
    for (insert, figures) in inserts.iter().zip(&q.inserts) {
        let rise = figures.surface_mean_temperature_k - q.inlet_temperature_k;
        if rise.abs() < 1.0 {
            continue;
        }
        let convective = figures.heat_w_m / (insert.perimeter_m * rise);
        let mean = 0.5 * (figures.surface_mean_temperature_k + q.inlet_temperature_k);
        let radiative = 4.0 * STEFAN_BOLTZMANN * mean.powi(3);
        if convective > 0.0 && radiative > SMALL_RADIATION * convective {
            say(
                CautionLevel::Note,
                format!(
                    "Radiation, which is left out, could add up to {:.0} % to the heat of {} (black surfaces, {radiative:.1} \
                     against {convective:.0} W/(m² K)).",
                    100.0 * radiative / convective,
                    insert.name
                ),
                Some(insert.centroid_m),
            );
        }
    }
}

fn hazards(
    q: &Quantities,
    inserts: &[InsertExtent],
    say: &mut impl FnMut(CautionLevel, String, Option<Vec2>),
) {
    for (insert, figures) in inserts.iter().zip(&q.inserts) {
        let t = figures.max_temperature_k;
        if t > TOUCH_MINUTES_K {
            let level = if t > TOUCH_SECOND_K {
                CautionLevel::Warning
            } else {
                CautionLevel::Caution
            };
            let time = if t > TOUCH_SECOND_K {
                "a second"
            } else {
                "minutes"
            };
            say(
                level,
                format!(
                    "{} reaches {:.0} °C: bare metal this hot burns the skin within {time} (ISO 13732-1, from memory; refer \
                     to the standard and to local codes, and plan for lost cooling).",
                    insert.name,
                    t - 273.15
                ),
                Some(insert.centroid_m),
            );
        }
    }
    let pressure = q
        .static_pressure_drop_pa
        .abs()
        .max(q.total_pressure_drop_pa.abs());
    if pressure > PRESSURE_RULES {
        say(
            CautionLevel::Warning,
            format!(
                "Pressures reach {:.2} bar: rules for pressure equipment may apply; have it designed and checked under \
                 local codes by a licensed engineer.",
                pressure / 1e5
            ),
            None,
        );
    }
}

/// Onset of shedding by blockage, linear between the values of [`SHEDDING`].
fn shedding_onset(blockage: f64) -> f64 {
    let last = SHEDDING[SHEDDING.len() - 1];
    if blockage >= last.0 {
        return last.1;
    }
    let i = SHEDDING
        .partition_point(|s| s.0 <= blockage)
        .clamp(1, SHEDDING.len() - 1);
    let (a, b) = (SHEDDING[i - 1], SHEDDING[i]);
    a.1 + (b.1 - a.1) * ((blockage - a.0) / (b.0 - a.0)).clamp(0.0, 1.0)
}

/// Whether an insert's heat would go on rising if the flow stopped (given heat rather than given temperature).
fn heats_by_itself(condition: &ThermalCondition) -> bool {
    matches!(
        condition,
        ThermalCondition::FixedFlux { .. } | ThermalCondition::Solid { .. }
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn onset_follows_the_published_curve() {
        assert_eq!(shedding_onset(0.3), 94.32);
        assert!((shedding_onset(0.4) - 108.98).abs() < 1e-9);
        assert_eq!(shedding_onset(2.0), 109.86);
    }
}
