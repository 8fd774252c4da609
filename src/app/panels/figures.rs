//! Results: each figure with its unit and its difference against the kept variant; greyed while stale.

use super::field::Units;
use crate::base::units::{Kind, significant};
use crate::study::SolveReport;
use egui::{Grid, RichText, Ui};

type Row = (
    &'static str,
    &'static str,
    Kind,
    fn(&SolveReport) -> f64,
    Better,
);

/// Which way is better, for the colour of a difference.
#[derive(Clone, Copy, PartialEq)]
enum Better {
    More,
    Less,
    Neither,
}

const ROWS: [Row; 11] = [
    (
        "heat from inserts",
        "Heat from all inserts into the fluid, per metre of depth",
        Kind::Power,
        |r| r.heat_w_m,
        Better::More,
    ),
    (
        "heat from walls",
        "Heat from all duct walls into the fluid, per metre of depth",
        Kind::Power,
        |r| r.wall_heat_w_m,
        Better::Neither,
    ),
    (
        "total pressure drop",
        "Flow-weighted total pressure between inlets and outlets: what a fan or pump must deliver",
        Kind::Pressure,
        |r| r.total_pressure_drop_pa,
        Better::Less,
    ),
    (
        "static pressure drop",
        "Width-averaged static pressure between inlets and outlets",
        Kind::Pressure,
        |r| r.static_pressure_drop_pa,
        Better::Less,
    ),
    (
        "pumping power",
        "Total pressure drop times flow rate, per metre of depth",
        Kind::Power,
        |r| r.pumping_power_w_m,
        Better::Less,
    ),
    (
        "flow rate",
        "Flow through the inlets, per metre of depth",
        Kind::FlowRate,
        |r| r.flow_rate_m2_s,
        Better::Neither,
    ),
    (
        "mean velocity",
        "Flow rate over the inlets' width",
        Kind::Velocity,
        |r| r.mean_velocity_m_s,
        Better::Neither,
    ),
    (
        "Reynolds number",
        "ρ U 2H/μ with the mean velocity U and the width H of the inlets",
        Kind::Number,
        |r| r.reynolds,
        Better::Neither,
    ),
    (
        "outlet temperature",
        "Mixed-mean temperature at the outlets",
        Kind::Temperature,
        |r| r.outlet_bulk_temperature_k,
        Better::Neither,
    ),
    (
        "highest temperature",
        "Highest temperature anywhere",
        Kind::Temperature,
        |r| r.max_temperature_k,
        Better::Less,
    ),
    (
        "highest speed",
        "Highest speed anywhere",
        Kind::Velocity,
        |r| r.max_speed_m_s,
        Better::Neither,
    ),
];

