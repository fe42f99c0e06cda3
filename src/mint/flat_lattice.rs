//! The flat crystal sheet that heights are given to.

use serde::Serialize;

use super::MintError;
use crate::theory::{BoxModes, BrillouinZone, PlaneCell};

/// Kinds of lattice.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum LatticeKind {
    /// A honeycomb of one species, two atoms a primitive cell.
    Hexagonal,
    /// One atom a square cell.
    Square,
    /// One atom a rectangular cell whose second side is 1.3 times the first.
    Rectangular,
    /// Three planes of a hexagonal lattice: metal atoms between two planes of others.
    ThreePlane,
}

/// Second side over first of the rectangular lattice; any ratio that no symmetry asks for would do.
const RECTANGLE: f64 = 1.3;

/// Distance of the outer planes from the middle one over the lattice constant: that of MoS2, 1.56 A over 3.16 A (common
/// practice).
const PLANE_HEIGHT: f64 = 0.494;

/// The least number of lattice constants along a side of the box.
const LEAST_CELLS: f64 = 4.0;

/// An atom of the rectangular cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Site {
    /// Place in units of the cell's sides.
    pub offset: [f64; 2],
    /// Height above the mid-plane, in A.
    pub height: f64,
    pub species: &'static str,
}

/// A flat sheet: a rectangular cell repeated along both axes.
#[derive(Clone, Debug, PartialEq)]
pub struct FlatLattice {
    pub(super) sites: Vec<Site>,
    pub(super) repeats: [usize; 2],
    sides: [f64; 2],
    primitive: [[f64; 2]; 2],
}

impl FlatLattice {
    /// The lattice of nearest-cell distance `constant` (A) whose box is as nearly a square of side `length` (A) as whole
    /// cells allow.
    ///
    /// # Errors
    /// [`MintError::Request`] where a number is not above zero or the box is too small for the lattice.
    pub fn new(kind: LatticeKind, constant: f64, length: f64) -> Result<Self, MintError> {
        MintError::check_positive("lattice constant", constant, "A")?;
        MintError::check_positive("length of the box", length, "A")?;
        if length < LEAST_CELLS * constant {
            return Err(MintError::request(format!(
                "a box of {length} A is too small for the lattice, whose constant is {constant} A: expected at least \
                 {LEAST_CELLS} lattice constants; raise --length"
            )));
        }
        let site = |x: f64, y: f64, height: f64, species: &'static str| Site {
            offset: [x, y],
            height: height * constant,
            species,
        };
        // Both points of the centred rectangular cell.
        let centred = |y: f64, height: f64, species: &'static str| {
            [site(0.0, y, height, species), site(0.5, y + 0.5, height, species)]
        };
        let third = 1.0 / 3.0;
        let sites = match kind {
            LatticeKind::Hexagonal => [centred(0.0, 0.0, "C"), centred(third, 0.0, "C")].concat(),
            LatticeKind::Square | LatticeKind::Rectangular => vec![site(0.0, 0.0, 0.0, "C")],
            LatticeKind::ThreePlane => [
                centred(0.0, 0.0, "Mo"),
                centred(third, PLANE_HEIGHT, "S"),
                centred(third, -PLANE_HEIGHT, "S"),
            ]
            .concat(),
        };
        let (second, primitive) = match kind {
            LatticeKind::Square => (1.0, [0.0, 1.0]),
            LatticeKind::Rectangular => (RECTANGLE, [0.0, RECTANGLE]),
            LatticeKind::Hexagonal | LatticeKind::ThreePlane => (3.0_f64.sqrt(), [0.5, 0.5 * 3.0_f64.sqrt()]),
        };
        let sides = [constant, second * constant];
        Ok(Self {
            sites,
            repeats: sides.map(|side| (length / side).round().max(1.0) as usize),
            sides,
            primitive: [[constant, 0.0], primitive.map(|x| x * constant)],
        })
    }

    /// The box of the flat sheet.
    #[must_use]
    pub fn cell(&self) -> PlaneCell {
        PlaneCell {
            a: [self.sides[0] * self.repeats[0] as f64, 0.0],
            b: [0.0, self.sides[1] * self.repeats[1] as f64],
        }
    }

    /// Number of atoms.
    #[must_use]
    pub fn atoms(&self) -> usize {
        self.sites.len() * self.repeats[0] * self.repeats[1]
    }

    /// The modes of the flat box that the lattice tells apart: those inside its first Brillouin zone, or those below
    /// `cut` (1/A).
    ///
    /// # Errors
    /// [`MintError::Request`] where the cut reaches out of the zone, or no six modes are below it.
    pub fn modes(&self, cut: Option<f64>) -> Result<BoxModes, MintError> {
        let zone = BrillouinZone::of_lattice(self.primitive);
        let inside = BoxModes::in_zone(self.cell(), &zone);
        let Some(cut) = cut else {
            // Modes on the edge stand for others outside: one displacement of the atoms, two wave vectors.
            let whole = |modes: &BoxModes, mode: usize| modes.weights[mode] > 1.0 - 1e-9;
            let kept: Vec<usize> = (0..inside.len()).filter(|&mode| whole(&inside, mode)).collect();
            return Ok(BoxModes {
                cell: inside.cell,
                integers: kept.iter().map(|&mode| inside.integers[mode]).collect(),
                weights: vec![1.0; kept.len()],
            });
        };
        MintError::check_positive("cut", cut, "1/A")?;
        let modes = BoxModes::within(self.cell(), cut);
        if modes.wave_vectors().into_iter().any(|q| zone.weight(q) < 1.0) {
            return Err(MintError::request(format!(
                "a cut at {cut} 1/A reaches out of the lattice's first Brillouin zone, where atoms cannot tell waves apart; \
                 lower --cut, or leave it out for the whole zone"
            )));
        }
        if modes.len() < 6 {
            return Err(MintError::request(format!(
                "only {} waves of the box are below the cut at {cut} 1/A, expected at least 6; raise --cut or --length",
                modes.len()
            )));
        }
        Ok(modes)
    }
}
