//! The one registry of parameter names: what each means, its unit, and when not to trust it.

/// One row of the registry.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct ParameterName {
    /// Name as it stands in parameter files.
    pub name: &'static str,
    /// Unit as it stands in parameter files; `1` for a pure number.
    pub unit: &'static str,
    /// What it is.
    pub meaning: &'static str,
    /// When not to trust it.
    pub caution: &'static str,
    /// Whether it cannot be negative or zero.
    pub positive: bool,
}

/// Looks a name up.
#[must_use]
pub fn look_up(name: &str) -> Option<&'static ParameterName> {
    PARAMETER_NAMES.iter().find(|row| row.name == name)
}

/// The known name nearest to a misspelt one; `None` where nothing is near.
#[must_use]
pub fn nearest(name: &str) -> Option<&'static str> {
    /// Jaro-Winkler similarity below which a suggestion would puzzle more than help (common practice).
    const NEAR: f64 = 0.8;
    PARAMETER_NAMES
        .iter()
        .map(|row| (strsim::jaro_winkler(row.name, name), row.name))
        .filter(|(similarity, _)| *similarity >= NEAR)
        .max_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, name)| name)
}

const fn positive(
    name: &'static str,
    unit: &'static str,
    meaning: &'static str,
    caution: &'static str,
) -> ParameterName {
    ParameterName {
        name,
        unit,
        meaning,
        caution,
        positive: true,
    }
}

const fn signed(
    name: &'static str,
    unit: &'static str,
    meaning: &'static str,
    caution: &'static str,
) -> ParameterName {
    ParameterName {
        name,
        unit,
        meaning,
        caution,
        positive: false,
    }
}

