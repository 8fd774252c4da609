//! One frame: bars and panels around the canvas. Panels return what was asked for; the studio does it.

use super::command::{Availability, Command};
use super::panels::field::Units;
use super::panels::{cautions, figures, goals, plots, properties, sketch};
use super::persist::Purpose;
use super::studio::Studio;
use super::words::{Edit, Selection};
use crate::study::Aim;
use egui::{Align, Button, Layout, Panel, RichText, ScrollArea, Ui};
use std::path::PathBuf;

/// Draw everything.
pub fn draw(studio: &mut Studio, ui: &mut Ui) {
    let commands = keys(studio, ui);
    let units = Units {
        inch_based: studio.settings.inch_based,
    };
    Panel::top("bar").show(ui, |ui| bar(studio, ui));
    Panel::bottom("status").show(ui, |ui| status(studio, ui));
    if studio.settings.plots {
        Panel::bottom("plots")
            .resizable(true)
            .default_size(210.0)
            .show(ui, |ui| plot_panel(studio, ui, units));
    }
    if studio.settings.sketch {
        Panel::left("sketch")
            .resizable(true)
            .default_size(268.0)
            .show(ui, |ui| sketch_panel(studio, ui, units));
    }
    if studio.settings.figures {
        Panel::right("figures")
            .resizable(true)
            .default_size(352.0)
            .show(ui, |ui| figures_panel(studio, ui, units));
    }
    egui::CentralPanel::default()
        .frame(egui::Frame::NONE)
        .show(ui, |ui| studio.canvas_frame(ui));
    windows(studio, ui);
    for command in commands {
        studio.dispatch(&ui.ctx().clone(), command);
    }
}

/// Keys pressed this frame, as commands. Plain keys do not act while text is being typed.
fn keys(studio: &Studio, ui: &Ui) -> Vec<Command> {
    let typing = ui.ctx().egui_wants_keyboard_input() && studio.question.is_some()
        || ui
            .ctx()
            .memory(|m| m.focused())
            .is_some_and(|id| egui::TextEdit::load_state(ui.ctx(), id).is_some());
    Command::ALL
        .into_iter()
        .filter(|c| {
            let Some(key) = c.entry().key else {
                return false;
            };
            let function_key =
                key.logical_key.name().starts_with('F') && key.logical_key.name().len() > 1;
            let plain = key.modifiers.is_none() && !function_key;
            !(plain && typing) && ui.ctx().input_mut(|i| i.consume_shortcut(&key))
        })
        .collect()
}

/// A button for a command: greyed with the reason when blocked.
fn command_button(ui: &mut Ui, now: &Availability, command: Command, label: &str) -> bool {
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

fn bar(studio: &mut Studio, ui: &mut Ui) {
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

fn status(studio: &mut Studio, ui: &mut Ui) {
    ui.horizontal(|ui| {
        if studio.link.is_busy() {
            let (text, fraction) = studio
                .link
                .stage
                .clone()
                .unwrap_or(("starting".into(), 0.0));
            let steps = studio
                .link
                .steps
                .iter()
                .filter(|s| s.accepted)
                .count()
                .saturating_sub(1);
            let text = if studio.link.is_improving() {
                let held = if studio.link.is_paused() {
                    ", held"
                } else {
                    ""
                };
                format!(
                    "improving: step {steps} of at most {}{held}",
                    studio.project.run.steps
                )
            } else {
                text
            };
            let share = if studio.link.is_improving() {
                steps as f64 / studio.project.run.steps as f64
            } else {
                fraction
            };
            ui.add(egui::ProgressBar::new(share as f32).desired_width(110.0));
            ui.label(text);
        } else {
            ui.label(
                if studio.geometry.marks.is_empty() && studio.geometry.faults.is_empty() {
                    "solved"
                } else {
                    "the drawing has faults"
                },
            );
        }
        ui.separator();
        if let Some((text, bad)) = &studio.message {
            let text = RichText::new(text);
            ui.add(
                egui::Label::new(if *bad {
                    text.color(ui.visuals().error_fg_color)
                } else {
                    text
                })
                .truncate(),
            );
        }
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            if let Some(probe) = &studio.probe {
                ui.label(RichText::new(probe).monospace());
            } else {
                ui.weak("drag a point, scroll to zoom, drag the paper to move; F1 lists the keys");
            }
        });
    });
}

