//! Properties of what is selected: typed coordinates, conditions, fluid, settings.

use super::field::{Units, choice, quantity, words};
use crate::app::words::{Edit, Selection};
use crate::base::units::Kind;
use crate::base::vec2;
use crate::geometry::PieceShape;
use crate::physics::{FlowCondition, ThermalCondition, tables};
use crate::study::{Accuracy, Design, Insert, RunSettings};
use egui::{Grid, Ui};

/// Draw the properties; returns edits.
pub fn show(
    ui: &mut Ui,
    design: &Design,
    run: &RunSettings,
    selection: &Selection,
    units: Units,
) -> Vec<Edit> {
    let mut edits = Vec::new();
    match *selection {
        Selection::Nothing => study(ui, design, run, units, &mut edits),
        Selection::Insert(i) => {
            if let Some(now) = design.inserts.get(i) {
                insert(ui, i, now, units, &mut edits);
            }
        }
        Selection::Control { insert: i, control } => {
            if let Some(now) = design.inserts.get(i) {
                if let Some(&p) = now.points_m.get(control) {
                    ui.strong(format!("Point {} of {}", control + 1, now.name));
                    Grid::new("point").num_columns(2).show(ui, |ui| {
                        let x = quantity(
                            ui,
                            units,
                            "x",
                            "Along the drawing's horizontal axis",
                            Kind::Length,
                            p.x,
                        );
                        let y = quantity(
                            ui,
                            units,
                            "y",
                            "Along the drawing's vertical axis",
                            Kind::Length,
                            p.y,
                        );
                        if x.is_some() || y.is_some() {
                            let to_m = vec2(x.unwrap_or(p.x), y.unwrap_or(p.y));
                            edits.push(Edit::MoveControl {
                                insert: i,
                                control,
                                to_m,
                            });
                        }
                    });
                    ui.add_space(8.0);
                }
                insert(ui, i, now, units, &mut edits);
            }
        }
        Selection::Piece(i) => piece(ui, i, design, units, &mut edits),
        Selection::Corner(i) => {
            if let Some(now) = design.duct.get(i) {
                ui.strong(format!("Corner at the end of {}", now.name));
                Grid::new("corner").num_columns(2).show(ui, |ui| {
                    let x = quantity(
                        ui,
                        units,
                        "x",
                        "Along the drawing's horizontal axis",
                        Kind::Length,
                        now.to_m.x,
                    );
                    let y = quantity(
                        ui,
                        units,
                        "y",
                        "Along the drawing's vertical axis",
                        Kind::Length,
                        now.to_m.y,
                    );
                    if x.is_some() || y.is_some() {
                        let to_m = vec2(x.unwrap_or(now.to_m.x), y.unwrap_or(now.to_m.y));
                        edits.push(Edit::MoveCorner { piece: i, to_m });
                    }
                });
                ui.add_space(8.0);
                piece(ui, i, design, units, &mut edits);
            }
        }
    }
    edits
}

fn study(ui: &mut Ui, design: &Design, run: &RunSettings, units: Units, edits: &mut Vec<Edit>) {
    ui.strong("Fluid");
    ui.menu_button("Take from a table", |ui| {
        for table in tables::fluids() {
            if ui
                .button(table.name())
                .on_hover_text(table.source())
                .clicked()
            {
                let reference =
                    reference_temperature(design).clamp(table.range_k()[0], table.range_k()[1]);
                if let Ok(fluid) = table.at(reference) {
                    edits.push(Edit::SetFluid(fluid));
                }
                ui.close();
            }
        }
    })
    .response
    .on_hover_text("Properties at the temperature of the inflow, from a published table");
    Grid::new("fluid").num_columns(2).show(ui, |ui| {
        let mut fluid = design.fluid.clone();
        let mut changed = false;
        if let Some(name) = words(ui, "name", "Name of the fluid", &fluid.name) {
            fluid.name = name;
            changed = true;
        }
        for (name, help, kind, slot) in [
            (
                "density",
                "Density, taken as constant",
                Kind::Density,
                &mut fluid.density_kg_m3,
            ),
            (
                "viscosity",
                "Dynamic viscosity, taken as constant",
                Kind::Viscosity,
                &mut fluid.viscosity_pa_s,
            ),
            (
                "conductivity",
                "Thermal conductivity",
                Kind::Conductivity,
                &mut fluid.conductivity_w_m_k,
            ),
            (
                "heat capacity",
                "Heat capacity at constant pressure",
                Kind::HeatCapacity,
                &mut fluid.heat_capacity_j_kg_k,
            ),
        ] {
            if let Some(value) = quantity(ui, units, name, help, kind, *slot) {
                *slot = value;
                changed = true;
            }
        }
        if changed {
            edits.push(Edit::SetFluid(fluid));
        }
    });
    ui.add_space(8.0);
    ui.strong("Computation");
    Grid::new("run").num_columns(2).show(ui, |ui| {
        let mut to = run.clone();
        let accuracies = [Accuracy::Draft, Accuracy::Design, Accuracy::Final];
        let now = accuracies
            .iter()
            .position(|a| *a == run.accuracy)
            .unwrap_or(1);
        if let Some(i) = choice(
            ui,
            "accuracy",
            "Fineness of the mesh: draft to sketch, design to decide, final for the record",
            &["draft", "design", "final"],
            now,
        ) {
            to.accuracy = accuracies[i];
        }
        if let Some(i) = choice(
            ui,
            "order",
            "Order of the velocity and temperature in each cell",
            &["2", "3", "4", "5"],
            run.order - 2,
        ) {
            to.order = i + 2;
        }
        if let Some(steps) = quantity(
            ui,
            units,
            "most steps",
            "Most steps of an improvement",
            Kind::Number,
            run.steps as f64,
        ) {
            to.steps = steps.round().clamp(1.0, 10_000.0) as usize;
        }
        if to != *run {
            edits.push(Edit::SetRun(to));
        }
    });
}

