//! Cautions: specific, with the number that triggers each; and faults of the drawing.

use crate::app::words::Mark;
use crate::study::{Caution, CautionLevel};
use egui::{RichText, Ui};

/// Draw faults first, then cautions, worst first.
pub fn show(
    ui: &mut Ui,
    faults: &[String],
    marks: &[Mark],
    cautions: &[Caution],
    failure: Option<&str>,
    stale: bool,
) {
    let bad = ui.visuals().error_fg_color;
    let warn = ui.visuals().warn_fg_color;
    for fault in faults
        .iter()
        .map(String::as_str)
        .chain(marks.iter().map(|m| m.text.as_str()))
    {
        ui.label(RichText::new(format!("× {fault}")).color(bad));
    }
    if let Some(failure) = failure {
        ui.label(RichText::new(format!("× {failure}")).color(bad));
    }
    if !faults.is_empty() || !marks.is_empty() {
        return;
    }
    for caution in cautions {
        let (sign, colour) = match caution.level {
            CautionLevel::Warning => ("!", Some(bad)),
            CautionLevel::Caution => ("!", Some(warn)),
            CautionLevel::Note => ("•", None),
        };
        let text = RichText::new(format!("{sign} {}", caution.text));
        let text = match colour {
            Some(c) if !stale => text.color(c),
            _ => text.weak(),
        };
        ui.label(text);
        ui.add_space(2.0);
    }
    ui.add_space(4.0);
    ui.weak(
        "Figures of a laminar, steady, two-dimensional model. Hot surfaces, pressure, coolants and lost cooling can hurt \
         people: follow local codes and have the design checked by a licensed engineer.",
    );
}
