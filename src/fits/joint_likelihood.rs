//! The likelihood of all runs of a sheet under one bare plate, and its maximum.
//!
//! At temperature T the plate has kappa(T) = kappa_m (1 + s t), Y(T) = Y_m (1 + r t) with t = T/T_m - 1 and T_m the runs' mean
//! temperature; b and Poisson's ratio do not depend on it. The deviance is the sum over the runs of that of the mode
//! powers ([`super::plate_likelihood`]) and that of the cell's strains ([`super::cell_likelihood`]).

use levenberg_marquardt::{LeastSquaresProblem, LevenbergMarquardt};
use nalgebra::storage::Owned;
use nalgebra::{DMatrix, DVector, Dyn};
use rayon::prelude::*;

use super::joint_run::{BARE, JointRun, RunPoint};
use super::plate_likelihood::{Limits, from_free, signed_root, to_free};

/// ln Y may move this far from its start.
const LN_YOUNGS_RANGE: f64 = 4.0;

/// Poisson's ratio and the relative slopes stay within these; beyond, a plate is unstable or vanishes at 0 K.
const POISSON_LIMITS: [f64; 2] = [-0.95, 0.95];
const SLOPE_LIMITS: [f64; 2] = [-0.9, 0.9];

/// The runs and what of the plate is free.
pub(super) struct JointModel<'a> {
    pub(super) runs: Vec<JointRun<'a>>,
    /// T_m in K.
    pub(super) mean_temperature: f64,
    /// Whether kappa and Y change with temperature.
    pub(super) slopes: bool,
    /// Poisson's ratio where it is held.
    pub(super) held_poisson: Option<f64>,
}

/// The maximum: parameters ln kappa_m, b, ln Y_m, then Poisson's ratio and s, r where they are free.
pub(super) struct JointFit {
    pub(super) parameters: Vec<f64>,
    pub(super) points: Vec<RunPoint>,
}

impl JointModel<'_> {
    /// Place of Poisson's ratio among the parameters.
    pub(super) fn poisson(&self) -> Option<usize> {
        self.held_poisson.is_none().then_some(3)
    }

    /// Places of s and r among the parameters.
    pub(super) fn slope_places(&self) -> Option<[usize; 2]> {
        let first = 3 + usize::from(self.held_poisson.is_none());
        self.slopes.then_some([first, first + 1])
    }

    /// Number of parameters.
    pub(super) fn size(&self) -> usize {
        3 + usize::from(self.held_poisson.is_none()) + 2 * usize::from(self.slopes)
    }

    /// The bare plate at a temperature (K), and its derivatives by the parameters, shape ([`BARE`], parameters); `None` where
    /// kappa or Y is not positive.
    pub(super) fn bare(&self, parameters: &[f64], temperature: f64) -> Option<([f64; BARE], DMatrix<f64>)> {
        let mut bare = [parameters[0], parameters[1], parameters[2], 0.0];
        let mut chain = DMatrix::identity(BARE, self.size());
        if self.held_poisson.is_some() && self.slopes {
            // The fourth column is then a slope.
            chain[(3, 3)] = 0.0;
        }
        bare[3] = self
            .poisson()
            .map_or(self.held_poisson, |place| Some(parameters[place]))?;
        if let Some(places) = self.slope_places() {
            let t = temperature / self.mean_temperature - 1.0;
            for (row, place) in [0, 2].into_iter().zip(places) {
                let factor = 1.0 + parameters[place] * t;
                if factor <= 0.0 {
                    return None;
                }
                bare[row] += factor.ln();
                chain[(row, place)] = t / factor;
            }
        }
        Some((bare, chain))
    }

    fn evaluate(&self, parameters: &[f64], near: Option<&[RunPoint]>) -> Option<Vec<RunPoint>> {
        let of_run = |(index, run): (usize, &JointRun<'_>)| {
            let (bare, _) = self.bare(parameters, run.plate.run.temperature)?;
            run.evaluate(&bare, near.map(|points| &points[index].solution))
        };
        self.runs.par_iter().enumerate().map(of_run).collect()
    }

    /// Maximises the likelihood from a plate that does not depend on temperature; `None` where the search does not settle.
    pub(super) fn fit(&self, [ln_kappa, lattice_term, ln_youngs]: [f64; 3]) -> Option<JointFit> {
        /// Relative changes of the deviance and the parameters below which the search ends: far below a standard error.
        const TOLERANCE: f64 = 1e-7;
        /// Poisson's ratio of most sheets lies near this.
        const POISSON_START: f64 = 0.25;
        let mut start = vec![ln_kappa, lattice_term, ln_youngs];
        let mut limits: Vec<Limits> = vec![
            None,
            None,
            Some([ln_youngs - LN_YOUNGS_RANGE, ln_youngs + LN_YOUNGS_RANGE]),
        ];
        if self.held_poisson.is_none() {
            start.push(POISSON_START);
            limits.push(Some(POISSON_LIMITS));
        }
        if self.slopes {
            start.extend([0.0, 0.0]);
            limits.extend([Some(SLOPE_LIMITS), Some(SLOPE_LIMITS)]);
        }
        let free = start
            .iter()
            .zip(&limits)
            .map(|(&value, limits)| to_free(value, *limits));
        let mut problem = Problem {
            model: self,
            free: DVector::from_iterator(start.len(), free),
            limits,
            points: None,
            near: None,
        };
        problem.update();
        problem.points.as_ref()?;
        let search = LevenbergMarquardt::new()
            .with_ftol(TOLERANCE)
            .with_xtol(TOLERANCE)
            .with_gtol(TOLERANCE)
            .with_patience(10);
        let (problem, report) = search.minimize(problem);
        if !report.termination.was_successful() || !report.objective_function.is_finite() {
            return None;
        }
        Some(JointFit {
            parameters: problem.parameters(),
            points: problem.points?,
        })
    }
}

