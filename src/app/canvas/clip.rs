//! Lines cut at the view, so that dashes are made only where they are seen.

use egui::{Pos2, Rect, Shape, Stroke};

/// The part of a line within a box, if any (Liang and Barsky, ACM Trans. Graphics 3, 1, 1984).
fn within(a: Pos2, b: Pos2, view: Rect) -> Option<[Pos2; 2]> {
    let (mut first, mut last) = (0.0f32, 1.0f32);
    let d = b - a;
    for (step, low, high) in [
        (d.x, view.left() - a.x, view.right() - a.x),
        (d.y, view.top() - a.y, view.bottom() - a.y),
    ] {
        if step == 0.0 {
            if low > 0.0 || high < 0.0 {
                return None;
            }
            continue;
        }
        let (near, far) = if step > 0.0 {
            (low / step, high / step)
        } else {
            (high / step, low / step)
        };
        first = first.max(near);
        last = last.min(far);
    }
    (first <= last).then(|| [a + d * first, a + d * last])
}

/// The visible runs of a chain of points.
fn runs(points: &[Pos2], view: Rect) -> Vec<Vec<Pos2>> {
    let mut runs: Vec<Vec<Pos2>> = Vec::new();
    for pair in points.windows(2) {
        let Some([a, b]) = within(pair[0], pair[1], view) else {
            continue;
        };
        match runs.last_mut() {
            Some(run) if run.last() == Some(&a) => run.push(b),
            _ => runs.push(vec![a, b]),
        }
    }
    runs
}

/// Dashes of a chain of points, made only within the view (and a little around it).
pub fn dashed(
    points: &[Pos2],
    view: Rect,
    stroke: Stroke,
    dashes: &[f32],
    gaps: &[f32],
) -> Vec<Shape> {
    let longest = dashes.iter().chain(gaps).fold(0.0f32, |a, &b| a.max(b));
    runs(points, view.expand(longest))
        .iter()
        .flat_map(|run| Shape::dashed_line_with_offset(run, stroke, dashes, gaps, 0.0))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use egui::pos2;

    #[test]
    fn a_line_far_beyond_the_view_makes_few_dashes() {
        let view = Rect::from_min_max(pos2(0.0, 0.0), pos2(100.0, 100.0));
        let line = [pos2(-1e7, 50.0), pos2(1e7, 50.0)];
        let count = |points: &[Pos2]| {
            dashed(
                points,
                view,
                Stroke::new(1.0, egui::Color32::BLACK),
                &[5.0],
                &[5.0],
            )
            .len()
        };
        assert!((10..=14).contains(&count(&line)), "{}", count(&line));
        assert_eq!(count(&[pos2(-10.0, -90.0), pos2(200.0, -90.0)]), 0);
        // A chain that leaves and comes back makes two runs.
        let chain = [
            pos2(10.0, 10.0),
            pos2(10.0, 400.0),
            pos2(90.0, 400.0),
            pos2(90.0, 10.0),
        ];
        assert_eq!(runs(&chain, view).len(), 2);
    }
}
