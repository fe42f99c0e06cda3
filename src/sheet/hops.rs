//! Whether an atom has left its place in the lattice.

use super::reference_sites::HOP;
use super::{Displacements, PlaneFrame, ReferenceSites};

/// The homes of a run's atoms, and how far from home an atom has hopped.
#[derive(Clone, Debug)]
pub struct HopWatch {
    /// Each atom's home relative to its reference site, in scaled units.
    homes: Vec<[f64; 2]>,
    /// Squared distance, in A^2, beyond which an atom has left its site.
    squared: f64,
}

impl HopWatch {
    /// For the atoms of `reference`.
    #[must_use]
    pub fn new(reference: &ReferenceSites) -> Self {
        let homes = reference.homes.iter().zip(&reference.sites);
        Self {
            homes: homes
                .map(|(home, site)| [home[0] - site[0], home[1] - site[1]])
                .collect(),
            squared: (HOP * reference.spacing).powi(2),
        }
    }

    /// The first atom that sits elsewhere than at home in a frame with these displacements.
    #[must_use]
    pub fn first_hop(&self, plane: &PlaneFrame, displacements: &Displacements) -> Option<usize> {
        displacements
            .relative
            .iter()
            .zip(&self.homes)
            .position(|(d, home)| plane.squared_in_plane(d[0] - home[0], d[1] - home[1]) > self.squared)
    }
}