struct Problem<'a, 'b> {
    model: &'a JointModel<'b>,
    free: DVector<f64>,
    limits: Vec<Limits>,
    points: Option<Vec<RunPoint>>,
    /// The last point that had a solution, to start the next from.
    near: Option<Vec<RunPoint>>,
}

impl Problem<'_, '_> {
    fn parameters(&self) -> Vec<f64> {
        let value = |(&free, limits): (&f64, &Limits)| from_free(free, *limits)[0];
        self.free.iter().zip(&self.limits).map(value).collect()
    }

    fn update(&mut self) {
        self.points = self.model.evaluate(&self.parameters(), self.near.as_deref());
        if let Some(points) = &self.points {
            self.near = Some(points.clone());
        }
    }

    fn length(&self) -> usize {
        let points = self.near.iter().flatten();
        points
            .map(|point| point.ln_power.len() + point.cell.as_ref().map_or(0, |cell| cell.residuals.len()))
            .sum()
    }
}

impl LeastSquaresProblem<f64, Dyn, Dyn> for Problem<'_, '_> {
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
        /// Residual of everything where the equations have no solution: the search turns back from there.
        const REFUSED: f64 = 1e6;
        let Some(points) = &self.points else {
            return Some(DVector::from_element(self.length(), REFUSED));
        };
        let mut residuals = Vec::with_capacity(self.length());
        for (run, point) in self.model.runs.iter().zip(points) {
            let of_mode = |(sample, &ln_power)| signed_root(sample, ln_power)[0];
            residuals.extend(run.samples().iter().zip(point.ln_power.iter()).map(of_mode));
            residuals.extend(point.cell.iter().flat_map(|cell| cell.residuals.iter()));
        }
        Some(DVector::from_vec(residuals))
    }

    fn jacobian(&self) -> Option<DMatrix<f64>> {
        let points = self.points.as_ref()?;
        let parameters = self.parameters();
        let mut jacobian = DMatrix::zeros(self.length(), parameters.len());
        let mut row = 0;
        for (run, point) in self.model.runs.iter().zip(points) {
            let (_, chain) = self.model.bare(&parameters, run.plate.run.temperature)?;
            let mut of_modes = &point.by_bare * &chain;
            for (mode, sample) in run.samples().iter().enumerate() {
                let slope = signed_root(sample, point.ln_power[mode])[1];
                of_modes.row_mut(mode).scale_mut(slope);
            }
            jacobian.rows_mut(row, of_modes.nrows()).copy_from(&of_modes);
            row += of_modes.nrows();
            if let Some(cell) = &point.cell {
                let of_cell = &cell.jacobian * &chain;
                jacobian.rows_mut(row, of_cell.nrows()).copy_from(&of_cell);
                row += of_cell.nrows();
            }
        }
        for (parameter, mut column) in jacobian.column_iter_mut().enumerate() {
            column *= from_free(self.free[parameter], self.limits[parameter])[1];
        }
        Some(jacobian)
    }
}
