//! The primitive lattice of a crystal sheet, found from its reference sites.

use super::neighbours::SiteBins;
use super::{Planes, ReferenceSites};

/// A translation is one of the lattice when it carries at least this share of the atoms onto atoms of their own kind;
/// the rest may be vacancies and substitutions.
const MATCHED: f64 = 0.9;

/// How near, in bond lengths, an atom must land to its image: between thermal scatter of a mean of 16 frames (under a
/// tenth) and half a bond.
const LANDING: f64 = 0.3;

/// Atoms a translation is tried on, at most; evenly spread over the sheet.
const PROBES: usize = 500;

/// Primitive vectors of the lattice.
#[derive(Clone, Debug, PartialEq)]
pub struct PrimitiveLattice {
    /// Two vectors in A, a along axis 1. Exact divisors of the mean cell: the cell's vectors are integer combinations.
    pub vectors: [[f64; 2]; 2],
    /// How many primitive cells the periodic cell holds.
    pub cells: usize,
}

impl PrimitiveLattice {
    /// Finds the lattice, or `None` where the sites have none that fits the cell (an amorphous or badly damaged sheet).
    ///
    /// Atoms are of one kind when they share species and plane. The shortest two independent translations that carry the
    /// sheet onto itself are taken, then made exact: the cell holds a whole number of each.
    #[must_use]
    pub fn find(reference: &ReferenceSites, species: &[String], planes: &Planes) -> Option<Self> {
        let sites = reference.in_plane();
        let cell = reference.plane_cell();
        let same_kind =
            |i: usize, j: usize| species[i] == species[j] && planes.of_atom[i] == planes.of_atom[j];
        let origin = representative_of_rarest_kind(species, planes)?;
        let landing = LANDING * reference.spacing;
        let targets = SiteBins::new(cell, &sites, landing);
        let step = sites.len().div_ceil(PROBES);
        let probes: Vec<usize> = (0..sites.len()).step_by(step).collect();
        // Where a translation carries these atoms on the mean, or `None` where it misses too many. Over all atoms of a
        // perfect crystal the mean is exact, since every site enters it once as a start and once as an end.
        let carried = |translation: [f64; 2], atoms: &[usize]| -> Option<[f64; 2]> {
            let (mut hits, mut sum) = (0.0, [0.0; 2]);
            for &j in atoms {
                let landed = [sites[j][0] + translation[0], sites[j][1] + translation[1]];
                let mut end = None;
                targets.around(landed, |n| {
                    if same_kind(j, n.index) {
                        end = Some([0, 1].map(|i| sites[n.index][i] + f64::from(n.image[i]) - sites[j][i]));
                    }
                });
                if let Some(end) = end {
                    hits += 1.0;
                    sum = [sum[0] + end[0], sum[1] + end[1]];
                }
            }
            (hits >= MATCHED * atoms.len() as f64).then(|| sum.map(|s| s / hits))
        };

        let rough = shortest_translations(reference, &sites, origin, &same_kind, &|t| {
            carried(t, &probes).is_some()
        })?;
        let all: Vec<usize> = (0..sites.len()).collect();
        let [first, second] = [carried(rough[0], &all)?, carried(rough[1], &all)?];
        // The cell's vectors in units of the translations, which must be whole numbers.
        let determinant = first[0] * second[1] - first[1] * second[0];
        let inverse = [
            [second[1] / determinant, -first[1] / determinant],
            [-second[0] / determinant, first[0] / determinant],
        ];
        // Row i of `counts`: cell vector i as a combination of first and second (scaled coordinates: row i of 1).
        let counts = [0, 1].map(|i| [inverse[i][0].round(), inverse[i][1].round()]);
        let off = [0, 1].map(|i| [0, 1].map(|k| (inverse[i][k] - counts[i][k]).abs()));
        let whole = counts[0][0] * counts[1][1] - counts[0][1] * counts[1][0];
        if off.iter().flatten().any(|&x| x > 0.25) || whole == 0.0 {
            return None;
        }
        let exact = [
            [counts[1][1] / whole, -counts[0][1] / whole],
            [-counts[1][0] / whole, counts[0][0] / whole],
        ];
        let vectors = exact.map(|s| {
            [
                s[0] * cell.a[0] + s[1] * cell.b[0],
                s[0] * cell.a[1] + s[1] * cell.b[1],
            ]
        });
        Some(Self {
            vectors,
            cells: whole.abs() as usize,
        })
    }
}

/// An atom of the kind that has fewest atoms: fewest candidates to try.
fn representative_of_rarest_kind(species: &[String], planes: &Planes) -> Option<usize> {
    let mut kinds: Vec<(usize, usize)> = Vec::new();
    for j in 0..species.len() {
        let same =
            |&(i, _): &(usize, usize)| species[i] == species[j] && planes.of_atom[i] == planes.of_atom[j];
        match kinds.iter_mut().find(|kind| same(kind)) {
            Some((_, count)) => *count += 1,
            None => kinds.push((j, 1)),
        }
    }
    // Impurities and adatoms are rare kinds too, but of no lattice: a kind counts from a twentieth of the atoms.
    let enough = species.len().div_ceil(20);
    kinds
        .iter()
        .filter(|k| k.1 >= enough)
        .min_by_key(|k| k.1)
        .or(kinds.iter().max_by_key(|k| k.1))
        .map(|k| k.0)
}

/// The two shortest independent translations (scaled) that carry the sheet onto itself, tried in order of length from
/// one atom to others of its kind.
fn shortest_translations(
    reference: &ReferenceSites,
    sites: &[[f64; 2]],
    origin: usize,
    same_kind: &dyn Fn(usize, usize) -> bool,
    carries: &dyn Fn([f64; 2]) -> bool,
) -> Option<[[f64; 2]; 2]> {
    let cell = reference.plane_cell();
    // Longer than any primitive vector of a sheet with a few dozen atoms a cell; the whole cell where that is smaller.
    let radius =
        (12.0 * reference.spacing).min(1.01 * (cell.a[0].hypot(cell.a[1]) + cell.b[0].hypot(cell.b[1])));
    let bins = SiteBins::new(cell, sites, radius);
    let mut candidates: Vec<(f64, [f64; 2], [f64; 2])> = Vec::new();
    bins.around(sites[origin], |n| {
        let length = n.vector[0].hypot(n.vector[1]);
        if length > reference.spacing / 2.0 && same_kind(origin, n.index) {
            let site = sites[n.index];
            let scaled = [0, 1].map(|i| site[i] + f64::from(n.image[i]) - sites[origin][i]);
            candidates.push((length, scaled, n.vector));
        }
    });
    candidates.sort_by(|x, y| x.0.total_cmp(&y.0));
    let mut first: Option<([f64; 2], [f64; 2], f64)> = None;
    for (length, scaled, vector) in candidates {
        match first {
            None if carries(scaled) => first = Some((scaled, vector, length)),
            Some((scaled_first, vector_first, length_first)) => {
                let sine =
                    (vector_first[0] * vector[1] - vector_first[1] * vector[0]) / (length_first * length);
                if sine.abs() > 0.3 && carries(scaled) {
                    return Some([scaled_first, scaled]);
                }
            }
            None => {}
        }
    }
    None
}
