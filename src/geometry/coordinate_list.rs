//! Reading plain lists of coordinates: `# ` comment lines (with `unit: mm` or `m`, `name: ...`), then two numbers
//! a line, separated by blanks, commas, semicolons or tabs; the first point may be repeated at the end.

use crate::base::{Vec2, vec2};

/// Most points read: far more than a contour needs.
const MOST_POINTS: usize = 200_000;

/// A list as read.
#[derive(Clone, Debug, PartialEq)]
pub struct CoordinateList {
    /// Name in the header, if any.
    pub name: Option<String>,
    /// Points, m, counter-clockwise, without repeats.
    pub points_m: Vec<Vec2>,
}

/// A list that cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum ListError {
    /// A line that is no point.
    #[error("line {line}: \"{text}\" is not two numbers; write x and y separated by a blank")]
    Line {
        /// Line number from 1.
        line: usize,
        /// What it holds.
        text: String,
    },
    /// A unit that is not known.
    #[error("line {line}: the unit \"{unit}\" is not known; write mm, m, cm, um or in")]
    Unit {
        /// Line number from 1.
        line: usize,
        /// What it says.
        unit: String,
    },
    /// Too few points.
    #[error(
        "the list has {count} different points, too few for a closed contour; it needs at least 4"
    )]
    TooFew {
        /// How many it has.
        count: usize,
    },
    /// Too many points.
    #[error("the list has more than {most} points; thin it out")]
    TooMany {
        /// How many are taken.
        most: usize,
    },
    /// No area.
    #[error("the points enclose no area; they must run round a contour")]
    NoArea,
}

impl CoordinateList {
    /// Read a list; without a unit in the header the numbers are millimetres.
    ///
    /// # Errors
    /// [`ListError`] with the line.
    pub fn read(text: &str) -> Result<Self, ListError> {
        let mut factor = 1e-3;
        let mut name = None;
        let mut points: Vec<Vec2> = Vec::new();
        for (i, line) in text.lines().enumerate() {
            let line = line.trim().trim_start_matches('\u{feff}');
            if let Some(comment) = line.strip_prefix('#') {
                header(comment, i + 1, &mut factor, &mut name)?;
                continue;
            }
            if line.is_empty() {
                continue;
            }
            let point = parse(line).ok_or_else(|| ListError::Line {
                line: i + 1,
                text: line.chars().take(40).collect(),
            })?;
            if points.len() >= MOST_POINTS {
                return Err(ListError::TooMany { most: MOST_POINTS });
            }
            if points.last() != Some(&point) {
                points.push(point);
            }
        }
        if points.len() > 1 && points.first() == points.last() {
            points.pop();
        }
        if points.len() < 4 {
            return Err(ListError::TooFew {
                count: points.len(),
            });
        }
        let n = points.len();
        let twice_area: f64 = (0..n).map(|i| points[i].cross(points[(i + 1) % n])).sum();
        if twice_area < 0.0 {
            points[1..].reverse();
        }
        let size = points
            .iter()
            .fold(0.0, |s: f64, p| s.max(p.distance(points[0])));
        if twice_area.abs() <= 1e-9 * size * size {
            return Err(ListError::NoArea);
        }
        Ok(Self {
            name,
            points_m: points.into_iter().map(|p| p * factor).collect(),
        })
    }
}

fn header(
    comment: &str,
    line: usize,
    factor: &mut f64,
    name: &mut Option<String>,
) -> Result<(), ListError> {
    let Some((key, value)) = comment.split_once(':') else {
        return Ok(());
    };
    let value = value.trim();
    match key.trim().to_ascii_lowercase().as_str() {
        "unit" | "units" => {
            *factor = match value.split_whitespace().next().unwrap_or("") {
                "m" => 1.0,
                "mm" => 1e-3,
                "cm" => 1e-2,
                "in" | "inch" => 0.0254,
                "um" | "µm" => 1e-6,
                other => {
                    return Err(ListError::Unit {
                        line,
                        unit: other.into(),
                    });
                }
            }
        }
        "name" => *name = Some(value.to_owned()),
        _ => {}
    }
    Ok(())
}

fn parse(line: &str) -> Option<Vec2> {
    let mut numbers = line
        .split(|c: char| c.is_whitespace() || matches!(c, ',' | ';'))
        .filter(|s| !s.is_empty())
        .map(str::parse::<f64>);
    let (x, y) = (numbers.next()?.ok()?, numbers.next()?.ok()?);
    let rest_is_fine = numbers.next().is_none_or(|z| z.is_ok());
    let point = vec2(x, y);
    (point.is_finite() && rest_is_fine).then_some(point)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists_are_read_in_either_sense_with_repeats_and_units() {
        let text = "# name: rib\n# unit: m\n0 0\n0 0\n0,1\n1;1\n1\t0\n0 0\n";
        let list = CoordinateList::read(text).unwrap();
        assert_eq!(list.name.as_deref(), Some("rib"));
        assert_eq!(
            list.points_m,
            vec![vec2(0., 0.), vec2(1., 0.), vec2(1., 1.), vec2(0., 1.)]
        );
        assert_eq!(
            CoordinateList::read("0 0\n1 0\n1 1\n0 1").unwrap().points_m[1],
            vec2(1e-3, 0.0)
        );
    }

    #[test]
    fn bad_lists_are_told_with_their_line() {
        assert!(
            CoordinateList::read("0 0\nx y\n")
                .unwrap_err()
                .to_string()
                .starts_with("line 2")
        );
        assert_eq!(
            CoordinateList::read("0 0\n1 1\n"),
            Err(ListError::TooFew { count: 2 })
        );
        assert_eq!(
            CoordinateList::read("0 0\n1 1\n2 2\n3 3\n"),
            Err(ListError::NoArea)
        );
        assert!(CoordinateList::read("0 0\n1 inf\n").is_err());
        assert!(
            CoordinateList::read("# unit: furlong\n0 0\n")
                .unwrap_err()
                .to_string()
                .contains("furlong")
        );
    }
}
