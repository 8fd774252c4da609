//! Whether limits name what there is, bound it from sensible sides and can be met together; and whether they
//! suffice to make an improvement end.

use super::fault::Fault;
use super::validate::positive;
use super::{Aim, Design, Insert, Limit, Project};
use crate::physics::ThermalCondition;
use std::f64::consts::PI;

impl Limit {
    /// Name of the insert that it is about; none for all free inserts and for the whole.
    pub fn insert(&self) -> Option<&str> {
        match self {
            Self::Area { insert, .. }
            | Self::Perimeter { insert, .. }
            | Self::WallGap { insert, .. }
            | Self::CurvatureRadius { insert, .. }
            | Self::Thickness { insert, .. }
            | Self::BoundingBox { insert, .. } => insert.as_deref(),
            Self::Centroid { insert, .. } => Some(insert),
            Self::InsertGap { .. } | Self::Heat { .. } | Self::TotalPressureDrop { .. } => None,
        }
    }

    /// Whether it speaks of this insert's contour.
    pub fn concerns(&self, insert: &Insert) -> bool {
        match self {
            Self::InsertGap { .. } | Self::Heat { .. } | Self::TotalPressureDrop { .. } => false,
            _ => self
                .insert()
                .map_or(!insert.frozen, |name| name == insert.name),
        }
    }
}

impl Project {
    /// What keeps an improvement from being run, besides [`Project::faults`].
    pub fn improve_faults(&self) -> Vec<Fault> {
        self.design.improve_faults()
    }
}

impl Design {
    /// What keeps an improvement from being run, besides [`Design::faults`].
    pub fn improve_faults(&self) -> Vec<Fault> {
        let mut faults = Vec::new();
        if self.inserts.iter().all(|i| i.frozen) {
            let sentence = "no insert is free to change: set \"frozen\" of at least one to false";
            faults.push(Fault::new("design.inserts", sentence));
        }
        let fixed = |i: &Insert| {
            matches!(
                i.thermal,
                ThermalCondition::FixedTemperature { .. } | ThermalCondition::Adiabatic {}
            )
        };
        if self.aim == (Aim::LeastPeakTemperature {}) && self.inserts.iter().all(fixed) {
            let sentence = "the surface temperature of every insert is given or free of heat, so no shape lowers its peak: give an insert a flux or make it a solid with a source, or choose another aim";
            faults.push(Fault::new("design.aim", sentence));
        }
        let carries_no_heat = |i: &Insert| match i.thermal {
            ThermalCondition::Adiabatic {} => true,
            // What a contour of given flux or a solid of given source gives off hangs on its size, not on the flow.
            _ => false,
        };
        let wants_heat = matches!(self.aim, Aim::MostHeat {} | Aim::MostHeatPerPumpingPower {});
        if wants_heat && self.inserts.iter().all(carries_no_heat) {
            let sentence = "no insert gives off heat: give one a thermal condition other than \"adiabatic\", or choose another aim";
            faults.push(Fault::new("design.aim", sentence));
        }
        faults
    }

    /// A sentence when a free insert could lengthen (aims of heat) or shrink away (aims of loss) without end,
    /// since no limit bounds it from that side.
    pub fn bounding_limit_missing(&self) -> Option<String> {
        let grows = match self.aim {
            Aim::MostHeat {} | Aim::MostHeatPerPumpingPower {} | Aim::LeastPeakTemperature {} => {
                true
            }
            Aim::LeastTotalPressureLoss {} | Aim::LeastPumpingPower {} | Aim::LeastDrag {} => false,
        };
        let holds_heat = self.limits.iter().any(|l| matches!(l, Limit::Heat { .. }));
        let loose = self.inserts.iter().filter(|i| !i.frozen).find(|insert| {
            let bounds = |limit: &Limit| {
                limit.concerns(insert)
                    && if grows {
                        bounds_length(limit)
                    } else {
                        bounds_smallness(limit)
                    }
            };
            !(self.limits.iter().any(bounds) || (!grows && holds_heat))
        })?;
        Some(if grows {
            format!(
                "nothing keeps \"{}\" from lengthening step by step, since more surface always moves more heat: add a limit on its thickness, perimeter, area or bounding box",
                loose.name
            )
        } else {
            format!(
                "nothing keeps \"{}\" from shrinking away, since less of it always costs less: add a limit on its area, perimeter or thickness from below, or on the heat",
                loose.name
            )
        })
    }
}

/// Keeps a contour from lengthening without end.
fn bounds_length(limit: &Limit) -> bool {
    match limit {
        Limit::Area {
            equal_m2,
            at_most_m2,
            ..
        } => equal_m2.is_some() || at_most_m2.is_some(),
        Limit::Perimeter { at_most_m, .. } => at_most_m.is_some(),
        Limit::Thickness { .. } | Limit::BoundingBox { .. } => true,
        _ => false,
    }
}

/// Keeps a contour from shrinking to nothing.
fn bounds_smallness(limit: &Limit) -> bool {
    match limit {
        Limit::Area {
            equal_m2,
            at_least_m2,
            ..
        } => equal_m2.is_some() || at_least_m2.is_some(),
        Limit::Perimeter { at_least_m, .. } => at_least_m.is_some(),
        Limit::Thickness { .. } | Limit::CurvatureRadius { .. } => true,
        _ => false,
    }
}

pub(super) fn check(design: &Design, faults: &mut Vec<Fault>) {
    for (i, limit) in design.limits.iter().enumerate() {
        let key = format!("design.limits[{i}]");
        if let Some(name) = limit.insert()
            && !design.inserts.iter().any(|insert| insert.name == name)
        {
            let sentence = format!(
                "there is no insert \"{name}\": correct the name or leave it out for every free insert"
            );
            faults.push(Fault::new(format!("{key}.insert"), sentence));
        }
        one(&key, limit, faults);
    }
    for insert in &design.inserts {
        together(design, insert, faults);
    }
}

