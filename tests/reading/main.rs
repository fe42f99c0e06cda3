//! Trajectories: every way in which frames come in, and every file that must be refused, with what the message says.
//!
//! Files are written here, on the fly: text by hand from the formats' manuals, binary ones through chemfiles' writers. The
//! lattice is known in scaled coordinates, so a cell and positions that do not belong together cannot pass.

mod atoms;
mod dumps;
mod files;
mod formats;
mod joining;
mod refused;
mod xtc;
