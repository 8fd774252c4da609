//! Plots: history of aim and limits, heat flux along contours, profiles over ports; and the scrubber through steps.

use super::field::Units;
use crate::app::theme::ACCENT;
use crate::base::units::Kind;
use crate::study::{Aim, FieldSnapshot, LineProfile, StepRecord};
use egui::Ui;
use egui_plot::{Legend, Line, Plot, PlotPoints, Points, VLine};

/// Which plot is shown.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Tab {
    /// History of the aim and limits.
    #[default]
    History,
    /// Heat flux along the contours.
    Flux,
    /// Temperature along the contours.
    Surface,
    /// Profiles over the ports.
    Ports,
}

/// What the user asked for at the plots.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Asked {
    /// Look at a step (none: at the present design).
    Look(Option<usize>),
    /// Keep the step looked at as a variant.
    KeepStep(usize),
    /// Go on with the shape of the step looked at.
    UseStep(usize),
}

/// Draw tabs, plot and scrubber.
pub fn show(
    ui: &mut Ui,
    tab: &mut Tab,
    aim: &Aim,
    steps: &[StepRecord],
    looked_at: Option<usize>,
    snapshot: Option<&FieldSnapshot>,
    units: Units,
) -> Option<Asked> {
    let mut asked = None;
    ui.horizontal(|ui| {
        for (which, name, help) in [
            (
                Tab::History,
                "History",
                "Aim, slacks and step sizes of the improvement",
            ),
            (
                Tab::Flux,
                "Heat flux",
                "Heat flux into the fluid along each insert's contour",
            ),
            (
                Tab::Surface,
                "Surface temperature",
                "Temperature along each insert's contour",
            ),
            (
                Tab::Ports,
                "Port profiles",
                "Normal velocity over each port",
            ),
        ] {
            ui.selectable_value(tab, which, name).on_hover_text(help);
        }
        let taken: Vec<usize> = (0..steps.len()).filter(|&i| steps[i].accepted).collect();
        if let (Some(&first), Some(&last)) = (taken.first(), taken.last())
            && first < last
        {
            ui.separator();
            let mut place = looked_at
                .and_then(|s| taken.iter().position(|&t| t == s))
                .unwrap_or(taken.len() - 1);
            let label = ui.label("look back");
            let slider = egui::Slider::new(&mut place, 0..=taken.len() - 1).show_value(false);
            let response = ui
                .add(slider)
                .labelled_by(label.id)
                .on_hover_text("Move back through the steps; the drawing shows each as it was");
            if response.changed() {
                asked = Some(Asked::Look(
                    (place + 1 < taken.len()).then_some(taken[place]),
                ));
            }
            ui.label(format!("step {}", steps[taken[place]].step));
            if let Some(step) = looked_at {
                if ui
                    .button("Keep this step")
                    .on_hover_text("Keep the shape of this step as a variant")
                    .clicked()
                {
                    asked = Some(Asked::KeepStep(step));
                }
                if ui
                    .button("Go on from here")
                    .on_hover_text("Take the shape of this step as the design")
                    .clicked()
                {
                    asked = Some(Asked::UseStep(step));
                }
                if ui
                    .button("Back to the end")
                    .on_hover_text("Show the present design again")
                    .clicked()
                {
                    asked = Some(Asked::Look(None));
                }
            }
        }
    });
    match tab {
        Tab::History => history(ui, aim, steps, looked_at, units),
        Tab::Flux => profile(
            ui,
            "flux",
            snapshot.map(|s| &s.insert_flux[..]),
            Kind::Flux,
            units,
        ),
        Tab::Surface => profile(
            ui,
            "surface",
            snapshot.map(|s| &s.insert_temperature[..]),
            Kind::Temperature,
            units,
        ),
        Tab::Ports => profile(
            ui,
            "ports",
            snapshot.map(|s| &s.port_velocity[..]),
            Kind::Velocity,
            units,
        ),
    }
    asked
}

