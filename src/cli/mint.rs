//! `planish mint`: synthetic trajectories whose true parameters are known.

use std::num::NonZeroUsize;
use std::path::PathBuf;

use clap::{Args, ValueEnum};

use super::arguments::thread_count;
use super::mint_progress::MintProgress;
use super::terminal::{Message, tell};
use super::{ExitStatus, Terminal};
use crate::mint::{LatticeKind, PlateRequest, mint_plate};
use crate::units::Dimension;

/// Arguments of `planish mint`.
#[derive(Clone, Debug, Args)]
pub struct MintArguments {
    /// What moves the sheet
    #[arg(long, value_enum, default_value = "plate")]
    pub law: Law,
    /// Name of the set, its pipeline file and its sheet
    #[arg(long, default_value = "plate")]
    pub name: String,
    /// Folder to make [default: NAME-set]; it must not exist
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Temperature; give it several times for one trajectory at each
    #[arg(long, value_name = "T", default_value = "300 K", value_parser = |text: &str| quantity(Dimension::Temperature, text))]
    pub temperature: Vec<f64>,
    /// Bare bending rigidity
    #[arg(long, value_name = "KAPPA", default_value = "1.1 eV", value_parser = |text: &str| quantity(Dimension::Energy, text))]
    pub kappa: f64,
    /// Bare two-dimensional Young's modulus
    #[arg(long, value_name = "Y", default_value = "340 N/m", value_parser = |text: &str| quantity(Dimension::Tension, text))]
    pub youngs: f64,
    /// Bare Poisson ratio
    #[arg(long, value_name = "NU", default_value = "0.2", allow_negative_numbers = true)]
    pub poisson: f64,
    /// b of kappa (1 - b q^2)
    #[arg(long, value_name = "B", default_value = "0 A^2", allow_hyphen_values = true,
          value_parser = |text: &str| quantity(Dimension::Area, text))]
    pub lattice_term: f64,
    /// Tension held, positive when it stretches
    #[arg(long, value_name = "SIGMA", default_value = "0 N/m", allow_hyphen_values = true,
          value_parser = |text: &str| quantity(Dimension::Tension, text))]
    pub tension: f64,
    /// Lattice of the atoms
    #[arg(long, value_enum, default_value = "hexagonal")]
    pub lattice: Lattice,
    /// Lattice constant of the flat sheet
    #[arg(long, value_name = "A", default_value = "2.46 angstrom", value_parser = |text: &str| quantity(Dimension::Length, text))]
    pub lattice_constant: f64,
    /// Side of the flat box, met as nearly as whole cells allow
    #[arg(long, value_name = "L", default_value = "52 angstrom", value_parser = |text: &str| quantity(Dimension::Length, text))]
    pub length: f64,
    /// Wave number at and beyond which nothing moves [default: the whole first Brillouin zone moves]
    #[arg(long, value_name = "Q", value_parser = |text: &str| quantity(Dimension::WaveNumber, text))]
    pub cut: Option<f64>,
    /// Fix the cell at the strain whose mean stress is the tension
    #[arg(long)]
    pub fixed_cell: bool,
    /// Frames of each trajectory
    #[arg(long, value_name = "N", default_value_t = 500)]
    pub frames: usize,
    /// Hybrid Monte Carlo trajectories from a frame to the next
    #[arg(long, value_name = "N", default_value_t = 4)]
    pub spacing: usize,
    /// Time the files give from a frame to the next: it orders the samples, there is no dynamics
    #[arg(long, value_name = "DT", default_value = "1 ps", value_parser = |text: &str| quantity(Dimension::Time, text))]
    pub frame_interval: f64,
    /// Format of the trajectories, by its file name extension, of those that chemfiles writes
    #[arg(long, value_name = "EXT", default_value = "trr")]
    pub format: String,
    /// Seed of the random numbers: the same seed gives the same bytes
    #[arg(long, value_name = "N", default_value_t = 1)]
    pub seed: u64,
    /// Number of threads [default: all cores]; the results do not depend on it
    #[arg(long, value_name = "N", value_parser = thread_count)]
    pub threads: Option<NonZeroUsize>,
    /// Show errors only
    #[arg(long, short, conflicts_with = "verbose")]
    pub quiet: bool,
    /// Show notes too
    #[arg(long, short)]
    pub verbose: bool,
}

/// What moves a synthetic sheet.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Law {
    /// Equilibrium samples of the full nonlinear thermal plate
    Plate,
}

/// Lattices, as said on the command line.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Lattice {
    /// A honeycomb of one species
    Hexagonal,
    /// One atom a square cell
    Square,
    /// One atom a rectangular cell
    Rectangular,
    /// Metal atoms between two planes of others, hexagonal
    ThreePlane,
}

impl From<Lattice> for LatticeKind {
    fn from(lattice: Lattice) -> Self {
        match lattice {
            Lattice::Hexagonal => Self::Hexagonal,
            Lattice::Square => Self::Square,
            Lattice::Rectangular => Self::Rectangular,
            Lattice::ThreePlane => Self::ThreePlane,
        }
    }
}

/// Makes the set, and says how it went.
pub(super) fn mint(arguments: &MintArguments, terminal: Terminal) -> ExitStatus {
    let Law::Plate = arguments.law;
    let request = PlateRequest {
        name: arguments.name.clone(),
        lattice: arguments.lattice.into(),
        lattice_constant: arguments.lattice_constant,
        length: arguments.length,
        kappa: arguments.kappa,
        youngs: arguments.youngs,
        poisson: arguments.poisson,
        lattice_term: arguments.lattice_term,
        tension: arguments.tension,
        temperatures: arguments.temperature.clone(),
        cut: arguments.cut,
        fixed_cell: arguments.fixed_cell,
        frames: arguments.frames,
        spacing: arguments.spacing,
        frame_interval: arguments.frame_interval,
        seed: arguments.seed,
        format: arguments.format.clone(),
    };
    let out = arguments
        .out
        .clone()
        .unwrap_or_else(|| PathBuf::from(format!("{}-set", arguments.name)));
    let threads = arguments
        .threads
        .or_else(|| std::thread::available_parallelism().ok())
        .map_or(1, NonZeroUsize::get);
    let progress = MintProgress::new(arguments.quiet, arguments.verbose, terminal.interactive);
    match mint_plate(&request, &out, threads, &progress) {
        Ok(()) => {
            if !arguments.quiet {
                let pipeline = out.join(format!("{}.toml", arguments.name));
                let next = format!(
                    "the set is in {}; measure it with: planish run {}",
                    out.display(),
                    pipeline.display()
                );
                tell(Message::Note, &next);
            }
            ExitStatus::Done
        }
        Err(error) => {
            tell(Message::Error, &error.to_string());
            if error.is_input() {
                ExitStatus::InputWrong
            } else {
                ExitStatus::MachineFailed
            }
        }
    }
}

fn quantity(dimension: Dimension, text: &str) -> Result<f64, String> {
    dimension
        .parse(text)
        .map_err(|error| format!("{}; {}", error.problem(), error.remedy()))
}