fn sketch_panel(studio: &mut Studio, ui: &mut Ui, units: Units) {
    let editable = !studio.link.is_improving();
    ScrollArea::vertical().auto_shrink([false, false]).show(ui, |ui| {
        ui.add_space(4.0);
        let (chosen, mut edits) =
            sketch::show(ui, &studio.project.design, &studio.selection, editable, studio.settings.inch_based);
        ui.separator();
        ui.add_enabled_ui(editable, |ui| {
            edits.extend(properties::show(ui, &studio.project.design, &studio.project.run, &studio.selection, units));
        });
        if matches!(studio.selection, Selection::Nothing) {
            ui.add_space(8.0);
            ui.strong("Notes");
            ui.add(egui::TextEdit::multiline(&mut studio.project.notes).desired_rows(4).hint_text("notes of the study").id_salt("notes"));
        }
        if let Some(selection) = chosen {
            studio.selection = selection;
        }
        let added = edits.iter().any(|e| matches!(e, Edit::SetInsert { insert, .. } if *insert == studio.project.design.inserts.len()));
        for edit in edits {
            studio.edit_whole(edit);
        }
        if added {
            studio.selection = Selection::Insert(studio.project.design.inserts.len() - 1);
        }
    });
}

fn figures_panel(studio: &mut Studio, ui: &mut Ui, units: Units) {
    ScrollArea::vertical()
        .auto_shrink([false, false])
        .show(ui, |ui| {
            ui.add_space(4.0);
            let case = studio.case();
            let solved = studio.link.solved.clone();
            let watched = studio.looked_at.or_else(|| {
                studio
                    .link
                    .is_improving()
                    .then(|| studio.link.steps.iter().rposition(|s| s.accepted))
                    .flatten()
            });
            let of_step = watched.and_then(|k| studio.link.steps.get(k)).cloned();
            let report = of_step
                .as_ref()
                .and_then(|s| s.report.as_deref())
                .or(solved.as_ref().map(|s| &s.report));
            let stale = of_step.is_none() && studio.link.is_stale(&case);
            egui::CollapsingHeader::new("Results")
                .default_open(true)
                .show(ui, |ui| {
                    variants(studio, ui);
                    let kept = studio
                        .compared
                        .as_ref()
                        .and_then(|name| studio.kept.iter().find(|k| k.0 == *name));
                    figures::show(
                        ui,
                        report,
                        kept.map(|k| (k.0.as_str(), &*k.1)),
                        stale,
                        units,
                    );
                });
            egui::CollapsingHeader::new("Aim and limits")
                .default_open(true)
                .show(ui, |ui| {
                    let limits = of_step
                        .as_ref()
                        .map(|s| s.limits.clone())
                        .or_else(|| solved.as_ref().map(|s| s.limits.clone()));
                    let editable = !studio.link.is_improving();
                    let edits = ui
                        .add_enabled_ui(editable, |ui| {
                            goals::show(
                                ui,
                                &studio.project.design,
                                &limits.unwrap_or_default(),
                                stale,
                                units,
                            )
                        })
                        .inner;
                    for edit in edits {
                        studio.edit_whole(edit);
                    }
                });
            egui::CollapsingHeader::new("Cautions")
                .default_open(true)
                .show(ui, |ui| {
                    let failure = studio.link.failure.as_ref().map(ToString::to_string);
                    let list = report.map_or(&[][..], |r| &r.cautions);
                    cautions::show(
                        ui,
                        &studio.geometry.faults,
                        &studio.geometry.marks,
                        list,
                        failure.as_deref(),
                        stale,
                    );
                });
        });
}

