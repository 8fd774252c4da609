//! Quadrature on the reference edge and triangle, exact to a stated degree.
//!
//! Sources: Gauss-Legendre by Newton on the Legendre recurrence (Abramowitz and Stegun 25.4.30); the triangle
//! by the collapsed product of Gauss-Legendre and Gauss-Jacobi(1,0) points (Stroud, Approximate Calculation of
//! Multiple Integrals, 1971, section 2.4). The Jacobi points are the eigenvalues of the recurrence's matrix
//! (Golub and Welsch, Math. Comp. 23, 221, 1969).

use nalgebra::DMatrix;

/// Points and weights on `0..=1`, exact for polynomials up to `degree`.
pub fn edge(degree: usize) -> Vec<(f64, f64)> {
    gauss_jacobi(degree / 2 + 1, 0.0)
        .into_iter()
        .map(|(x, w)| (0.5 * (1.0 + x), 0.5 * w))
        .collect()
}

/// Points and weights on the triangle (0,0), (1,0), (0,1), exact for polynomials up to `degree`.
pub fn triangle(degree: usize) -> Vec<([f64; 2], f64)> {
    let n = degree / 2 + 1;
    let along = gauss_jacobi(n, 0.0);
    let across = gauss_jacobi(n, 1.0);
    let mut rule = Vec::with_capacity(n * n);
    for &(b, wb) in &across {
        let y = 0.5 * (1.0 + b);
        for &(a, wa) in &along {
            rule.push(([0.5 * (1.0 + a) * (1.0 - y), y], wa * wb / 8.0));
        }
    }
    rule
}

/// Gauss points for the weight `(1 - x)^alpha` on `-1..=1`.
fn gauss_jacobi(n: usize, alpha: f64) -> Vec<(f64, f64)> {
    let mut matrix = DMatrix::<f64>::zeros(n, n);
    for i in 0..n {
        let k = i as f64;
        let s = 2.0 * k + alpha;
        matrix[(i, i)] = if alpha == 0.0 {
            0.0
        } else {
            -alpha * alpha / (s * (s + 2.0))
        };
        if i > 0 {
            let b = 4.0 * k * (k + alpha) * k * (k + alpha) / (s * s * (s + 1.0) * (s - 1.0));
            matrix[(i, i - 1)] = b.sqrt();
            matrix[(i - 1, i)] = b.sqrt();
        }
    }
    let eigen = matrix.symmetric_eigen();
    let total = 2f64.powf(alpha + 1.0) / (alpha + 1.0);
    let mut rule: Vec<(f64, f64)> = (0..n)
        .map(|i| {
            (
                eigen.eigenvalues[i],
                total * eigen.eigenvectors[(0, i)].powi(2),
            )
        })
        .collect();
    rule.sort_by(|a, b| a.0.total_cmp(&b.0));
    rule
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Exact: a! b! / (a + b + 2)! for x^a y^b (Stroud 1971).
    fn exact(a: usize, b: usize) -> f64 {
        let f = |n: usize| (1..=n).map(|i| i as f64).product::<f64>();
        f(a) * f(b) / f(a + b + 2)
    }

    fn worst(rule_degree: usize, degree: usize) -> f64 {
        let rule = triangle(rule_degree);
        let mut worst: f64 = 0.0;
        for a in 0..=degree {
            let b = degree - a;
            let sum: f64 = rule
                .iter()
                .map(|&([x, y], w)| w * x.powi(a as i32) * y.powi(b as i32))
                .sum();
            worst = worst.max((sum / exact(a, b) - 1.0).abs());
        }
        worst
    }

    #[test]
    fn triangle_rules_are_exact_to_their_degree_and_no_further() {
        for degree in 0..=16 {
            assert!(
                worst(degree, degree) < 1e-12,
                "degree {degree}: {}",
                worst(degree, degree)
            );
        }
        assert!(worst(7, 8) > 1e-4);
    }

    #[test]
    fn edge_rules_are_exact() {
        for degree in 0..=12usize {
            let sum: f64 = edge(degree)
                .iter()
                .map(|&(x, w)| w * x.powi(degree as i32))
                .sum();
            assert!((sum * (degree + 1) as f64 - 1.0).abs() < 1e-13);
        }
    }
}
