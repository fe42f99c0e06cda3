//! The likelihood of mode powers, and its maximum.
//!
//! Each complex mode's |h_q|^2 is exponentially distributed, so that its mean s over n effective samples is Gamma(n, m/n)
//! about the model's mean m (Whittle, Ark. Mat. 2, 423 (1953)). Twice the log-likelihood's distance from its best is the deviance
//!
//! ```text
//! D = sum over modes of 2 n (s/m - 1 - ln(s/m))
//! ```
//!
//! a sum of squares of signed roots, which a nonlinear least-squares solver minimises exactly. Least squares on logarithms
//! or with the measured errors as weights would be biased where n is small.

use levenberg_marquardt::{LeastSquaresProblem, LevenbergMarquardt};
use nalgebra::storage::Owned;
use nalgebra::{DMatrix, DVector, Dyn};

/// Below this |ln(s/m)| the signed root is taken from its series, where the closed form cancels.
const SERIES_BELOW: f64 = 1e-3;

/// The mean power of one mode.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ModeSample {
    /// |q| in 1/A.
    pub length: f64,
    /// Mean s of |h_q|^2 over the run, in A^2; positive.
    pub power: f64,
    /// Effective samples n of that mean.
    pub effective_samples: f64,
}

/// A model at some parameters: ln m of each mode, and its derivatives with shape (modes, parameters).
#[derive(Clone, Debug, PartialEq)]
pub struct ModelPoint {
    /// ln of the model's mean power, in ln A^2.
    pub ln_power: DVector<f64>,
    /// Derivatives of it.
    pub derivatives: DMatrix<f64>,
}

/// A model of mode powers.
pub trait PowerModel {
    /// The model at `parameters`; `None` where it has no solution there.
    fn evaluate(&mut self, parameters: &[f64]) -> Option<ModelPoint>;
}

/// Limits of one parameter, kept by a logistic map; `None` where it is free.
pub type Limits = Option<[f64; 2]>;

/// The maximum of the likelihood.
#[derive(Clone, Debug, PartialEq)]
pub struct LikelihoodFit {
    /// The parameters.
    pub parameters: Vec<f64>,
    /// The model there.
    pub point: ModelPoint,
    /// The deviance D.
    pub deviance: f64,
}

/// Signed root of one mode's deviance, sign(x) sqrt(2 n (e^x - 1 - x)) with x = ln(s/m), and its derivative by ln m.
#[must_use]
pub fn signed_root(sample: &ModeSample, ln_model: f64) -> [f64; 2] {
    let x = sample.power.ln() - ln_model;
    let root_n = sample.effective_samples.sqrt();
    if x.abs() < SERIES_BELOW {
        return [
            root_n * x * (1.0 + x / 6.0 + x * x / 36.0),
            -root_n * (1.0 + x / 3.0 + x * x / 12.0),
        ];
    }
    let root = x.signum() * root_n * (2.0 * (x.exp_m1() - x)).sqrt();
    [root, -sample.effective_samples * x.exp_m1() / root]
}

/// Maximises the likelihood of `samples` under `model` from `start`, which must lie within the limits.
///
/// `None` where the model has no solution at the start, or the search did not settle.
pub fn maximise(
    model: &mut impl PowerModel,
    samples: &[ModeSample],
    start: &[f64],
    limits: &[Limits],
) -> Option<LikelihoodFit> {
    /// Relative changes of the deviance and the parameters below which the search ends: far below a standard error.
    const TOLERANCE: f64 = 1e-8;
    let free = start
        .iter()
        .zip(limits)
        .map(|(&value, limits)| to_free(value, *limits));
    let mut problem = Problem {
        model,
        samples,
        limits,
        free: DVector::from_iterator(start.len(), free),
        point: None,
    };
    problem.update();
    problem.point.as_ref()?;
    let search = LevenbergMarquardt::new()
        .with_ftol(TOLERANCE)
        .with_xtol(TOLERANCE)
        .with_gtol(TOLERANCE)
        .with_patience(20);
    let (problem, report) = search.minimize(problem);
    let deviance = 2.0 * report.objective_function;
    if !report.termination.was_successful() || !deviance.is_finite() {
        return None;
    }
    Some(LikelihoodFit {
        parameters: problem.parameters(),
        deviance,
        point: problem.point?,
    })
}

struct Problem<'a, M> {
    model: &'a mut M,
    samples: &'a [ModeSample],
    limits: &'a [Limits],
    free: DVector<f64>,
    point: Option<ModelPoint>,
}

impl<M: PowerModel> Problem<'_, M> {
    fn parameters(&self) -> Vec<f64> {
        self.free
            .iter()
            .zip(self.limits)
            .map(|(&free, limits)| from_free(free, *limits)[0])
            .collect()
    }

    fn update(&mut self) {
        let parameters = self.parameters();
        self.point = self.model.evaluate(&parameters);
    }
}

impl<M: PowerModel> LeastSquaresProblem<f64, Dyn, Dyn> for Problem<'_, M> {
    type ResidualStorage = Owned<f64, Dyn>;
    type JacobianStorage = Owned<f64, Dyn, Dyn>;
    type ParameterStorage = Owned<f64, Dyn>;

    fn set_params(&mut self, free: &DVector<f64>) {
        self.free.copy_from(free);
        self.update();
    }

    fn params(&self) -> DVector<f64> {
        self.free.clone()
    }

    fn residuals(&self) -> Option<DVector<f64>> {
        /// Residual of every mode where the model has no solution: the search turns back from there.
        const REFUSED: f64 = 1e6;
        let Some(point) = &self.point else {
            return Some(DVector::from_element(self.samples.len(), REFUSED));
        };
        let residual = |mode: usize| signed_root(&self.samples[mode], point.ln_power[mode])[0];
        Some(DVector::from_fn(self.samples.len(), |mode, _| residual(mode)))
    }

    fn jacobian(&self) -> Option<DMatrix<f64>> {
        let point = self.point.as_ref()?;
        let mut jacobian = point.derivatives.clone();
        for (parameter, mut column) in jacobian.column_iter_mut().enumerate() {
            let slope = from_free(self.free[parameter], self.limits[parameter])[1];
            column *= slope;
        }
        for (mode, mut row) in jacobian.row_iter_mut().enumerate() {
            row *= signed_root(&self.samples[mode], point.ln_power[mode])[1];
        }
        Some(jacobian)
    }
}

/// How near, as a share of the range, a start may lie to a limit: at the limit itself the map has no slope.
const START_MARGIN: f64 = 1e-3;

pub(super) fn to_free(value: f64, limits: Limits) -> f64 {
    limits.map_or(value, |[lower, upper]| {
        let share = ((value - lower) / (upper - lower)).clamp(START_MARGIN, 1.0 - START_MARGIN);
        (share / (1.0 - share)).ln()
    })
}

/// The parameter and its derivative by the free variable.
pub(super) fn from_free(free: f64, limits: Limits) -> [f64; 2] {
    limits.map_or([free, 1.0], |[lower, upper]| {
        let share = 1.0 / (1.0 + (-free).exp());
        [
            lower + (upper - lower) * share,
            (upper - lower) * share * (1.0 - share),
        ]
    })
}
