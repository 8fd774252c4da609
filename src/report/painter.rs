//! A small painter on an RGB picture: triangles with a value at each corner, filled polygons, strokes and
//! letters, with soft edges. Places are pixels, x to the right, y downwards.

use super::lettering;
use image::{Rgb, RgbImage};

/// Colour, sRGB.
pub(super) type Colour = [u8; 3];

/// Where a text starts or stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Anchor {
    /// At its left end.
    Left,
    /// At its middle.
    Middle,
    /// At its right end.
    Right,
}

/// The picture being painted.
pub(super) struct Painter {
    image: RgbImage,
    /// How much of each pixel the present shape covers, 0 to 1; all zero between shapes.
    cover: Vec<f32>,
}

impl Painter {
    pub(super) fn new(width: u32, height: u32, paper: Colour) -> Self {
        Self {
            image: RgbImage::from_pixel(width, height, Rgb(paper)),
            cover: vec![0.0; width as usize * height as usize],
        }
    }

    pub(super) fn into_image(self) -> RgbImage {
        self.image
    }

    /// Pixels from `low` to `high` (not included) along an axis of `size` pixels, as whole numbers inside.
    fn pixels(low: f64, high: f64, size: u32) -> std::ops::Range<u32> {
        let clamp = |v: f64| v.clamp(0.0, f64::from(size)) as u32;
        clamp(low.floor())..clamp(high.ceil())
    }