/// Variants: show, compare with, take, remove.
fn variants(studio: &mut Studio, ui: &mut Ui) {
    if studio.project.variants.is_empty() {
        ui.weak("Keep (Ctrl+K) stores the present shapes to compare with.");
        return;
    }
    let mut take = None;
    let mut remove = None;
    ui.horizontal_wrapped(|ui| {
        ui.label("Variants");
        for (i, variant) in studio.project.variants.iter().enumerate() {
            let compared = studio.compared.as_deref() == Some(variant.name.as_str());
            let response = ui.selectable_label(compared, &variant.name).on_hover_text(
                "Click to compare with it; right click to take it as the design or to remove it",
            );
            if response.clicked() {
                studio.compared = Some(variant.name.clone());
            }
            response.context_menu(|ui| {
                if ui.button("Take it as the design").clicked() {
                    take = Some(i);
                    ui.close();
                }
                if ui.button("Remove it").clicked() {
                    remove = Some(i);
                    ui.close();
                }
            });
        }
    });
    if let Some(i) = take {
        let mut design = studio.project.design.clone();
        design
            .inserts
            .clone_from(&studio.project.variants[i].inserts);
        let name = format!("take {}", studio.project.variants[i].name);
        studio.edit_whole(Edit::Replace {
            to: Box::new(design),
            name,
        });
    }
    if let Some(i) = remove {
        studio.project.variants.remove(i);
    }
}

fn plot_panel(studio: &mut Studio, ui: &mut Ui, units: Units) {
    let record = studio.looked_at.and_then(|k| studio.link.steps.get(k));
    let shot = record
        .and_then(|r| r.snapshot.clone())
        .or_else(|| studio.link.solved.as_ref().map(|s| s.snapshot.clone()));
    let aim: Aim = studio.project.design.aim.clone();
    let asked = plots::show(
        ui,
        &mut studio.tab,
        &aim,
        &studio.link.steps,
        studio.looked_at,
        shot.as_deref(),
        units,
    );
    match asked {
        Some(plots::Asked::Look(step)) => studio.looked_at = step,
        Some(plots::Asked::KeepStep(step)) => studio.take_step(step, true),
        Some(plots::Asked::UseStep(step)) => studio.take_step(step, false),
        None => {}
    }
}

/// Small windows: path question, command finder, keys, recovery.
fn windows(studio: &mut Studio, ui: &mut Ui) {
    let ctx = ui.ctx().clone();
    path_window(studio, &ctx);
    finder_window(studio, &ctx);
    let mut shown = studio.keys_shown;
    egui::Window::new("Keys")
        .open(&mut shown)
        .resizable(false)
        .show(&ctx, |ui| {
            egui::Grid::new("keys")
                .num_columns(3)
                .striped(true)
                .show(ui, |ui| {
                    for command in Command::ALL {
                        let entry = command.entry();
                        ui.monospace(entry.key.map_or(String::new(), |k| ctx.format_shortcut(&k)));
                        ui.label(entry.name);
                        ui.weak(entry.help);
                        ui.end_row();
                    }
                    for (key, name, help) in [
                        (
                            "N",
                            "Next point",
                            "Select the next point of the insert or the next corner",
                        ),
                        ("A", "Add point", "Add a point behind the selected one"),
                        (
                            "Del",
                            "Remove",
                            "Remove the selected point, corner or insert",
                        ),
                        (
                            "Enter",
                            "Type coordinates",
                            "Type the place of the selected point",
                        ),
                        (
                            "Arrows",
                            "Nudge",
                            "Move the selected thing by a screen point, ten with Shift",
                        ),
                        ("Esc", "Leave", "Take the drag in progress back"),
                    ] {
                        ui.monospace(key);
                        ui.label(name);
                        ui.weak(help);
                        ui.end_row();
                    }
                });
        });
    studio.keys_shown = shown;
    if studio.recovery.is_some() {
        egui::Window::new("Unsaved session").collapsible(false).resizable(false).show(&ctx, |ui| {
            ui.label("The last session ended with changes that were not saved. They were written beside the project.");
            ui.horizontal(|ui| {
                if ui.button("Take them up again").clicked() {
                    studio.recover();
                }
                if ui.button("Leave them").clicked() {
                    studio.recovery = None;
                }
            });
        });
    }
}

