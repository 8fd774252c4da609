//! Elimination of the pivots of one dense front.

use faer::linalg::matmul::matmul;
use faer::linalg::triangular_solve::{
    solve_lower_triangular_in_place, solve_unit_lower_triangular_in_place,
};
use faer::prelude::{Reborrow, ReborrowMut};
use faer::{Accum, MatMut, Par};

/// Columns factorised at a time by plain loops; beyond, products of blocks.
const PANEL: usize = 16;
/// A diagonal entry stays the pivot where it is at least this part of its column's greatest: a growth of ten a step at
/// worst, and rows seldom move (common practice, no source).
const KEEP: f64 = 0.1;
/// A pivot below this part of the front's greatest entry cannot be told from rounding and is replaced by it.
const SMALLEST: f64 = 1e-13;

/// Eliminate the first `pivots` rows and columns of a column-major `size` by `size` front in place:
///   P A_11 = L_11 U_11,   U_12 = L_11^-1 P A_12,   L_21 = A_21 U_11^-1,   A_22 := A_22 - L_21 U_12.
/// `exchanged[k]` is the row that changed places with row `k`, in turn. Returns how many pivots were replaced.
pub(super) fn eliminate(a: &mut [f64], size: usize, exchanged: &mut [u32]) -> usize {
    let pivots = exchanged.len();
    let greatest = a[..pivots * size]
        .iter()
        .fold(0.0, |g: f64, x| g.max(x.abs()));
    let floor = (SMALLEST * greatest).max(f64::MIN_POSITIVE);
    let mut replaced = 0;
    let mut first = 0;
    while first < pivots {
        let end = (first + PANEL).min(pivots);
        replaced += panel(a, size, first, end, floor, exchanged);
        // Exchanges reach the columns outside the panel.
        for column in (0..first).chain(end..size) {
            let column = &mut a[column * size..(column + 1) * size];
            for k in first..end {
                column.swap(k, exchanged[k] as usize);
            }
        }
        update(a, size, first, end, pivots);
        first = end;
    }
    schur(a, size, pivots);
    replaced
}

/// LU of columns `first..end` in rows `first..pivots`.
fn panel(
    a: &mut [f64],
    size: usize,
    first: usize,
    end: usize,
    floor: f64,
    exchanged: &mut [u32],
) -> usize {
    let pivots = exchanged.len();
    let mut replaced = 0;
    for k in first..end {
        let column = &a[k * size..k * size + pivots];
        let (mut best, mut most) = (k, column[k].abs());
        for (i, x) in column.iter().enumerate().skip(k + 1) {
            if x.abs() > most {
                (best, most) = (i, x.abs());
            }
        }
        if column[k].abs() >= KEEP * most {
            best = k;
        }
        exchanged[k] = best as u32;
        if best != k {
            for j in first..end {
                a.swap(j * size + k, j * size + best);
            }
        }
        let pivot = &mut a[k * size + k];
        if pivot.abs() < floor {
            *pivot = if *pivot < 0.0 { -floor } else { floor };
            replaced += 1;
        }
        let inverse = 1.0 / *pivot;
        for x in &mut a[k * size + k + 1..k * size + pivots] {
            *x *= inverse;
        }
        let (done, rest) = a.split_at_mut((k + 1) * size);
        let factors = &done[k * size + k + 1..k * size + pivots];
        for column in rest.chunks_exact_mut(size).take(end - k - 1) {
            let u = column[k];
            for (x, l) in column[k + 1..pivots].iter_mut().zip(factors) {
                *x -= l * u;
            }
        }
    }
    replaced
}

/// Rows of U right of a panel, and what they take from the pivot rows below it.
fn update(a: &mut [f64], size: usize, first: usize, end: usize, pivots: usize) {
    if end == size {
        return;
    }
    let all = MatMut::from_column_major_slice_mut(a, size, size);
    let (done, rest) = all.split_at_col_mut(end);
    let done = done.rb().subcols(first, end - first);
    let mut right = rest.subrows_mut(first, pivots - first);
    let lower = done.subrows(first, pivots - first);
    let (unit, below) = lower.split_at_row(end - first);
    solve_unit_lower_triangular_in_place(
        unit,
        right.rb_mut().subrows_mut(0, end - first),
        Par::Seq,
    );
    if end < pivots {
        let (upper, under) = right.split_at_row_mut(end - first);
        matmul(under, Accum::Add, below, upper.rb(), -1.0, Par::Seq);
    }
}

/// L_21 and the update of what remains.
fn schur(a: &mut [f64], size: usize, pivots: usize) {
    if pivots == size {
        return;
    }
    let all = MatMut::from_column_major_slice_mut(a, size, size);
    let (left, right) = all.split_at_col_mut(pivots);
    let (upper, lower) = left.split_at_row_mut(pivots);
    let (u, rest) = right.split_at_row_mut(pivots);
    // X U = A_21 is U^T X^T = A_21^T.
    let mut lower = lower;
    solve_lower_triangular_in_place(
        upper.rb().transpose(),
        lower.rb_mut().transpose_mut(),
        Par::Seq,
    );
    matmul(rest, Accum::Add, lower.rb(), u.rb(), -1.0, Par::Seq);
}
