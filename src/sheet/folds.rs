//! Whether the sheet turns over or lies over itself, so that its height has two values.

use super::neighbours::{Neighbour, SiteBins, nearest_distance};
use super::{Displacements, PlaneFrame, Planes, ReferenceSites, SheetError};

/// Atoms within this many nearest distances are bonded: first neighbours, never second ones.
const BONDED: f64 = 1.25;

/// A triangle whose sides have grown past this many times their length is torn and says nothing of the surface.
const TORN: f64 = 1.5;

/// A fold turns many triangles over; fewer than this many in a frame may be one atom's own violent motion.
const FEWEST_TURNED: usize = 4;

/// Atoms nearer than this in projection, in bond lengths, lie over one another.
const OVER: f64 = 0.7;

/// More than this share of atoms lying over far parts of the sheet is a fold.
const FOLDED_SHARE: f64 = 0.01;

/// Bonds through the thickest sheets there are (seven planes); the heights of a crumpled sheet may look like more planes.
const THICKEST: usize = 9;

/// An atom and two of its neighbours in the same plane, counter-clockwise on the reference.
#[derive(Clone, Copy, Debug)]
struct Triangle {
    corners: [u32; 3],
    /// Scaled vectors and rises (A) from the first corner to the others.
    sides: [[f64; 3]; 2],
    /// Squared lengths of the two sides in A^2.
    squared: [f64; 2],
}

/// Triangles all over the sheet: one that turns clockwise in projection has been turned over.
#[derive(Clone, Debug)]
pub struct FoldWatch {
    triangles: Vec<Triangle>,
}

impl FoldWatch {
    /// One triangle for each atom that has two neighbours, in other directions, in its own plane.
    #[must_use]
    pub fn new(reference: &ReferenceSites, planes: &Planes) -> Self {
        let cell = reference.plane_cell();
        let mut triangles = Vec::new();
        for plane in 0..planes.count() {
            let members: Vec<usize> = (0..reference.len())
                .filter(|&j| planes.of_atom[j] == plane)
                .collect();
            if members.len() < 3 {
                continue;
            }
            let atoms: Vec<[f64; 3]> = members.iter().map(|&j| reference.sites[j]).collect();
            let sites: Vec<[f64; 2]> = atoms.iter().map(|s| [s[0], s[1]]).collect();
            let reach = BONDED * nearest_distance(cell, &atoms);
            let bins = SiteBins::new(cell, &sites, reach);
            for (j, atom) in atoms.iter().enumerate() {
                let mut near: Vec<Neighbour> = Vec::new();
                bins.around(sites[j], |n| {
                    if n.index != j {
                        near.push(n);
                    }
                });
                if let Some((first, second)) = widest_pair(&near) {
                    let side = |n: &Neighbour| {
                        let other = atoms[n.index];
                        let image = n.image.map(f64::from);
                        [
                            other[0] + image[0] - atom[0],
                            other[1] + image[1] - atom[1],
                            other[2] - atom[2],
                        ]
                    };
                    let squared =
                        |n: &Neighbour| n.vector[0].powi(2) + n.vector[1].powi(2) + side(n)[2].powi(2);
                    triangles.push(Triangle {
                        corners: [j, first.index, second.index].map(|k| members[k] as u32),
                        sides: [side(&first), side(&second)],
                        squared: [squared(&first), squared(&second)],
                    });
                }
            }
        }
        Self { triangles }
    }

    /// Refuses a frame in which the surface turns over.
    ///
    /// # Errors
    /// [`SheetError::Folded`].
    pub fn check(&self, plane: &PlaneFrame, displacements: &Displacements) -> Result<(), SheetError> {
        let turned = self
            .triangles
            .iter()
            .filter(|t| t.is_turned_over(plane, displacements))
            .count();
        if turned < FEWEST_TURNED {
            return Ok(());
        }
        let found = format!(
            "{turned} of {} small triangles of atoms are turned over",
            self.triangles.len()
        );
        Err(SheetError::Folded { found })
    }
}