/// Temperature of the first inflow, or room temperature.
fn reference_temperature(design: &Design) -> f64 {
    let ports = design.duct.iter().filter(|p| p.flow.is_port());
    ports
        .filter_map(|p| match p.thermal {
            ThermalCondition::FixedTemperature { temperature_k } => Some(temperature_k),
            _ => None,
        })
        .next()
        .unwrap_or(293.15)
}

fn insert(ui: &mut Ui, i: usize, now: &Insert, units: Units, edits: &mut Vec<Edit>) {
    ui.strong(format!("Insert: {}", now.name));
    let mut to = now.clone();
    let contour = (now.points_m.len() >= 4 && now.points_m.iter().all(|p| p.is_finite()))
        .then(|| now.contour());
    Grid::new("insert").num_columns(2).show(ui, |ui| {
        if let Some(name) = words(ui, "name", "Name, unique among the inserts", &now.name) {
            to.name = name;
        }
        if let Some(contour) = &contour {
            let centre = contour.centroid();
            let x = quantity(
                ui,
                units,
                "centroid x",
                "Move the insert by its centroid",
                Kind::Length,
                centre.x,
            );
            let y = quantity(
                ui,
                units,
                "centroid y",
                "Move the insert by its centroid",
                Kind::Length,
                centre.y,
            );
            if x.is_some() || y.is_some() {
                let by_m = vec2(x.unwrap_or(centre.x), y.unwrap_or(centre.y)) - centre;
                edits.push(Edit::MoveInsert { insert: i, by_m });
            }
            if let Some(angle_rad) = quantity(
                ui,
                units,
                "turn by",
                "Turn counter-clockwise about the centroid",
                Kind::Angle,
                0.0,
            ) {
                edits.push(Edit::TurnInsert {
                    insert: i,
                    angle_rad,
                    factor: 1.0,
                });
            }
            if let Some(factor) = quantity(
                ui,
                units,
                "scale by",
                "Multiply its size",
                Kind::Number,
                1.0,
            ) && factor > 0.0
            {
                edits.push(Edit::TurnInsert {
                    insert: i,
                    angle_rad: 0.0,
                    factor,
                });
            }
            let points = quantity(
                ui,
                units,
                "points",
                "Number of control points; the shape is kept as well as possible",
                Kind::Number,
                now.points_m.len() as f64,
            );
            if let Some(n) = points {
                to.points_m = contour
                    .respaced(n.round().clamp(4.0, 200.0) as usize)
                    .0
                    .controls()
                    .to_vec();
            }
        }
    });
    let mut free = !now.frozen;
    ui.checkbox(&mut free, "free to improve")
        .on_hover_text("Whether the optimiser may change its shape");
    to.frozen = !free;
    if let Some(thermal) = thermal(ui, "insert", &now.thermal, true, units) {
        to.thermal = thermal;
    }
    if to != *now {
        edits.push(Edit::SetInsert { insert: i, to });
    }
    if ui
        .button("Remove insert")
        .on_hover_text("Take this insert out of the duct")
        .clicked()
    {
        edits.push(Edit::RemoveInsert { insert: i });
    }
}

