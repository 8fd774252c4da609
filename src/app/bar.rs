//! The bar at the top: menus, undo, the run's buttons, what is painted.

use super::command::{Availability, Command};
use super::persist::Purpose;
use super::studio::Studio;
use egui::{Align, Button, Layout, RichText, Ui};
use std::path::PathBuf;

/// A button for a command: greyed with the reason when blocked.
pub(super) fn command_button(
    ui: &mut Ui,
    now: &Availability,
    command: Command,
    label: &str,
) -> bool {
    let entry = command.entry();
    let blocked = command.blocked(now);
    let key = entry.key.map_or(String::new(), |k| {
        format!("  ({})", ui.ctx().format_shortcut(&k))
    });
    let response = ui.add_enabled(blocked.is_none(), Button::new(label));
    let response = response.on_hover_text(format!("{}{key}", entry.help));
    response
        .on_disabled_hover_text(blocked.unwrap_or(""))
        .clicked()
}

fn menu_item(ui: &mut Ui, now: &Availability, command: Command, asked: &mut Vec<Command>) {
    let entry = command.entry();
    let blocked = command.blocked(now);
    let key = entry
        .key
        .map_or(String::new(), |k| ui.ctx().format_shortcut(&k));
    let response = ui
        .add_enabled(
            blocked.is_none(),
            Button::new(entry.name).shortcut_text(key),
        )
        .on_hover_text(entry.help);
    if response
        .on_disabled_hover_text(blocked.unwrap_or(""))
        .clicked()
    {
        asked.push(command);
        ui.close();
    }
}

/// Draw the bar and carry out what was asked for.
pub(super) fn bar(studio: &mut Studio, ui: &mut Ui) {
    let now = studio.availability();
    let mut asked = Vec::new();
    let mut open: Option<PathBuf> = None;
    let mut sample = None;
    let mut template = None;
    ui.horizontal(|ui| {
        ui.menu_button("Project", |ui| {
            menu_item(ui, &now, Command::Open, &mut asked);
            ui.menu_button("Samples", |ui| {
                for (name, text) in super::SAMPLES {
                    if ui.button(*name).clicked() {
                        sample = Some(*text);
                        ui.close();
                    }
                }
            });
            if !studio.settings.recent.is_empty() {
                ui.menu_button("Recent", |ui| {
                    for path in &studio.settings.recent {
                        if ui.button(path.display().to_string()).clicked() {
                            open = Some(path.clone());
                            ui.close();
                        }
                    }
                });
            }
            menu_item(ui, &now, Command::Save, &mut asked);
            menu_item(ui, &now, Command::SaveAs, &mut asked);
            ui.separator();
            for command in [
                Command::ImportContour,
                Command::ExportContour,
                Command::ExportPicture,
                Command::ExportHistory,
            ] {
                menu_item(ui, &now, command, &mut asked);
            }
        });
        ui.menu_button("Duct", |ui| {
            ui.weak("Replace the duct by a template");
            for kind in crate::geometry::duct::Template::all() {
                if ui.button(kind.name()).on_hover_text(kind.help()).clicked() {
                    template = Some(kind);
                    ui.close();
                }
            }
        });
        ui.menu_button("View", |ui| {
            for command in [
                Command::FitView,
                Command::ShowTemperature,
                Command::ShowSpeed,
                Command::ShowPressure,
                Command::ShowTotalPressure,
                Command::ShowNothing,
                Command::ToggleIsoLines,
                Command::ToggleStreamlines,
                Command::ToggleMesh,
                Command::ToggleDimensions,
                Command::ToggleSnap,
                Command::ToggleSketch,
                Command::ToggleFigures,
                Command::TogglePlots,
                Command::ToggleDark,
                Command::ToggleUnits,
                Command::LargerText,
                Command::SmallerText,
                Command::ShowKeys,
            ] {
                menu_item(ui, &now, command, &mut asked);
            }
        });
        ui.separator();
        for (command, label) in [(Command::Undo, "Undo"), (Command::Redo, "Redo")] {
            let name = if command == Command::Undo {
                studio.history.undo_name()
            } else {
                studio.history.redo_name()
            };
            let label = name.map_or(label.to_owned(), |n| format!("{label}: {n}"));
            if command_button(ui, &now, command, &label) {
                asked.push(command);
            }
        }
        ui.separator();
        let improve = RichText::new("Improve").strong();
        let blocked = Command::Improve.blocked(&now);
        let response = ui.add_enabled(
            blocked.is_none(),
            Button::new(improve).fill(super::theme::ACCENT.gamma_multiply(0.35)),
        );
        let response = response
            .on_hover_text("Let the optimiser improve the free inserts within their limits  (F5)");
        if response
            .on_disabled_hover_text(blocked.unwrap_or(""))
            .clicked()
        {
            asked.push(Command::Improve);
        }
        if command_button(
            ui,
            &now,
            Command::Pause,
            if studio.link.is_paused() {
                "Go on"
            } else {
                "Pause"
            },
        ) {
            asked.push(Command::Pause);
        }
        if command_button(ui, &now, Command::Stop, "Stop") {
            asked.push(Command::Stop);
        }
        if command_button(ui, &now, Command::KeepVariant, "Keep") {
            asked.push(Command::KeepVariant);
        }
        ui.separator();
        field_choice(studio, ui);
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let dirty = if studio.is_dirty() { " •" } else { "" };
            ui.label(RichText::new(format!("{}{dirty}", studio.project.name)).strong())
                .on_hover_text("The study; a dot stands for changes that are not saved");
        });
    });
    if let Some(text) = sample {
        match crate::study::Project::from_json(text) {
            Ok(project) => studio.open(project, None),
            Err(error) => studio.message = Some((error.to_string(), true)),
        }
    }
    if let Some(path) = open {
        studio.answered(Purpose::Open, &path);
    }
    if let Some(kind) = template {
        super::templates::apply(studio, kind);
    }
    for command in asked {
        studio.dispatch(&ui.ctx().clone(), command);
    }
}

