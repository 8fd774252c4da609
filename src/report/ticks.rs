//! Round numbers for legends, rulers and scale bars.

/// Largest of 1, 2, 5 times a power of ten that is not above `most`; 1 where `most` is not a positive number.
pub fn round_below(most: f64) -> f64 {
    if !(most > 0.0 && most.is_finite()) {
        return 1.0;
    }
    let power = 10f64.powf(most.log10().floor());
    // The slack lets 0.3 / 3 count as 0.1.
    let fits = |m: &&f64| **m * power <= most * (1.0 + 1e-9);
    [5.0, 2.0, 1.0]
        .iter()
        .find(fits)
        .map_or(power, |m| m * power)
}

/// Round values within a range, ends included where round: at most `most` of them (at least two asked for),
/// each `k * step`.
pub fn ticks(low: f64, high: f64, most: usize) -> Vec<f64> {
    let span = high - low;
    if !(span > 0.0 && span.is_finite()) {
        return if low.is_finite() {
            vec![low]
        } else {
            Vec::new()
        };
    }
    let fewest_steps = most.max(2) as f64 - 1.0;
    let mut step = round_below(span / fewest_steps);
    loop {
        let first = (low / step - 1e-9).ceil();
        let last = (high / step + 1e-9).floor();
        if last - first <= fewest_steps {
            return (0..=(last - first).max(0.0) as usize)
                .map(|i| (first + i as f64) * step)
                .collect();
        }
        step = round_below(step * 2.5);
    }
}

/// A number with `digits` significant digits, without needless zeros' loss: fixed point for everyday sizes,
/// powers of ten outside.
pub fn short(value: f64, digits: usize) -> String {
    let digits = digits.max(1);
    if value == 0.0 {
        return "0".into();
    }
    let rounded = format!("{value:.*e}", digits - 1);
    let exponent: i32 = rounded
        .split_once('e')
        .and_then(|(_, e)| e.parse().ok())
        .unwrap_or(0);
    if !(-4..6).contains(&exponent) {
        return rounded;
    }
    let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
    format!("{value:.decimals$}")
}

/// Texts of ticks that share their number of decimals.
pub fn labels(ticks: &[f64]) -> Vec<String> {
    let step = ticks
        .windows(2)
        .map(|t| t[1] - t[0])
        .fold(f64::INFINITY, f64::min);
    let largest = ticks.iter().fold(0.0f64, |m, t| m.max(t.abs()));
    if !step.is_finite() || largest == 0.0 {
        return ticks.iter().map(|&t| short(t, 4)).collect();
    }
    let step_exponent = (step.log10() + 1e-9).floor() as i32;
    if largest >= 1e6 || step_exponent < -5 {
        let digits = ((largest.log10().floor() as i32) - step_exponent).max(0) as usize;
        return ticks.iter().map(|t| format!("{t:.digits$e}")).collect();
    }
    let decimals = (-step_exponent).max(0) as usize;
    ticks
        .iter()
        .map(|t| format!("{:.decimals$}", if *t == 0.0 { 0.0 } else { *t }))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_few() {
        assert_eq!(
            labels(&ticks(293.15, 340.0, 6)),
            ["300", "310", "320", "330", "340"]
        );
        assert_eq!(labels(&ticks(0.0, 0.3, 4)), ["0.0", "0.1", "0.2", "0.3"]);
        assert_eq!(
            labels(&ticks(-0.05, 0.05, 5)),
            ["-0.04", "-0.02", "0.00", "0.02", "0.04"]
        );
        for most in 2..12 {
            for (low, high) in [(0.0, 1.0), (-3.2e-5, 7.7e3), (293.1, 293.2), (-9e9, -1e9)] {
                let count = ticks(low, high, most).len();
                assert!(count <= most, "{count} > {most} for {low}..{high}");
            }
        }
    }

    #[test]
    fn ranges_without_length_give_what_there_is() {
        assert_eq!(ticks(3.0, 3.0, 5), [3.0]);
        assert!(ticks(f64::NAN, 1.0, 5).is_empty());
        assert_eq!(labels(&[3.0]), ["3.000"]);
    }

    #[test]
    fn short_numbers() {
        let texts = [0.0, 1234.56, 0.012345, 1.5e-7, -99.99, 2.5e8].map(|v| short(v, 3));
        assert_eq!(texts, ["0", "1235", "0.0123", "1.50e-7", "-100", "2.50e8"]);
    }
}
