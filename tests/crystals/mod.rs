//! Crystal sheets that tests build frames from: positions known in closed form.

#![allow(dead_code, reason = "each test file uses its own part")]

use planish::frames::{Cell, Frame, SheetAtoms};

/// A flat crystal in its periodic cell.
#[derive(Clone)]
pub struct Crystal {
    pub cell: Cell,
    /// Scaled in-plane coordinates and the height of the atom's plane, in A.
    pub sites: Vec<[f64; 3]>,
    pub species: Vec<String>,
}

/// Boron nitride in a rectangular cell of `n1` x `n2` four-atom cells: bond 1.45 A, armchair along b.
pub fn honeycomb(n1: usize, n2: usize) -> Crystal {
    let bond = 1.45;
    let (a, b) = (3.0_f64.sqrt() * bond, 3.0 * bond);
    let basis = [
        [0.25, 0.5 / 6.0],
        [0.75, 3.5 / 6.0],
        [0.25, 2.5 / 6.0],
        [0.75, 5.5 / 6.0],
    ];
    let species = ["B", "B", "N", "N"];
    repeat(
        [[a, 0.0], [0.0, b]],
        [n1, n2],
        &basis.map(|s| [s[0], s[1], 0.0]),
        &species,
    )
}

/// The same sheet on its own oblique primitive cell, n1 x n2 of them.
pub fn honeycomb_oblique(n1: usize, n2: usize) -> Crystal {
    let a = 3.0_f64.sqrt() * 1.45;
    let basis = [[1.0 / 3.0, 1.0 / 3.0, 0.0], [2.0 / 3.0, 2.0 / 3.0, 0.0]];
    repeat(
        [[a, 0.0], [a / 2.0, a * 3.0_f64.sqrt() / 2.0]],
        [n1, n2],
        &basis,
        &["B", "N"],
    )
}

/// A three-plane MX2 sheet (a = 3.16 A, planes 1.56 A apart: molybdenum disulphide's), oblique cell.
pub fn three_planes(n1: usize, n2: usize) -> Crystal {
    let a = 3.16;
    let basis = [
        [1.0 / 3.0, 1.0 / 3.0, 0.0],
        [2.0 / 3.0, 2.0 / 3.0, 1.56],
        [2.0 / 3.0, 2.0 / 3.0, -1.56],
    ];
    repeat(
        [[a, 0.0], [a / 2.0, a * 3.0_f64.sqrt() / 2.0]],
        [n1, n2],
        &basis,
        &["Mo", "S", "S"],
    )
}

/// A square lattice of side `a`, one atom a cell.
pub fn square(n: usize, a: f64) -> Crystal {
    repeat([[a, 0.0], [0.0, a]], [n, n], &[[0.25, 0.25, 0.0]], &["X"])
}

fn repeat(unit: [[f64; 2]; 2], n: [usize; 2], basis: &[[f64; 3]], species: &[&str]) -> Crystal {
    let scale = n.map(|x| x as f64);
    let vectors = [
        [unit[0][0] * scale[0], unit[0][1] * scale[0], 0.0],
        [unit[1][0] * scale[1], unit[1][1] * scale[1], 0.0],
        [0.0, 0.0, 40.0],
    ];
    let mut sites = Vec::new();
    let mut names = Vec::new();
    for i in 0..n[0] {
        for k in 0..n[1] {
            for (s, name) in basis.iter().zip(species) {
                sites.push([(s[0] + i as f64) / scale[0], (s[1] + k as f64) / scale[1], s[2]]);
                names.push((*name).to_owned());
            }
        }
    }
    Crystal {
        cell: Cell { vectors },
        sites,
        species: names,
    }
}

impl Crystal {
    pub fn atoms(&self) -> SheetAtoms {
        SheetAtoms {
            indices: (0..self.sites.len()).collect(),
            species: self.species.clone(),
            masses: None,
        }
    }

    /// A frame with each atom moved by `displacement(site index)` (Cartesian, A) from its flat site.
    pub fn frame(&self, displacement: impl Fn(usize) -> [f64; 3]) -> Frame {
        let [a, b, _] = self.cell.vectors;
        let positions = self
            .sites
            .iter()
            .enumerate()
            .map(|(j, s)| {
                let d = displacement(j);
                [
                    s[0] * a[0] + s[1] * b[0] + d[0],
                    s[0] * a[1] + s[1] * b[1] + d[1],
                    s[0] * a[2] + s[1] * b[2] + s[2] + d[2],
                ]
            })
            .collect();
        Frame {
            time_ps: Some(0.0),
            cell: self.cell,
            positions,
        }
    }
}
