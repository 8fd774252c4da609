//! The numbers of a factorisation, and solving with them.

use super::front::eliminate;
use super::plan::{Front, Plan};
use super::scale::Scale;
use crate::linalg::Sparse;

/// Factors of one matrix, scaled to entries of about one.
pub(super) struct Numeric {
    scale: Scale,
    values: Vec<f64>,
    /// Row exchanges within the pivots of each front, by place in the elimination order.
    exchanged: Vec<u32>,
    /// Pivots replaced.
    pub(super) replaced: usize,
}

impl Numeric {
    /// Factorise.
    pub(super) fn new(plan: &Plan, matrix: &Sparse) -> Self {
        let (scale, scaled) = Scale::equilibrate(matrix);
        let mut numeric = Self {
            scale,
            values: vec![0.0; plan.factor_values],
            exchanged: vec![0; plan.row.len()],
            replaced: 0,
        };
        let mut stack = vec![0.0; plan.stack_height];
        let mut height = 0;
        let mut work = vec![0.0; plan.front_values];
        for front in &plan.fronts {
            let size = front.size();
            let dense = &mut work[..size * size];
            dense.fill(0.0);
            for &(value, place) in &plan.entries[front.entries.clone()] {
                dense[place as usize] += scaled[value as usize];
            }
            // The last child's update lies on top.
            for &child in front.children.iter().rev() {
                let child = &plan.fronts[child];
                let rows = child.below_count();
                height -= rows * rows;
                let update = &stack[height..height + rows * rows];
                add(dense, size, update, &plan.in_parent[child.below.clone()]);
            }
            let exchanged = &mut numeric.exchanged[front.pivots.clone()];
            numeric.replaced += eliminate(dense, size, exchanged);
            let (pivots, below) = (front.pivot_count(), front.below_count());
            let (lower, upper) = numeric.values
                [front.values..front.values + (size + below) * pivots]
                .split_at_mut(size * pivots);
            lower.copy_from_slice(&dense[..size * pivots]);
            let right = dense[size * pivots..].chunks_exact(size.max(1));
            let update = stack[height..height + below * below].chunks_exact_mut(below.max(1));
            for ((column, u), rest) in right.zip(upper.chunks_exact_mut(pivots.max(1))).zip(update)
            {
                u.copy_from_slice(&column[..pivots]);
                rest.copy_from_slice(&column[pivots..]);
            }
            height += below * below;
        }
        numeric
    }

    fn parts<'a>(&'a self, front: &Front) -> (&'a [f64], &'a [f64]) {
        let (size, pivots) = (front.size(), front.pivot_count());
        self.values[front.values..front.values + (size + front.below_count()) * pivots]
            .split_at(size * pivots)
    }

    /// `A x = b`, overwriting `b`.
    pub(super) fn solve(&self, plan: &Plan, b: &mut [f64]) {
        let mut x = gather(plan, b, &self.scale.rows);
        for front in &plan.fronts {
            let (size, pivots) = (front.size(), front.pivot_count());
            let (lower, _) = self.parts(front);
            let at = front.pivots.start;
            for (k, &other) in self.exchanged[front.pivots.clone()].iter().enumerate() {
                x.swap(at + k, at + other as usize);
            }
            for (k, column) in lower.chunks_exact(size).enumerate() {
                let value = x[at + k];
                for (i, l) in (at + k + 1..at + pivots).zip(&column[k + 1..pivots]) {
                    x[i] -= l * value;
                }
                for (&i, l) in plan.below[front.below.clone()]
                    .iter()
                    .zip(&column[pivots..])
                {
                    x[i as usize] -= l * value;
                }
            }
        }
        for front in plan.fronts.iter().rev() {
            let (size, pivots) = (front.size(), front.pivot_count());
            let (lower, upper) = self.parts(front);
            let at = front.pivots.start;
            for (&i, column) in plan.below[front.below.clone()]
                .iter()
                .zip(upper.chunks_exact(pivots))
            {
                let value = x[i as usize];
                for (x, u) in x[at..at + pivots].iter_mut().zip(column) {
                    *x -= u * value;
                }
            }
            for (k, column) in lower.chunks_exact(size).enumerate().rev() {
                let value = x[at + k] / column[k];
                x[at + k] = value;
                for (x, u) in x[at..at + k].iter_mut().zip(column) {
                    *x -= u * value;
                }
            }
        }
        scatter(plan, &x, &self.scale.columns, b);
    }

    /// `A^T x = b`, overwriting `b`.
    pub(super) fn solve_transposed(&self, plan: &Plan, b: &mut [f64]) {
        let mut x = gather(plan, b, &self.scale.columns);
        for front in &plan.fronts {
            let (size, pivots) = (front.size(), front.pivot_count());
            let (lower, upper) = self.parts(front);
            let at = front.pivots.start;
            for (k, column) in lower.chunks_exact(size).enumerate() {
                let sum: f64 = column[..k]
                    .iter()
                    .zip(&x[at..at + k])
                    .map(|(u, x)| u * x)
                    .sum();
                x[at + k] = (x[at + k] - sum) / column[k];
            }
            for (&i, column) in plan.below[front.below.clone()]
                .iter()
                .zip(upper.chunks_exact(pivots))
            {
                let sum: f64 = column
                    .iter()
                    .zip(&x[at..at + pivots])
                    .map(|(u, x)| u * x)
                    .sum();
                x[i as usize] -= sum;
            }
        }
        for front in plan.fronts.iter().rev() {
            let (size, pivots) = (front.size(), front.pivot_count());
            let (lower, _) = self.parts(front);
            let at = front.pivots.start;
            let below = &plan.below[front.below.clone()];
            for (k, column) in lower.chunks_exact(size).enumerate().rev() {
                let within: f64 = column[k + 1..pivots]
                    .iter()
                    .zip(&x[at + k + 1..at + pivots])
                    .map(|(l, x)| l * x)
                    .sum();
                let under: f64 = column[pivots..]
                    .iter()
                    .zip(below)
                    .map(|(l, &i)| l * x[i as usize])
                    .sum();
                x[at + k] -= within + under;
            }
            for (k, &other) in self.exchanged[front.pivots.clone()]
                .iter()
                .enumerate()
                .rev()
            {
                x.swap(at + k, at + other as usize);
            }
        }
        scatter(plan, &x, &self.scale.rows, b);
    }
}

fn gather(plan: &Plan, b: &[f64], scale: &[f64]) -> Vec<f64> {
    let rows = plan.row.iter().map(|&r| r as usize);
    rows.map(|r| b[r] * scale[r]).collect()
}

fn scatter(plan: &Plan, x: &[f64], scale: &[f64], b: &mut [f64]) {
    for (&r, x) in plan.row.iter().zip(x) {
        b[r as usize] = x * scale[r as usize];
    }
}

/// Add a child's update, column-major of shape `(rows, rows)`, where its rows sit in the parent.
fn add(dense: &mut [f64], size: usize, update: &[f64], rows: &[u32]) {
    if rows.is_empty() {
        return;
    }
    for (column, &to) in update.chunks_exact(rows.len()).zip(rows) {
        let target = &mut dense[to as usize * size..(to as usize + 1) * size];
        for (value, &i) in column.iter().zip(rows) {
            target[i as usize] += value;
        }
    }
}
