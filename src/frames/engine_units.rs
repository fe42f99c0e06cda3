//! What the bare numbers of simulation engines are in.
//!
//! Constants: CODATA 2018 (exact where the SI of 2019 fixes them); the calorie is the thermochemical one, 4.184 J.

use super::EngineUnits;

/// Elementary charge in coulomb: joules in one eV (exact).
const JOULE_PER_EV: f64 = 1.602_176_634e-19;

/// Avogadro's constant in 1/mol (exact).
const AVOGADRO_PER_MOL: f64 = 6.022_140_76e23;

/// The Bohr radius in A.
pub(super) const BOHR_A: f64 = 0.529_177_210_903;

/// The Hartree energy in eV.
pub(super) const HARTREE_EV: f64 = 27.211_386_245_988;

/// One kJ/mol in eV.
pub(super) const KJ_PER_MOL_EV: f64 = 1000.0 / AVOGADRO_PER_MOL / JOULE_PER_EV;

/// One kcal/mol in eV.
pub(super) const KCAL_PER_MOL_EV: f64 = 4184.0 / AVOGADRO_PER_MOL / JOULE_PER_EV;

/// One joule in eV.
pub(super) const JOULE_EV: f64 = 1.0 / JOULE_PER_EV;

/// One pascal in eV/A^3: 1 eV/A^3 is 160.2176634 GPa.
pub(super) const PASCAL_EV_PER_A3: f64 = 1e-30 / JOULE_PER_EV;

/// One bar in eV/A^3.
pub(super) const BAR_EV_PER_A3: f64 = 1e5 * PASCAL_EV_PER_A3;

/// One standard atmosphere in eV/A^3.
pub(super) const ATM_EV_PER_A3: f64 = 101_325.0 * PASCAL_EV_PER_A3;

impl EngineUnits {
    /// One length unit in A.
    #[must_use]
    pub fn length_a(self) -> f64 {
        match self {
            Self::Metal | Self::Real => 1.0,
            Self::Electron => BOHR_A,
            Self::Si => 1e10,
            Self::Gromacs => 10.0,
        }
    }

    /// One time unit in ps.
    #[must_use]
    pub fn time_ps(self) -> f64 {
        match self {
            Self::Metal | Self::Gromacs => 1.0,
            Self::Real | Self::Electron => 1e-3,
            Self::Si => 1e12,
        }
    }

    /// One energy unit in eV.
    #[must_use]
    pub fn energy_ev(self) -> f64 {
        match self {
            Self::Metal => 1.0,
            Self::Real => KCAL_PER_MOL_EV,
            Self::Electron => HARTREE_EV,
            Self::Si => JOULE_EV,
            Self::Gromacs => KJ_PER_MOL_EV,
        }
    }

    /// One pressure unit in eV/A^3.
    #[must_use]
    pub fn pressure_ev_per_a3(self) -> f64 {
        match self {
            Self::Metal | Self::Gromacs => BAR_EV_PER_A3,
            Self::Real => ATM_EV_PER_A3,
            Self::Electron | Self::Si => PASCAL_EV_PER_A3,
        }
    }

    /// The name in pipeline files.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Self::Metal => "metal",
            Self::Real => "real",
            Self::Electron => "electron",
            Self::Si => "si",
            Self::Gromacs => "gromacs",
        }
    }

    /// All of them, for messages.
    pub const NAMES: &'static str = "metal, real, electron, si, gromacs";

    /// The units of a name in pipeline files, text dumps and logs.
    #[must_use]
    pub fn from_name(name: &str) -> Option<Self> {
        [Self::Metal, Self::Real, Self::Electron, Self::Si, Self::Gromacs]
            .into_iter()
            .find(|units| units.name() == name)
    }
}