    /// A triangle whose pixels take the colour of the interpolated value.
    pub(super) fn triangle(
        &mut self,
        corners: [[f64; 2]; 3],
        values: [f64; 3],
        colour: impl Fn(f64) -> Colour,
    ) {
        let [a, b, c] = corners;
        let twice_area = (b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1]);
        if twice_area == 0.0 || !twice_area.is_finite() {
            return;
        }
        let low = [0, 1].map(|k| a[k].min(b[k]).min(c[k]));
        let high = [0, 1].map(|k| a[k].max(b[k]).max(c[k]));
        for y in Self::pixels(low[1] - 0.5, high[1] + 0.5, self.image.height()) {
            for x in Self::pixels(low[0] - 0.5, high[0] + 0.5, self.image.width()) {
                let p = [f64::from(x) + 0.5, f64::from(y) + 0.5];
                let part = |q: [f64; 2], r: [f64; 2]| {
                    ((r[0] - q[0]) * (p[1] - q[1]) - (p[0] - q[0]) * (r[1] - q[1])) / twice_area
                };
                let (u, v, w) = (part(b, c), part(c, a), part(a, b));
                // The slack closes the seams between triangles; it is far below a pixel.
                if u.min(v).min(w) >= -1e-6 {
                    let value = u * values[0] + v * values[1] + w * values[2];
                    self.image.put_pixel(x, y, Rgb(colour(value)));
                }
            }
        }
    }

    /// A closed polygon filled by the even-odd rule.
    pub(super) fn fill(&mut self, polygon: &[[f64; 2]], colour: Colour) {
        /// Lines sampled in a pixel row: sixteen steps of grey along slanted edges.
        const LINES: u32 = 16;
        let low = polygon.iter().fold(f64::MAX, |m, p| m.min(p[1]));
        let high = polygon.iter().fold(f64::MIN, |m, p| m.max(p[1]));
        let rows = Self::pixels(low, high, self.image.height());
        let width = self.image.width();
        for y in rows.clone() {
            for line in 0..LINES {
                let at = f64::from(y) + (f64::from(line) + 0.5) / f64::from(LINES);
                let mut crossings: Vec<f64> = polygon
                    .iter()
                    .zip(polygon.iter().cycle().skip(1))
                    .filter(|(p, q)| (p[1] > at) != (q[1] > at))
                    .map(|(p, q)| p[0] + (q[0] - p[0]) * (at - p[1]) / (q[1] - p[1]))
                    .collect();
                crossings.sort_by(f64::total_cmp);
                for pair in crossings.chunks_exact(2) {
                    for x in Self::pixels(pair[0], pair[1], width) {
                        let left = f64::from(x);
                        let inside = pair[1].min(left + 1.0) - pair[0].max(left);
                        let cover = &mut self.cover[(y * width + x) as usize];
                        *cover += (inside.max(0.0) / f64::from(LINES)) as f32;
                    }
                }
            }
        }
        self.blend(0..width, rows, colour);
    }

    /// A chain of points drawn with a round pen; `dash` gives the lengths drawn and left out.
    pub(super) fn stroke(
        &mut self,
        points: &[[f64; 2]],
        pen: f64,
        colour: Colour,
        dash: Option<[f64; 2]>,
    ) {
        let mut travelled = 0.0;
        for pair in points.windows(2) {
            let length = (pair[1][0] - pair[0][0]).hypot(pair[1][1] - pair[0][1]);
            match dash {
                None => self.cover_segment(pair[0], pair[1], pen / 2.0),
                Some([drawn, left_out]) => {
                    let period = drawn + left_out;
                    let at = |s: f64| {
                        let t = if length > 0.0 { s / length } else { 0.0 };
                        [0, 1].map(|k| pair[0][k] + (pair[1][k] - pair[0][k]) * t)
                    };
                    let mut start = -(travelled % period);
                    while start < length {
                        let (from, to) = (start.max(0.0), (start + drawn).min(length));
                        if to > from {
                            self.cover_segment(at(from), at(to), pen / 2.0);
                        }
                        start += period;
                    }
                }
            }
            travelled += length;
        }
        let reach = pen + 1.0;
        let bound = |k: usize, size: u32| {
            let low = points.iter().fold(f64::MAX, |m, p| m.min(p[k]));
            let high = points.iter().fold(f64::MIN, |m, p| m.max(p[k]));
            Self::pixels(low - reach, high + reach, size)
        };
        let (columns, rows) = (bound(0, self.image.width()), bound(1, self.image.height()));
        self.blend(columns, rows, colour);
    }

    /// Pixels within `radius` of a segment are covered, with an edge one pixel wide.
    fn cover_segment(&mut self, a: [f64; 2], b: [f64; 2], radius: f64) {
        let reach = radius + 1.0;
        let d = [b[0] - a[0], b[1] - a[1]];
        let squared = d[0] * d[0] + d[1] * d[1];
        let width = self.image.width();
        for y in Self::pixels(
            a[1].min(b[1]) - reach,
            a[1].max(b[1]) + reach,
            self.image.height(),
        ) {
            for x in Self::pixels(a[0].min(b[0]) - reach, a[0].max(b[0]) + reach, width) {
                let p = [f64::from(x) + 0.5 - a[0], f64::from(y) + 0.5 - a[1]];
                let along = (p[0] * d[0] + p[1] * d[1]) / squared;
                let t = if squared > 0.0 {
                    along.clamp(0.0, 1.0)
                } else {
                    0.0
                };
                let distance = (p[0] - t * d[0]).hypot(p[1] - t * d[1]);
                let covered = (radius + 0.5 - distance).clamp(0.0, 1.0) as f32;
                let cover = &mut self.cover[(y * width + x) as usize];
                *cover = cover.max(covered);
            }
        }
    }

    /// Lay the colour over what is covered and forget the cover.
    fn blend(&mut self, columns: std::ops::Range<u32>, rows: std::ops::Range<u32>, colour: Colour) {
        let width = self.image.width();
        for y in rows {
            for x in columns.clone() {
                let cover = std::mem::take(&mut self.cover[(y * width + x) as usize]).min(1.0);
                if cover > 0.0 {
                    let Rgb(pixel) = self.image.get_pixel_mut(x, y);
                    for (old, new) in pixel.iter_mut().zip(colour) {
                        let mixed = f32::from(*old) * (1.0 - cover) + f32::from(new) * cover;
                        *old = mixed.round() as u8;
                    }
                }
            }
        }
    }

    /// A line of text on the base line at `place`; `capital` is the height of its capitals.
    pub(super) fn text(
        &mut self,
        place: [f64; 2],
        anchor: Anchor,
        capital: f64,
        text: &str,
        colour: Colour,
    ) {
        let width = lettering::width(text, capital);
        let left = match anchor {
            Anchor::Left => place[0],
            Anchor::Middle => place[0] - width / 2.0,
            Anchor::Right => place[0] - width,
        };
        // Pen of a ninth of the capitals' height: as plain text faces have (common practice, no source).
        let pen = (capital / 9.0).max(1.2);
        for stroke in lettering::strokes(text, capital) {
            let points: Vec<[f64; 2]> = stroke
                .iter()
                .map(|p| [left + p[0], place[1] - p[1]])
                .collect();
            self.stroke(&points, pen, colour, None);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn darkness(painter: Painter) -> f64 {
        let image = painter.into_image();
        image
            .pixels()
            .map(|p| 1.0 - f64::from(p.0[0]) / 255.0)
            .sum()
    }

    #[test]
    fn a_filled_disc_has_its_area() {
        let mut painter = Painter::new(60, 60, [255; 3]);
        let disc: Vec<[f64; 2]> = (0..400)
            .map(|i| std::f64::consts::TAU * f64::from(i) / 400.0)
            .map(|a| [30.3 + 20.0 * a.cos(), 29.6 + 20.0 * a.sin()])
            .collect();
        painter.fill(&disc, [0; 3]);
        let area = darkness(painter);
        let exact = std::f64::consts::PI * 400.0;
        assert!((area / exact - 1.0).abs() < 2e-3, "{area}");
    }

    #[test]
    fn a_dashed_line_has_half_the_ink_of_a_solid_one() {
        let ink = |dash| {
            let mut painter = Painter::new(320, 20, [255; 3]);
            painter.stroke(
                &[[10.0, 10.0], [160.0, 10.0], [310.0, 10.0]],
                2.0,
                [0; 3],
                dash,
            );
            darkness(painter)
        };
        let solid = ink(None);
        assert!((solid / 600.0 - 1.0).abs() < 0.02, "{solid}");
        // Round ends add a little to each dash.
        assert!((ink(Some([15.0, 15.0])) / solid - 0.5).abs() < 0.07);
    }

    #[test]
    fn shapes_beyond_the_edge_are_cut() {
        let mut painter = Painter::new(10, 10, [255; 3]);
        painter.fill(
            &[[-50.0, -50.0], [50.0, -50.0], [50.0, 50.0], [-50.0, 50.0]],
            [0; 3],
        );
        painter.stroke(&[[-100.0, 5.0], [100.0, 5.0]], 3.0, [9; 3], None);
        painter.triangle([[-9.0, -9.0], [30.0, -9.0], [-9.0, 30.0]], [0.0; 3], |_| {
            [7; 3]
        });
        painter.text([-5.0, 3.0], Anchor::Right, 8.0, "far", [0; 3]);
        assert_eq!(painter.into_image().get_pixel(5, 5).0, [7; 3]);
    }

    #[test]
    fn two_triangles_leave_no_seam() {
        let mut painter = Painter::new(40, 40, [255; 3]);
        let (a, b, c, d) = ([3.2, 4.1], [35.7, 6.3], [33.1, 36.2], [5.5, 31.9]);
        painter.triangle([a, b, c], [0.0; 3], |_| [0; 3]);
        painter.triangle([a, c, d], [0.0; 3], |_| [0; 3]);
        let image = painter.into_image();
        assert!((10..30).all(|i| image.get_pixel(i, i).0 == [0; 3]));
    }
}
