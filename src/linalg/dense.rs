//! Small dense blocks, row-major: LU with partial pivoting and its solves.
//!
//! Source: Golub and Van Loan, Matrix Computations (Johns Hopkins, 2013), algorithm 3.4.1.

/// Factorise an `n` by `n` row-major block in place; `pivots[k]` is the row exchanged with row `k`.
/// Returns false when a pivot vanishes.
#[must_use]
pub fn lu_factor(a: &mut [f64], pivots: &mut [usize]) -> bool {
    let n = pivots.len();
    for k in 0..n {
        let mut best = k;
        for i in k + 1..n {
            if a[i * n + k].abs() > a[best * n + k].abs() {
                best = i;
            }
        }
        pivots[k] = best;
        let pivot = a[best * n + k];
        if pivot == 0.0 || !pivot.is_finite() {
            return false;
        }
        if best != k {
            for j in 0..n {
                a.swap(k * n + j, best * n + j);
            }
        }
        for i in k + 1..n {
            let factor = a[i * n + k] / pivot;
            a[i * n + k] = factor;
            for j in k + 1..n {
                a[i * n + j] -= factor * a[k * n + j];
            }
        }
    }
    true
}

/// Solve `A X = B` for `columns` right sides, `b` row-major of shape `(n, columns)`, in place.
pub fn lu_solve(lu: &[f64], pivots: &[usize], b: &mut [f64], columns: usize) {
    let n = pivots.len();
    for k in 0..n {
        if pivots[k] != k {
            for c in 0..columns {
                b.swap(k * columns + c, pivots[k] * columns + c);
            }
        }
    }
    for i in 0..n {
        for k in 0..i {
            let l = lu[i * n + k];
            let (head, tail) = b.split_at_mut(i * columns);
            axpy(
                -l,
                &head[k * columns..(k + 1) * columns],
                &mut tail[..columns],
            );
        }
    }
    for i in (0..n).rev() {
        for k in i + 1..n {
            let u = lu[i * n + k];
            let (head, tail) = b.split_at_mut(k * columns);
            axpy(
                -u,
                &tail[..columns],
                &mut head[i * columns..(i + 1) * columns],
            );
        }
        let inverse = 1.0 / lu[i * n + i];
        for x in &mut b[i * columns..(i + 1) * columns] {
            *x *= inverse;
        }
    }
}

/// Solve `A^T x = b` in place, one right side.
pub fn lu_solve_transposed(lu: &[f64], pivots: &[usize], b: &mut [f64]) {
    let n = pivots.len();
    for i in 0..n {
        for k in 0..i {
            b[i] -= lu[k * n + i] * b[k];
        }
        b[i] /= lu[i * n + i];
    }
    for i in (0..n).rev() {
        for k in i + 1..n {
            b[i] -= lu[k * n + i] * b[k];
        }
    }
    for k in (0..n).rev() {
        b.swap(k, pivots[k]);
    }
}

/// `y += a x`.
pub fn axpy(a: f64, x: &[f64], y: &mut [f64]) {
    for (y, x) in y.iter_mut().zip(x) {
        *y += a * x;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_solves_invert_the_block() {
        let a = [0.0, 2.0, 1.0, 1.0, -1.0, 0.5, 3.0, 0.2, -2.0];
        let mut lu = a;
        let mut pivots = [0; 3];
        assert!(lu_factor(&mut lu, &mut pivots));
        let x = [0.3, -1.0, 2.0];
        let mut b: Vec<f64> = (0..3)
            .map(|i| (0..3).map(|j| a[i * 3 + j] * x[j]).sum())
            .collect();
        let mut c: Vec<f64> = (0..3)
            .map(|j| (0..3).map(|i| a[i * 3 + j] * x[i]).sum())
            .collect();
        lu_solve(&lu, &pivots, &mut b, 1);
        lu_solve_transposed(&lu, &pivots, &mut c);
        for i in 0..3 {
            assert!((b[i] - x[i]).abs() < 1e-14 && (c[i] - x[i]).abs() < 1e-14);
        }
        assert!(!lu_factor(&mut [1.0, 2.0, 2.0, 4.0], &mut [0; 2]));
    }
}
