//! Hybrid Monte Carlo on the height modes of a plate.
//!
//! Duane, Kennedy, Pendleton and Roweth, Phys. Lett. B 195, 216 (1987); Neal, in Handbook of Markov Chain Monte Carlo
//! (2011). Each mode is measured in units of the size it is expected to have, from the self-consistent screening
//! approximation in the same box, which is right within some per cent. All modes then swing with one period, and a
//! trajectory of a quarter of it makes them all forget where they were, whatever their wave vector.

use num_complex::Complex64;
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

use super::{CellCondition, RippledPlate, Voigt};
use crate::theory::{BoxModes, BoxScsa, PlaneModuli, PlateState, ScsaError};

/// Lengths of trajectories in units where a harmonic mode has the period 2 pi, drawn evenly: about a quarter of a period,
/// spread so that no mode can stay in step with them.
const TRAJECTORY: [f64; 2] = [0.75, 2.25];

/// Acceptance at which the work per independent sample is least, between 0.65 of many modes and 0.9 of few
/// (Neal 2011, section 5.4.4).
const ACCEPTANCE: f64 = 0.8;

/// Trajectories over which the step is tuned; as many follow with it fixed before the first sample.
const TUNING: usize = 400;

/// Rounds, and trajectories a round, in which the strain of a fixed cell is sought.
const STRAIN_ROUNDS: usize = 40;
const STRAIN_ROUND: usize = 100;

/// How a chain's cell is held.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CellHold {
    /// It breathes at the tension of the plate's state.
    Free,
    /// It is fixed at the strain whose mean stress is the tension of the plate's state; that strain is sought.
    FixedAtTension,
    /// It is fixed at this strain of the flat sheet.
    FixedAt(Voigt),
}

/// A Markov chain of equilibrium heights of one plate in one box.
pub struct HybridMonteCarlo {
    plate: RippledPlate,
    /// Expected sqrt(<|h_q|^2>/2) of each mode: the unit of its real and of its imaginary part.
    scales: Vec<f64>,
    heights: Vec<Complex64>,
    gradient: Vec<Complex64>,
    energy: f64,
    step: f64,
    trajectories: u64,
    accepted: u64,
    random: Xoshiro256PlusPlus,
    trial: Vec<Complex64>,
    trial_gradient: Vec<Complex64>,
    momenta: Vec<Complex64>,
}

impl HybridMonteCarlo {
    /// A chain in equilibrium: the step is tuned, then the chain runs on with it fixed, and only then it is handed out.
    /// Under [`CellHold::FixedAtTension`] the strain that the cell imposes is sought in between; then it, too, is fixed.
    ///
    /// # Errors
    /// Where the box SCSA has no solution: a parameter out of range, or a plate that buckles under its tension.
    pub fn equilibrated(
        modes: &BoxModes,
        state: PlateState,
        poisson: f64,
        hold: CellHold,
        seed: u64,
    ) -> Result<Self, ScsaError> {
        let theory = BoxScsa::new(modes);
        let expected = if hold == CellHold::Free {
            theory.solve(&state)?
        } else {
            theory.solve_clamped(&state, [true; 3], poisson, None)?
        };
        let held = held_strain(&state, poisson);
        let condition = match hold {
            CellHold::Free => CellCondition::Free,
            CellHold::FixedAt(mean_strain) => CellCondition::Fixed { mean_strain },
            CellHold::FixedAtTension => CellCondition::Fixed {
                mean_strain: difference(held, mean_ripple_strain(modes, &expected.power)),
            },
        };
        let mut plate = RippledPlate::new(modes, state, poisson, condition);
        let mut random = Xoshiro256PlusPlus::seed_from_u64(seed);
        let scales: Vec<f64> = expected.power.iter().map(|power| (0.5 * power).sqrt()).collect();
        let heights: Vec<Complex64> = scales
            .iter()
            .map(|scale| normal_pair(&mut random) * *scale)
            .collect();
        let mut gradient = vec![Complex64::ZERO; modes.len()];
        let energy = plate.energy(&heights, &mut gradient);
        let count = modes.len();
        let mut chain = Self {
            plate,
            scales,
            heights,
            gradient,
            energy,
            step: 1.0 / (1.0 + count as f64).powf(0.25),
            trajectories: 0,
            accepted: 0,
            random,
            trial: vec![Complex64::ZERO; count],
            trial_gradient: vec![Complex64::ZERO; count],
            momenta: vec![Complex64::ZERO; count],
        };
        chain.tune();
        if let (CellHold::FixedAtTension, CellCondition::Fixed { mean_strain }) = (hold, condition) {
            let found = chain.strain_for(held, mean_strain);
            chain.impose(found);
        }
        for _ in 0..TUNING {
            chain.advance();
        }
        (chain.trajectories, chain.accepted) = (0, 0);
        Ok(chain)
    }

    /// One trajectory further.
    pub fn advance(&mut self) {
        self.trajectory();
    }

    /// Heights h_q (A) of each mode now.
    #[must_use]
    pub fn heights(&self) -> &[Complex64] {
        &self.heights
    }

    /// dE/dRe h_q + i dE/dIm h_q (eV/A) of each mode now.
    #[must_use]
    pub fn gradient(&self) -> &[Complex64] {
        &self.gradient
    }

    /// The plate that is sampled.
    #[must_use]
    pub fn plate(&self) -> &RippledPlate {
        &self.plate
    }

