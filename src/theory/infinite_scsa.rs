//! The self-consistent screening approximation of an infinite sheet without tension: one universal crossover.
//!
//! Le Doussal and Radzihovsky, Phys. Rev. Lett. 69, 1209 (1992): with x = q/q_th, kappa in units of the bare kappa and Y in
//! units of the bare Y, the equations of [`super::box_scsa`] hold no parameter at all (3 kB T Y/(16 pi kappa^2) = 1). In
//! elliptic coordinates with foci at 0 and k,
//!
//! ```text
//! q = (k/2)(cosh u + cos v),   |k - q| = p = (k/2)(cosh u - cos v),   d2q = q p du dv,
//! kappa(k) = 1 + 4/(3 pi k^2) int du dv w(u, v) Y(q)/kappa(p),
//! 1/Y(k)   = 1 + 2/(3 pi k^2) int du dv w(u, v)/(kappa(q) kappa(p)),
//! w(u, v)  = 4 sinh^4 u sin^4 v/(sinh^2 u + sin^2 v)^3,   u > 0,   0 < v < 2 pi
//! ```
//!
//! no integrand is singular, and q/k and p/k do not depend on k: on a grid even in ln k every wave vector is interpolated with
//! the same weights.

use std::f64::consts::{LN_10, PI};

use super::ScsaError;
use super::plate::SCSA_ETA;
use crate::numerics::{AndersonSettings, fixed_point};

/// Grid points in each decade of x.
const PER_DECADE: usize = 20;

/// First decade of the grid, and how many there are. Outside, the asymptotic laws hold.
const FIRST_DECADE: f64 = -5.0;
const DECADES: usize = 8;

/// The integrals end at this u, where the integrand, e^(-(2 - eta) u) at least, is beyond rounding.
const LAST_U: f64 = 26.0;

/// Points of the trapezoidal rule in u and in v, after a change of variable that flattens both ends.
const POINTS: [usize; 2] = [120, 60];

const SETTINGS: AndersonSettings = AndersonSettings {
    depth: 8,
    tolerance: 1e-10,
    evaluations: 300,
};

/// The universal crossover, tabulated.
#[derive(Clone, Debug, PartialEq)]
pub struct InfiniteScsa {
    /// ln of kappa(x)/kappa on the grid.
    ln_kappa: Vec<f64>,
    /// ln of Y(x)/Y on the grid.
    ln_youngs: Vec<f64>,
}

/// One point of the quadrature: its weight, and where its q and p lie relative to k on the grid.
struct Node {
    weight: f64,
    q: Shift,
    p: Shift,
}

/// An interpolation at a fixed distance from any grid point.
#[derive(Clone, Copy)]
struct Shift {
    /// Grid steps to the first of four points.
    steps: isize,
    /// Their weights (cubic Lagrange).
    weights: [f64; 4],
}

impl InfiniteScsa {
    /// Solves the equations, in about a second.
    ///
    /// # Errors
    /// [`ScsaError::NotConverged`] where the iteration does not settle.
    pub fn solve() -> Result<Self, ScsaError> {
        let nodes = nodes();
        let start: Vec<f64> = grid().map(|x| 0.5 * SCSA_ETA * (1.5 / (x * x)).ln_1p()).collect();
        let found = fixed_point(start, &SETTINGS, |ln_kappa| -> Result<Vec<f64>, ScsaError> {
            Ok(Self::iterate(&nodes, ln_kappa).ln_kappa)
        })?;
        if !found.converged(&SETTINGS) {
            return Err(ScsaError::NotConverged {
                evaluations: found.evaluations,
                residual: found.residual,
            });
        }
        Ok(Self::iterate(&nodes, &found.point))
    }

    /// kappa(q)/kappa at `ratio` = q/q_th.
    #[must_use]
    pub fn kappa_ratio(&self, ratio: f64) -> f64 {
        interpolate(&Extended::new(&self.ln_kappa, -SCSA_ETA, 1.0), ratio).exp()
    }

    /// Y(q)/Y at `ratio` = q/q_th.
    #[must_use]
    pub fn youngs_ratio(&self, ratio: f64) -> f64 {
        interpolate(&Extended::new(&self.ln_youngs, ETA_U, -0.5), ratio).exp()
    }

    /// Poisson ratio of a sheet of length L with `ratio` = 2 pi/(L q_th), from the bare one: nu(L) = -S12/S11 with the ripples'
    /// compliance at fixed kappa(p), 1/(2 kB T A) sum p_i p_j p_k p_l G(p)^2 over p > 2 pi/L. Its own part gives -1/3.
    #[must_use]
    pub fn poisson_ratio(&self, bare: f64, ratio: f64) -> f64 {
        const STEPS: u32 = 2_000;
        /// Ripples shorter than q_th over this soften nothing: what is left is 1e-8 of the compliance.
        const LAST: f64 = 1e4;
        // Y S11 of the ripples is (1/2) int dx/(x^3 kappa(x)^2), here by the midpoint rule in ln x.
        let table = Extended::new(&self.ln_kappa, -SCSA_ETA, 1.0);
        let step = (LAST / ratio).ln() / f64::from(STEPS);
        let mut softening = 0.0;
        for point in 0..STEPS {
            let x = ratio * (step * (f64::from(point) + 0.5)).exp();
            softening += 0.5 * step / (x * interpolate(&table, x).exp()).powi(2);
        }
        (bare - softening / 3.0) / (1.0 + softening)
    }

