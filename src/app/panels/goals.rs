//! Aim and limits: what improvement is after, each limit with its value, slack and whether it is active.

use super::field::{Units, bare_quantity};
use crate::app::words::Edit;
use crate::base::units::Kind;
use crate::base::vec2;
use crate::study::{Aim, Design, Limit, LimitReport};
use egui::{RichText, Ui};

/// Draw the editor; returns edits.
pub fn show(
    ui: &mut Ui,
    design: &Design,
    reports: &[LimitReport],
    stale: bool,
    units: Units,
) -> Vec<Edit> {
    let mut edits = Vec::new();
    ui.horizontal(|ui| {
        let label = ui
            .label("Aim")
            .on_hover_text("What the improvement is after");
        egui::ComboBox::from_id_salt("aim")
            .selected_text(design.aim.words())
            .width(190.0)
            .show_ui(ui, |ui| {
                for aim in Aim::all() {
                    if ui
                        .selectable_label(aim == design.aim, aim.words())
                        .clicked()
                    {
                        edits.push(Edit::SetAim(aim));
                    }
                }
            })
            .response
            .labelled_by(label.id)
            .on_hover_text("What the improvement is after, at the given ports");
    });
    ui.add_space(4.0);
    let mut limits = design.limits.clone();
    let mut removed = None;
    for (i, limit) in limits.iter_mut().enumerate() {
        ui.push_id(("limit", i), |ui| {
            ui.horizontal(|ui| {
                if ui
                    .small_button("×")
                    .on_hover_text("Remove this limit")
                    .clicked()
                {
                    removed = Some(i);
                }
                let label = ui.label(limit.words()).id;
                insert_choice(ui, design, limit, label);
            });
            ui.horizontal_wrapped(|ui| {
                ui.add_space(20.0);
                bounds(ui, limit, units);
            });
        });
    }
    if let Some(i) = removed {
        limits.remove(i);
    }
    ui.menu_button("Add limit", |ui| {
        for (name, limit) in offers(design) {
            if ui.button(name).clicked() {
                limits.push(limit);
                ui.close();
            }
        }
    })
    .response
    .on_hover_text("Add something that an improved shape must respect");
    if limits != design.limits {
        edits.push(Edit::SetLimits(limits));
    }
    if !reports.is_empty() {
        ui.add_space(6.0);
        slacks(ui, reports, stale, units);
    }
    if let Some(missing) = design.bounding_limit_missing() {
        ui.add_space(4.0);
        ui.label(RichText::new(format!("! {missing}")).color(ui.visuals().warn_fg_color));
    }
    edits
}

/// Value and slack of each limit.
fn slacks(ui: &mut Ui, reports: &[LimitReport], stale: bool, units: Units) {
    egui::Grid::new("slacks").num_columns(3).striped(true).show(ui, |ui| {
        ui.weak("limit");
        ui.weak("value");
        ui.weak("slack").on_hover_text("How far inside its bound; a limit without slack is active: it holds the design back");
        ui.end_row();
        for line in reports {
            let kind = kind_of(&line.unit);
            let text = |si: f64| RichText::new(kind.text(si, units.inch_based)).monospace();
            ui.label(&line.name);
            ui.label(if stale { text(line.value).weak() } else { text(line.value) });
            let violated = line.slack < -1e-6 * line.bound.abs();
            let slack = if line.active && !violated { RichText::new("active").strong() } else { text(line.slack) };
            let slack = if violated && !stale { slack.color(ui.visuals().error_fg_color) } else { slack };
            ui.label(if stale { slack.weak() } else { slack });
            ui.end_row();
        }
    });
}

fn kind_of(unit: &str) -> Kind {
    match unit {
        "m" => Kind::Length,
        "m^2" => Kind::Area,
        "Pa" => Kind::Pressure,
        "W/m" => Kind::Power,
        "K" => Kind::Temperature,
        "N/m" => Kind::Force,
        _ => Kind::Number,
    }
}

fn insert_choice(ui: &mut Ui, design: &Design, limit: &mut Limit, label: egui::Id) {
    let slot = match limit {
        Limit::Area { insert, .. }
        | Limit::Perimeter { insert, .. }
        | Limit::WallGap { insert, .. }
        | Limit::CurvatureRadius { insert, .. }
        | Limit::Thickness { insert, .. }
        | Limit::BoundingBox { insert, .. } => insert,
        _ => return,
    };
    let shown = slot.clone().unwrap_or_else(|| "every free insert".into());
    egui::ComboBox::from_id_salt("which insert")
        .selected_text(shown)
        .width(120.0)
        .show_ui(ui, |ui| {
            ui.selectable_value(slot, None, "every free insert");
            for insert in &design.inserts {
                ui.selectable_value(slot, Some(insert.name.clone()), &insert.name);
            }
        })
        .response
        .labelled_by(label)
        .on_hover_text("Which insert this limit is for");
}

