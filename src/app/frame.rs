//! One frame: bars and panels around the canvas. Panels return what was asked for; the studio does it.

use super::bar::bar;
use super::command::Command;
use super::panels::field::Units;
use super::panels::{cautions, figures, goals, plots, properties, sketch};
use super::studio::Studio;
use super::windows::windows;
use super::words::{Edit, Selection};
use crate::study::Aim;
use egui::{Align, Layout, Panel, RichText, ScrollArea, Ui};

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
            .default_size(230.0)
            .min_size(190.0)
            .show(ui, |ui| plot_panel(studio, ui, units));
    }
    if studio.settings.sketch {
        Panel::left("sketch")
            .resizable(true)
            .default_size(268.0)
            .show(ui, |ui| sketch_panel(studio, ui, units));
    }
    if studio.settings.figures {
        // The drawing is the subject: on a small screen the figures take no more than their table.
        let width = if ui.available_width() < 1000.0 {
            352.0
        } else {
            384.0
        };
        Panel::right("figures")
            .resizable(true)
            .default_size(width)
            .min_size(352.0)
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

/// Width that the probe's readout takes at most, points.
const PROBE_WIDTH: f32 = 760.0;

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
            let text = if *bad {
                text.color(ui.visuals().error_fg_color)
            } else {
                text
            };
            // The probe keeps its place at the right.
            let kept = if studio.probe.is_some() {
                PROBE_WIDTH
            } else {
                0.0
            };
            let width = (ui.available_width() - kept).max(80.0);
            let area = egui::vec2(width, 18.0);
            ui.allocate_ui_with_layout(area, Layout::left_to_right(Align::Center), |ui| {
                ui.add(egui::Label::new(text).truncate());
            });
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
            let label = ui.strong("Notes").id;
            ui.add(egui::TextEdit::multiline(&mut studio.project.notes).desired_rows(4).hint_text("notes of the study").id_salt("notes"))
            .labelled_by(label);
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
                    // Slacks of a step belong to the limits its run had.
                    let same = studio
                        .link
                        .run_case
                        .as_ref()
                        .is_some_and(|c| c.design.limits == studio.project.design.limits);
                    let limits = of_step
                        .as_ref()
                        .map(|s| if same { s.limits.clone() } else { Vec::new() })
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
                    let failure = studio.link.failure_of(&case).map(ToString::to_string);
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
        studio.forget_variant(i);
    }
    if let Some(name) = &studio.compared
        && studio.variant_figures(name).is_none()
    {
        ui.weak(if studio.unsolvable.contains(name) {
            "This variant cannot be solved under the present conditions."
        } else {
            "The figures of this variant are being computed."
        });
    }
}

fn plot_panel(studio: &mut Studio, ui: &mut Ui, units: Units) {
    let record = studio.looked_at.and_then(|k| studio.link.steps.get(k));
    let shot = record
        .and_then(|r| r.snapshot.clone())
        .or_else(|| studio.link.solved.as_ref().map(|s| s.snapshot.clone()));
    // A run keeps the aim it was started with, whatever is chosen since.
    let aim: Aim = match &studio.link.run_case {
        Some(case) if !studio.link.steps.is_empty() => case.design.aim.clone(),
        _ => studio.project.design.aim.clone(),
    };
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
        Some(plots::Asked::Look(step)) => studio.look_at(step),
        Some(plots::Asked::KeepStep(step)) => studio.take_step(step, true),
        Some(plots::Asked::UseStep(step)) => studio.take_step(step, false),
        None => {}
    }
}
