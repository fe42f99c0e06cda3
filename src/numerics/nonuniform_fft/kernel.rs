//! The "exponential of semicircle" spreading kernel and its Fourier transform.

use std::f64::consts::PI;

use nalgebra::{DMatrix, SymmetricEigen};

/// Nodes of the quadrature that gives the kernel's Fourier transform. The integrand is a smooth bell times a cosine of
/// at most w/8 periods on the interval; 60 nodes integrate it to rounding for every width up to 16.
const QUADRATURE_NODES: usize = 60;

/// The kernel exp(beta (sqrt(1 - z^2) - 1)) on |z| <= 1, zero outside, stretched over `width` grid cells.
///
/// Barnett, Magland and af Klinteberg, SIAM J. Sci. Comput. 41, C479 (2019): beta = 2.30 w at twofold
/// upsampling; the error falls by about ten for each cell of width.
#[derive(Clone, Copy, Debug)]
pub(super) struct Kernel {
    /// Support w in grid cells.
    pub width: usize,
    beta: f64,
}

impl Kernel {
    /// The narrowest kernel with an error below `tolerance`, relative to the l1 norm of the strengths.
    ///
    /// The paper's width is ceil(log10(1/tolerance)) + 1; one cell more covers the two dimensions and the difference
    /// between its root-mean-square error and the largest one. Beyond width 16 rounding dominates.
    pub fn for_tolerance(tolerance: f64) -> Self {
        let digits = (-tolerance.log10()).ceil().clamp(1.0, 14.0);
        let width = digits as usize + 2;
        Self {
            width,
            beta: 2.30 * width as f64,
        }
    }

    /// The kernel at `offset` grid cells from its middle.
    pub fn value(&self, offset: f64) -> f64 {
        let z = 2.0 * offset / self.width as f64;
        let inside = 1.0 - z * z;
        if inside < 0.0 {
            0.0
        } else {
            (self.beta * (inside.sqrt() - 1.0)).exp()
        }
    }

    /// int phi(t) exp(-2 pi i m t/n) dt over the support, t in grid cells of a grid of n, for m = 0..=max_mode.
    pub fn transform(&self, max_mode: usize, grid: usize) -> Vec<f64> {
        let rule = gauss_legendre(QUADRATURE_NODES);
        let half = 0.5 * self.width as f64;
        (0..=max_mode)
            .map(|m| {
                let wave = 2.0 * PI * m as f64 / grid as f64;
                rule.iter()
                    .map(|&(z, weight)| half * weight * self.value(half * z) * (wave * half * z).cos())
                    .sum()
            })
            .collect()
    }
}

/// Nodes and weights of the Gauss-Legendre rule on (-1, 1), nodes ascending.
///
/// Golub and Welsch, Math. Comp. 23, 221 (1969): nodes are the eigenvalues of the Jacobi matrix with off-diagonal
/// k/sqrt(4 k^2 - 1), weights twice the squared first components of its eigenvectors.
fn gauss_legendre(nodes: usize) -> Vec<(f64, f64)> {
    let mut jacobi = DMatrix::<f64>::zeros(nodes, nodes);
    for k in 1..nodes {
        let kf = k as f64;
        let off_diagonal = kf / (4.0 * kf * kf - 1.0).sqrt();
        jacobi[(k - 1, k)] = off_diagonal;
        jacobi[(k, k - 1)] = off_diagonal;
    }
    let eigen = SymmetricEigen::new(jacobi);
    let mut rule: Vec<(f64, f64)> = (0..nodes)
        .map(|i| (eigen.eigenvalues[i], 2.0 * eigen.eigenvectors[(0, i)].powi(2)))
        .collect();
    rule.sort_by(|a, b| a.0.total_cmp(&b.0));
    rule
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Abramowitz and Stegun, Handbook of Mathematical Functions, table 25.4, n = 5.
    #[test]
    fn gauss_legendre_rule_is_the_tabulated_one() {
        let table = [
            (-0.906_179_845_938_664, 0.236_926_885_056_189),
            (-0.538_469_310_105_683, 0.478_628_670_499_366),
            (0.0, 0.568_888_888_888_889),
            (0.538_469_310_105_683, 0.478_628_670_499_366),
            (0.906_179_845_938_664, 0.236_926_885_056_189),
        ];
        for ((z, weight), (z_table, weight_table)) in gauss_legendre(5).into_iter().zip(table) {
            assert!((z - z_table).abs() < 2e-15, "{z} against {z_table}");
            assert!(
                (weight - weight_table).abs() < 2e-15,
                "{weight} against {weight_table}"
            );
        }
    }

    /// The transform by quadrature against a plain trapezoidal sum with 20,000 steps, for the narrowest and the
    /// widest kernel and the highest mode that twofold upsampling asks for.
    #[test]
    fn kernel_transform_agrees_with_a_brute_force_sum() {
        for tolerance in [1e-1, 1e-9, 1e-14] {
            let kernel = Kernel::for_tolerance(tolerance);
            let (grid, max_mode) = (64, 15);
            let half = 0.5 * kernel.width as f64;
            let steps = 20_000;
            let step = 2.0 * half / f64::from(steps);
            let transform = kernel.transform(max_mode, grid);
            for m in [0, 7, max_mode] {
                let wave = 2.0 * PI * m as f64 / grid as f64;
                let brute: f64 = (0..=steps)
                    .map(|i| {
                        let t = -half + f64::from(i) * step;
                        let ends = if i == 0 || i == steps { 0.5 } else { 1.0 };
                        ends * step * kernel.value(t) * (wave * t).cos()
                    })
                    .sum();
                let allowed = (1e-2 * tolerance).max(2e-14) * transform[0];
                assert!(
                    (transform[m] - brute).abs() < allowed,
                    "width {}, mode {m}: {} against {brute}",
                    kernel.width,
                    transform[m]
                );
            }
        }
    }
}