fn bounds(ui: &mut Ui, limit: &mut Limit, units: Units) {
    let one = |ui: &mut Ui, name: &str, kind: Kind, slot: &mut f64| {
        let label = ui.label(name);
        if let Some(value) = bare_quantity(
            ui,
            units,
            name,
            "Bound of this limit",
            kind,
            *slot,
            Some(label.id),
        ) {
            *slot = value;
        }
    };
    let optional = |ui: &mut Ui, name: &str, kind: Kind, slot: &mut Option<f64>, usual: f64| {
        let mut on = slot.is_some();
        let used = ui.checkbox(&mut on, name).on_hover_text("Use this bound");
        if used.changed() {
            *slot = on.then_some(usual);
        }
        if let Some(value) = slot
            && let Some(new) = bare_quantity(
                ui,
                units,
                name,
                "Bound of this limit",
                kind,
                *value,
                Some(used.id),
            )
        {
            *value = new;
        }
    };
    match limit {
        Limit::Area {
            equal_m2,
            at_least_m2,
            at_most_m2,
            ..
        } => {
            let usual = equal_m2.or(*at_least_m2).or(*at_most_m2).unwrap_or(1e-5);
            optional(ui, "equal to", Kind::Area, equal_m2, usual);
            optional(ui, "at least", Kind::Area, at_least_m2, usual);
            optional(ui, "at most", Kind::Area, at_most_m2, usual);
        }
        Limit::Perimeter {
            at_least_m,
            at_most_m,
            ..
        } => {
            let usual = at_least_m.or(*at_most_m).unwrap_or(1e-2);
            optional(ui, "at least", Kind::Length, at_least_m, usual);
            optional(ui, "at most", Kind::Length, at_most_m, usual);
        }
        Limit::WallGap { at_least_m, .. }
        | Limit::InsertGap { at_least_m }
        | Limit::CurvatureRadius { at_least_m, .. }
        | Limit::Thickness { at_least_m, .. } => one(ui, "at least", Kind::Length, at_least_m),
        Limit::BoundingBox {
            lower_left_m,
            upper_right_m,
            ..
        } => {
            one(ui, "left", Kind::Length, &mut lower_left_m.x);
            one(ui, "lower", Kind::Length, &mut lower_left_m.y);
            one(ui, "right", Kind::Length, &mut upper_right_m.x);
            one(ui, "upper", Kind::Length, &mut upper_right_m.y);
        }
        Limit::Centroid { at_m, .. } => {
            one(ui, "x", Kind::Length, &mut at_m.x);
            one(ui, "y", Kind::Length, &mut at_m.y);
        }
        Limit::Heat { at_least_w_m } => one(ui, "at least", Kind::Power, at_least_w_m),
        Limit::TotalPressureDrop { at_most_pa } => one(ui, "at most", Kind::Pressure, at_most_pa),
    }
}

/// Limits on offer, with bounds that the present design meets.
fn offers(design: &Design) -> Vec<(&'static str, Limit)> {
    let first = design
        .inserts
        .iter()
        .find(|i| !i.frozen)
        .or(design.inserts.first());
    let contour = first
        .filter(|i| i.points_m.len() >= 4)
        .map(crate::study::Insert::contour);
    let area = contour.as_ref().map_or(1e-5, |c| c.area());
    let perimeter = contour.as_ref().map_or(1e-2, |c| c.perimeter());
    let [low, high] = contour
        .as_ref()
        .map_or([vec2(0.0, 0.0), vec2(0.01, 0.01)], |c| c.bounding_box());
    let centroid = contour.as_ref().map_or(vec2(0.0, 0.0), |c| c.centroid());
    let size = area.sqrt();
    let mut list = vec![
        (
            "area",
            Limit::Area {
                insert: None,
                equal_m2: Some(area),
                at_least_m2: None,
                at_most_m2: None,
            },
        ),
        (
            "perimeter",
            Limit::Perimeter {
                insert: None,
                at_least_m: None,
                at_most_m: Some(1.2 * perimeter),
            },
        ),
        (
            "gap to the walls",
            Limit::WallGap {
                insert: None,
                at_least_m: 0.2 * size,
            },
        ),
        (
            "gap between inserts",
            Limit::InsertGap {
                at_least_m: 0.2 * size,
            },
        ),
        (
            "radius of curvature",
            Limit::CurvatureRadius {
                insert: None,
                at_least_m: 0.1 * size,
            },
        ),
        (
            "thickness",
            Limit::Thickness {
                insert: None,
                at_least_m: 0.3 * size,
            },
        ),
        (
            "bounding box",
            Limit::BoundingBox {
                insert: None,
                lower_left_m: low,
                upper_right_m: high,
            },
        ),
        ("heat at least", Limit::Heat { at_least_w_m: 1.0 }),
        (
            "total pressure drop at most",
            Limit::TotalPressureDrop { at_most_pa: 1.0 },
        ),
    ];
    if let Some(insert) = first {
        list.insert(
            7,
            (
                "centroid fixed",
                Limit::Centroid {
                    insert: insert.name.clone(),
                    at_m: centroid,
                },
            ),
        );
    }
    list
}
