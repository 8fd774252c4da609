//! The picture of a design: duct and inserts to scale over a field, the contour before and after, a legend with
//! units, a scale bar.

use super::colour;
use super::error::ReportError;
use super::field::Field;
use super::painter::{Anchor, Colour, Painter};
use super::ticks;
use crate::base::Vec2;
use crate::geometry::{Curve, PieceShape, Segment};
use crate::physics::FlowCondition;
use crate::study::{Design, FieldSnapshot};
use image::RgbImage;

/// Widest picture, pixels: keeps its memory under 200 MB.
const WIDEST: u32 = 8000;
/// Narrowest, pixels: the legend still fits.
const NARROWEST: u32 = 600;
/// Height of the drawing over the picture's width at most.
const TALLEST: f64 = 0.6;
/// Points on each span of a spline or on an arc: chords then bow less than a pixel.
const POINTS_A_SPAN: usize = 12;

const PAPER: Colour = [255; 3];
const INK: Colour = [20; 3];
const FAINT: Colour = [120; 3];
const SOLID: Colour = [214; 3];

/// What to paint.
pub struct Figure<'a> {
    /// Title above the drawing.
    pub title: &'a str,
    /// Duct and inserts as they are now.
    pub design: &'a Design,
    /// Contours before, drawn dashed.
    pub before: Option<&'a Design>,
    /// Field of the design as it is now.
    pub snapshot: Option<&'a FieldSnapshot>,
    /// Which quantity.
    pub field: Field,
    /// Range of the legend, SI; the field's own when none.
    pub range: Option<[f64; 2]>,
    /// Width, pixels (600 to 8000).
    pub width_px: u32,
}

/// From metres to pixels.
struct Place {
    scale: f64,
    low: Vec2,
    left: f64,
    bottom: f64,
}

impl Place {
    fn of(&self, p: Vec2) -> [f64; 2] {
        [
            self.left + (p.x - self.low.x) * self.scale,
            self.bottom - (p.y - self.low.y) * self.scale,
        ]
    }
}

