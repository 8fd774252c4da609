//! Nodal (Lagrange) polynomials of order `k` on the reference triangle (0,0), (1,0), (0,1).
//!
//! Nodes: vertices, then `k - 1` on each edge (Gauss-Lobatto spaced, edge `e` from vertex `e` to `e + 1`),
//! then the interior, placed by warping and blending: Warburton, An explicit construction of interpolation
//! nodes on the simplex, J. Eng. Math. 56, 247 (2006), with his optimised blending for triangles. Basis functions come from the Bernstein
//! polynomials through their Vandermonde matrix (well conditioned up to the orders used here).

use nalgebra::DMatrix;

/// Number of nodes of order `k`: (k + 1)(k + 2)/2.
pub const fn count(order: usize) -> usize {
    (order + 1) * (order + 2) / 2
}

/// Number of nodes inside the triangle: (k - 1)(k - 2)/2.
pub const fn interior_count(order: usize) -> usize {
    if order < 3 {
        0
    } else {
        (order - 1) * (order - 2) / 2
    }
}

/// The nodal basis of one order.
#[derive(Clone, Debug)]
pub struct Reference {
    /// Order `k`.
    pub order: usize,
    /// Nodes, shape `(count(k), 2)`.
    pub nodes: Vec<[f64; 2]>,
    /// Nodal function `i` = sum over Bernstein `b` of `nodal_from_bernstein[(b, i)] B_b`.
    nodal_from_bernstein: DMatrix<f64>,
}

impl Reference {
    /// The basis of order 1 to 8 (higher orders are refused by the settings long before).
    pub fn new(order: usize) -> Self {
        let nodes = nodes(order);
        let n = nodes.len();
        let mut vandermonde = DMatrix::zeros(n, n);
        for (i, &node) in nodes.iter().enumerate() {
            for (b, value) in bernstein(order, node).into_iter().enumerate() {
                vandermonde[(i, b)] = value;
            }
        }
        let identity = DMatrix::identity(n, n);
        // The nodes are unisolvent, so the solve always succeeds; a zero basis would show in every test.
        let inverse = vandermonde
            .lu()
            .solve(&identity)
            .unwrap_or_else(|| DMatrix::zeros(n, n));
        Self {
            order,
            nodes,
            nodal_from_bernstein: inverse,
        }
    }

    /// Values of all nodal functions at a reference point, shape `(count(k),)`.
    pub fn values(&self, at: [f64; 2]) -> Vec<f64> {
        self.combine(&bernstein(self.order, at))
    }

    /// Reference gradients of all nodal functions, shape `(count(k), 2)`.
    pub fn gradients(&self, at: [f64; 2]) -> Vec<[f64; 2]> {
        let [by_x, by_y] = bernstein_gradient(self.order, at);
        let (gx, gy) = (self.combine(&by_x), self.combine(&by_y));
        gx.into_iter().zip(gy).map(|(x, y)| [x, y]).collect()
    }

    /// Bernstein coefficients of the polynomial with these nodal values: bounds of the coefficients bound the
    /// polynomial on the whole triangle. Order of coefficients as [`bernstein_exponents`].
    pub fn bernstein_coefficients(&self, nodal: &[f64]) -> Vec<f64> {
        let n = nodal.len();
        (0..n)
            .map(|b| {
                (0..n)
                    .map(|i| self.nodal_from_bernstein[(b, i)] * nodal[i])
                    .sum()
            })
            .collect()
    }

    fn combine(&self, bernstein: &[f64]) -> Vec<f64> {
        let n = bernstein.len();
        (0..n)
            .map(|i| {
                (0..n)
                    .map(|b| self.nodal_from_bernstein[(b, i)] * bernstein[b])
                    .sum()
            })
            .collect()
    }
}

/// Exponents (of 1-x-y, x, y) of the Bernstein polynomials in the order used here.
pub fn bernstein_exponents(order: usize) -> Vec<[usize; 3]> {
    let mut all = Vec::with_capacity(count(order));
    for j in 0..=order {
        for i in 0..=order - j {
            all.push([order - i - j, i, j]);
        }
    }
    all
}

/// Bernstein polynomials of an order at a reference point, shape `(count(order),)`.
pub fn bernstein(order: usize, [x, y]: [f64; 2]) -> Vec<f64> {
    let z = 1.0 - x - y;
    bernstein_exponents(order)
        .into_iter()
        .map(|[a, b, c]| {
            multinomial(a, b, c) * z.powi(a as i32) * x.powi(b as i32) * y.powi(c as i32)
        })
        .collect()
}

/// Their derivatives by x and by y.
fn bernstein_gradient(order: usize, [x, y]: [f64; 2]) -> [Vec<f64>; 2] {
    let z = 1.0 - x - y;
    let power = |base: f64, e: usize| base.powi(e as i32);
    let slope = |base: f64, e: usize| {
        if e == 0 {
            0.0
        } else {
            e as f64 * base.powi(e as i32 - 1)
        }
    };
    let mut by_x = Vec::with_capacity(count(order));
    let mut by_y = Vec::with_capacity(count(order));
    for [a, b, c] in bernstein_exponents(order) {
        let m = multinomial(a, b, c);
        by_x.push(m * power(y, c) * (power(z, a) * slope(x, b) - slope(z, a) * power(x, b)));
        by_y.push(m * power(x, b) * (power(z, a) * slope(y, c) - slope(z, a) * power(y, c)));
    }
    [by_x, by_y]
}

fn multinomial(a: usize, b: usize, c: usize) -> f64 {
    let factorial = |n: usize| (1..=n).map(|i| i as f64).product::<f64>();
    factorial(a + b + c) / (factorial(a) * factorial(b) * factorial(c))
}