fn piece(ui: &mut Ui, i: usize, design: &Design, units: Units, edits: &mut Vec<Edit>) {
    let Some(now) = design.duct.get(i) else {
        return;
    };
    ui.strong(format!("Piece: {}", now.name));
    Grid::new("piece").num_columns(2).show(ui, |ui| {
        if let Some(to) = words(ui, "name", "Name, unique among the pieces", &now.name) {
            edits.push(Edit::RenamePiece { piece: i, to });
        }
        let shapes = ["straight line", "circular arc", "free spline"];
        let shape = match now.shape {
            PieceShape::Line {} => 0,
            PieceShape::Arc { .. } => 1,
            PieceShape::Spline { .. } => 2,
        };
        let (from, end) = (design.from_m(i), now.to_m);
        if let Some(picked) = choice(ui, "shape", "Shape between its ends", &shapes, shape) {
            let bulge = from.lerp(end, 0.5) + (end - from).right() * 0.15;
            edits.push(Edit::SetPieceShape {
                piece: i,
                to: match picked {
                    0 => PieceShape::Line {},
                    1 => PieceShape::Arc { through_m: bulge },
                    _ => PieceShape::Spline {
                        through_m: vec![from.lerp(end, 1.0 / 3.0), from.lerp(end, 2.0 / 3.0)],
                    },
                },
            });
        }
        let through = match &now.shape {
            PieceShape::Line {} => Vec::new(),
            PieceShape::Arc { through_m } => vec![*through_m],
            PieceShape::Spline { through_m } => through_m.clone(),
        };
        for (k, p) in through.iter().enumerate() {
            let x = quantity(
                ui,
                units,
                &format!("through {} x", k + 1),
                "A point that the piece passes",
                Kind::Length,
                p.x,
            );
            let y = quantity(
                ui,
                units,
                &format!("through {} y", k + 1),
                "A point that the piece passes",
                Kind::Length,
                p.y,
            );
            if x.is_some() || y.is_some() {
                let mut points = through.clone();
                points[k] = vec2(x.unwrap_or(p.x), y.unwrap_or(p.y));
                let to = match now.shape {
                    PieceShape::Arc { .. } => PieceShape::Arc {
                        through_m: points[0],
                    },
                    _ => PieceShape::Spline { through_m: points },
                };
                edits.push(Edit::SetPieceShape { piece: i, to });
            }
        }
    });
    if let PieceShape::Spline { through_m } = &now.shape {
        ui.horizontal(|ui| {
            if ui
                .button("Add a point")
                .on_hover_text("One more point for the spline, near its end")
                .clicked()
            {
                let mut through_m = through_m.clone();
                let last = through_m.last().copied().unwrap_or(design.from_m(i));
                through_m.push(last.lerp(now.to_m, 0.5));
                edits.push(Edit::SetPieceShape {
                    piece: i,
                    to: PieceShape::Spline { through_m },
                });
            }
            if through_m.len() > 1
                && ui
                    .button("Remove a point")
                    .on_hover_text("Remove the spline's last point")
                    .clicked()
            {
                let through_m = through_m[..through_m.len() - 1].to_vec();
                edits.push(Edit::SetPieceShape {
                    piece: i,
                    to: PieceShape::Spline { through_m },
                });
            }
        });
    }
    if let Some(to) = flow(ui, &now.flow, units) {
        edits.push(Edit::SetFlow { piece: i, to });
    }
    let title = if now.flow.is_port() { "port" } else { "wall" };
    if let Some(to) = thermal(ui, title, &now.thermal, false, units) {
        edits.push(Edit::SetPieceThermal { piece: i, to });
    }
    if ui
        .button("Add a corner in the middle")
        .on_hover_text("Split this piece in two")
        .clicked()
    {
        edits.push(Edit::SplitPiece { piece: i, t: 0.5 });
    }
}

fn flow(ui: &mut Ui, now: &FlowCondition, units: Units) -> Option<FlowCondition> {
    let kinds = [
        "wall",
        "symmetry plane",
        "total pressure",
        "static pressure",
        "flow rate",
        "given velocity",
    ];
    let index = match now {
        FlowCondition::Wall {} => 0,
        FlowCondition::Symmetry {} => 1,
        FlowCondition::TotalPressure { .. } => 2,
        FlowCondition::StaticPressure { .. } => 3,
        FlowCondition::FlowRate { .. } => 4,
        FlowCondition::Velocity { .. } => 5,
    };
    let mut to = None;
    Grid::new("flow").num_columns(2).show(ui, |ui| {
        let help = "What holds for the flow here: total pressure belongs where a fan or pump delivers, static pressure where it leaves";
        if let Some(picked) = choice(ui, "flow", help, &kinds, index) {
            to = Some(match picked {
                0 => FlowCondition::Wall {},
                1 => FlowCondition::Symmetry {},
                2 => FlowCondition::TotalPressure { pressure_pa: 0.1 },
                3 => FlowCondition::StaticPressure { pressure_pa: 0.0 },
                4 => FlowCondition::FlowRate { flow_rate_m2_s: 1e-4 },
                _ => FlowCondition::Velocity { velocity_m_s: [0.1, 0.0] },
            });
        }
        match *now {
            FlowCondition::TotalPressure { pressure_pa } => {
                if let Some(pressure_pa) = quantity(ui, units, "pressure", "Total pressure p + ρu²/2", Kind::Pressure, pressure_pa) {
                    to = Some(FlowCondition::TotalPressure { pressure_pa });
                }
            }
            FlowCondition::StaticPressure { pressure_pa } => {
                if let Some(pressure_pa) = quantity(ui, units, "pressure", "Static pressure", Kind::Pressure, pressure_pa) {
                    to = Some(FlowCondition::StaticPressure { pressure_pa });
                }
            }
            FlowCondition::FlowRate { flow_rate_m2_s } => {
                let help = "Flow into the duct per metre of depth, with a parabolic profile; negative draws out";
                if let Some(flow_rate_m2_s) = quantity(ui, units, "flow rate", help, Kind::FlowRate, flow_rate_m2_s) {
                    to = Some(FlowCondition::FlowRate { flow_rate_m2_s });
                }
            }
            FlowCondition::Velocity { velocity_m_s: [u, v] } => {
                let x = quantity(ui, units, "velocity x", "Velocity along x, the same along the piece", Kind::Velocity, u);
                let y = quantity(ui, units, "velocity y", "Velocity along y, the same along the piece", Kind::Velocity, v);
                if x.is_some() || y.is_some() {
                    to = Some(FlowCondition::Velocity { velocity_m_s: [x.unwrap_or(u), y.unwrap_or(v)] });
                }
            }
            _ => {}
        }
    });
    to
}

