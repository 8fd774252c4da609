//! A field for a quantity: shows the value with its unit, takes typed text with or without a unit.

use crate::base::units::Kind;
use egui::{Id, Ui};

/// Width of a field, points.
const WIDTH: f32 = 108.0;

/// Settings that fields need.
#[derive(Clone, Copy, Debug)]
pub struct Units {
    /// Inch-based.
    pub inch_based: bool,
}

/// A labelled field in a grid row; returns a new SI value when the user entered one.
pub fn quantity(
    ui: &mut Ui,
    units: Units,
    name: &str,
    help: &str,
    kind: Kind,
    si: f64,
) -> Option<f64> {
    let label = ui.label(name).on_hover_text(help);
    let entered = bare_quantity(ui, units, name, help, kind, si, Some(label.id));
    ui.end_row();
    entered
}

/// The field without its label.
pub fn bare_quantity(
    ui: &mut Ui,
    units: Units,
    name: &str,
    help: &str,
    kind: Kind,
    si: f64,
    label: Option<Id>,
) -> Option<f64> {
    let id = ui.make_persistent_id(("quantity", name));
    let shown = kind.text(si, units.inch_based);
    // Text that is being typed, or was left wrong; it is dropped when the value changes from elsewhere.
    let kept = ui.data(|d| d.get_temp::<(String, u64)>(id));
    let mut text = match kept {
        Some((text, of)) if of == si.to_bits() => text,
        _ => shown.clone(),
    };
    let units_known: Vec<&str> = kind.units().iter().map(|u| u.symbol).collect();
    let (response, wrong) = ui
        .vertical(|ui| {
            let wrong = kind.parse(&text, units.inch_based).err();
            let mut edit = egui::TextEdit::singleline(&mut text)
                .id(id.with("edit"))
                .desired_width(WIDTH);
            if wrong.is_some() {
                edit = edit.text_color(ui.visuals().error_fg_color);
            }
            let mut response = ui.add(edit);
            response = match label {
                Some(label) => response.labelled_by(label),
                None => response,
            };
            let wrong = kind.parse(&text, units.inch_based).err();
            if let Some(error) = &wrong
                && !response.has_focus()
            {
                reason(
                    ui,
                    &format!("Not taken: {error}. Escape in the field brings the old value back."),
                );
            }
            (response, wrong)
        })
        .inner;
    let response = response.on_hover_text(match &wrong {
        Some(error) => error.to_string(),
        None => format!("{help}. Units: {}", units_known.join(", ")),
    });
    if response.has_focus() {
        ui.data_mut(|d| d.insert_temp(id, (text.clone(), si.to_bits())));
    }
    if response.lost_focus() {
        let escaped = ui.input(|i| i.key_pressed(egui::Key::Escape));
        match kind.parse(&text, units.inch_based) {
            // Wrong text stays with its reason, so that nothing typed is lost.
            Err(_) if !escaped => {
                ui.data_mut(|d| d.insert_temp(id, (text.clone(), si.to_bits())));
            }
            parsed => {
                ui.data_mut(|d| d.remove_temp::<(String, u64)>(id));
                if let Ok(value) = parsed
                    && !escaped
                    && text != shown
                    && value != si
                {
                    return Some(value);
                }
            }
        }
    }
    None
}

/// Why a text was not taken, under its field.
pub(in crate::app) fn reason(ui: &mut Ui, error: &str) {
    let color = ui.visuals().error_fg_color;
    ui.set_max_width(WIDTH.max(150.0));
    ui.add(egui::Label::new(egui::RichText::new(error).small().color(color)).wrap());
}

/// A text field in a grid row; returns the new text when the user entered one.
pub fn words(ui: &mut Ui, name: &str, help: &str, now: &str) -> Option<String> {
    let label = ui.label(name).on_hover_text(help);
    let id = ui.make_persistent_id(("words", name));
    let mut text = ui
        .data(|d| d.get_temp::<String>(id))
        .unwrap_or_else(|| now.to_owned());
    let edit = egui::TextEdit::singleline(&mut text)
        .id(id.with("edit"))
        .desired_width(WIDTH);
    let response = ui.add(edit).labelled_by(label.id).on_hover_text(help);
    ui.end_row();
    if response.has_focus() {
        ui.data_mut(|d| d.insert_temp(id, text.clone()));
    }
    if response.lost_focus() {
        ui.data_mut(|d| d.remove_temp::<String>(id));
        if !text.trim().is_empty() && text != now {
            return Some(text.trim().to_owned());
        }
    }
    None
}

/// A choice in a grid row; returns the new index when the user chose another.
pub fn choice(ui: &mut Ui, name: &str, help: &str, options: &[&str], now: usize) -> Option<usize> {
    let label = ui.label(name).on_hover_text(help);
    let mut picked = now;
    let shown = options.get(now).copied().unwrap_or("");
    egui::ComboBox::from_id_salt(("choice", name))
        .selected_text(shown)
        .width(WIDTH)
        .show_ui(ui, |ui| {
            for (i, option) in options.iter().enumerate() {
                ui.selectable_value(&mut picked, i, *option);
            }
        })
        .response
        .labelled_by(label.id)
        .on_hover_text(help);
    ui.end_row();
    (picked != now).then_some(picked)
}
