//! planish turns atomistic trajectories of thin sheets into the parameters of a continuum plate.
//!
//! # The arrows
//!
//! Data flows one way, and each arrow is a type:
//!
//! ```text
//! Frame -> Surface -> BlockRecord -> History -> RunEstimates -> Quantity -> ParameterFile -> report, verdict
//! ```
//!
//! [`pipeline`] holds the one function that walks it, top to bottom. The modules below stand in the order in which
//! data flows, and a module never uses one that stands above it:
//!
//! | module | what it does |
//! | --- | --- |
//! | [`frames`] | reads trajectories, topologies and thermo series; joins the files of a run |
//! | [`sheet`] | reference sites, planes, unwrapping, heights, the modes of the surface |
//! | [`measurements`] | one record a block: series per frame, sums per mode |
//! | [`estimates`] | equilibration cut, effective samples, errors: histories become numbers with errors |
//! | [`fits`] | plate, stiffness and expansion fitted to the estimates |
//! | [`parameters`] | the parameter file |
//! | [`report`] | tables, figures, page, terminal |
//! | [`pipeline`] | the pipeline file as written, the plan as resolved, and the run |
//! | [`mint`] | synthetic sheets whose parameters are known |
//! | [`cli`] | one file per command |
//!
//! Leaves that any of them may use, and that know nothing of frames: [`theory`] (formulas), [`statistics`]
//! (series algorithms), [`numerics`] (named numerical algorithms), [`units`].
//!
//! # Units
//!
//! Inside: eV, A, ps, K, g/mol; an area modulus is eV/A^2, a two-dimensional tension is eV/A^2. Outside: eV, N/m, A, K.

pub mod cli;
pub mod estimates;
pub mod fits;
pub mod frames;
pub mod measurements;
pub mod mint;
pub mod numerics;
pub mod parameters;
pub mod pipeline;
pub mod report;
pub mod sheet;
pub mod statistics;
pub mod theory;
pub mod units;
