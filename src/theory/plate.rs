//! The continuum plate: its parameters, its harmonic height spectrum, and the scales they set.
//!
//! Energy of a thin sheet, with u_ij = (d_i u_j + d_j u_i + d_i h d_j h)/2 (Katsnelson, The Physics of Graphene, ch. 9):
//!
//! ```text
//! E = 1/2 int d2x [ kappa (lap h)^2 + 2 mu u_ij u_ij + lambda u_kk^2 + sigma |grad h|^2 ]
//! ```

use std::f64::consts::PI;

use crate::units::BOLTZMANN_EV_PER_K;

/// Exponent of the ripples' stiffening within the self-consistent screening approximation, 4/(1 + sqrt 15)
/// (Le Doussal and Radzihovsky, Phys. Rev. Lett. 69, 1209 (1992)).
pub const SCSA_ETA: f64 = 0.820_852_384_630_69;

/// The part of the bare rigidity that is left where the lattice term would take more.
const LEAST_RIGIDITY_FRACTION: f64 = 0.5;

/// A plate without ripples, at one temperature and tension.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PlateState {
    /// Bare bending rigidity kappa at q -> 0, in eV.
    pub kappa: f64,
    /// Bare two-dimensional Young's modulus Y, in eV/A^2.
    pub youngs: f64,
    /// b of kappa (1 - b q^2), in A^2: the plate's softening on a lattice.
    pub lattice_term: f64,
    /// Tension sigma held in the plane, positive when it stretches, in eV/A^2.
    pub tension: f64,
    /// Temperature in K.
    pub temperature: f64,
}

impl PlateState {
    /// kB T in eV.
    #[must_use]
    pub fn thermal_energy(&self) -> f64 {
        BOLTZMANN_EV_PER_K * self.temperature
    }

    /// kappa0(q) = kappa max(1 - b q^2, 1/2) in eV: the lattice term is the first of a series, and unchecked would turn
    /// the rigidity of sheets several atoms thick negative inside the zone.
    #[must_use]
    pub fn bare_kappa(&self, q: f64) -> f64 {
        self.kappa * (1.0 - self.lattice_term * q * q).max(LEAST_RIGIDITY_FRACTION)
    }

    /// Thermal wave vector q_th of the bare plate, see [`thermal_wave_vector`].
    #[must_use]
    pub fn thermal_wave_vector(&self) -> f64 {
        thermal_wave_vector(self.kappa, self.youngs, self.temperature)
    }

    /// Closed form of the stiffening by ripples, kappa0(q) [1 + 1.5 q_th^2/q^2]^(eta/2), in eV.
    ///
    /// It follows the self-consistent screening approximation of an infinite sheet without tension within a few per cent
    /// from 0.02 to 20 q_th, and in a periodic box reads 4 to 20 % high at the smallest q: for start values only.
    #[must_use]
    pub fn crossover_kappa(&self, q: f64) -> f64 {
        const CROSSOVER: f64 = 1.5;
        let ratio = self.thermal_wave_vector() / q;
        self.bare_kappa(q) * (1.0 + CROSSOVER * ratio * ratio).powf(0.5 * SCSA_ETA)
    }
}

/// Mean square height <|h_q|^2> = kB T/(A (kappa q^4 + sigma q^2)) in A^2 of one mode h_q = (1/N) sum_j h_j exp(-i q.R_j)
/// of a harmonic plate of area A (A^2), rigidity kappa (eV), tension sigma (eV/A^2), temperature T (K), at |q| (1/A).
/// Equipartition; Safran, Statistical Thermodynamics of Surfaces, Interfaces and Membranes.
#[must_use]
pub fn harmonic_power(area: f64, kappa: f64, tension: f64, temperature: f64, q: f64) -> f64 {
    let square = q * q;
    BOLTZMANN_EV_PER_K * temperature / (area * (kappa * square + tension) * square)
}

/// Rigidity in eV that a mean square height `power` (A^2) stands for: the inverse of [`harmonic_power`].
#[must_use]
pub fn rigidity_of_power(area: f64, power: f64, tension: f64, temperature: f64, q: f64) -> f64 {
    let square = q * q;
    (BOLTZMANN_EV_PER_K * temperature / (area * power * square) - tension) / square
}