    /// Y(x) of kappa(x), and the kappa(x) that both give.
    fn iterate(nodes: &[Node], ln_kappa: &[f64]) -> Self {
        let kappa = Extended::new(ln_kappa, -SCSA_ETA, 1.0);
        let screening = |(point, x): (usize, f64)| {
            let term = |node: &Node| node.weight * (-kappa.at(point, node.q) - kappa.at(point, node.p)).exp();
            -(2.0 / (3.0 * PI) * nodes.iter().map(term).sum::<f64>() / (x * x)).ln_1p()
        };
        let ln_youngs: Vec<f64> = grid().enumerate().map(screening).collect();
        let youngs = Extended::new(&ln_youngs, ETA_U, -0.5);
        let stiffening = |(point, x): (usize, f64)| {
            let term = |node: &Node| node.weight * (youngs.at(point, node.q) - kappa.at(point, node.p)).exp();
            (4.0 / (3.0 * PI) * nodes.iter().map(term).sum::<f64>() / (x * x)).ln_1p()
        };
        Self {
            ln_kappa: grid().enumerate().map(stiffening).collect(),
            ln_youngs,
        }
    }
}

/// Exponent of the softening of Y within the approximation, 2 - 2 eta.
const ETA_U: f64 = 2.0 - 2.0 * SCSA_ETA;

fn step() -> f64 {
    LN_10 / PER_DECADE as f64
}

fn grid() -> impl Iterator<Item = f64> {
    (0..=DECADES * PER_DECADE).map(|point| (FIRST_DECADE * LN_10 + point as f64 * step()).exp())
}

/// Points of padding on either side of the grid, so that every shift stays inside.
fn padding() -> usize {
    (LAST_U / step()) as usize + 4
}

/// A field on the grid, continued by x^slope below and by its first-order law ln(1 + first/x^2) above.
struct Extended(Vec<f64>);

impl Extended {
    fn new(field: &[f64], slope: f64, first: f64) -> Self {
        let padding = padding();
        let below = (1..=padding)
            .rev()
            .map(|back| field[0] - slope * step() * back as f64);
        let last = FIRST_DECADE * LN_10 + (field.len() - 1) as f64 * step();
        let above = (1..=padding).map(|on| {
            let x = (last + step() * on as f64).exp();
            (first / (x * x)).ln_1p()
        });
        Self(below.chain(field.iter().copied()).chain(above).collect())
    }

    /// The field at a shift from a grid point.
    fn at(&self, point: usize, shift: Shift) -> f64 {
        let first = (padding() + point).saturating_add_signed(shift.steps);
        let values = &self.0[first..first + 4];
        values
            .iter()
            .zip(shift.weights)
            .map(|(value, weight)| value * weight)
            .sum()
    }
}

fn interpolate(table: &Extended, ratio: f64) -> f64 {
    table.at(
        0,
        Shift::new(ratio.ln() - FIRST_DECADE * LN_10, table.0.len() - padding()),
    )
}

impl Shift {
    /// The shift by `distance` in ln x, kept inside the padding below and `after` points that follow the start.
    fn new(distance: f64, after: usize) -> Self {
        let steps = (distance / step()).clamp(1.0 - padding() as f64, after as f64 - 3.0);
        let whole = steps.floor();
        let t = steps - whole;
        Self {
            steps: whole as isize - 1,
            weights: [
                -t * (t - 1.0) * (t - 2.0) / 6.0,
                (t + 1.0) * (t - 1.0) * (t - 2.0) / 2.0,
                -(t + 1.0) * t * (t - 2.0) / 2.0,
                (t + 1.0) * t * (t - 1.0) / 6.0,
            ],
        }
    }
}

/// The quadrature in u and v. The upper half of the ellipses counts twice.
fn nodes() -> Vec<Node> {
    let [in_u, in_v] = POINTS;
    let mut nodes = Vec::with_capacity(in_u * in_v);
    for i in 1..in_u {
        let [u, du] = flattened(i, in_u, LAST_U);
        for j in 1..in_v {
            let [v, dv] = flattened(j, in_v, PI);
            let (height, width) = (u.sinh().powi(2), v.sin().powi(2));
            let kernel = 4.0 * height.powi(2) * width.powi(2) / (height + width).powi(3);
            // cosh u +- cos v without cancellation at the foci.
            let (half_u, half_v) = ((0.5 * u).sinh().powi(2), (0.5 * v).sin().powi(2));
            let (q, p) = (half_u + (0.5 * v).cos().powi(2), half_u + half_v);
            nodes.push(Node {
                weight: 2.0 * kernel * du * dv,
                q: Shift::new(q.ln(), padding()),
                p: Shift::new(p.ln(), padding()),
            });
        }
    }
    nodes
}

/// Point `index` of `count` and its weight on (0, end), by x = end (t - sin(2 pi t)/2 pi): the trapezoidal rule in t converges
/// fast whatever the ends are like (Sidi, Int. Ser. Numer. Math. 112, 359 (1993)).
fn flattened(index: usize, count: usize, end: f64) -> [f64; 2] {
    let t = index as f64 / count as f64;
    let angle = 2.0 * PI * t;
    [
        end * (t - angle.sin() / (2.0 * PI)),
        end * (1.0 - angle.cos()) / count as f64,
    ]
}
