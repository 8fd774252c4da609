//! Colours of fields: from dark blue over brick red to straw, lightness rising evenly, so that the order of
//! values survives a grey print and every kind of colour vision.
//!
//! Rule, in CIELAB (CIE 1976, white D65) for a fraction s: `L* = 14 + 80 s`, `b* = -48 + 100 s`,
//! `a* = 8 - 16 s + 36 sin(pi s)`; where the screen cannot show that (sRGB), a* and b* shrink together and L* stays.
//! Red-green confusions lie along a*; what a* adds can be lost, since L* and b* both rise with s.

use std::f64::consts::PI;
use std::sync::LazyLock;

/// Colours in the table: as many as eight bits tell apart.
const SHADES: usize = 256;

static TABLE: LazyLock<[[u8; 3]; SHADES]> =
    LazyLock::new(|| std::array::from_fn(|i| shade(i as f64 / (SHADES - 1) as f64)));

/// sRGB colour at a fraction of the range, 0 (low) to 1 (high); grey where the fraction is not a number.
pub fn of_fraction(s: f64) -> [u8; 3] {
    if s.is_nan() {
        return [128; 3];
    }
    TABLE[(s.clamp(0.0, 1.0) * (SHADES - 1) as f64).round() as usize]
}

fn shade(s: f64) -> [u8; 3] {
    let lightness = 14.0 + 80.0 * s;
    let (a, b) = (8.0 - 16.0 * s + 36.0 * (PI * s).sin(), -48.0 + 100.0 * s);
    let shown = |chroma: f64| linear_of_lab([lightness, a * chroma, b * chroma]);
    let fits = |rgb: [f64; 3]| rgb.iter().all(|c| (0.0..=1.0).contains(c));
    let mut chroma = 1.0;
    if !fits(shown(1.0)) {
        let mut step = 0.5;
        chroma = 0.0;
        // Bisection; thirty halvings are far below one of 256 shades.
        for _ in 0..30 {
            if fits(shown(chroma + step)) {
                chroma += step;
            }
            step /= 2.0;
        }
    }
    shown(chroma).map(|c| (encode(c) * 255.0).round() as u8)
}

/// CIE white point D65 for the two-degree observer (IEC 61966-2-1).
const WHITE: [f64; 3] = [0.95047, 1.0, 1.08883];

/// Linear sRGB of a CIELAB colour (CIE 15; matrix of IEC 61966-2-1).
fn linear_of_lab([l, a, b]: [f64; 3]) -> [f64; 3] {
    let fy = (l + 16.0) / 116.0;
    let inverse = |f: f64| {
        let corner = 6.0 / 29.0;
        if f > corner {
            f * f * f
        } else {
            3.0 * corner * corner * (f - 4.0 / 29.0)
        }
    };
    let x = WHITE[0] * inverse(fy + a / 500.0);
    let y = WHITE[1] * inverse(fy);
    let z = WHITE[2] * inverse(fy - b / 200.0);
    [
        3.2404542 * x - 1.5371385 * y - 0.4985314 * z,
        -0.9692660 * x + 1.8760108 * y + 0.0415560 * z,
        0.0556434 * x - 0.2040259 * y + 1.0572252 * z,
    ]
}

/// sRGB transfer curve (IEC 61966-2-1).
fn encode(linear: f64) -> f64 {
    if linear <= 0.0031308 {
        12.92 * linear
    } else {
        1.055 * linear.powf(1.0 / 2.4) - 0.055
    }
}

/// CIELAB lightness L* of an sRGB colour, 0 (black) to 100 (white).
pub fn lightness(rgb: [u8; 3]) -> f64 {
    let [r, g, b] = rgb.map(|c| {
        let c = f64::from(c) / 255.0;
        if c <= 0.04045 {
            c / 12.92
        } else {
            ((c + 0.055) / 1.055).powf(2.4)
        }
    });
    let y = 0.2126729 * r + 0.7151522 * g + 0.0721750 * b;
    if y > (6.0f64 / 29.0).powi(3) {
        116.0 * y.cbrt() - 16.0
    } else {
        y * (29.0f64 / 3.0).powi(3)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Largest departure of the map's lightness from the straight line.
    fn unevenness(map: impl Fn(f64) -> [u8; 3]) -> f64 {
        (0..SHADES)
            .map(|i| i as f64 / (SHADES - 1) as f64)
            .map(|s| (lightness(map(s)) - (14.0 + 80.0 * s)).abs())
            .fold(0.0, f64::max)
    }

    #[test]
    fn lightness_rises_evenly() {
        let all: Vec<f64> = TABLE.iter().map(|&c| lightness(c)).collect();
        assert!(all.windows(2).all(|l| l[1] > l[0]));
        // Rounding to eight bits moves L* by half a unit at most.
        assert!(unevenness(of_fraction) < 0.5, "{}", unevenness(of_fraction));
        // Flawed twin: the usual rainbow's lightness goes up and down.
        let rainbow = |s: f64| [s, 1.0 - (2.0 * s - 1.0).abs(), 1.0 - s].map(|c| (c * 255.0) as u8);
        assert!(unevenness(rainbow) > 20.0);
    }

    /// IEC 61966-2-1 with CIE 15: white is 100, mid grey 119 is 50.03, primary blue 32.30 (from memory).
    #[test]
    fn lightness_of_known_colours() {
        assert!((lightness([255; 3]) - 100.0).abs() < 1e-3);
        assert!((lightness([119; 3]) - 50.03).abs() < 0.02);
        assert!((lightness([0, 0, 255]) - 32.30).abs() < 0.02);
    }

    #[test]
    fn out_of_range_is_clamped_and_not_a_number_is_grey() {
        assert_eq!(of_fraction(-1.0), of_fraction(0.0));
        assert_eq!(of_fraction(f64::INFINITY), of_fraction(1.0));
        assert_eq!(of_fraction(f64::NAN), [128; 3]);
    }
}
