//! Which quantity is painted: values, name and unit.

use crate::study::FieldSnapshot;

/// A quantity over the duct.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Field {
    /// Temperature, K.
    #[default]
    Temperature,
    /// Speed |u|, m/s.
    Speed,
    /// Static pressure, Pa.
    Pressure,
    /// Total pressure p + rho |u|^2/2, Pa.
    TotalPressure,
}

impl Field {
    /// Name and unit for a legend.
    pub fn legend(self) -> &'static str {
        match self {
            Self::Temperature => "Temperature, K",
            Self::Speed => "Speed, m/s",
            Self::Pressure => "Static pressure, Pa",
            Self::TotalPressure => "Total pressure, Pa",
        }
    }

    /// Values at the points of a snapshot, SI.
    pub fn values(self, snapshot: &FieldSnapshot) -> Vec<f32> {
        match self {
            Self::Temperature => snapshot.temperature_k.clone(),
            Self::Speed => snapshot
                .velocity_m_s
                .iter()
                .map(|u| u[0].hypot(u[1]))
                .collect(),
            Self::Pressure => snapshot.pressure_pa.clone(),
            Self::TotalPressure => snapshot.total_pressure_pa.clone(),
        }
    }

    /// Triangles on which it has a meaning: solids have a temperature only.
    pub fn triangles(self, snapshot: &FieldSnapshot) -> &[[u32; 3]] {
        let fluid = snapshot.fluid_triangles.min(snapshot.triangles.len());
        match self {
            Self::Temperature => &snapshot.triangles,
            _ => &snapshot.triangles[..fluid],
        }
    }

    /// Lowest and highest finite value over its triangles.
    pub fn range(self, snapshot: &FieldSnapshot) -> Option<[f64; 2]> {
        let values = self.values(snapshot);
        let all = self.triangles(snapshot).iter().flatten();
        let finite = all
            .filter_map(|&i| values.get(i as usize))
            .filter(|v| v.is_finite());
        finite.fold(None, |range, &v| {
            let v = f64::from(v);
            Some(range.map_or([v, v], |[low, high]: [f64; 2]| [low.min(v), high.max(v)]))
        })
    }
}