/// Bounds of one limit.
fn one(key: &str, limit: &Limit, faults: &mut Vec<Fault>) {
    let mut above = |name: &str, value: Option<f64>, unit: &str| {
        if let Some(value) = value {
            positive(&format!("{key}.{name}"), value, unit, faults);
        }
    };
    match limit {
        Limit::Area {
            equal_m2,
            at_least_m2,
            at_most_m2,
            ..
        } => {
            above("equal_m2", *equal_m2, "m^2");
            above("at_least_m2", *at_least_m2, "m^2");
            above("at_most_m2", *at_most_m2, "m^2");
            if equal_m2.is_some() && (at_least_m2.is_some() || at_most_m2.is_some()) {
                let sentence = "\"equal_m2\" leaves no room for \"at_least_m2\" or \"at_most_m2\": keep one kind";
                faults.push(Fault::new(key, sentence));
            }
            pair(
                key,
                equal_m2.or(*at_least_m2),
                equal_m2.or(*at_most_m2),
                "m^2",
                faults,
            );
        }
        Limit::Perimeter {
            at_least_m,
            at_most_m,
            ..
        } => {
            above("at_least_m", *at_least_m, "m");
            above("at_most_m", *at_most_m, "m");
            pair(key, *at_least_m, *at_most_m, "m", faults);
        }
        Limit::WallGap { at_least_m, .. }
        | Limit::InsertGap { at_least_m }
        | Limit::CurvatureRadius { at_least_m, .. }
        | Limit::Thickness { at_least_m, .. } => above("at_least_m", Some(*at_least_m), "m"),
        Limit::Heat { at_least_w_m } => above("at_least_w_m", Some(*at_least_w_m), "W/m"),
        Limit::TotalPressureDrop { at_most_pa } => above("at_most_pa", Some(*at_most_pa), "Pa"),
        Limit::BoundingBox {
            lower_left_m: low,
            upper_right_m: high,
            ..
        } => {
            if !(low.x < high.x && low.y < high.y) {
                let sentence = format!(
                    "the box from ({}, {}) to ({}, {}) m has no inside: its upper right corner must lie above and right of the lower left",
                    low.x, low.y, high.x, high.y
                );
                faults.push(Fault::new(key, sentence).at(*low));
            }
        }
        Limit::Centroid { .. } => {}
    }
}

fn pair(key: &str, low: Option<f64>, high: Option<f64>, unit: &str, faults: &mut Vec<Fault>) {
    match (low, high) {
        (None, None) => {
            let sentence = "bounds nothing: give it at least one bound or remove it";
            faults.push(Fault::new(key, sentence));
        }
        (Some(low), Some(high)) if low > high => {
            let sentence = format!(
                "at least {low} {unit} and at most {high} {unit} cannot both hold: move one of them"
            );
            faults.push(Fault::new(key, sentence));
        }
        _ => {}
    }
}

/// Bounds of all limits on one insert that no closed curve meets.
fn together(design: &Design, insert: &Insert, faults: &mut Vec<Fault>) {
    let mut area = (0.0_f64, f64::INFINITY);
    let mut perimeter = (0.0_f64, f64::INFINITY);
    let mut radius = 0.0_f64;
    for limit in design.limits.iter().filter(|l| l.concerns(insert)) {
        match *limit {
            Limit::Area {
                equal_m2,
                at_least_m2,
                at_most_m2,
                ..
            } => {
                area.0 = area.0.max(equal_m2.or(at_least_m2).unwrap_or(0.0));
                area.1 = area.1.min(equal_m2.or(at_most_m2).unwrap_or(f64::INFINITY));
            }
            Limit::Perimeter {
                at_least_m,
                at_most_m,
                ..
            } => {
                perimeter.0 = perimeter.0.max(at_least_m.unwrap_or(0.0));
                perimeter.1 = perimeter.1.min(at_most_m.unwrap_or(f64::INFINITY));
            }
            Limit::CurvatureRadius { at_least_m, .. } => radius = radius.max(at_least_m),
            _ => {}
        }
    }
    let mut cannot = |why: String| {
        let sentence = format!(
            "the limits on \"{}\" cannot be met together: {why}",
            insert.name
        );
        faults.push(Fault::new("design.limits", sentence));
    };
    // Isoperimetric inequality: a closed curve of length P encloses at most P^2/(4 pi).
    let most_area = perimeter.1 * perimeter.1 / (4.0 * PI);
    // Pestov and Ionin (1959, from memory): a simple closed curve whose radius of curvature is nowhere below r
    // encloses a disc of radius r.
    let least_area = PI * radius * radius;
    if area.0 > area.1 {
        cannot(format!(
            "its area at least {} m^2 and at most {} m^2",
            area.0, area.1
        ));
    } else if perimeter.0 > perimeter.1 {
        cannot(format!(
            "its perimeter at least {} m and at most {} m",
            perimeter.0, perimeter.1
        ));
    } else if area.0 > most_area {
        cannot(format!(
            "a contour of at most {} m encloses at most {most_area:.6e} m^2 (a circle), but {} m^2 are asked for",
            perimeter.1, area.0
        ));
    } else if least_area > area.1 {
        cannot(format!(
            "a contour with a radius of curvature of {radius} m or more encloses at least {least_area:.6e} m^2, but {} m^2 are asked for",
            area.1
        ));
    }
}
