//! Physical constants in the program's units.

/// Boltzmann's constant in eV/K (CODATA 2018, exact in the SI of 2019).
pub const BOLTZMANN_EV_PER_K: f64 = 8.617_333_262e-5;

/// One eV/A^2 in N/m: the elementary charge in coulomb times 1e20 (CODATA 2018, exact).
pub const N_PER_M_PER_EV_PER_A2: f64 = 16.021_766_34;

/// One g/mol per A^2 in kg/m^2: 1e-3 kg/g, divided by Avogadro's constant and 1e-20 m^2 (CODATA 2018, exact).
pub const KG_PER_M2_PER_GRAM_PER_MOL_A2: f64 = 1e-3 / 6.022_140_76e23 / 1e-20;