/// Every parameter that planish writes.
pub const PARAMETER_NAMES: &[ParameterName] = &[
    positive(
        "bending_rigidity",
        "eV",
        "renormalised bending rigidity at the wavelength length_A and at temperature_K, held tension taken out",
        "the run is shorter than some ten relaxation times of its longest waves, its cell is fixed, or its tension is unknown",
    ),
    positive(
        "bending_rigidity_bare",
        "eV",
        "bending rigidity of the plate without thermal ripples, joint over temperatures; at 0 K where a slope is given",
        "one temperature only, or temperatures so close together that ripples and slope cannot be told apart",
    ),
    signed(
        "bending_rigidity_bare_slope",
        "eV/K",
        "change of the bare bending rigidity with temperature",
        "fewer than three temperatures, or an error as large as the value",
    ),
    signed(
        "lattice_term",
        "A^2",
        "b of kappa (1 - b q^2): how the lattice softens short waves",
        "a fit window that ends below about 0.5/A, where b hardly shows",
    ),
    positive(
        "youngs_modulus",
        "N/m",
        "two-dimensional Young's modulus along axis 1 at the size of the cell, (C11 C22 - C12^2)/C22",
        "few effective samples of the cell's strain, or a barostat that rescales instead of sampling",
    ),
    positive(
        "bulk_modulus",
        "N/m",
        "two-dimensional bulk modulus at the size of the cell, 1/(S11 + S22 + 2 S12)",
        "few effective samples of the cell's area, or a barostat that rescales instead of sampling",
    ),
    positive(
        "shear_modulus",
        "N/m",
        "two-dimensional shear modulus C66 at the size of the cell",
        "few effective samples of the cell's shear; absent where the shear is clamped",
    ),
    positive(
        "youngs_modulus_bare",
        "N/m",
        "two-dimensional Young's modulus of the plate without thermal ripples; at 0 K where a slope is given",
        "it is read from heights alone and stays poorly known where ripples hardly change kappa(q)",
    ),
    signed(
        "youngs_modulus_bare_slope",
        "N/m/K",
        "change of the bare Young's modulus with temperature",
        "fewer than three temperatures, or an error as large as the value",
    ),
    signed(
        "poisson_ratio",
        "1",
        "Poisson ratio at the size of the cell, -S12/S11 (C12/C22 without shear coupling)",
        "few effective samples of the product of the two strains, or a barostat that couples them",
    ),
    signed(
        "poisson_ratio_bare",
        "1",
        "Poisson ratio of the plate without thermal ripples",
        "it inherits every doubt about the bare moduli",
    ),
    positive(
        "stiffness_11",
        "N/m",
        "two-dimensional C11, axis 1 along the mean a",
        STIFFNESS_CAUTION,
    ),
    positive(
        "stiffness_22",
        "N/m",
        "two-dimensional C22, axis 2 normal to axis 1 in the plane",
        STIFFNESS_CAUTION,
    ),
    signed("stiffness_12", "N/m", "two-dimensional C12", STIFFNESS_CAUTION),
    positive(
        "stiffness_66",
        "N/m",
        "two-dimensional C66, in-plane shear",
        STIFFNESS_CAUTION,
    ),
    signed(
        "stiffness_16",
        "N/m",
        "two-dimensional C16, zero by symmetry in hexagonal sheets",
        STIFFNESS_CAUTION,
    ),
    signed(
        "stiffness_26",
        "N/m",
        "two-dimensional C26, zero by symmetry in hexagonal sheets",
        STIFFNESS_CAUTION,
    ),
    positive(
        "area_per_atom",
        "A^2",
        "mean projected area of the cell over the number of atoms in the sheet",
        "the start of the run still drifts, or the cell is fixed and the area was chosen, not found",
    ),
    positive(
        "excess_area",
        "1",
        "relative area hidden in ripples, (1/2) sum q^2 <|h_q|^2> over the first Brillouin zone",
        "atomic steps of a buckled sheet, or long waves that have not relaxed",
    ),
    positive(
        "rms_slope",
        "1",
        "root-mean-square slope of the sheet, sqrt(<|grad h|^2>)",
        "above about 0.3 the height description itself becomes poor",
    ),
    positive(
        "normal_order",
        "1",
        "limit of the correlation of the sheet's normals, <n(0).n(r)>, at large distance",
        "long waves that have not relaxed",
    ),
    signed(
        "thermal_expansion",
        "1/K",
        "linear thermal expansion in the plane at temperature_K, half of d ln(area)/dT",
        "fewer than four temperatures, or a classical run far below the Debye temperature",
    ),
    signed(
        "tension",
        "N/m",
        "total mean in-plane tension, positive when it stretches",
        "a thermo series shorter than the run, or one with the vacuum's height changing",
    ),
    positive(
        "areal_density",
        "kg/m^2",
        "mass of the sheet over its mean projected area",
        "masses that the input only guesses from names",
    ),
    positive(
        "thermal_length",
        "A",
        "wavelength scale above which ripples stiffen the plate: pi/q_th, q_th^2 = 3 kB T Y/(16 pi kappa^2), bare kappa and Y",
        "it is a scale, not a border; its error is that of the bare parameters",
    ),
    positive(
        "crossover_tension",
        "N/m",
        "tension above which ripples are ironed out: kB T Y/kappa, bare kappa and Y",
        "it is a scale, not a border; its error is that of the bare parameters",
    ),
    positive(
        "foppl_von_karman",
        "1",
        "Y L^2/kappa with bare kappa and Y and L = sqrt(area)",
        "sizes other than length_A: it grows with the area",
    ),
    signed(
        "scaling_exponent_eta",
        "1",
        "exponent of kappa(q) ~ q^-eta in the anomalous range",
        "data that hardly reach below q_th",
    ),
    signed(
        "scaling_exponent_eta_u",
        "1",
        "exponent of Y(q) ~ q^eta_u in the anomalous range",
        "data that hardly reach below q_th",
    ),
    signed(
        "stress_exponent",
        "1",
        "exponent of the anomalous stress-strain law at small tension",
        "fewer than three tensions below the crossover tension",
    ),
];

/// All components of the stiffness share one weakness.
const STIFFNESS_CAUTION: &str = "few effective samples of the slowest product of two strains, or a barostat that rescales instead of sampling";

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_unique() {
        for (at, row) in PARAMETER_NAMES.iter().enumerate() {
            assert!(
                PARAMETER_NAMES[at + 1..]
                    .iter()
                    .all(|other| other.name != row.name),
                "{} stands twice",
                row.name
            );
        }
    }

    #[test]
    fn a_slip_of_the_finger_finds_its_name_and_nonsense_none() {
        assert_eq!(nearest("bending_rigidty"), Some("bending_rigidity"));
        assert_eq!(nearest("youngs_modulus"), Some("youngs_modulus"));
        assert_eq!(nearest("zzz"), None);
        assert_eq!(look_up("area_per_atom").map(|row| row.unit), Some("A^2"));
    }
}
