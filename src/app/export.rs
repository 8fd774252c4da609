//! What leaves the studio, through the report layer; and what comes in as a coordinate list.

use super::canvas::field_of;
use super::studio::Studio;
use super::words::{Edit, Selection};
use crate::base::units::Kind;
use crate::report::contour_file::{self, LengthUnit};
use crate::report::{Figure, table};
use crate::study::Insert;
use crate::study::file::write_whole;
use std::path::Path;

/// The selected insert, or the first.
fn chosen(studio: &Studio) -> Option<&Insert> {
    let inserts = &studio.project.design.inserts;
    match studio.selection {
        Selection::Insert(i) | Selection::Control { insert: i, .. } => inserts.get(i),
        _ => inserts.first(),
    }
}

/// Write the selected contour.
pub fn contour(studio: &mut Studio, path: &Path) -> Result<String, String> {
    let insert = chosen(studio).ok_or("There is no insert to export: add one first.")?;
    let chord_m = Kind::Length
        .parse(&studio.chord_text, studio.settings.inch_based)
        .map_err(|e| e.to_string())?;
    if chord_m <= 0.0 {
        return Err("The chord tolerance must be larger than zero.".into());
    }
    let unit = if studio.export_mm {
        LengthUnit::Millimetre
    } else {
        LengthUnit::Metre
    };
    let text = contour_file::text(insert, unit, chord_m).map_err(|e| e.to_string())?;
    write_whole(path, text.as_bytes()).map_err(|e| e.to_string())?;
    Ok(format!(
        "Wrote the contour of {} to {}.",
        insert.name,
        path.display()
    ))
}

/// Write the drawing with its field.
pub fn picture(studio: &mut Studio, path: &Path) -> Result<String, String> {
    let solved = studio.link.solved.clone();
    let before = studio
        .link
        .improved
        .as_ref()
        .map(|i| i.start.case.design.clone());
    let fresh = solved.as_ref().filter(|s| s.case == studio.case());
    let figure = Figure {
        title: &studio.project.name,
        design: &studio.project.design,
        before: before.as_deref(),
        snapshot: fresh.map(|s| &*s.snapshot),
        field: field_of(studio.view.field).unwrap_or_default(),
        range: studio.view.fixed_range,
        width_px: 2000,
    };
    let bytes = figure.png().map_err(|e| e.to_string())?;
    write_whole(path, &bytes).map_err(|e| e.to_string())?;
    Ok(format!("Wrote the picture to {}.", path.display()))
}

/// Write the history of the last run.
pub fn history(studio: &mut Studio, path: &Path) -> Result<String, String> {
    let run = studio.link.run_case.as_ref();
    let aim = run.map_or(&studio.project.design.aim, |c| &c.design.aim);
    let text = table::history_csv(aim, &studio.link.steps);
    write_whole(path, text.as_bytes()).map_err(|e| e.to_string())?;
    Ok(format!("Wrote the history to {}.", path.display()))
}

/// Read a coordinate list as a new insert.
pub fn import(studio: &mut Studio, path: &Path) -> Result<String, String> {
    let text = std::fs::read_to_string(path)
        .map_err(|e| format!("Cannot read {}: {e}.", path.display()))?;
    let design = &studio.project.design;
    let (to, deviation_m) = design.insert_from_list(&text).map_err(|e| e.to_string())?;
    let (index, name) = (design.inserts.len(), to.name.clone());
    let points = to.points_m.len();
    studio.edit_whole(Edit::SetInsert { insert: index, to });
    studio.selection = Selection::Insert(index);
    let deviation = Kind::Length.text(deviation_m, studio.settings.inch_based);
    Ok(format!(
        "Read {name}: {points} control points, largest deviation from the list {deviation}."
    ))
}

/// Ask for the window's pixels once the question for the path is gone; they are written when they arrive.
pub fn snap(studio: &mut Studio, ctx: &egui::Context) {
    let Some((path, wait)) = studio.snap.take() else {
        return;
    };
    if wait > 0 {
        studio.snap = Some((path, wait - 1));
        ctx.request_repaint();
        return;
    }
    ctx.request_screenshot(move |image| {
        let [width, height] = image.size.map(|s| s as u32);
        let bytes: Vec<u8> = image
            .pixels
            .iter()
            .flat_map(|p| [p.r(), p.g(), p.b()])
            .collect();
        let saved =
            image::RgbImage::from_raw(width, height, bytes).map(|picture| picture.save(&path));
        let done = if matches!(saved, Some(Ok(()))) {
            "exported"
        } else {
            "failed to write"
        };
        super::log(&format!("{done} {}", path.display()));
    });
}
