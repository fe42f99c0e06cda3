//! What can be measured, and how people write its units.

use super::N_PER_M_PER_EV_PER_A2;

/// A physical dimension that a pipeline file or an option may state.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Dimension {
    /// Absolute temperature, inside in K. Only kelvin is taken: a scale with another zero invites mistakes.
    Temperature,
    /// Time, inside in ps.
    Time,
    /// Length, inside in A.
    Length,
    /// Area, inside in A^2.
    Area,
    /// Wave number 2 pi/wavelength, inside in 1/A.
    WaveNumber,
    /// Energy, inside in eV.
    Energy,
    /// Tension or two-dimensional modulus, inside in eV/A^2.
    Tension,
    /// Pressure, inside in eV/A^3.
    Pressure,
    /// Change of an energy with temperature, inside in eV/K.
    EnergyPerKelvin,
    /// Change of a tension or modulus with temperature, inside in eV/A^2/K.
    TensionPerKelvin,
    /// Coefficient of thermal expansion, in 1/K.
    PerKelvin,
    /// Mass per area, in kg/m^2.
    ArealDensity,
    /// A pure number: bare, or a percentage.
    Number,
}

/// One unit of a dimension.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// How messages and documentation write it; taken in files too.
    pub symbol: &'static str,
    /// Other spellings that are taken.
    pub spellings: &'static [&'static str],
    /// One of this unit in the program's unit of the dimension.
    pub factor: f64,
}

