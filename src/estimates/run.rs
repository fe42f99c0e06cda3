//! Everything known about one condition of a sheet before anything is fitted.

use super::{Estimate, SpectrumEstimate, StrainEstimate};

/// Mean in-plane tension of a run, positive when it stretches, in eV/A^2 (contract, "Pipeline file").
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Tension {
    /// The pipeline states it: held exactly.
    Stated(f64),
    /// Mean of the thermo series, with its standard error.
    Measured {
        /// Mean, in eV/A^2.
        value: f64,
        /// One standard error, in eV/A^2.
        error: f64,
    },
    /// Neither: taken as zero, with a note.
    Assumed,
}

impl Tension {
    /// The value that fits hold, in eV/A^2.
    #[must_use]
    pub fn value(self) -> f64 {
        match self {
            Self::Stated(value) | Self::Measured { value, .. } => value,
            Self::Assumed => 0.0,
        }
    }

    /// Its standard error in eV/A^2: 0 where it was stated.
    #[must_use]
    pub fn error(self) -> f64 {
        match self {
            Self::Measured { error, .. } => error,
            Self::Stated(_) | Self::Assumed => 0.0,
        }
    }
}

/// The projected area over one block.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AreaBlock {
    /// Index of the block in its run, from 0.
    pub block: usize,
    /// Time of the block's middle in ps, where known.
    pub time_ps: Option<f64>,
    /// Mean area in A^2.
    pub area: f64,
    /// Standard error of the mean in A^2, correlation included; `None` for a block of one frame.
    pub error: Option<f64>,
}

/// One run (or the pool of its replicas) after the equilibration cut.
#[derive(Clone, Debug, PartialEq)]
pub struct RunEstimates {
    /// Name of the run, unique within its sheet.
    pub name: String,
    /// Stated temperature, in K.
    pub temperature: f64,
    /// Mean in-plane tension.
    pub tension: Tension,
    /// Number of atoms in the sheet.
    pub atoms: usize,
    /// Mass of the sheet in g/mol, where the masses are known.
    pub mass: Option<f64>,
    /// Frames left after the cut.
    pub frames: usize,
    /// Projected area in A^2.
    pub area: Estimate,
    /// The area block by block, all blocks of the run.
    pub area_blocks: Vec<AreaBlock>,
    /// Height spectrum.
    pub spectrum: SpectrumEstimate,
    /// Strain fluctuations of the cell.
    pub strain: StrainEstimate,
    /// (1/2) sum q^2 |h_q|^2 over the zone, dimensionless.
    pub excess_area: Estimate,
    /// Why this run can be at most weak, whatever its statistics: hops, a fixed cell, and the like.
    pub reservations: Vec<String>,
}

impl RunEstimates {
    /// Whether the area of the cell was held: neither e1 nor e2 fluctuated.
    #[must_use]
    pub fn cell_is_fixed(&self) -> bool {
        !self.strain.free[0] && !self.strain.free[1]
    }
}

/// All conditions of one sheet, in the order of the pipeline.
#[derive(Clone, Debug, PartialEq)]
pub struct SheetEstimates {
    /// Name of the sheet.
    pub name: String,
    /// Its runs, replicas pooled.
    pub runs: Vec<RunEstimates>,
}