impl Figure<'_> {
    /// The picture as the bytes of a PNG file.
    ///
    /// # Errors
    /// [`ReportError::Picture`].
    pub fn png(&self) -> Result<Vec<u8>, ReportError> {
        let image = self.paint();
        let mut bytes = std::io::Cursor::new(Vec::new());
        let (width, height) = image.dimensions();
        image
            .write_to(&mut bytes, image::ImageFormat::Png)
            .map_err(|reason| ReportError::Picture {
                width,
                height,
                reason,
            })?;
        Ok(bytes.into_inner())
    }

    /// The picture.
    pub fn paint(&self) -> RgbImage {
        let width_px = self.width_px.clamp(NARROWEST, WIDEST);
        let width = f64::from(width_px);
        // All sizes follow the width; 1600 pixels are the reference.
        let unit = width / 1600.0;
        let (margin, head, foot) = (50.0 * unit, 90.0 * unit, 150.0 * unit);
        let outline = outline(self.design);
        let (low, high) = bounds(outline.iter().flatten());
        let size = high - low;
        let inner = width - 2.0 * margin;
        let scale = (inner / size.x).min(TALLEST * width / size.y);
        let scale = if scale.is_finite() && scale > 0.0 {
            scale
        } else {
            1.0
        };
        let drawn = size * scale;
        let height = head + drawn.y.max(40.0 * unit) + foot;
        let place = Place {
            scale,
            low,
            left: margin + (inner - drawn.x) / 2.0,
            bottom: head + drawn.y,
        };
        let mut painter = Painter::new(width_px, height.ceil() as u32, PAPER);
        let title_at = [margin, 48.0 * unit];
        painter.text(title_at, Anchor::Left, 20.0 * unit, self.title, INK);
        let range = self.paint_field(&mut painter, &place);
        self.paint_duct(&mut painter, &place, &outline, unit);
        self.paint_inserts(&mut painter, &place, unit);
        let foot_top = height - foot;
        if let Some(range) = range {
            let bar = [margin, foot_top + 62.0 * unit, 0.5 * inner];
            self.paint_legend(&mut painter, bar, range, unit);
        }
        let right = width - margin;
        self.paint_keys(&mut painter, [right, foot_top + 62.0 * unit], unit);
        paint_scale_bar(
            &mut painter,
            [right, foot_top + 118.0 * unit],
            scale,
            inner,
            unit,
        );
        painter.into_image()
    }

    fn paint_field(&self, painter: &mut Painter, place: &Place) -> Option<[f64; 2]> {
        let snapshot = self.snapshot?;
        let [low, high] = self.range.or_else(|| self.field.range(snapshot))?;
        let values = self.field.values(snapshot);
        let span = if high > low { high - low } else { 1.0 };
        for triangle in self.field.triangles(snapshot) {
            let corner = |i: u32| {
                let p = snapshot.points_m.get(i as usize)?;
                let v = values.get(i as usize)?;
                let p = Vec2::from(p.map(f64::from));
                Some((place.of(p), f64::from(*v)))
            };
            if let [Some(a), Some(b), Some(c)] = triangle.map(corner) {
                painter.triangle([a.0, b.0, c.0], [a.1, b.1, c.1], |v| {
                    colour::of_fraction((v - low) / span)
                });
            }
        }
        Some([low, high])
    }

    fn paint_duct(&self, painter: &mut Painter, place: &Place, outline: &[Vec<Vec2>], unit: f64) {
        for (piece, points) in self.design.duct.iter().zip(outline) {
            let points: Vec<_> = points.iter().map(|&p| place.of(p)).collect();
            let (pen, colour, dash) = match piece.flow {
                FlowCondition::Wall {} => (3.0 * unit, INK, None),
                FlowCondition::Symmetry {} => (1.5 * unit, FAINT, Some([14.0 * unit, 6.0 * unit])),
                _ => (1.5 * unit, FAINT, None),
            };
            painter.stroke(&points, pen, colour, dash);
        }
    }

    fn paint_inserts(&self, painter: &mut Painter, place: &Place, unit: f64) {
        let contours = |design: &Design| -> Vec<Vec<[f64; 2]>> {
            let inserts = design.sketch().inserts;
            let closed = |spline: &dyn Curve, spans: usize| {
                let n = spans * POINTS_A_SPAN;
                (0..=n)
                    .map(|i| place.of(spline.point(i as f64 / n as f64)))
                    .collect()
            };
            inserts
                .iter()
                .map(|i| closed(&i.contour, i.contour.len()))
                .collect()
        };
        let no_field_inside = self.snapshot.is_none_or(|s| {
            self.field != Field::Temperature || s.fluid_triangles >= s.triangles.len()
        });
        for contour in contours(self.design) {
            if no_field_inside {
                painter.fill(&contour, SOLID);
            }
            painter.stroke(&contour, 3.0 * unit, INK, None);
        }
        for contour in self.before.map(contours).unwrap_or_default() {
            // Dark under light: seen on every colour of the map.
            let dash = Some([9.0 * unit, 9.0 * unit]);
            painter.stroke(&contour, 3.4 * unit, INK, dash);
            painter.stroke(&contour, 1.6 * unit, PAPER, dash);
        }
    }

    /// Colour bar from `[left, top]` with its length, and its numbers.
    fn paint_legend(
        &self,
        painter: &mut Painter,
        [left, top, length]: [f64; 3],
        [low, high]: [f64; 2],
        unit: f64,
    ) {
        let thick = 22.0 * unit;
        let (right, bottom) = (left + length, top + thick);
        let name_at = [left, top - 12.0 * unit];
        painter.text(name_at, Anchor::Left, 14.0 * unit, self.field.legend(), INK);
        let corners = [[left, top], [right, top], [right, bottom], [left, bottom]];
        for half in [[0, 1, 2], [0, 2, 3]] {
            let at = half.map(|i: usize| corners[i]);
            let s = at.map(|p| (p[0] - left) / length);
            painter.triangle(at, s, colour::of_fraction);
        }
        let frame = [0, 1, 2, 3, 0].map(|i: usize| corners[i]);
        painter.stroke(&frame, 1.2 * unit, INK, None);
        let values = ticks::ticks(low, high, 7);
        for (value, label) in values.iter().zip(ticks::labels(&values)) {
            let s = if high > low {
                (value - low) / (high - low)
            } else {
                0.5
            };
            let x = left + s * length;
            painter.stroke(
                &[[x, bottom], [x, bottom + 7.0 * unit]],
                1.2 * unit,
                INK,
                None,
            );
            let at = [x, bottom + 28.0 * unit];
            painter.text(at, Anchor::Middle, 14.0 * unit, &label, INK);
        }
    }

    /// What the dashed and the solid contour are, ending at the right.
    fn paint_keys(&self, painter: &mut Painter, [right, y]: [f64; 2], unit: f64) {
        if self.before.is_none() {
            return;
        }
        let text = |painter: &mut Painter, x: f64, text: &str| {
            painter.text([x, y + 5.0 * unit], Anchor::Right, 14.0 * unit, text, INK);
        };
        let line = |x: f64| [[x - 80.0 * unit, y - 2.0 * unit], [x, y - 2.0 * unit]];
        text(painter, right, "after");
        painter.stroke(&line(right - 85.0 * unit), 3.0 * unit, INK, None);
        text(painter, right - 220.0 * unit, "before");
        let dash = Some([9.0 * unit, 9.0 * unit]);
        painter.stroke(&line(right - 320.0 * unit), 3.4 * unit, INK, dash);
        painter.stroke(&line(right - 320.0 * unit), 1.6 * unit, PAPER, dash);
    }
}

/// A length of a round number of metres or millimetres, ending at the right.
fn paint_scale_bar(painter: &mut Painter, [right, y]: [f64; 2], scale: f64, inner: f64, unit: f64) {
    let length_m = ticks::round_below(0.22 * inner / scale);
    let left = right - length_m * scale;
    let end = 7.0 * unit;
    painter.stroke(&[[left, y], [right, y]], 2.0 * unit, INK, None);
    for x in [left, right] {
        painter.stroke(&[[x, y - end], [x, y + end]], 2.0 * unit, INK, None);
    }
    let label = if length_m < 1.0 {
        format!("{} mm", ticks::short(length_m * 1e3, 1))
    } else {
        format!("{} m", ticks::short(length_m, 1))
    };
    let middle = (left + right) / 2.0;
    painter.text(
        [middle, y - 12.0 * unit],
        Anchor::Middle,
        14.0 * unit,
        &label,
        INK,
    );
}