fn path_window(studio: &mut Studio, ctx: &egui::Context) {
    let Some(mut question) = studio.question.take() else {
        return;
    };
    let mut keep = true;
    let mut answer = None;
    egui::Window::new(question.purpose.title()).collapsible(false).resizable(false).show(ctx, |ui| {
        ui.horizontal(|ui| {
            let label = ui.label("Path");
            let field = ui.add(egui::TextEdit::singleline(&mut question.text).desired_width(360.0).id_salt("path")).labelled_by(label.id);
            if !field.has_focus() && !field.lost_focus() && ui.memory(|m| m.focused().is_none()) {
                field.request_focus();
            }
            if field.lost_focus() && ui.input(|i| i.key_pressed(egui::Key::Enter)) {
                answer = Some(PathBuf::from(question.text.trim()));
            }
            if ui.button("Browse…").on_hover_text("Choose with the system's own dialogue").clicked() {
                let ctx = ctx.clone();
                question.browse(move || ctx.request_repaint());
            }
        });
        if question.purpose == Purpose::Contour {
            ui.horizontal(|ui| {
                let label = ui.label("Chord tolerance");
                ui.add(egui::TextEdit::singleline(&mut studio.chord_text).desired_width(90.0).id_salt("chord"))
                    .labelled_by(label.id)
                    .on_hover_text("Straight lines between the listed points depart from the contour by no more than this");
                ui.selectable_value(&mut studio.export_mm, true, "mm");
                ui.selectable_value(&mut studio.export_mm, false, "m");
            });
        }
        ui.horizontal(|ui| {
            if ui.button("OK").clicked() {
                answer = Some(PathBuf::from(question.text.trim()));
            }
            if ui.button("Cancel").clicked() || ui.input(|i| i.key_pressed(egui::Key::Escape)) {
                keep = false;
            }
        });
    });
    let purpose = question.purpose;
    if keep {
        studio.question = Some(question);
    }
    if let Some(path) = answer {
        studio.answered(purpose, &path);
    }
}

fn finder_window(studio: &mut Studio, ctx: &egui::Context) {
    let Some(mut text) = studio.finder.take() else {
        return;
    };
    let now = studio.availability();
    let mut chosen = None;
    let mut keep = true;
    egui::Window::new("Find command")
        .collapsible(false)
        .resizable(false)
        .anchor(egui::Align2::CENTER_TOP, [0.0, 60.0])
        .show(ctx, |ui| {
            let label = ui.label("Type a few letters");
            let field = ui
                .add(
                    egui::TextEdit::singleline(&mut text)
                        .desired_width(280.0)
                        .id_salt("finder"),
                )
                .labelled_by(label.id);
            field.request_focus();
            let wanted = text.to_lowercase();
            let fits = |c: &Command| {
                let e = c.entry();
                e.name.to_lowercase().contains(&wanted) || e.help.to_lowercase().contains(&wanted)
            };
            let found: Vec<Command> = Command::ALL.into_iter().filter(fits).take(9).collect();
            if ui.input(|i| i.key_pressed(egui::Key::Enter)) {
                chosen = found.iter().find(|c| c.blocked(&now).is_none()).copied();
            }
            if ui.input(|i| i.key_pressed(egui::Key::Escape)) {
                keep = false;
            }
            for command in found {
                if command_button(ui, &now, command, command.entry().name) {
                    chosen = Some(command);
                }
            }
        });
    if keep && chosen.is_none() {
        studio.finder = Some(text);
    }
    if let Some(command) = chosen {
        studio.dispatch(ctx, command);
    }
}