fn thermal(
    ui: &mut Ui,
    salt: &str,
    now: &ThermalCondition,
    insert: bool,
    units: Units,
) -> Option<ThermalCondition> {
    let kinds = [
        "no heat (adiabatic)",
        "fixed temperature",
        "fixed flux",
        "convection",
        "solid with source",
    ];
    let index = match now {
        ThermalCondition::Adiabatic {} => 0,
        ThermalCondition::FixedTemperature { .. } => 1,
        ThermalCondition::FixedFlux { .. } => 2,
        ThermalCondition::Convection { .. } => 3,
        ThermalCondition::Solid { .. } => 4,
    };
    let mut to = None;
    Grid::new(("thermal", salt)).num_columns(2).show(ui, |ui| {
        let help = "What holds for heat here; on a port a fixed temperature is that of the inflow, and no heat is what an outlet takes";
        let offered = if insert { &kinds[..] } else { &kinds[..4] };
        if let Some(picked) = choice(ui, "heat", help, offered, index) {
            to = Some(match picked {
                0 => ThermalCondition::Adiabatic {},
                1 => ThermalCondition::FixedTemperature { temperature_k: 313.15 },
                2 => ThermalCondition::FixedFlux { flux_w_m2: 1000.0 },
                3 => ThermalCondition::Convection { coefficient_w_m2_k: 10.0, ambient_k: 293.15 },
                _ => ThermalCondition::Solid { conductivity_w_m_k: 15.0, source_w_m3: 1e5 },
            });
        }
        match *now {
            ThermalCondition::Adiabatic {} => {}
            ThermalCondition::FixedTemperature { temperature_k } => {
                if let Some(temperature_k) = quantity(ui, units, "temperature", "Temperature held here", Kind::Temperature, temperature_k) {
                    to = Some(ThermalCondition::FixedTemperature { temperature_k });
                }
            }
            ThermalCondition::FixedFlux { flux_w_m2 } => {
                if let Some(flux_w_m2) = quantity(ui, units, "heat flux", "Heat flux into the fluid", Kind::Flux, flux_w_m2) {
                    to = Some(ThermalCondition::FixedFlux { flux_w_m2 });
                }
            }
            ThermalCondition::Convection { coefficient_w_m2_k, ambient_k } => {
                let h = quantity(ui, units, "coefficient", "Heat transfer coefficient to the surroundings", Kind::Coefficient, coefficient_w_m2_k);
                let t = quantity(ui, units, "ambient", "Temperature of the surroundings", Kind::Temperature, ambient_k);
                if h.is_some() || t.is_some() {
                    to = Some(ThermalCondition::Convection {
                        coefficient_w_m2_k: h.unwrap_or(coefficient_w_m2_k),
                        ambient_k: t.unwrap_or(ambient_k),
                    });
                }
            }
            ThermalCondition::Solid { conductivity_w_m_k, source_w_m3 } => {
                let k = quantity(ui, units, "conductivity", "Conductivity of the solid", Kind::Conductivity, conductivity_w_m_k);
                let q = quantity(ui, units, "source", "Heat made in a volume of the solid", Kind::Source, source_w_m3);
                if k.is_some() || q.is_some() {
                    to = Some(ThermalCondition::Solid {
                        conductivity_w_m_k: k.unwrap_or(conductivity_w_m_k),
                        source_w_m3: q.unwrap_or(source_w_m3),
                    });
                }
            }
        }
    });
    to
}
