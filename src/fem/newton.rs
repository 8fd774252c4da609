//! Newton's method with its own safeguards.
//!
//! Source: Deuflhard, Newton Methods for Nonlinear Problems (Springer, 2004), chapter 3: damping by halving
//! until the residual falls.

use super::{FemError, Layout, Linearised};
use crate::base::Watch;

/// Residual relative to the sum of its parts below which a state is solved. The parts cancel to about 1e-15,
/// so four digits of headroom remain.
pub const TOLERANCE: f64 = 1e-11;
/// Most steps of one call; from a fair start five to eight are usual.
const MOST_STEPS: usize = 25;
/// Shortest step tried before giving up: shorter ones only crawl.
const SHORTEST_STEP: f64 = 1.0 / 32.0;

/// Contraction below which the last factors are used again.
const CONTRACTION: f64 = 0.1;

/// Residual of a state.
pub struct Residual {
    /// Residual over all rows, shape `(total,)`; fixed rows hold the reactions.
    pub rows: Vec<f64>,
    /// Norm over the free rows, scaled.
    pub norm: f64,
    /// Norm of the element contributions before they cancel, scaled: what `norm` is small against.
    pub parts: f64,
}

impl Residual {
    /// Sum the element residuals: the first `layout.local` numbers of each of `slots` (`stride` apart).
    pub fn gather(layout: &Layout, slots: &[f64], stride: usize) -> Self {
        let mut rows = vec![0.0; layout.total];
        let mut parts = 0.0;
        for e in 0..layout.elements {
            let own = &slots[e * stride..e * stride + layout.local];
            for (&n, &r) in layout.element(e).iter().zip(own) {
                rows[n as usize] += r;
                let scaled = r * layout.scale[n as usize];
                parts += scaled * scaled;
            }
        }
        let free = |(n, r): (usize, &f64)| {
            if layout.fixed[n] {
                0.0
            } else {
                (r * layout.scale[n]).powi(2)
            }
        };
        let norm = rows.iter().enumerate().map(free).sum::<f64>().sqrt();
        Self {
            rows,
            norm,
            parts: parts.sqrt(),
        }
    }

    /// The element matrices that stand behind the residuals in `slots`.
    pub fn matrices(layout: &Layout, slots: &[f64], stride: usize) -> Vec<f64> {
        slots
            .chunks(stride)
            .flat_map(|slot| &slot[layout.local..])
            .copied()
            .collect()
    }

    /// Norm relative to the parts.
    pub fn relative(&self) -> f64 {
        if self.parts > 0.0 {
            self.norm / self.parts
        } else {
            0.0
        }
    }
}

/// A nonlinear system `R(x) = 0`.
pub trait Nonlinear {
    /// Residual at `x`.
    fn residual(&self, x: &[f64]) -> Residual;
    /// Residual and factorised Jacobian at `x`.
    ///
    /// # Errors
    /// From the factorisation, or the watch's stop.
    fn linearise(&self, x: &[f64], watch: &Watch) -> Result<(Residual, Linearised), FemError>;
}

/// Further steps with the same factors while each shrinks the residual at least to a tenth: near the solution they
/// cost a tenth of a Newton step (Kelley, Iterative Methods for Linear and Nonlinear Equations, SIAM 1995, section 5.4).
fn reuse(system: &impl Nonlinear, linearised: &Linearised, x: &mut Vec<f64>, now: &mut Residual) {
    while now.relative() >= TOLERANCE {
        let increment = linearised.solve(&now.rows);
        let trial: Vec<f64> = x.iter().zip(&increment).map(|(x, d)| x - d).collect();
        let then = system.residual(&trial);
        if then.norm.is_nan() || then.norm > CONTRACTION * now.norm {
            return;
        }
        *x = trial;
        *now = then;
    }
}

/// Solve from `x`; returns the state and the number of steps.
///
/// # Errors
/// [`FemError::Stalled`] when the residual does not fall; [`FemError::Cancelled`].
pub fn solve(
    system: &impl Nonlinear,
    mut x: Vec<f64>,
    watch: &Watch,
) -> Result<(Vec<f64>, usize), FemError> {
    let mut now = system.residual(&x);
    for step in 0..MOST_STEPS {
        watch.check()?;
        if now.relative() < TOLERANCE {
            return Ok((x, step));
        }
        let (residual, linearised) = system.linearise(&x, watch)?;
        let increment = linearised.solve(&residual.rows);
        let mut length = 1.0;
        loop {
            let trial: Vec<f64> = x
                .iter()
                .zip(&increment)
                .map(|(x, d)| x - length * d)
                .collect();
            let then = system.residual(&trial);
            let falls = then.norm.is_finite() && then.norm < now.norm * (1.0 - 1e-3 * length);
            if falls || then.relative() < TOLERANCE {
                x = trial;
                now = then;
                break;
            }
            length *= 0.5;
            if length < SHORTEST_STEP {
                return Err(FemError::Stalled {
                    steps: step + 1,
                    residual: now.relative(),
                });
            }
        }
        if length == 1.0 {
            reuse(system, &linearised, &mut x, &mut now);
        }
    }
    Err(FemError::Stalled {
        steps: MOST_STEPS,
        residual: now.relative(),
    })
}
