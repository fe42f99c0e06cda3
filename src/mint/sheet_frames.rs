//! From modes to atoms: one frame of a trajectory.

use std::f64::consts::TAU;

use num_complex::Complex64;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

use super::flat_lattice::FlatLattice;
use super::hybrid_monte_carlo::{difference, held_strain};
use super::in_plane::InPlane;
use super::mode_grid::ModeGrid;
use super::plate_box::{PlateBox, stretched};
use super::{CellCondition, RippledPlate, Voigt};
use crate::frames::{Cell, Frame};
use crate::theory::PlaneModuli;

/// Height of the cell out of the plane, in A: more than any ripple, and nothing is there.
const VACUUM: f64 = 60.0;

/// Makes frames of the atoms of a lattice from the heights of a plate.
pub(super) struct SheetFrames<'a> {
    lattice: &'a FlatLattice,
    plate: &'a PlateBox,
    in_plane: InPlane,
    /// The cells of the lattice, as points.
    cells: ModeGrid,
    random: Xoshiro256PlusPlus,
}

impl<'a> SheetFrames<'a> {
    pub fn new(lattice: &'a FlatLattice, plate: &'a PlateBox, random: Xoshiro256PlusPlus) -> Self {
        Self {
            lattice,
            plate,
            in_plane: InPlane::new(plate),
            cells: ModeGrid::with_lengths(&plate.modes, lattice.repeats),
            random,
        }
    }

    /// Species of each atom.
    pub fn species(&self) -> Vec<String> {
        let cells = self.lattice.repeats[0] * self.lattice.repeats[1];
        let of_site = |species: &str| std::iter::repeat_n(species.to_owned(), cells);
        self.lattice
            .sites
            .iter()
            .flat_map(|site| of_site(site.species))
            .collect()
    }

    /// The atoms at these heights, in a cell that follows them.
    pub fn frame(&mut self, surface: &RippledPlate, heights: &[Complex64], time_ps: f64) -> Frame {
        let strain = self.strain(surface, heights);
        let cell = stretched(&self.plate.flat, strain);
        let modes = &self.plate.modes;
        let waves = modes.wave_vectors();
        let displacements = self.in_plane.displacements(heights, &mut self.random);
        let [repeats1, repeats2] = self.lattice.repeats;
        let (mut out, mut across) = (Vec::new(), Vec::new());
        let mut positions = Vec::with_capacity(self.lattice.atoms());
        for site in &self.lattice.sites {
            let start = [0, 1].map(|axis: usize| site.offset[axis] / self.lattice.repeats[axis] as f64);
            let phase = |mode: usize| {
                let [m1, m2] = modes.integers[mode].map(f64::from);
                Complex64::cis(TAU * (m1 * start[0] + m2 * start[1]))
            };
            // Normals to the mid-surface stay so: an atom above it leans against the slope.
            let lean = |mode: usize, axis: usize| {
                displacements[mode][axis] - Complex64::i() * waves[mode][axis] * heights[mode] * site.height
            };
            self.cells.at_points(
                |mode| [heights[mode], lean(mode, 0)].map(|value| value * phase(mode)),
                &mut out,
            );
            self.cells
                .at_points(|mode| [lean(mode, 1) * phase(mode), Complex64::ZERO], &mut across);
            for k2 in 0..repeats2 {
                for k1 in 0..repeats1 {
                    let point = k2 * repeats1 + k1;
                    let s = [
                        start[0] + k1 as f64 / repeats1 as f64,
                        start[1] + k2 as f64 / repeats2 as f64,
                    ];
                    positions.push([
                        cell.a[0] * s[0] + cell.b[0] * s[1] + out[point].im,
                        cell.b[1] * s[1] + across[point].re,
                        0.5 * VACUUM + site.height + out[point].re,
                    ]);
                }
            }
        }
        Frame {
            time_ps: Some(time_ps),
            cell: Cell {
                vectors: [
                    [cell.a[0], 0.0, 0.0],
                    [cell.b[0], cell.b[1], 0.0],
                    [0.0, 0.0, VACUUM],
                ],
            },
            positions,
        }
    }

    /// Strain of the cell against the flat sheet: what the ripples take in, the tension gives, and the bare stiffness
    /// lets fluctuate, with the covariance kB T S/A; of a fixed cell what it imposes.
    fn strain(&mut self, surface: &RippledPlate, heights: &[Complex64]) -> Voigt {
        if let CellCondition::Fixed { mean_strain } = surface.condition() {
            return mean_strain;
        }
        let (state, poisson) = (&self.plate.state, self.plate.poisson);
        let mu = PlaneModuli::from_youngs_and_poisson(state.youngs, poisson).mu;
        let scale = |modulus: f64| (state.thermal_energy() / (surface.area() * modulus)).sqrt();
        let mut normal = || -> f64 { StandardNormal.sample(&mut self.random) };
        // S11 = S22 = 1/Y, S12 = -nu/Y, S66 = 1/mu.
        let (first, second, shear) = (normal(), normal(), normal());
        let along = scale(state.youngs) * first;
        let across = scale(state.youngs) * (-poisson * first + (1.0 - poisson * poisson).sqrt() * second);
        let mean = difference(held_strain(state, poisson), surface.ripple_strain(heights));
        [mean[0] + along, mean[1] + across, mean[2] + scale(mu) * shear]
    }
}