fn field_choice(studio: &mut Studio, ui: &mut Ui) {
    use super::words::FieldChoice as Field;
    let before = studio.view.field;
    let label = ui.label("show");
    egui::ComboBox::from_id_salt("field")
        .selected_text(field_name(studio.view.field))
        .show_ui(ui, |ui| {
            for field in [
                Field::Temperature,
                Field::Speed,
                Field::Pressure,
                Field::TotalPressure,
                Field::Nothing,
            ] {
                ui.selectable_value(&mut studio.view.field, field, field_name(field));
            }
        })
        .response
        .labelled_by(label.id)
        .on_hover_text("Field painted over the duct (keys 1 to 4, 0 for none)");
    if studio.view.field != before {
        studio.view.fixed_range = None;
    }
    let view = &mut studio.view;
    ui.toggle_value(&mut view.iso_lines, "iso-lines")
        .on_hover_text("Lines of equal value (L)");
    ui.toggle_value(&mut view.streamlines, "streamlines")
        .on_hover_text("Lines along the flow (T)");
    ui.toggle_value(&mut view.mesh, "mesh")
        .on_hover_text("The cells that the solution lives on (M)");
    let mut fixed = view.fixed_range.is_some();
    if ui
        .toggle_value(&mut fixed, "hold range")
        .on_hover_text("Keep the legend's range while shapes change, to compare colours")
        .changed()
    {
        let range = studio
            .link
            .solved
            .as_ref()
            .and_then(|s| super::canvas::field_of(studio.view.field)?.range(&s.snapshot));
        studio.view.fixed_range = if fixed { range } else { None };
    }
}

fn field_name(field: super::words::FieldChoice) -> &'static str {
    use super::words::FieldChoice as Field;
    match field {
        Field::Temperature => "Temperature",
        Field::Speed => "Speed",
        Field::Pressure => "Static pressure",
        Field::TotalPressure => "Total pressure",
        Field::Nothing => "Drawing only",
    }
}
