//! The program's unit system, physical constants, and quantities written with their unit.
//!
//! Inside the program lengths are in A, energies in eV, times in ps, temperatures in K, masses in g/mol, and what is
//! made of them follows: wave numbers in 1/A, tensions and two-dimensional moduli in eV/A^2, pressures in eV/A^3.
//! [`Dimension`] lists how people write them, and reads "0.05 N/m" into that system.

mod constants;
mod dimension;
mod quantity;

pub use constants::{BOLTZMANN_EV_PER_K, KG_PER_M2_PER_GRAM_PER_MOL_A2, N_PER_M_PER_EV_PER_A2};
pub use dimension::{Dimension, Unit};
pub use quantity::QuantityError;
