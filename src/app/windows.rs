//! Small windows: question for a path, command finder, keys, recovery.

use super::bar::command_button;
use super::command::Command;
use super::persist::{Purpose, age_words};
use super::studio::Studio;
use egui::Ui;
use std::path::PathBuf;

/// Small windows: path question, command finder, keys, recovery.
pub(super) fn windows(studio: &mut Studio, ui: &mut Ui) {
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
                            "Move the selected thing by a screen point, ten with Shift, a tenth with Alt",
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
    sessions_window(studio, &ctx);
}

/// The offer of sessions that ended unsaved. Until it is answered nothing touches their files.
fn sessions_window(studio: &mut Studio, ctx: &egui::Context) {
    let files = studio.offered_sessions().to_vec();
    if files.is_empty() {
        return;
    }
    egui::Window::new("Unsaved session")
        .collapsible(false)
        .resizable(false)
        .anchor(egui::Align2::CENTER_TOP, [0.0, 60.0])
        .show(ctx, |ui| {
            ui.label("Changes that were never saved are still there.");
            for (which, file) in files.iter().enumerate() {
                ui.horizontal(|ui| {
                    if ui
                        .button("Take them up again")
                        .on_hover_text(format!("Go on with {}", file.display()))
                        .clicked()
                    {
                        studio.recover(which);
                    }
                    ui.weak(format!("written {}", age_words(file)));
                });
            }
            ui.separator();
            ui.horizontal(|ui| {
                if ui
                    .button("Ask again next time")
                    .on_hover_text("Leave the files where they are")
                    .clicked()
                {
                    studio.postpone_sessions();
                }
                if ui
                    .button("Delete them")
                    .on_hover_text("Delete the unsaved changes for good")
                    .clicked()
                {
                    studio.discard_sessions();
                }
            });
        });
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
            if field.changed() {
                question.replaces = false;
            }
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
        if question.replaces {
            ui.label(egui::RichText::new("A file of this name is there already.").color(ui.visuals().warn_fg_color));
        }
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
            let (word, help) = if question.replaces {
                ("Replace it", "Write over the file that is there")
            } else if question.purpose.reads() {
                ("Open", "Read this file")
            } else {
                ("Write", "Write to this path")
            };
            if ui.button(word).on_hover_text(help).clicked() {
                answer = Some(PathBuf::from(question.text.trim()));
            }
            if ui.button("Cancel").clicked() || ui.input(|i| i.key_pressed(egui::Key::Escape)) {
                keep = false;
            }
        });
    });
    let (purpose, replaces) = (question.purpose, question.replaces);
    if keep {
        studio.question = Some(question);
    }
    match answer {
        Some(path) if replaces => studio.answered(purpose, &path),
        Some(path) => studio.propose(purpose, &path),
        None => {}
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