/// Points along each piece of the outline, m.
fn outline(design: &Design) -> Vec<Vec<Vec2>> {
    let pieces = design.duct.iter().enumerate();
    pieces
        .map(|(i, piece)| {
            let n = match &piece.shape {
                PieceShape::Line {} => 1,
                PieceShape::Arc { .. } => 4 * POINTS_A_SPAN,
                PieceShape::Spline { through_m } => (through_m.len() + 1) * POINTS_A_SPAN,
            };
            let curve = Segment::new(&piece.shape, design.from_m(i), piece.to_m);
            (0..=n).map(|j| curve.point(j as f64 / n as f64)).collect()
        })
        .collect()
}

fn bounds<'a>(points: impl Iterator<Item = &'a Vec2>) -> (Vec2, Vec2) {
    let finite = points.filter(|p| p.is_finite());
    finite.fold(
        (
            Vec2 {
                x: f64::MAX,
                y: f64::MAX,
            },
            Vec2 {
                x: f64::MIN,
                y: f64::MIN,
            },
        ),
        |(low, high), p| {
            (
                Vec2 {
                    x: low.x.min(p.x),
                    y: low.y.min(p.y),
                },
                Vec2 {
                    x: high.x.max(p.x),
                    y: high.y.max(p.y),
                },
            )
        },
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Watch;
    use crate::study::Engine;
    use crate::study::stand_in::StandIn;
    use crate::study::test_design::project;

    fn painted(field: Field) -> RgbImage {
        let before = project().design;
        let mut after = before.clone();
        for p in &mut after.inserts[0].points_m {
            p.x = 0.02 + (p.x - 0.02) * 1.5;
        }
        let mut case = project().case();
        case.design = std::sync::Arc::new(after.clone());
        let solved = StandIn::default()
            .solve(&case, &Watch::idle())
            .expect("stands in");
        Figure {
            title: "Tube in a duct: heat +12.5 %",
            design: &after,
            before: Some(&before),
            snapshot: Some(&solved.snapshot),
            field,
            range: None,
            width_px: 1200,
        }
        .paint()
    }

    #[test]
    fn field_contours_and_legend_are_on_the_picture() {
        let image = painted(Field::Temperature);
        if let Ok(path) = std::env::var("FLUMELOFT_FIGURE") {
            image.save(path).expect("saved");
        }
        assert_eq!(image.width(), 1200);
        let has = |colour: Colour| image.pixels().any(|p| p.0 == colour);
        assert!(has(INK) && has(SOLID) && has(PAPER));
        assert!(has(colour::of_fraction(1.0)) && has(colour::of_fraction(0.0)));
        // The corners of the picture are margin.
        assert_eq!(image.get_pixel(0, image.height() - 1).0, PAPER);
        assert_eq!(
            painted(Field::Temperature),
            image,
            "the same picture each time"
        );
        assert_ne!(painted(Field::Speed), image);
    }

    #[test]
    fn the_drawing_is_to_scale() {
        let design = project().design;
        let image = Figure {
            title: "",
            design: &design,
            before: None,
            snapshot: None,
            field: Field::Temperature,
            range: None,
            width_px: 1600,
        }
        .paint();
        // 70 mm fill 1500 pixels: the tube of 4 mm is filled over 85.7 by 85.7 pixels (less the pen).
        let solid = || image.enumerate_pixels().filter(|(_, _, p)| p.0 == SOLID);
        let across = solid()
            .map(|p| p.0)
            .max()
            .zip(solid().map(|p| p.0).min())
            .expect("filled");
        let down = solid()
            .map(|p| p.1)
            .max()
            .zip(solid().map(|p| p.1).min())
            .expect("filled");
        for (high, low) in [across, down] {
            let size = f64::from(high - low + 1) + 3.0;
            assert!((size - 4.0 / 70.0 * 1500.0).abs() < 2.0, "{size}");
        }
    }

    #[test]
    fn a_png_is_written_and_read() {
        let design = project().design;
        let bytes = Figure {
            title: "duct",
            design: &design,
            before: None,
            snapshot: Some(&FieldSnapshot::default()),
            field: Field::Pressure,
            range: None,
            width_px: 700,
        }
        .png()
        .expect("encoded");
        let back = image::load_from_memory(&bytes).expect("decoded");
        assert_eq!(back.width(), 700);
    }

    #[test]
    fn a_hopeless_design_still_gives_a_picture() {
        let mut design = project().design;
        design.duct.clear();
        design.inserts[0].points_m.clear();
        let image = Figure {
            title: "nothing",
            design: &design,
            before: Some(&design),
            snapshot: None,
            field: Field::Temperature,
            range: None,
            width_px: 1,
        }
        .paint();
        assert_eq!(image.width(), NARROWEST);
    }
}