/// q_th in 1/A, below which ripples stiffen the plate: q_th^2 = 3 kB T Y/(16 pi kappa^2), with kappa in eV, Y in eV/A^2 and T
/// in K. There the first-order correction of kappa equals kappa (see [`super::one_loop`]).
#[must_use]
pub fn thermal_wave_vector(kappa: f64, youngs: f64, temperature: f64) -> f64 {
    (3.0 * BOLTZMANN_EV_PER_K * temperature * youngs / (16.0 * PI)).sqrt() / kappa
}

/// Thermal length pi/q_th in A. (Other authors' sqrt(kappa^2/(kB T Y)) is some 13 times shorter.)
#[must_use]
pub fn thermal_length(kappa: f64, youngs: f64, temperature: f64) -> f64 {
    PI / thermal_wave_vector(kappa, youngs, temperature)
}

/// Tension kB T Y/kappa in eV/A^2 above which a rippled plate stretches as an ordinary one
/// (Gornyi, Kachorovskii and Mirlin, 2D Mater. 4, 011003 (2017)).
#[must_use]
pub fn crossover_tension(kappa: f64, youngs: f64, temperature: f64) -> f64 {
    BOLTZMANN_EV_PER_K * temperature * youngs / kappa
}

/// Foppl-von Karman number Y L^2/kappa of a sheet of length L (A), Y in eV/A^2 and kappa in eV: stretching against bending.
#[must_use]
pub fn foppl_von_karman(kappa: f64, youngs: f64, length: f64) -> f64 {
    youngs * length * length / kappa
}

/// In-plane moduli of an isotropic sheet, in one unit (eV/A^2 or N/m).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PlaneModuli {
    /// First Lame modulus, C12.
    pub lambda: f64,
    /// Shear modulus, C66.
    pub mu: f64,
}

impl PlaneModuli {
    /// From the two-dimensional Young's modulus and Poisson ratio: lambda = Y nu/(1 - nu^2), mu = Y/(2 (1 + nu)).
    #[must_use]
    pub fn from_youngs_and_poisson(youngs: f64, poisson: f64) -> Self {
        Self {
            lambda: youngs * poisson / (1.0 - poisson * poisson),
            mu: 0.5 * youngs / (1.0 + poisson),
        }
    }

    /// Two-dimensional bulk modulus B = mu + lambda.
    #[must_use]
    pub fn bulk(self) -> f64 {
        self.mu + self.lambda
    }

    /// Two-dimensional Young's modulus Y = 4 mu (mu + lambda)/(2 mu + lambda).
    #[must_use]
    pub fn youngs(self) -> f64 {
        4.0 * self.mu * (self.mu + self.lambda) / (2.0 * self.mu + self.lambda)
    }

    /// Two-dimensional Poisson ratio nu = lambda/(2 mu + lambda), between -1 and 1.
    #[must_use]
    pub fn poisson(self) -> f64 {
        self.lambda / (2.0 * self.mu + self.lambda)
    }

    /// Compliance matrix in Voigt order 1, 2, 6: S11 = S22 = 1/Y, S12 = -nu/Y, S66 = 1/mu.
    #[must_use]
    pub fn compliance(self) -> [[f64; 3]; 3] {
        let s11 = 1.0 / self.youngs();
        let s12 = -self.poisson() * s11;
        [[s11, s12, 0.0], [s12, s11, 0.0], [0.0, 0.0, 1.0 / self.mu]]
    }

    /// Stiffness matrix in Voigt order 1, 2, 6: C11 = C22 = lambda + 2 mu, C12 = lambda, C66 = mu.
    #[must_use]
    pub fn stiffness(self) -> [[f64; 3]; 3] {
        let c11 = self.lambda + 2.0 * self.mu;
        [
            [c11, self.lambda, 0.0],
            [self.lambda, c11, 0.0],
            [0.0, 0.0, self.mu],
        ]
    }
}
