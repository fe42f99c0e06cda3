//! Anderson's acceleration of fixed-point iterations.

use std::collections::VecDeque;

use nalgebra::{DMatrix, DVector};

/// How a fixed point is sought.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AndersonSettings {
    /// How many past steps are mixed.
    pub depth: usize,
    /// Largest |g(x) - x| over the components at which x counts as fixed.
    pub tolerance: f64,
    /// Most evaluations of the map.
    pub evaluations: usize,
}

/// Where the iteration ended.
#[derive(Clone, Debug, PartialEq)]
pub struct FixedPoint {
    /// The image g(x) of the last iterate.
    pub point: Vec<f64>,
    /// Largest |g(x) - x| over the components.
    pub residual: f64,
    /// Evaluations of the map.
    pub evaluations: usize,
}

impl FixedPoint {
    /// Whether the residual met the tolerance of `settings`.
    #[must_use]
    pub fn converged(&self, settings: &AndersonSettings) -> bool {
        self.residual <= settings.tolerance
    }
}

/// Seeks x = g(x) from `start` (Anderson, J. ACM 12, 547 (1965); type II of Walker and Ni, SIAM J. Numer. Anal. 49, 1715
/// (2011)): the next point is the mean of past images whose residuals, in the least-squares sense, cancel best.
///
/// # Errors
/// Those of the map, which end the iteration.
pub fn fixed_point<E>(
    start: Vec<f64>,
    settings: &AndersonSettings,
    mut map: impl FnMut(&[f64]) -> Result<Vec<f64>, E>,
) -> Result<FixedPoint, E> {
    let mut point = start;
    let mut previous: Option<(DVector<f64>, DVector<f64>)> = None;
    let mut steps: VecDeque<(DVector<f64>, DVector<f64>)> = VecDeque::new();
    let mut evaluations = 0;
    loop {
        let image = DVector::from_vec(map(&point)?);
        evaluations += 1;
        let residual = &image - DVector::from_column_slice(&point);
        let largest = residual.amax();
        // A residual that is not a number ends here as well, as one that did not converge.
        let undone = largest > settings.tolerance && evaluations < settings.evaluations;
        if !undone {
            return Ok(FixedPoint {
                point: image.as_slice().to_vec(),
                residual: largest,
                evaluations,
            });
        }
        if let Some((last_image, last_residual)) = previous {
            if steps.len() == settings.depth {
                steps.pop_front();
            }
            steps.push_back((&image - last_image, &residual - last_residual));
        }
        let mut next = image.clone();
        for ((image_step, _), weight) in steps.iter().zip(mixing(&steps, &residual).iter()) {
            next.axpy(-weight, image_step, 1.0);
        }
        point = next.as_slice().to_vec();
        previous = Some((image, residual));
    }
}

/// Weights of past residual steps that cancel `residual` best, by normal equations in the pseudo-inverse sense.
fn mixing(steps: &VecDeque<(DVector<f64>, DVector<f64>)>, residual: &DVector<f64>) -> DVector<f64> {
    /// Directions whose squared residual is this much below the largest are rounding noise.
    const RANK_TOLERANCE: f64 = 1e-14;
    let count = steps.len();
    let normal = DMatrix::from_fn(count, count, |i, j| steps[i].1.dot(&steps[j].1));
    let right = DVector::from_fn(count, |i, _| steps[i].1.dot(residual));
    if count == 0 {
        return right;
    }
    let decomposition = normal.svd(true, true);
    let cutoff = RANK_TOLERANCE * decomposition.singular_values[0];
    decomposition
        .solve(&right, cutoff)
        .unwrap_or_else(|_| DVector::zeros(count))
}

#[cfg(test)]
mod tests {
    use std::convert::Infallible;

    use super::{AndersonSettings, fixed_point};

    /// A linear map x -> M x + c of dimension n is solved in n + 1 mixed steps or a few more (Walker and Ni 2011: type II is then
    /// equivalent to GMRES), though its plain iteration, with an eigenvalue of -2, runs away.
    #[test]
    fn linear_map_is_solved_though_its_plain_iteration_diverges() {
        let settings = AndersonSettings {
            depth: 3,
            tolerance: 1e-12,
            evaluations: 12,
        };
        let found = fixed_point(vec![0.0; 3], &settings, |x| {
            Ok::<_, Infallible>(vec![
                -2.0 * x[0] + 3.0,
                0.5 * x[1] + 0.1 * x[0] + 1.0,
                0.9 * x[2] - 0.2,
            ])
        })
        .expect("the map has no errors");
        assert!(found.converged(&settings), "{found:?}");
        for (value, truth) in found.point.iter().zip([1.0, 2.2, -2.0]) {
            assert!((value - truth).abs() < 1e-10, "{value} is not {truth}");
        }
    }

    /// The Dottie number, cos x = x: 0.739085133215160641 (OEIS A003957).
    #[test]
    fn nonlinear_map_reaches_its_fixed_point() {
        let settings = AndersonSettings {
            depth: 4,
            tolerance: 1e-13,
            evaluations: 20,
        };
        let found = fixed_point(vec![0.0], &settings, |x| Ok::<_, Infallible>(vec![x[0].cos()]))
            .expect("the map has no errors");
        assert!(found.converged(&settings));
        assert!((found.point[0] - 0.739_085_133_215_160_6).abs() < 1e-12);
    }

    #[test]
    fn what_does_not_settle_says_so() {
        let settings = AndersonSettings {
            depth: 2,
            tolerance: 1e-12,
            evaluations: 5,
        };
        let found =
            fixed_point(vec![0.0], &settings, |x| Ok::<_, Infallible>(vec![x[0] + 1.0])).expect("no errors");
        assert!(!found.converged(&settings));
        assert_eq!(found.evaluations, 5);
    }
}
