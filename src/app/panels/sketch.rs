//! The list of parts: inserts, pieces of the duct, fluid; and what can be added.

use crate::app::canvas_words::flow_words;
use crate::app::words::{Edit, Selection};
use crate::base::{Vec2, vec2};
use crate::geometry::Starter;
use crate::physics::ThermalCondition;
use crate::study::{Design, Insert};
use egui::Ui;

/// Control points of a starter.
const POINTS: usize = 20;

/// Draw the list; returns a new selection and edits.
pub fn show(
    ui: &mut Ui,
    design: &Design,
    selection: &Selection,
    editable: bool,
    inch_based: bool,
) -> (Option<Selection>, Vec<Edit>) {
    let mut chosen = None;
    let mut edits = Vec::new();
    let mut row = |ui: &mut Ui, selected: bool, name: &str, detail: &str, to: Selection| {
        let text = egui::RichText::new(name);
        let response = ui.horizontal(|ui| {
            let r = ui.selectable_label(selected, text);
            ui.weak(detail);
            r
        });
        if response.inner.clicked() {
            chosen = Some(to);
        }
    };
    ui.strong("Study");
    row(
        ui,
        *selection == Selection::Nothing,
        &design.fluid.name,
        "fluid and settings",
        Selection::Nothing,
    );
    ui.add_space(6.0);
    ui.strong("Inserts");
    for (i, insert) in design.inserts.iter().enumerate() {
        let selected = matches!(selection, Selection::Insert(s) | Selection::Control { insert: s, .. } if *s == i);
        let detail = if insert.frozen {
            "frozen"
        } else {
            thermal_words(&insert.thermal)
        };
        row(ui, selected, &insert.name, detail, Selection::Insert(i));
    }
    ui.add_enabled_ui(editable, |ui| {
        ui.menu_button("Add insert", |ui| {
            for (name, starter) in starters(design) {
                if ui
                    .button(name)
                    .on_hover_text("Put this starting shape in the middle of the duct")
                    .clicked()
                {
                    edits.push(add(design, name, starter));
                    ui.close();
                }
            }
        })
        .response
        .on_hover_text("Add a starting shape; drag its points afterwards");
    });
    ui.add_space(6.0);
    ui.strong("Duct");
    for (i, piece) in design.duct.iter().enumerate() {
        let detail = flow_words(&piece.flow, inch_based);
        row(
            ui,
            *selection == Selection::Piece(i),
            &piece.name,
            &detail,
            Selection::Piece(i),
        );
    }
    (chosen, edits)
}

/// A thermal condition in a word.
pub fn thermal_words(thermal: &ThermalCondition) -> &'static str {
    match thermal {
        ThermalCondition::Adiabatic {} => "no heat",
        ThermalCondition::FixedTemperature { .. } => "fixed temperature",
        ThermalCondition::FixedFlux { .. } => "fixed flux",
        ThermalCondition::Convection { .. } => "convection",
        ThermalCondition::Solid { .. } => "solid with source",
    }
}

/// Starters sized by the duct: a third of its least width.
fn starters(design: &Design) -> [(&'static str, Starter); 5] {
    let size = port_width(design) / 3.0;
    [
        ("circle", Starter::Circle { diameter_m: size }),
        (
            "ellipse",
            Starter::Ellipse {
                length_m: 1.6 * size,
                height_m: 0.8 * size,
            },
        ),
        (
            "rounded bar",
            Starter::RoundedBar {
                length_m: 2.0 * size,
                height_m: 0.6 * size,
            },
        ),
        (
            "drop",
            Starter::Drop {
                length_m: 2.0 * size,
                height_m: 0.8 * size,
            },
        ),
        (
            "vane",
            Starter::Vane {
                length_m: 2.4 * size,
                height_m: 0.3 * size,
                camber_m: 0.3 * size,
            },
        ),
    ]
}

fn port_width(design: &Design) -> f64 {
    let ports = (0..design.duct.len()).filter(|&i| design.duct[i].flow.is_port());
    let width = ports
        .map(|i| design.from_m(i).distance(design.duct[i].to_m))
        .fold(f64::INFINITY, f64::min);
    if width.is_finite() && width > 0.0 {
        width
    } else {
        0.01
    }
}

fn add(design: &Design, kind: &str, starter: Starter) -> Edit {
    let outline = design.sketch().outline;
    let corners: Vec<Vec2> = outline
        .pieces
        .iter()
        .map(|p| crate::geometry::Curve::point(&p.segment, 0.5))
        .collect();
    let middle = corners.iter().fold(Vec2::ZERO, |s, &p| s + p) / corners.len().max(1) as f64;
    // Beside what is there already.
    let taken: Vec<[Vec2; 2]> = design
        .inserts
        .iter()
        .map(|i| i.contour().bounding_box())
        .collect();
    let step = port_width(design) / 2.0;
    let free = |c: Vec2| {
        taken.iter().all(|[low, high]| {
            c.x < low.x - step || c.x > high.x + step || c.y < low.y - step || c.y > high.y + step
        })
    };
    let centre = (0..40)
        .map(|k| {
            middle
                + vec2(
                    step * f64::from((k + 1) / 2) * if k % 2 == 0 { 1.0 } else { -1.0 },
                    0.0,
                )
        })
        .find(|&c| free(c))
        .unwrap_or(middle);
    let name = (1..)
        .map(|i| {
            if i == 1 {
                kind.to_owned()
            } else {
                format!("{kind} {i}")
            }
        })
        .find(|n| !design.inserts.iter().any(|i| i.name == *n))
        .unwrap_or_default();
    let thermal = design.inserts.first().map_or(
        ThermalCondition::FixedTemperature {
            temperature_k: 330.0,
        },
        |i| i.thermal.clone(),
    );
    let to = Insert {
        name,
        points_m: starter.controls(centre, 0.0, POINTS),
        frozen: false,
        thermal,
    };
    Edit::SetInsert {
        insert: design.inserts.len(),
        to,
    }
}