/// Draw the results.
pub fn show(
    ui: &mut Ui,
    report: Option<&SolveReport>,
    kept: Option<(&str, &SolveReport)>,
    stale: bool,
    units: Units,
) {
    let Some(report) = report else {
        ui.weak("Nothing is solved yet.");
        return;
    };
    if stale {
        ui.weak("Being computed for the present drawing; these numbers belong to the one before.");
    }
    Grid::new("figures")
        .num_columns(3)
        .striped(true)
        .min_col_width(70.0)
        .show(ui, |ui| {
            ui.weak("");
            ui.weak("value");
            let against = kept.map_or("no variant kept yet".to_owned(), |k| {
                format!("Difference against \"{}\"", k.0)
            });
            ui.weak(if kept.is_some() { "change" } else { "" })
                .on_hover_text(against);
            ui.end_row();
            for (name, help, kind, get, better) in ROWS {
                line(
                    ui,
                    name,
                    help,
                    kind,
                    get(report),
                    kept.map(|k| get(k.1)),
                    better,
                    stale,
                    units,
                );
            }
            for insert in &report.inserts {
                ui.strong(&insert.name);
                ui.end_row();
                let before = kept.and_then(|k| k.1.inserts.iter().find(|i| i.name == insert.name));
                for (name, help, kind, value, old, better) in [
                    (
                        "heat",
                        "Heat into the fluid, per metre of depth",
                        Kind::Power,
                        insert.heat_w_m,
                        before.map(|b| b.heat_w_m),
                        Better::More,
                    ),
                    (
                        "drag",
                        "Force of the fluid along x, per metre of depth",
                        Kind::Force,
                        insert.drag_n_m,
                        before.map(|b| b.drag_n_m),
                        Better::Less,
                    ),
                    (
                        "lift",
                        "Force of the fluid along y, per metre of depth",
                        Kind::Force,
                        insert.lift_n_m,
                        before.map(|b| b.lift_n_m),
                        Better::Neither,
                    ),
                    (
                        "highest temperature",
                        "On the contour or in the solid",
                        Kind::Temperature,
                        insert.max_temperature_k,
                        before.map(|b| b.max_temperature_k),
                        Better::Less,
                    ),
                    (
                        "area",
                        "Area of the cross-section",
                        Kind::Area,
                        insert.area_m2,
                        before.map(|b| b.area_m2),
                        Better::Neither,
                    ),
                    (
                        "perimeter",
                        "Length of the contour",
                        Kind::Length,
                        insert.perimeter_m,
                        before.map(|b| b.perimeter_m),
                        Better::Neither,
                    ),
                    (
                        "smallest gap",
                        "To walls and other inserts",
                        Kind::Length,
                        insert.min_gap_m,
                        before.map(|b| b.min_gap_m),
                        Better::Neither,
                    ),
                    (
                        "smallest radius",
                        "Radius of curvature, convex or concave",
                        Kind::Length,
                        insert.min_radius_m,
                        before.map(|b| b.min_radius_m),
                        Better::Neither,
                    ),
                    (
                        "smallest thickness",
                        "Along the inward normals",
                        Kind::Length,
                        insert.min_thickness_m,
                        before.map(|b| b.min_thickness_m),
                        Better::Neither,
                    ),
                ] {
                    line(ui, name, help, kind, value, old, better, stale, units);
                }
            }
        });
    ui.add_space(6.0);
    ui.weak(format!(
        "{} triangles, {} flow unknowns, {} Newton steps, {:.2} s",
        report.triangles, report.unknowns, report.newton_steps, report.seconds.total
    ));
    let b = &report.balance;
    ui.weak(format!(
        "Balances: mass {:.0e}, heat {:.0e}, energy {:.0e}, area {:.0e}",
        b.mass_relative, b.heat_relative, b.energy_relative, b.area_relative
    ))
    .on_hover_text("Relative: net flow; heat in against heat out; dissipation against pressure times flow; mesh area against drawn area");
}

#[expect(clippy::too_many_arguments, reason = "a row of a table")]
fn line(
    ui: &mut Ui,
    name: &str,
    help: &str,
    kind: Kind,
    value: f64,
    before: Option<f64>,
    better: Better,
    stale: bool,
    units: Units,
) {
    ui.label(name).on_hover_text(help);
    let text = RichText::new(kind.text(value, units.inch_based)).monospace();
    ui.label(if stale { text.weak() } else { text });
    match before {
        Some(before) if !stale => {
            let colours = (
                egui::Color32::from_rgb(0x2e, 0x8b, 0x57),
                ui.visuals().warn_fg_color,
            );
            let (text, change) = difference(kind, value, before, units);
            let good = match better {
                Better::More => change > 0.0,
                Better::Less => change < 0.0,
                Better::Neither => true,
            };
            let text = RichText::new(text).monospace();
            let plain = better == Better::Neither || change.abs() < 5e-5;
            ui.label(if plain {
                text.weak()
            } else {
                text.color(if good { colours.0 } else { colours.1 })
            });
        }
        _ => {
            ui.label("");
        }
    }
    ui.end_row();
}

/// Differences outside these, per cent, say nothing: noise, or a comparison with nearly zero.
const LEAST_PERCENT: f64 = 5e-3;
const MOST_PERCENT: f64 = 1000.0;

/// Difference in words and its relative size (kelvin for temperatures).
fn difference(kind: Kind, value: f64, before: f64, units: Units) -> (String, f64) {
    if kind == Kind::Temperature {
        let factor = kind.shown(units.inch_based).factor;
        return (
            format!(
                "{:+.2} {}",
                (value - before) / factor,
                if units.inch_based { "°F" } else { "K" }
            ),
            value - before,
        );
    }
    if before == 0.0 {
        return (String::new(), 0.0);
    }
    let relative = value / before - 1.0;
    let percent = 100.0 * relative;
    if percent.abs() < LEAST_PERCENT {
        return ("±0 %".into(), 0.0);
    }
    if percent.abs() > MOST_PERCENT {
        return ("from about 0".into(), relative);
    }
    let digits = significant(percent.abs(), 3);
    (
        format!("{}{digits} %", if percent < 0.0 { "−" } else { "+" }),
        relative,
    )
}
