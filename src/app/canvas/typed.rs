//! Coordinates typed at the selected handle.

use super::CanvasState;
use super::camera::Camera;
use super::tool::place_of;
use crate::app::words::{CanvasInput, CanvasOutput, Edit, Gesture, Selection};
use crate::base::units::{Kind, significant};
use crate::base::{Vec2, vec2};
use egui::{Key, Rect, Ui};

/// The inline field.
#[derive(Clone, Debug, Default)]
pub struct Typed {
    text: String,
    /// Whether the field was there in the frame before: the key that opens it does not enter it.
    open: bool,
    /// Why the text was not taken, until it is changed.
    wrong: Option<PlaceError>,
}

/// Text that is no place.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum PlaceError {
    /// Not two parts.
    #[error("\"{text}\" is not a pair of lengths; type x; y, for example 12 mm; 5 mm")]
    Pair {
        /// What was typed.
        text: String,
    },
    /// Commas can be read in two ways.
    #[error("\"{text}\" can be read in more than one way; put a semicolon between x and y")]
    Commas {
        /// What was typed.
        text: String,
    },
    /// One part is no length.
    #[error("{which}: {reason}")]
    Length {
        /// x or y.
        which: char,
        /// Why.
        reason: crate::base::units::UnitError,
    },
}

impl Typed {
    /// The field with a place, m, in it.
    pub(super) fn at(place_m: Vec2, inch_based: bool) -> Self {
        let number = |v| significant(Kind::Length.number(v, inch_based), 6);
        Self {
            text: format!("{}; {}", number(place_m.x), number(place_m.y)),
            ..Self::default()
        }
    }
}

/// A place, m, from `x; y`, `x, y` or `x y`, each with or without a unit. A comma is a decimal one only where a
/// semicolon stands between the two.
///
/// # Errors
/// [`PlaceError`] with what is wrong.
pub fn parse_place(text: &str, inch_based: bool) -> Result<Vec2, PlaceError> {
    let text = text.trim().trim_matches(['(', ')']);
    let length = |which, part: &str| {
        Kind::Length
            .parse(part, inch_based)
            .map_err(|reason| PlaceError::Length { which, reason })
    };
    let pair = |x: &str, y: &str| Ok(vec2(length('x', x)?, length('y', y)?));
    let told = || text.to_owned();
    if let Some((x, y)) = text.split_once(';') {
        return pair(x, y);
    }
    match text.matches(',').count() {
        0 => {}
        1 => {
            let (x, y) = text.split_once(',').unwrap_or_default();
            return if x.trim().is_empty() || y.trim().is_empty() {
                Err(PlaceError::Pair { text: told() })
            } else {
                pair(x, y)
            };
        }
        _ => return Err(PlaceError::Commas { text: told() }),
    }
    // Between two words: the cut that makes two lengths, so that units may stand apart from their numbers.
    let words: Vec<&str> = text.split_whitespace().collect();
    (1..words.len())
        .find_map(|k| pair(&words[..k].join(" "), &words[k..].join(" ")).ok())
        .ok_or_else(|| PlaceError::Pair { text: told() })
}

/// Draw the field, if it is open, and take what was entered.
pub(super) fn show(
    ui: &mut Ui,
    state: &mut CanvasState,
    camera: &Camera,
    rect: Rect,
    input: &CanvasInput,
    output: &mut CanvasOutput,
) {
    let Some(mut typed) = state.tool.typed.take() else {
        return;
    };
    let opened = std::mem::replace(&mut typed.open, true);
    let Some(place) = place_of(input.design, input.selection) else {
        return;
    };
    let at = camera.screen_from_world(rect, place) + egui::vec2(12.0, -28.0);
    let field = Rect::from_min_size(at, egui::vec2(170.0, 22.0));
    let response = ui
        .put(
            field,
            egui::TextEdit::singleline(&mut typed.text)
                .hint_text("x; y")
                .id_salt("typed coordinates"),
        )
        .on_hover_text(
            "Coordinates of the point: x; y with or without units, Enter to set, Escape to leave",
        );
    response.request_focus();
    if !opened {
        // All of it is selected, so that typing replaces it.
        let mut cursor = egui::TextEdit::load_state(ui.ctx(), response.id).unwrap_or_default();
        let end = egui::text::CCursor::new(typed.text.chars().count());
        let all = egui::text::CCursorRange::two(egui::text::CCursor::new(0), end);
        cursor.cursor.set_char_range(Some(all));
        cursor.store(ui.ctx(), response.id);
    }
    if ui.input(|i| i.key_pressed(Key::Escape)) {
        return;
    }
    if response.changed() {
        typed.wrong = None;
    }
    if opened && ui.input(|i| i.key_pressed(Key::Enter)) {
        match parse_place(&typed.text, input.inch_based) {
            Ok(to_m) => {
                let edit = match *input.selection {
                    Selection::Control { insert, control } => Some(Edit::MoveControl {
                        insert,
                        control,
                        to_m,
                    }),
                    Selection::Corner(piece) => Some(Edit::MoveCorner { piece, to_m }),
                    _ => None,
                };
                output
                    .gestures
                    .extend(edit.filter(|_| to_m != place).map(|edit| Gesture {
                        edit,
                        finished: true,
                    }));
                return;
            }
            Err(error) => typed.wrong = Some(error),
        }
    }
    if let Some(error) = &typed.wrong {
        let under = egui::Area::new(response.id.with("reason"))
            .fixed_pos(field.left_bottom() + egui::vec2(0.0, 3.0));
        under.show(ui.ctx(), |ui| {
            egui::Frame::popup(ui.style()).show(ui, |ui| {
                crate::app::panels::field::reason(ui, &error.to_string())
            });
        });
    }
    state.tool.typed = Some(typed);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_are_read_in_the_ways_people_write_them() {
        let place = vec2(0.012, 0.0055);
        for text in [
            "12; 5.5",
            "12 mm; 5.5 mm",
            "12, 5.5",
            "12 5.5",
            "12 mm 5.5 mm",
            "1.2 cm 5.5",
            "12,0; 5,5",
            "(12, 5.5)",
        ] {
            let read = parse_place(text, false).unwrap();
            assert!(read.distance(place) < 1e-15, "{text}: {read:?}");
        }
        assert!(
            parse_place("1; 1", true)
                .unwrap()
                .distance(vec2(0.0254, 0.0254))
                < 1e-15
        );
    }

    #[test]
    fn what_is_no_place_is_refused_with_the_reason() {
        for (text, told) in [
            ("12", "pair of lengths"),
            ("12,5, 3,2", "semicolon"),
            ("12 kg; 3", "kg"),
            ("12; x", "y:"),
            ("", "pair of lengths"),
            ("12,", "pair of lengths"),
        ] {
            let error = parse_place(text, false).unwrap_err().to_string();
            assert!(error.contains(told), "{text}: {error}");
        }
    }
}