impl Triangle {
    fn is_turned_over(&self, plane: &PlaneFrame, displacements: &Displacements) -> bool {
        let [origin, first, second] = self.corners.map(|j| displacements.relative[j as usize]);
        let now = |side: [f64; 3], end: [f64; 3]| [0, 1, 2].map(|i| side[i] + end[i] - origin[i]);
        let (u, v) = (now(self.sides[0], first), now(self.sides[1], second));
        if u[0] * v[1] - u[1] * v[0] >= 0.0 {
            return false;
        }
        let whole = |side: [f64; 3], squared: f64| {
            plane.squared_in_plane(side[0], side[1]) + side[2] * side[2] < TORN * TORN * squared
        };
        whole(u, self.squared[0]) && whole(v, self.squared[1])
    }
}

/// The two neighbours whose directions are nearest to a right angle, counter-clockwise; `None` where all lie on a line.
fn widest_pair(near: &[Neighbour]) -> Option<(Neighbour, Neighbour)> {
    let mut best: Option<(f64, Neighbour, Neighbour)> = None;
    for first in near {
        for second in near {
            let area = first.vector[0] * second.vector[1] - first.vector[1] * second.vector[0];
            let sizes = first.vector[0].hypot(first.vector[1]) * second.vector[0].hypot(second.vector[1]);
            let sine = area / sizes;
            if sine > best.map_or(0.3, |b| b.0 + 1e-9) {
                best = Some((sine, *first, *second));
            }
        }
    }
    best.map(|(_, first, second)| (first, second))
}

/// Refuses reference sites that lie over one another without being near along the sheet: a sheet folded from the start.
///
/// # Errors
/// [`SheetError::Folded`].
pub fn check_flat_from_start(reference: &ReferenceSites, planes: &Planes) -> Result<(), SheetError> {
    let sites = reference.in_plane();
    let cell = reference.plane_cell();
    let reach = BONDED * reference.spacing;
    let bins = SiteBins::new(cell, &sites, reach);
    // Through a thick sheet, the way from top to bottom takes up to two bonds a plane.
    let most_bonds = (2 * planes.count() + 1).min(THICKEST);
    let over = (0..sites.len())
        .filter(|&j| {
            let mut suspects = Vec::new();
            bins.around(sites[j], |n| {
                let rise = (reference.sites[n.index][2] - reference.sites[j][2]).abs();
                if n.vector[0].hypot(n.vector[1]) < OVER * reference.spacing && rise > 2.0 * reference.spacing
                {
                    suspects.push(n.index);
                }
            });
            !suspects.is_empty() && {
                let near = within_bonds(reference, &bins, &sites, reach, j, most_bonds);
                suspects.iter().any(|s| near.binary_search(s).is_err())
            }
        })
        .count();
    if over as f64 <= FOLDED_SHARE * sites.len() as f64 {
        return Ok(());
    }
    Err(SheetError::Folded {
        found: format!("{over} of {} atoms lie over far parts of the sheet", sites.len()),
    })
}

/// Atoms that at most `bonds` bonds part from atom `start`, ascending.
fn within_bonds(
    reference: &ReferenceSites,
    bins: &SiteBins<'_>,
    sites: &[[f64; 2]],
    reach: f64,
    start: usize,
    bonds: usize,
) -> Vec<usize> {
    let mut reached = vec![start];
    let mut edge = vec![start];
    for _ in 0..bonds {
        let mut next = Vec::new();
        for &j in &edge {
            bins.around(sites[j], |n| {
                let rise = reference.sites[n.index][2] - reference.sites[j][2];
                let squared = n.vector[0].powi(2) + n.vector[1].powi(2) + rise * rise;
                if squared < reach * reach && !reached.contains(&n.index) && !next.contains(&n.index) {
                    next.push(n.index);
                }
            });
        }
        reached.extend(&next);
        edge = next;
    }
    reached.sort_unstable();
    reached
}
