//! Everything known about one condition of a sheet before anything is fitted.

use ndarray::{Axis, Slice};

use super::area::estimate_area;
use super::cut::find_cut;
use super::excess_area::estimate_excess_area;
use super::history_view::HistoryView;
use super::modes::estimate_spectrum;
use super::strain::{MetricSeries, estimate_strain};
use super::{Cut, Estimate, EstimateError, SpectrumEstimate, StrainEstimate};
use crate::measurements::History;
use crate::theory::PlaneCell;

/// Mean in-plane tension of a run, positive when it stretches, in eV/A^2.
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

/// What is known of a run beside its frames.
#[derive(Clone, Debug, PartialEq)]
pub struct RunFacts {
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
    /// Why this run can be at most weak, whatever its statistics: hops, a fixed cell, and the like.
    pub reservations: Vec<String>,
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
    /// What was cut (summed over replicas).
    pub cut: Cut,
    /// Projected area in A^2.
    pub area: Estimate,
    /// The area block by block, all blocks of the run.
    pub area_blocks: Vec<AreaBlock>,
    /// Height spectrum.
    pub spectrum: SpectrumEstimate,
    /// Strain fluctuations of the cell.
    pub strain: StrainEstimate,
    /// (1/2) sum q^2 |h_q|^2 over the zone, dimensionless; `None` where no measured mode lies in the zone.
    pub excess_area: Option<Estimate>,
    /// Why this run can be at most weak, whatever its statistics: hops, a fixed cell, and the like.
    pub reservations: Vec<String>,
}

impl RunEstimates {
    /// Estimates of one run from its blocks: the cut first, then everything from what is left.
    ///
    /// # Errors
    /// Fewer than two frames, records that are missing or of the wrong shape, a cell without area.
    pub fn from_history(history: &History, facts: RunFacts) -> Result<Self, EstimateError> {
        let all = HistoryView::new(history);
        let area_series = all.column("area", "area_A2")?;
        let heights = all.long_wave_heights()?;
        let cut = find_cut(&all, &area_series, &heights)?;
        let view = all.without_first(cut.blocks_cut);
        let frames = view.frames();
        let too_few = || EstimateError::TooFewFrames { found: frames };
        let (interval, first_time) = (history.frame_interval_ps, history.first_time_ps);
        let (area, area_blocks) =
            estimate_area(&all, &area_series, cut.frames_cut, first_time, interval).ok_or_else(too_few)?;
        let metric = MetricSeries {
            aa: view.column("strain", "aa_A2")?,
            ab: view.column("strain", "ab_A2")?,
            bb: view.column("strain", "bb_A2")?,
        };
        let [aa, ab, bb] = metric.mean();
        if !(aa > 0.0 && aa * bb > ab * ab) {
            return Err(EstimateError::FlatCell { aa, ab, bb });
        }
        let cell = PlaneCell::from_metric(aa, ab, bb);
        let spectrum = estimate_spectrum(
            &view,
            &heights.slice_axis(Axis(0), Slice::from(cut.frames_cut..)),
            &history.modes,
            cell,
            interval,
        )?;
        Ok(Self {
            name: facts.name,
            temperature: facts.temperature,
            tension: facts.tension,
            atoms: facts.atoms,
            mass: facts.mass,
            frames,
            cut,
            area,
            area_blocks,
            excess_area: estimate_excess_area(&spectrum),
            spectrum,
            strain: estimate_strain(&metric, cell, facts.temperature),
            reservations: facts.reservations,
        })
    }

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
