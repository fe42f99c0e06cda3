//! Trajectories of a plate without ripples' coupling: independent frames whose height modes are Gaussian with the power of a
//! known bending rigidity and tension.

#![allow(dead_code, reason = "each test file uses its own part")]

use std::f64::consts::TAU;

use planish::frames::{Frame, cross, dot, length};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

use super::crystals::{Crystal, honeycomb};

/// kB in eV/K and 1 eV/A^2 in N/m (CODATA 2018), written out so that the check does not lean on the program's units.
const BOLTZMANN: f64 = 8.617_333_262e-5;
pub const N_PER_M: f64 = 16.021_766_34;

/// In K.
pub const TEMPERATURE: f64 = 300.0;

/// A harmonic plate on a crystal, at [`TEMPERATURE`].
pub struct HarmonicSheet {
    pub crystal: Crystal,
    /// Primitive vectors of its lattice, in A.
    pub primitive: [[f64; 2]; 2],
    /// Bending rigidity in eV.
    pub kappa: f64,
    /// Tension in N/m.
    pub tension: f64,
    pub seed: u64,
}

/// 2 pi times the inverse of a lattice: b_i . a_j = 2 pi delta_ij.
fn reciprocal([a, b]: [[f64; 2]; 2]) -> [[f64; 2]; 2] {
    let area = a[0] * b[1] - a[1] * b[0];
    [
        [TAU * b[1] / area, -TAU * b[0] / area],
        [-TAU * a[1] / area, TAU * a[0] / area],
    ]
}

fn combine([u, v]: [[f64; 2]; 2], m: [i32; 2]) -> [f64; 2] {
    [0, 1].map(|i| f64::from(m[0]) * u[i] + f64::from(m[1]) * v[i])
}

impl HarmonicSheet {
    /// A rectangular boron nitride lattice of `n1` x `n2` four-atom cells.
    pub fn honeycomb(n1: usize, n2: usize, kappa: f64, tension: f64, seed: u64) -> Self {
        let bond = 1.45;
        let a = 3.0_f64.sqrt() * bond;
        Self {
            crystal: honeycomb(n1, n2),
            primitive: [[a, 0.0], [a / 2.0, 1.5 * bond]],
            kappa,
            tension,
            seed,
        }
    }

    pub fn area(&self) -> f64 {
        let [a, b, _] = self.crystal.cell.vectors;
        length(cross(a, b))
    }

    /// Length of the longest waves' q in 1/A.
    pub fn smallest_q(&self) -> f64 {
        let [a, b, _] = self.crystal.cell.vectors;
        let box_vectors = reciprocal([[a[0], a[1]], [b[0], b[1]]]);
        [[1, 0], [0, 1], [1, 1], [1, -1]]
            .map(|m| combine(box_vectors, m))
            .iter()
            .map(|q| q[0].hypot(q[1]))
            .fold(f64::INFINITY, f64::min)
    }

    /// One of each pair q, -q in the first zone of the primitive lattice: no reciprocal vector is nearer than the origin.
    /// With it <|h_q|^2> = kB T/(A (kappa q^4 + sigma q^2)) in A^2.
    fn modes(&self) -> Vec<([i32; 2], f64)> {
        let [a, b, _] = self.crystal.cell.vectors;
        let box_vectors = reciprocal([[a[0], a[1]], [b[0], b[1]]]);
        let lattice = reciprocal(self.primitive);
        let near: Vec<[f64; 2]> = (-2..=2)
            .flat_map(|i| (-2..=2).map(move |k| [i, k]))
            .filter(|&m| m != [0, 0])
            .map(|m| combine(lattice, m))
            .collect();
        let mut modes = Vec::new();
        for m1 in 0..60 {
            for m2 in -60..60 {
                if m1 == 0 && m2 <= 0 {
                    continue;
                }
                let q = combine(box_vectors, [m1, m2]);
                let square = q[0] * q[0] + q[1] * q[1];
                let inside = near
                    .iter()
                    .all(|g| square <= (q[0] - g[0]).powi(2) + (q[1] - g[1]).powi(2) + 1e-9);
                if inside {
                    let stiffness = self.kappa * square * square + self.tension / N_PER_M * square;
                    modes.push(([m1, m2], BOLTZMANN * TEMPERATURE / (self.area() * stiffness)));
                }
            }
        }
        modes
    }

    /// Independent frames: Gaussian modes, noise in the plane, a breathing cell, drift in all directions, atoms wrapped
    /// into the cell.
    pub fn frames(&self, count: usize) -> Vec<Frame> {
        let mut random = Xoshiro256PlusPlus::seed_from_u64(self.seed);
        let mut normal = || -> f64 { StandardNormal.sample(&mut random) };
        let modes = self.modes();
        let mut frames = Vec::new();
        for k in 0..count {
            // A real wave c cos + s sin has h_q = (c - i s)/2, so <|h_q|^2> = w asks for variances 2 w.
            let waves: Vec<([i32; 2], [f64; 2])> = modes
                .iter()
                .map(|&(m, power)| (m, [normal(), normal()].map(|x| x * (2.0 * power).sqrt())))
                .collect();
            let stretch = [1.0 + 2e-3 * normal(), 1.0 + 2e-3 * normal()];
            let noise: Vec<[f64; 2]> = self
                .crystal
                .sites
                .iter()
                .map(|_| [0.04 * normal(), 0.04 * normal()])
                .collect();
            let mut breathing = self.crystal.clone();
            for (vector, stretch) in breathing.cell.vectors.iter_mut().zip(stretch) {
                *vector = vector.map(|x| x * stretch);
            }
            let drift = [0.13, -0.08, 0.21].map(|step| step * k as f64);
            let mut frame = breathing.frame(|j| {
                let [s1, s2, _] = self.crystal.sites[j];
                let height: f64 = waves
                    .iter()
                    .map(|(m, [cosine, sine])| {
                        let phase = TAU * (f64::from(m[0]) * s1 + f64::from(m[1]) * s2);
                        cosine * phase.cos() + sine * phase.sin()
                    })
                    .sum();
                [noise[j][0] + drift[0], noise[j][1] + drift[1], height + drift[2]]
            });
            frame.time_ps = Some(10.0 * k as f64);
            wrap(&mut frame);
            frames.push(frame);
        }
        frames
    }
}

/// Moves every atom into the cell.
fn wrap(frame: &mut Frame) {
    let [a, b, c] = frame.cell.vectors;
    let volume = dot(a, cross(b, c));
    for r in &mut frame.positions {
        let turns = [cross(b, c), cross(c, a), cross(a, b)].map(|normal| (dot(*r, normal) / volume).floor());
        for (vector, turns) in [a, b, c].iter().zip(turns) {
            for (x, v) in r.iter_mut().zip(vector) {
                *x -= turns * v;
            }
        }
    }
}
