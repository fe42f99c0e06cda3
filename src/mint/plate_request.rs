//! What is asked of a `plate` set.

use super::{FlatLattice, LatticeKind, MintError};
use crate::frames::TrajectoryWriter;
use crate::theory::{BoxModes, PlateState};

/// A set of trajectories of one nonlinear plate, one for each temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct PlateRequest {
    /// Name of the set, of its pipeline and of its sheet: letters, digits, `-`, `_` and `.`.
    pub name: String,
    /// The lattice of atoms.
    pub lattice: LatticeKind,
    /// Its constant in the flat sheet, in A.
    pub lattice_constant: f64,
    /// Wanted side of the flat box, in A.
    pub length: f64,
    /// Bare bending rigidity, in eV.
    pub kappa: f64,
    /// Bare two-dimensional Young's modulus, in eV/A^2.
    pub youngs: f64,
    /// Bare Poisson ratio.
    pub poisson: f64,
    /// b of kappa (1 - b q^2), in A^2.
    pub lattice_term: f64,
    /// Tension held, in eV/A^2.
    pub tension: f64,
    /// Temperatures, in K.
    pub temperatures: Vec<f64>,
    /// Waves at and beyond it do not move, in 1/A of the flat sheet; `None`: all of the first Brillouin zone move.
    pub cut: Option<f64>,
    /// Whether the cell is fixed at the strain whose mean stress is the tension, rather than free.
    pub fixed_cell: bool,
    /// Frames of each trajectory.
    pub frames: usize,
    /// Trajectories of hybrid Monte Carlo from a frame to the next.
    pub spacing: usize,
    /// Time that the files give from a frame to the next, in ps: a name for the order of samples, no dynamics.
    pub frame_interval: f64,
    /// Seed of the random numbers.
    pub seed: u64,
    /// Extension of the trajectories' format, as chemfiles knows it.
    pub format: String,
}

/// A request that has been found sound, and what follows from it.
#[derive(Clone, Debug)]
pub(super) struct PlatePlan {
    pub request: PlateRequest,
    pub lattice: FlatLattice,
    /// The modes that move, in the flat box.
    pub modes: BoxModes,
}

impl PlateRequest {
    /// Refuses what is no sheet.
    pub(super) fn plan(&self) -> Result<PlatePlan, MintError> {
        MintError::check_positive("bending rigidity", self.kappa, "eV")?;
        MintError::check_positive("Young's modulus", self.youngs, "eV/A^2")?;
        MintError::check_positive("frame interval", self.frame_interval, "ps")?;
        let refuse = |message: String| Err(MintError::request(message));
        if !(self.poisson > -1.0 && self.poisson < 1.0) {
            return refuse(format!(
                "the stiffness is unstable: the Poisson ratio of a sheet is {}, expected between -1 and 1",
                self.poisson
            ));
        }
        if !self.lattice_term.is_finite() || !self.tension.is_finite() {
            return refuse("the lattice term and the tension must be finite".to_owned());
        }
        if self.temperatures.is_empty() {
            return refuse("no temperature is given".to_owned());
        }
        for (place, &temperature) in self.temperatures.iter().enumerate() {
            MintError::check_positive("temperature", temperature, "K")?;
            if self.temperatures[..place].contains(&temperature) {
                return refuse(format!("the temperature {temperature} K is given twice"));
            }
        }
        if self.frames == 0 || self.spacing == 0 {
            return refuse(format!(
                "{} frames, {} trajectories apart; expected at least 1 of each",
                self.frames, self.spacing
            ));
        }
        let plain = |c: char| c.is_ascii_alphanumeric() || "-_.".contains(c);
        if !self.name.starts_with(|c: char| c.is_ascii_alphanumeric()) || !self.name.chars().all(plain) {
            return refuse(format!(
                "the name {:?} names files: expected letters, digits, \"-\", \"_\" and \".\"",
                self.name
            ));
        }
        let known = TrajectoryWriter::extensions();
        if !known.contains(&self.format.as_str()) {
            return refuse(format!(
                "the format {:?} is not known as the extension of a trajectory with a cell; expected one of {}",
                self.format,
                known.join(", ")
            ));
        }
        let lattice = FlatLattice::new(self.lattice, self.lattice_constant, self.length)?;
        let modes = lattice.modes(self.cut)?;
        Ok(PlatePlan {
            request: self.clone(),
            lattice,
            modes,
        })
    }

    /// The plate at one temperature.
    pub(super) fn state(&self, temperature: f64) -> PlateState {
        PlateState {
            kappa: self.kappa,
            youngs: self.youngs,
            lattice_term: self.lattice_term,
            tension: self.tension,
            temperature,
        }
    }
}
