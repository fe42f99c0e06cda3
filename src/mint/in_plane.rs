//! In-plane displacements of a rippled plate: relaxed to the heights, and thermal.
//!
//! Minimising the stretching energy at given heights, with K_ij = (1/2) d_i h d_j h, leaves (L along q, T across it)
//!
//! ```text
//! u_L = i (K_LL + nu K_TT)/q,    u_T = 2 i K_LT/q
//! ```
//!
//! and the stretching (Y/2)|K_TT|^2 that the plate's energy counts. About that the displacements are Gaussian with
//! <|u_L|^2> = kB T/(A (lambda + 2 mu) q^2) and <|u_T|^2> = kB T/(A mu q^2).

use num_complex::Complex64;
use rand_xoshiro::Xoshiro256PlusPlus;

use super::hybrid_monte_carlo::normal_pair;
use super::mode_grid::ModeGrid;
use super::plate_box::PlateBox;
use crate::theory::PlaneModuli;

/// Displacements of one plate in one box, with the memory their evaluation needs.
pub(super) struct InPlane {
    wave_vectors: Vec<[f64; 2]>,
    poisson: f64,
    /// sqrt(kB T/(2 A modulus)) of longitudinal and transverse waves, in A/A.
    thermal: [f64; 2],
    grid: ModeGrid,
    slopes: Vec<Complex64>,
    products: Vec<Complex64>,
    /// K_xx, K_yy, K_xy of each mode.
    squares: Vec<[Complex64; 3]>,
}

impl InPlane {
    pub fn new(plate: &PlateBox) -> Self {
        let moduli = PlaneModuli::from_youngs_and_poisson(plate.state.youngs, plate.poisson);
        let area = plate.modes.cell.area();
        let thermal = |modulus: f64| (plate.state.thermal_energy() / (2.0 * area * modulus)).sqrt();
        Self {
            wave_vectors: plate.modes.wave_vectors(),
            poisson: plate.poisson,
            thermal: [thermal(moduli.lambda + 2.0 * moduli.mu), thermal(moduli.mu)],
            grid: ModeGrid::new(&plate.modes),
            slopes: Vec::new(),
            products: Vec::new(),
            squares: vec![[Complex64::ZERO; 3]; plate.modes.len()],
        }
    }

    /// u_q (A) along axes 1 and 2 of each mode.
    pub fn displacements(
        &mut self,
        heights: &[Complex64],
        random: &mut Xoshiro256PlusPlus,
    ) -> Vec<[Complex64; 2]> {
        let imaginary = Complex64::i();
        let waves = &self.wave_vectors;
        let slope = |mode: usize| waves[mode].map(|component| imaginary * component * heights[mode]);
        self.grid.at_points(slope, &mut self.slopes);
        let squares = &mut self.squares;
        self.products.clear();
        self.products.extend(
            self.slopes
                .iter()
                .map(|s| Complex64::new(0.5 * s.re * s.re, 0.5 * s.im * s.im)),
        );
        self.grid.at_modes(&mut self.products, |mode, [xx, yy]| {
            squares[mode][0] = xx;
            squares[mode][1] = yy;
        });
        self.products.clear();
        self.products
            .extend(self.slopes.iter().map(|s| Complex64::new(0.5 * s.re * s.im, 0.0)));
        self.grid
            .at_modes(&mut self.products, |mode, [xy, _]| squares[mode][2] = xy);

        let displacement = |([x, y], [xx, yy, xy]): (&[f64; 2], &[Complex64; 3])| {
            let q = x.hypot(*y);
            let (c, s) = (x / q, y / q);
            let along = xx * (c * c) + yy * (s * s) + xy * (2.0 * c * s);
            let across = xx * (s * s) + yy * (c * c) - xy * (2.0 * c * s);
            let mixed = (yy - xx) * (c * s) + xy * (c * c - s * s);
            let longitudinal =
                imaginary * (along + across * self.poisson) + normal_pair(random) * self.thermal[0];
            let transverse = imaginary * mixed * 2.0 + normal_pair(random) * self.thermal[1];
            [
                (longitudinal * c - transverse * s) / q,
                (longitudinal * s + transverse * c) / q,
            ]
        };
        waves.iter().zip(squares.iter()).map(displacement).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::mint::CellHold;
    use crate::theory::{BoxModes, PlaneCell, PlateState};
    use rand::SeedableRng;

    /// Displacements without their thermal part balance the forces: q_j T_ij = 0 with the stress of the whole strain.
    #[test]
    fn relaxed_displacements_leave_no_force() {
        let cell = PlaneCell {
            a: [23.0, 0.0],
            b: [0.0, 19.0],
        };
        let modes = BoxModes::within(cell, 1.0);
        let (youngs, poisson) = (15.0, 0.3);
        let plate = PlateBox {
            state: PlateState {
                kappa: 1.0,
                youngs,
                lattice_term: 0.0,
                tension: 0.0,
                temperature: 300.0,
            },
            poisson,
            flat: cell,
            modes,
            hold: CellHold::Free,
        };
        let mut random = Xoshiro256PlusPlus::seed_from_u64(1);
        let heights: Vec<Complex64> = plate
            .modes
            .integers
            .iter()
            .map(|_| normal_pair(&mut random) * 0.1)
            .collect();
        let mut in_plane = InPlane::new(&plate);
        in_plane.thermal = [0.0, 0.0];
        let found = in_plane.displacements(&heights, &mut random);
        let moduli = PlaneModuli::from_youngs_and_poisson(youngs, poisson);
        for ((q, u), [xx, yy, xy]) in plate
            .modes
            .wave_vectors()
            .iter()
            .zip(&found)
            .zip(&in_plane.squares)
        {
            let i = Complex64::i();
            let strain = [
                i * q[0] * u[0] + xx,
                i * q[1] * u[1] + yy,
                i * 0.5 * (q[0] * u[1] + q[1] * u[0]) + xy,
            ];
            let trace = (strain[0] + strain[1]) * moduli.lambda;
            let stress = [
                trace + strain[0] * (2.0 * moduli.mu),
                trace + strain[1] * (2.0 * moduli.mu),
                strain[2] * (2.0 * moduli.mu),
            ];
            let size = stress.iter().map(|t| t.norm()).fold(0.0, f64::max);
            for force in [
                stress[0] * q[0] + stress[2] * q[1],
                stress[2] * q[0] + stress[1] * q[1],
            ] {
                assert!(
                    force.norm() < 1e-10 * size.max(1e-3),
                    "{force} of {size} at {q:?}"
                );
            }
        }
    }
}