fn history(ui: &mut Ui, aim: &Aim, steps: &[StepRecord], looked_at: Option<usize>, units: Units) {
    if steps.is_empty() {
        ui.weak("No improvement has been made yet: press Improve (F5).");
        return;
    }
    let kind = match aim.unit() {
        "Pa" => Kind::Pressure,
        "W/m" => Kind::Power,
        "K" => Kind::Temperature,
        "N/m" => Kind::Force,
        _ => Kind::Number,
    };
    let taken: Vec<&StepRecord> = steps.iter().filter(|s| s.accepted).collect();
    let number = |v: f64| kind.number(v, units.inch_based);
    ui.columns(2, |columns| {
        let values: Vec<[f64; 2]> = taken
            .iter()
            .map(|s| [s.step as f64, number(s.aim_value)])
            .collect();
        let name = format!("{}, {}", aim.words(), kind.shown(units.inch_based).symbol);
        Plot::new("history")
            .legend(Legend::default().position(egui_plot::Corner::RightBottom))
            .allow_scroll(false)
            .show(&mut columns[0], |plot| {
                plot.line(
                    Line::new(name.clone(), PlotPoints::from(values.clone()))
                        .color(ACCENT)
                        .width(2.0),
                );
                plot.points(
                    Points::new(name, PlotPoints::from(values))
                        .color(ACCENT)
                        .radius(3.0),
                );
                if let Some(step) = looked_at.and_then(|k| steps.get(k)) {
                    plot.vline(VLine::new("", step.step as f64).color(ACCENT));
                }
            });
        slacks(&mut columns[1], &taken);
    });
}

/// Colours of the limits' lines, told apart by eye and in grey (after Okabe and Ito's set of 2008, from memory).
const LINES: [egui::Color32; 7] = [
    egui::Color32::from_rgb(0, 114, 178),
    egui::Color32::from_rgb(213, 94, 0),
    egui::Color32::from_rgb(0, 158, 115),
    egui::Color32::from_rgb(204, 121, 167),
    egui::Color32::from_rgb(86, 180, 233),
    egui::Color32::from_rgb(230, 159, 0),
    egui::Color32::from_rgb(110, 110, 110),
];

/// Slack of each limit over its bound through the steps, with the key beside the plot.
fn slacks(ui: &mut Ui, taken: &[&StepRecord]) {
    let names: Vec<&str> = taken.last().map_or(Vec::new(), |s| {
        s.limits.iter().map(|l| l.name.as_str()).collect()
    });
    let key = (0.42 * ui.available_width()).min(230.0);
    let height = ui.available_height();
    ui.horizontal_top(|ui| {
        Plot::new("slacks")
            .allow_scroll(false)
            .width((ui.available_width() - key - 8.0).max(80.0))
            .height(height)
            .y_axis_formatter(|m, _| format!("{:.0} %", m.value))
            .show(ui, |plot| {
                for (k, name) in names.iter().enumerate() {
                    // Slack over its bound, cut at 100 %: how near each limit is.
                    let line: Vec<[f64; 2]> = taken
                        .iter()
                        .filter_map(|s| {
                            let l = s.limits.get(k)?;
                            let percent = 100.0 * l.slack / l.bound.abs().max(1e-300);
                            Some([s.step as f64, percent.clamp(-20.0, 100.0)])
                        })
                        .collect();
                    plot.line(
                        Line::new(*name, PlotPoints::from(line))
                            .color(LINES[k % LINES.len()])
                            .width(1.5),
                    );
                }
            });
        egui::ScrollArea::vertical()
            .id_salt("limits of the plot")
            .max_height(height)
            .show(ui, |ui| {
                ui.vertical(|ui| {
                    ui.set_width(key);
                    ui.weak("slack of each limit, in parts of it");
                    for (k, name) in names.iter().enumerate() {
                        ui.horizontal(|ui| {
                            let size = egui::vec2(12.0, 3.0);
                            let (mark, _) = ui.allocate_exact_size(size, egui::Sense::hover());
                            ui.painter().rect_filled(mark, 0.0, LINES[k % LINES.len()]);
                            let text = egui::RichText::new(*name).small();
                            ui.add(egui::Label::new(text).truncate())
                                .on_hover_text(*name);
                        });
                    }
                });
            });
    });
}

fn profile(ui: &mut Ui, id: &str, lines: Option<&[LineProfile]>, kind: Kind, units: Units) {
    let Some(lines) = lines.filter(|l| !l.is_empty()) else {
        ui.weak("Nothing is solved yet.");
        return;
    };
    let length = Kind::Length.shown(units.inch_based);
    Plot::new(id)
        .legend(Legend::default())
        .allow_scroll(false)
        .x_axis_label(format!("along the line, {}", length.symbol))
        .y_axis_label(kind.shown(units.inch_based).symbol)
        .show(ui, |plot| {
            for line in lines {
                let points: Vec<[f64; 2]> = line
                    .along_m
                    .iter()
                    .zip(&line.value)
                    .map(|(&s, &v)| {
                        [
                            Kind::Length.number(s, units.inch_based),
                            kind.number(v, units.inch_based),
                        ]
                    })
                    .collect();
                plot.line(Line::new(&line.name, PlotPoints::from(points)).width(1.8));
            }
        });
}