/// Gauss-Lobatto points on `0..=1`, shape `(order + 1,)`: the nodes along an edge.
pub fn edge_nodes(order: usize) -> Vec<f64> {
    lobatto(order)
        .into_iter()
        .map(|x| 0.5 * (1.0 + x))
        .collect()
}

/// Gauss-Lobatto points on `-1..=1`: the ends and the roots of the Legendre polynomial's derivative, by Newton.
fn lobatto(order: usize) -> Vec<f64> {
    let n = order as f64;
    (0..=order)
        .map(|i| {
            let mut x = -(std::f64::consts::PI * i as f64 / n).cos();
            if i == 0 || i == order {
                return x.round();
            }
            for _ in 0..50 {
                let (mut p0, mut p1) = (1.0, x);
                for m in 1..order {
                    let m = m as f64;
                    (p0, p1) = (p1, ((2.0 * m + 1.0) * x * p1 - m * p0) / (m + 1.0));
                }
                // (1 - x^2) P_n' = n (P_(n-1) - x P_n); and its derivative is -n (n + 1) P_n.
                let step = n * (p0 - x * p1) / (-n * (n + 1.0) * p1);
                x -= step;
                if step.abs() < 1e-16 {
                    break;
                }
            }
            x
        })
        .collect()
}

/// Nodes of order `k` in the documented order, shape `(count(k), 2)`.
pub fn nodes(order: usize) -> Vec<[f64; 2]> {
    let mut all = vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];
    let along = edge_nodes(order);
    let inner = &along[1..order];
    all.extend(inner.iter().map(|&s| [s, 0.0]));
    all.extend(inner.iter().map(|&s| [1.0 - s, s]));
    all.extend(inner.iter().map(|&s| [0.0, 1.0 - s]));
    for j in 1..order {
        for i in 1..order - j {
            all.push(warped(order, i, j));
        }
    }
    all
}

/// Optimised blending parameter for orders 1 to 8 (Warburton 2006, table for the triangle).
const BLEND: [f64; 8] = [0.0, 0.0, 1.4152, 0.1001, 0.2751, 0.9800, 1.0999, 1.2832];

/// Interior node with even barycentric indices (order - i - j, i, j)/order, moved by warp and blend.
fn warped(order: usize, i: usize, j: usize) -> [f64; 2] {
    let n = order as f64;
    let l = [(order - i - j) as f64 / n, i as f64 / n, j as f64 / n];
    let alpha = BLEND[order - 1];
    let mut moved = l;
    for edge in 0..3 {
        // The edge opposite barycentric `edge`, from `a` to `b`; warp along it, blended by 4 la lb and widened.
        let (a, b) = ((edge + 1) % 3, (edge + 2) % 3);
        let blend = 4.0 * l[a] * l[b] * (1.0 + (alpha * l[edge]).powi(2));
        let warp = blend * warp_factor(order, l[b] - l[a]) * 0.5;
        moved[b] += warp;
        moved[a] -= warp;
    }
    [moved[1], moved[2]]
}

/// Displacement from even to Gauss-Lobatto spacing at `r` in -1..1, divided by 1 - r^2.
fn warp_factor(order: usize, r: f64) -> f64 {
    let target = lobatto(order);
    let even: Vec<f64> = (0..=order)
        .map(|i| -1.0 + 2.0 * i as f64 / order as f64)
        .collect();
    let mut warp = 0.0;
    for i in 0..=order {
        let lagrange: f64 = (0..=order)
            .filter(|&m| m != i)
            .map(|m| (r - even[m]) / (even[i] - even[m]))
            .product();
        warp += (target[i] - even[i]) * lagrange;
    }
    let bubble = 1.0 - r * r;
    if bubble > 1e-10 { warp / bubble } else { 0.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nodal_functions_are_one_at_their_node_and_reproduce_polynomials() {
        for order in 1..=6 {
            let basis = Reference::new(order);
            for (i, &node) in basis.nodes.iter().enumerate() {
                for (j, v) in basis.values(node).into_iter().enumerate() {
                    assert!((v - f64::from(i == j)).abs() < 1e-12, "order {order}");
                }
            }
            let f = |[x, y]: [f64; 2]| (1.0 + x - 2.0 * y).powi(order as i32);
            let at = [0.31, 0.22];
            let value: f64 = basis
                .values(at)
                .iter()
                .zip(&basis.nodes)
                .map(|(v, &n)| v * f(n))
                .sum();
            assert!((value - f(at)).abs() < 1e-12);
            let slope: f64 = basis
                .gradients(at)
                .iter()
                .zip(&basis.nodes)
                .map(|(g, &n)| g[0] * f(n))
                .sum();
            let exact = order as f64 * (1.0 + at[0] - 2.0 * at[1]).powi(order as i32 - 1);
            assert!((slope - exact).abs() < 1e-11);
        }
    }

    #[test]
    fn nodes_keep_the_triangle_symmetry() {
        for order in 3..=6 {
            let all = nodes(order);
            for &[x, y] in &all {
                let turned = [1.0 - x - y, x];
                assert!(
                    all.iter()
                        .any(|n| (n[0] - turned[0]).abs() + (n[1] - turned[1]).abs() < 1e-13),
                    "order {order}"
                );
            }
        }
    }

    #[test]
    fn edge_nodes_of_order_four_are_lobatto() {
        // Abramowitz and Stegun, table 25.6, n = 5: sqrt(3/7).
        assert!((lobatto(4)[3] - (3.0f64 / 7.0).sqrt()).abs() < 1e-15);
    }
}