    /// Share of trajectories accepted since the chain was handed out; `None` before the first.
    #[must_use]
    pub fn acceptance(&self) -> Option<f64> {
        (self.trajectories > 0).then(|| self.accepted as f64 / self.trajectories as f64)
    }

    /// Steps the tuned step size leaves an average trajectory.
    #[must_use]
    pub fn mean_steps(&self) -> f64 {
        0.5 * (TRAJECTORY[0] + TRAJECTORY[1]) / self.step
    }

    /// Robbins and Monro's stochastic approximation of the step at which [`ACCEPTANCE`] is met.
    fn tune(&mut self) {
        for n in 0..TUNING {
            let probability = self.trajectory();
            let gain = 1.0 / (1.0 + n as f64).sqrt();
            self.step = (self.step * (gain * (probability - ACCEPTANCE)).exp()).clamp(1e-3, 1.0);
        }
    }

    /// The strain to impose for a mean strain of `held`, by stochastic approximation: each round moves it by part of what
    /// the round's mean strain lacks; the second half of the rounds is averaged (Polyak and Juditsky, SIAM J. Control
    /// Optim. 30, 838 (1992)).
    fn strain_for(&mut self, held: Voigt, start: Voigt) -> Voigt {
        let mut imposed = start;
        let mut sum = [0.0; 3];
        for round in 0..STRAIN_ROUNDS {
            let mut ripples = [0.0; 3];
            for _ in 0..STRAIN_ROUND {
                self.advance();
                for (sum, part) in ripples.iter_mut().zip(self.plate.ripple_strain(&self.heights)) {
                    *sum += part / STRAIN_ROUND as f64;
                }
            }
            // Ripples that are pulled by one unit of strain give back about half of it: the full step is twice the lack.
            let gain = 2.0 / (1.0 + round as f64).powf(0.6);
            for i in 0..3 {
                imposed[i] += gain * (held[i] - imposed[i] - ripples[i]);
            }
            self.impose(imposed);
            if round >= STRAIN_ROUNDS / 2 {
                let share = 1.0 / (STRAIN_ROUNDS - STRAIN_ROUNDS / 2) as f64;
                for i in 0..3 {
                    sum[i] += share * imposed[i];
                }
            }
        }
        sum
    }

    fn impose(&mut self, strain: Voigt) {
        self.plate.impose(strain);
        self.energy = self.plate.energy(&self.heights, &mut self.gradient);
    }

    /// One trajectory; gives the probability with which it was accepted.
    fn trajectory(&mut self) -> f64 {
        let thermal = self.plate.state().thermal_energy();
        let length = self.random.random_range(TRAJECTORY[0]..TRAJECTORY[1]);
        let steps = (length / self.step).round().max(1.0) as usize;
        for p in &mut self.momenta {
            *p = normal_pair(&mut self.random);
        }
        self.trial.copy_from_slice(&self.heights);
        self.trial_gradient.copy_from_slice(&self.gradient);
        let before = self.energy / thermal + kinetic(&self.momenta);
        let mut energy = self.energy;
        self.kick(0.5 * self.step / thermal);
        for step in 1..=steps {
            for ((h, p), scale) in self.trial.iter_mut().zip(&self.momenta).zip(&self.scales) {
                *h += p * (self.step * scale);
            }
            energy = self.plate.energy(&self.trial, &mut self.trial_gradient);
            let share = if step == steps { 0.5 } else { 1.0 };
            self.kick(share * self.step / thermal);
        }
        let probability = (before - energy / thermal - kinetic(&self.momenta))
            .exp()
            .min(1.0);
        self.trajectories += 1;
        // A trajectory that ran away has no finite energy, and the comparison is then false.
        if self.random.random::<f64>() < probability {
            self.accepted += 1;
            self.energy = energy;
            std::mem::swap(&mut self.heights, &mut self.trial);
            std::mem::swap(&mut self.gradient, &mut self.trial_gradient);
        }
        if probability.is_nan() { 0.0 } else { probability }
    }

    fn kick(&mut self, time: f64) {
        for ((p, g), scale) in self
            .momenta
            .iter_mut()
            .zip(&self.trial_gradient)
            .zip(&self.scales)
        {
            *p -= g * (time * scale);
        }
    }
}

/// Strain of the flat plate under its tension, in Voigt order.
pub(super) fn held_strain(state: &PlateState, poisson: f64) -> Voigt {
    let each = state.tension / (2.0 * PlaneModuli::from_youngs_and_poisson(state.youngs, poisson).bulk());
    [each, each, 0.0]
}

/// The mean strain that ripples of the powers <|h_q|^2> make.
pub(super) fn mean_ripple_strain(modes: &BoxModes, power: &[f64]) -> Voigt {
    let mut strain = [0.0; 3];
    for ([x, y], power) in modes.wave_vectors().into_iter().zip(power) {
        for (sum, product) in strain.iter_mut().zip([x * x, y * y, 2.0 * x * y]) {
            *sum += product * power;
        }
    }
    strain
}

pub(super) fn difference(left: Voigt, right: Voigt) -> Voigt {
    [0, 1, 2].map(|i| left[i] - right[i])
}

fn kinetic(momenta: &[Complex64]) -> f64 {
    0.5 * momenta.iter().map(Complex64::norm_sqr).sum::<f64>()
}

/// Two independent standard normal numbers.
pub(super) fn normal_pair(random: &mut Xoshiro256PlusPlus) -> Complex64 {
    Complex64::new(StandardNormal.sample(random), StandardNormal.sample(random))
}
