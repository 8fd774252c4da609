//! An insert from a list of coordinates.

use super::{Design, Insert};
use crate::geometry::coordinate_list::{CoordinateList, ListError};
use crate::geometry::fit::closed_spline;
use crate::physics::ThermalCondition;

/// Temperature of an imported insert where there is no other insert to take its condition from, K.
const USUAL_TEMPERATURE_K: f64 = 330.0;

impl Design {
    /// The insert that a coordinate list describes, under a free name and with the thermal condition of the first
    /// insert, and the largest deviation of its spline from the list, m. The design is not changed.
    ///
    /// # Errors
    /// [`ListError`] with the line of the list.
    pub fn insert_from_list(&self, text: &str) -> Result<(Insert, f64), ListError> {
        let list = CoordinateList::read(text)?;
        let fitted = closed_spline(&list.points_m, None);
        let stem = list
            .name
            .filter(|n| !n.trim().is_empty())
            .unwrap_or_else(|| "imported".into());
        let taken = |n: &str| self.inserts.iter().any(|i| i.name == n);
        let name = (1..)
            .map(|i| {
                if i == 1 {
                    stem.clone()
                } else {
                    format!("{stem} {i}")
                }
            })
            .find(|n| !taken(n))
            .unwrap_or_default();
        let usual = ThermalCondition::FixedTemperature {
            temperature_k: USUAL_TEMPERATURE_K,
        };
        let thermal = self.inserts.first().map_or(usual, |i| i.thermal.clone());
        let points_m = fitted.spline.controls().to_vec();
        Ok((
            Insert {
                name,
                points_m,
                frozen: false,
                thermal,
            },
            fitted.deviation_m,
        ))
    }
}
