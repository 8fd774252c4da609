//! A check that the user can run: the gradient along a direction against central differences.

use super::problem::{Problem, Refusal};
use crate::base::Watch;

/// Relative difference between the slope of the objective along `direction` at `x` and its five-point central
/// difference with step `h`: (8 (f(h) - f(-h)) - (f(2h) - f(-2h)))/(12 h), error of fourth order.
///
/// # Errors
/// [`Refusal`] when a point cannot be evaluated.
pub fn relative_difference(
    problem: &mut impl Problem,
    x: &[f64],
    direction: &[f64],
    h: f64,
    watch: &Watch,
) -> Result<f64, Refusal> {
    let mut at = |s: f64| {
        let moved: Vec<f64> = x.iter().zip(direction).map(|(x, d)| x + s * d).collect();
        Ok::<f64, Refusal>(problem.evaluate(&moved, watch)?.objective)
    };
    let difference = (8.0 * (at(h)? - at(-h)?) - (at(2.0 * h)? - at(-2.0 * h)?)) / (12.0 * h);
    problem.evaluate(x, watch)?;
    let slope: f64 = problem
        .gradients(watch)?
        .objective
        .iter()
        .zip(direction)
        .map(|(g, d)| g * d)
        .sum();
    Ok((slope - difference).abs() / difference.abs().max(f64::MIN_POSITIVE))
}
