//! Plain arrays for drawing: fields on flat triangles, profiles along lines.

/// Fields at the points of a fine flat triangulation (each cell cut in k^2).
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FieldSnapshot {
    /// Points, m.
    pub points_m: Vec<[f32; 2]>,
    /// Triangles; those of the fluid first.
    pub triangles: Vec<[u32; 3]>,
    /// How many of the triangles carry fluid.
    pub fluid_triangles: usize,
    /// Temperature at the points, K.
    pub temperature_k: Vec<f32>,
    /// Velocity at the points, m/s (zero in solids).
    pub velocity_m_s: Vec<[f32; 2]>,
    /// Static pressure, Pa (zero in solids).
    pub pressure_pa: Vec<f32>,
    /// Total pressure p + rho |u|^2/2, Pa (zero in solids).
    pub total_pressure_pa: Vec<f32>,
    /// Lines of the mesh's cells, as pairs of points.
    pub cell_lines: Vec<[u32; 2]>,
    /// Heat flux into the fluid along each insert's contour.
    pub insert_flux: Vec<LineProfile>,
    /// Temperature along each insert's contour.
    pub insert_temperature: Vec<LineProfile>,
    /// Normal velocity into the duct over each port.
    pub port_velocity: Vec<LineProfile>,
    /// Temperature over each port.
    pub port_temperature: Vec<LineProfile>,
}

/// A quantity along a line.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct LineProfile {
    /// Name of the insert or port.
    pub name: String,
    /// Arc length from the line's start, m.
    pub along_m: Vec<f64>,
    /// Place, m.
    pub place_m: Vec<[f64; 2]>,
    /// Value, SI.
    pub value: Vec<f64>,
}