const fn unit(symbol: &'static str, spellings: &'static [&'static str], factor: f64) -> Unit {
    Unit {
        symbol,
        spellings,
        factor,
    }
}

/// One J in eV: the inverse of the elementary charge (CODATA 2018, exact).
const JOULE: f64 = 1.0 / 1.602_176_634e-19;
/// One kJ/mol in eV, with Avogadro's constant (CODATA 2018, exact).
const KILOJOULE_PER_MOLE: f64 = 1e3 / 6.022_140_76e23 * JOULE;
/// One kcal/mol in eV, with the thermochemical calorie of 4.184 J.
const KILOCALORIE_PER_MOLE: f64 = 4.184 * KILOJOULE_PER_MOLE;
/// One hartree in eV (CODATA 2018).
const HARTREE: f64 = 27.211_386_245_988;
/// One bohr in A (CODATA 2018).
const BOHR: f64 = 0.529_177_210_903;
/// One N/m in eV/A^2.
const NEWTON_PER_METRE: f64 = 1.0 / N_PER_M_PER_EV_PER_A2;
/// One Pa in eV/A^3: J in eV over m^3 in A^3.
const PASCAL: f64 = JOULE * 1e-30;

const TEMPERATURE: &[Unit] = &[
    unit("K", &["kelvin", "Kelvin"], 1.0),
    unit("mK", &["millikelvin"], 1e-3),
];
const TIME: &[Unit] = &[
    unit("ps", &["picosecond", "picoseconds"], 1.0),
    unit("fs", &["femtosecond", "femtoseconds"], 1e-3),
    unit("ns", &["nanosecond", "nanoseconds"], 1e3),
    unit("us", &["μs", "microsecond", "microseconds"], 1e6),
    unit("s", &["second", "seconds"], 1e12),
];
const LENGTH: &[Unit] = &[
    unit("angstrom", &["A", "Å", "angstroms", "Angstrom", "ångström"], 1.0),
    unit(
        "nm",
        &["nanometre", "nanometer", "nanometres", "nanometers"],
        10.0,
    ),
    unit("pm", &["picometre", "picometer"], 1e-2),
    unit("um", &["μm", "micrometre", "micrometer", "micron"], 1e4),
    unit("bohr", &["Bohr", "a0"], BOHR),
    unit("m", &["metre", "meter"], 1e10),
];
const AREA: &[Unit] = &[
    unit("angstrom^2", &["A^2", "Å^2", "Angstrom^2"], 1.0),
    unit("nm^2", &[], 1e2),
    unit("um^2", &["μm^2"], 1e8),
    unit("bohr^2", &["Bohr^2"], BOHR * BOHR),
    unit("m^2", &[], 1e20),
];
const WAVE_NUMBER: &[Unit] = &[
    unit(
        "1/angstrom",
        &["1/A", "1/Å", "angstrom^-1", "A^-1", "Å^-1", "1/Angstrom"],
        1.0,
    ),
    unit("1/nm", &["nm^-1"], 0.1),
    unit("1/bohr", &["bohr^-1", "1/Bohr"], 1.0 / BOHR),
    unit("1/m", &["m^-1"], 1e-10),
];
const ENERGY: &[Unit] = &[
    unit("eV", &["ev", "electronvolt"], 1.0),
    unit("meV", &[], 1e-3),
    unit("kJ/mol", &[], KILOJOULE_PER_MOLE),
    unit("kcal/mol", &[], KILOCALORIE_PER_MOLE),
    unit("hartree", &["Hartree", "Ha", "Eh"], HARTREE),
    unit("J", &["joule"], JOULE),
];
const TENSION: &[Unit] = &[
    unit("N/m", &["J/m^2", "N*m^-1", "Nm^-1"], NEWTON_PER_METRE),
    unit("mN/m", &["mJ/m^2", "dyn/cm"], 1e-3 * NEWTON_PER_METRE),
    unit("eV/angstrom^2", &["eV/A^2", "eV/Å^2", "eV/Angstrom^2"], 1.0),
    unit("meV/angstrom^2", &["meV/A^2", "meV/Å^2"], 1e-3),
    unit("eV/nm^2", &[], 1e-2),
];
const PRESSURE: &[Unit] = &[
    unit("bar", &["bars"], 1e5 * PASCAL),
    unit("kbar", &[], 1e8 * PASCAL),
    unit("Pa", &["pascal"], PASCAL),
    unit("MPa", &[], 1e6 * PASCAL),
    unit("GPa", &[], 1e9 * PASCAL),
    unit("atm", &[], 101_325.0 * PASCAL),
    unit("eV/angstrom^3", &["eV/A^3", "eV/Å^3"], 1.0),
];
const ENERGY_PER_KELVIN: &[Unit] = &[unit("eV/K", &[], 1.0), unit("meV/K", &[], 1e-3)];
const TENSION_PER_KELVIN: &[Unit] = &[
    unit("N/m/K", &["N/(m*K)", "N/m/kelvin"], NEWTON_PER_METRE),
    unit("mN/m/K", &["mN/(m*K)"], 1e-3 * NEWTON_PER_METRE),
    unit("eV/angstrom^2/K", &["eV/A^2/K", "eV/Å^2/K"], 1.0),
];
const PER_KELVIN: &[Unit] = &[unit("1/K", &["K^-1", "/K"], 1.0), unit("ppm/K", &[], 1e-6)];
const AREAL_DENSITY: &[Unit] = &[
    unit("kg/m^2", &[], 1.0),
    unit("g/m^2", &[], 1e-3),
    unit("mg/m^2", &[], 1e-6),
];
const NUMBER: &[Unit] = &[unit("1", &[""], 1.0), unit("%", &["percent"], 1e-2)];

impl Dimension {
    /// Every dimension, in the order of the declaration.
    pub const ALL: [Self; 13] = [
        Self::Temperature,
        Self::Time,
        Self::Length,
        Self::Area,
        Self::WaveNumber,
        Self::Energy,
        Self::Tension,
        Self::Pressure,
        Self::EnergyPerKelvin,
        Self::TensionPerKelvin,
        Self::PerKelvin,
        Self::ArealDensity,
        Self::Number,
    ];

    /// The dimension that is written in `unit`, such as the unit of a parameter: "N/m" is a tension, "A^2" an area.
    #[must_use]
    pub fn of_unit(unit: &str) -> Option<Self> {
        Self::ALL
            .into_iter()
            .find(|dimension| dimension.find(unit).is_some())
    }

    /// The units taken, the most usual first.
    #[must_use]
    pub fn units(self) -> &'static [Unit] {
        match self {
            Self::Temperature => TEMPERATURE,
            Self::Time => TIME,
            Self::Length => LENGTH,
            Self::Area => AREA,
            Self::WaveNumber => WAVE_NUMBER,
            Self::Energy => ENERGY,
            Self::Tension => TENSION,
            Self::Pressure => PRESSURE,
            Self::EnergyPerKelvin => ENERGY_PER_KELVIN,
            Self::TensionPerKelvin => TENSION_PER_KELVIN,
            Self::PerKelvin => PER_KELVIN,
            Self::ArealDensity => AREAL_DENSITY,
            Self::Number => NUMBER,
        }
    }

    /// The name with its article, for messages: "a temperature".
    #[must_use]
    pub fn noun(self) -> &'static str {
        match self {
            Self::Temperature => "a temperature",
            Self::Time => "a time",
            Self::Length => "a length",
            Self::Area => "an area",
            Self::WaveNumber => "a wave number",
            Self::Energy => "an energy",
            Self::Tension => "a tension",
            Self::Pressure => "a pressure",
            Self::EnergyPerKelvin => "an energy per kelvin",
            Self::TensionPerKelvin => "a tension per kelvin",
            Self::PerKelvin => "an expansion coefficient",
            Self::ArealDensity => "a mass per area",
            Self::Number => "a number",
        }
    }

    /// A value as it could stand in a file, for messages and documentation.
    #[must_use]
    pub fn example(self) -> &'static str {
        match self {
            Self::Temperature => "300 K",
            Self::Time => "0.4 ps",
            Self::Length => "12 angstrom",
            Self::Area => "2.6 angstrom^2",
            Self::WaveNumber => "1.2 1/angstrom",
            Self::Energy => "1.1 eV",
            Self::Tension => "0.05 N/m",
            Self::Pressure => "1 bar",
            Self::EnergyPerKelvin => "1e-4 eV/K",
            Self::TensionPerKelvin => "-0.02 N/m/K",
            Self::PerKelvin => "-4e-6 1/K",
            Self::ArealDensity => "7.6e-7 kg/m^2",
            Self::Number => "5 %",
        }
    }

    /// One of `unit` in the program's unit.
    ///
    /// # Panics
    /// Where `unit` is not one of this dimension's: it is the caller's constant, not input.
    #[must_use]
    pub fn one(self, unit: &str) -> f64 {
        self.find(unit)
            .expect("the wanted unit belongs to the dimension")
            .factor
    }

    /// The unit that `spelling` means in this dimension, if it is taken.
    pub(super) fn find(self, spelling: &str) -> Option<&'static Unit> {
        self.units()
            .iter()
            .find(|unit| unit.symbol == spelling || unit.spellings.contains(&spelling))
    }
}
