//! Contours as plain lists of coordinates for CAD: `# ` header lines with unit, name, closed flag and the chord
//! tolerance that is met, then `x y` a line, counter-clockwise.

use super::error::ReportError;
use crate::base::Vec2;
use crate::geometry::{ClosedSpline, Curve};
use crate::study::Insert;
use std::fmt::Write;

/// Most points of a list: what CAD programs still take in one spline or polyline (common practice, no source).
const MOST_POINTS: f64 = 100_000.0;

/// Unit of the coordinates.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LengthUnit {
    /// Millimetres.
    Millimetre,
    /// Metres.
    Metre,
}

impl LengthUnit {
    /// Its symbol.
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Millimetre => "mm",
            Self::Metre => "m",
        }
    }

    /// How many of it a metre has.
    pub fn per_metre(self) -> f64 {
        match self {
            Self::Millimetre => 1e3,
            Self::Metre => 1.0,
        }
    }
}

/// Name of the file for an insert's contour: letters, digits, `-` and `_` of its name are kept.
pub fn file_name(insert: &str) -> String {
    let safe = insert.chars().map(|c| {
        if c.is_alphanumeric() || c == '-' || c == '_' {
            c
        } else {
            '_'
        }
    });
    format!("contour_{}.txt", safe.collect::<String>())
}

/// The list of an insert's contour, straight lines between its points departing from the contour by at most
/// `chord_m`, rounding included.
///
/// # Errors
/// [`ReportError::TooFine`].
pub fn text(insert: &Insert, unit: LengthUnit, chord_m: f64) -> Result<String, ReportError> {
    let scale = unit.per_metre();
    // A hundredth of the tolerance goes to rounding, the rest to the chords.
    let decimals = (-(chord_m * scale * 1e-2).log10()).ceil().clamp(0.0, 17.0) as usize;
    let rounding_m = 10f64.powi(-(decimals as i32)) / scale;
    let (points, departure_m) =
        chords(&insert.contour(), chord_m - rounding_m).ok_or(ReportError::TooFine { chord_m })?;
    let met = (departure_m + rounding_m) * scale;
    let symbol = unit.symbol();
    let mut text = String::new();
    // Writing to a String cannot fail.
    let name = insert.name.replace(['\n', '\r'], " ");
    let _ = write!(
        text,
        "# unit: {symbol}\n# name: {name}\n# closed: yes\n# chord tolerance: {met:.3e} {symbol}\n"
    );
    for p in points {
        let _ = writeln!(
            text,
            "{:.decimals$} {:.decimals$}",
            p.x * scale,
            p.y * scale
        );
    }
    Ok(text)
}

/// Points along the contour and how far the chords between them depart at most, m.
///
/// Over a parameter step h a curve departs from its chord by at most `h^2/8 max |p''|` (error of linear
/// interpolation), and on a span of a cubic spline p'' is linear, so that its largest value is at an end.
fn chords(contour: &ClosedSpline, chord_m: f64) -> Option<(Vec<Vec2>, f64)> {
    let n = contour.len();
    let bend = |i: usize| contour.second_derivative((i % n) as f64 / n as f64).norm();
    let mut points = Vec::new();
    let mut departure_m = 0.0f64;
    for i in 0..n {
        let most = bend(i).max(bend(i + 1)) / (8.0 * (n * n) as f64);
        let parts = (most / chord_m).sqrt().ceil().max(1.0);
        if !(chord_m > 0.0 && points.len() as f64 + parts <= MOST_POINTS) {
            return None;
        }
        departure_m = departure_m.max(most / (parts * parts));
        let parts = parts as usize;
        points
            .extend((0..parts).map(|j| contour.point((i * parts + j) as f64 / (n * parts) as f64)));
    }
    Some((points, departure_m))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::test_design::channel_with_tube;

    fn read(text: &str, unit: LengthUnit) -> Vec<Vec2> {
        let lines = text.lines().filter(|l| !l.starts_with('#'));
        lines
            .map(|l| {
                let (x, y) = l.split_once(' ').expect("two numbers");
                let metres = |s: &str| s.parse::<f64>().expect("a number") / unit.per_metre();
                Vec2 {
                    x: metres(x),
                    y: metres(y),
                }
            })
            .collect()
    }

    /// Largest distance of the contour from the polygon, m.
    fn departure(contour: &ClosedSpline, polygon: &[Vec2]) -> f64 {
        let to_segment = |p: Vec2, a: Vec2, b: Vec2| {
            let t = ((p - a).dot(b - a) / (b - a).norm_squared()).clamp(0.0, 1.0);
            p.distance(a.lerp(b, t))
        };
        let nearest = |p: Vec2| {
            let next = polygon.iter().cycle().skip(1);
            polygon
                .iter()
                .zip(next)
                .map(|(a, b)| to_segment(p, *a, *b))
                .fold(f64::MAX, f64::min)
        };
        (0..2000)
            .map(|i| nearest(contour.point(f64::from(i) / 2000.0)))
            .fold(0.0, f64::max)
    }

    #[test]
    fn the_tolerance_is_met_and_not_by_waste() {
        let insert = &channel_with_tube().inserts[0];
        for unit in [LengthUnit::Millimetre, LengthUnit::Metre] {
            for chord_m in [1e-4, 1e-5, 1e-6] {
                let text = text(insert, unit, chord_m).expect("written");
                let points = read(&text, unit);
                let off = departure(&insert.contour(), &points);
                assert!(off <= chord_m, "{off} > {chord_m}");
                // A circle of radius r needs about 2 pi / sqrt(8 chord / r) points.
                let needed = std::f64::consts::TAU / (8.0 * chord_m / 2e-3).sqrt();
                assert!(
                    points.len() as f64 <= 16.0f64.max(2.0 * needed),
                    "{}",
                    points.len()
                );
                // Flawed twin: every second point left out misses the tolerance where it was not for free.
                let thin: Vec<Vec2> = points.iter().copied().step_by(2).collect();
                assert!(chord_m > 1e-5 || departure(&insert.contour(), &thin) > chord_m);
            }
        }
    }

    #[test]
    fn the_header_names_all_and_the_points_run_counter_clockwise() {
        let mut insert = channel_with_tube().inserts[0].clone();
        insert.points_m.reverse();
        let text = text(&insert, LengthUnit::Millimetre, 1e-5).expect("written");
        let head: Vec<&str> = text.lines().take(4).collect();
        assert_eq!(head[..3], ["# unit: mm", "# name: tube", "# closed: yes"]);
        assert!(head[3].starts_with("# chord tolerance: ") && head[3].ends_with(" mm"));
        let points = read(&text, LengthUnit::Millimetre);
        let next = points.iter().cycle().skip(1);
        assert!(
            points
                .iter()
                .zip(next)
                .map(|(p, q)| p.cross(*q))
                .sum::<f64>()
                > 0.0
        );
    }

    #[test]
    fn a_hopeless_tolerance_is_refused() {
        let insert = &channel_with_tube().inserts[0];
        for chord_m in [0.0, -1.0, 1e-16, f64::NAN] {
            assert!(matches!(
                text(insert, LengthUnit::Metre, chord_m),
                Err(ReportError::TooFine { .. })
            ));
        }
        assert_eq!(file_name("tube 1/a"), "contour_tube_1_a.txt");
    }
}
