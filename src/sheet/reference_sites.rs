//! Reference sites: the material points that heights belong to.

use super::neighbours::nearest_distance;
use super::unwrapping::Displacements;
use super::{PlaneFrame, unit_normal};
use crate::frames::{Cell, Frame};
use crate::theory::PlaneCell;

/// How many frames the reference sites are the mean of.
pub const REFERENCE_FRAMES: usize = 16;

/// The largest power of two that the reference frames are spread over: a run that has grown past it keeps its sites.
const LAST_GROWTH: usize = 1024;

/// Which of a run's `frames` frames make the reference: those numbered k M/16, k = 0 to 15, with M the largest power of
/// two that is at most `frames` and at most 1,024; all of them where there are fewer than 16.
#[must_use]
pub fn reference_frame_indices(frames: usize) -> Vec<usize> {
    if frames < REFERENCE_FRAMES {
        return (0..frames).collect();
    }
    let spread = (1 << frames.ilog2()).min(LAST_GROWTH);
    (0..REFERENCE_FRAMES)
        .map(|k| k * spread / REFERENCE_FRAMES)
        .collect()
}

/// An atom this many bond lengths from home, in the plane, has left its site: half-way to the next site and half as far
/// again. Thermal motion of a bonded atom reaches a fifth of a bond.
pub const HOP: f64 = 0.75;

/// Each atom's mean position over the reference frames, drift-free, in the mean cell.
#[derive(Clone, Debug, PartialEq)]
pub struct ReferenceSites {
    /// Mean (s1, s2, h) of each atom: scaled along a and b, height in A above the plane through the origin.
    pub sites: Vec<[f64; 3]>,
    /// Mean cell of the reference frames.
    pub cell: Cell,
    /// Unit vector along a x b of the mean cell: the direction of heights.
    pub normal: [f64; 3],
    /// Median distance to the nearest atom, in A: the length of a bond.
    pub spacing: f64,
    /// For each atom, the first reference frame (0 to 15) in which it sat elsewhere than in the first one, where any.
    pub moved: Vec<Option<usize>>,
    /// Where each atom's home is, for telling a hop: its mean site, or its first position where it moved.
    pub homes: Vec<[f64; 3]>,
}

impl ReferenceSites {
    /// The mean of `frames` (at least one; the same atoms in each).
    ///
    /// An atom that is ever more than `HOP` (0.75) spacings (in the plane) from where the first frame has it is recorded in
    /// `moved`.
    #[must_use]
    pub fn average(frames: &[Frame], masses: Option<&[f64]>) -> Self {
        let count = frames.len() as f64;
        let mut vectors = [[0.0; 3]; 3];
        for frame in frames {
            for (sum, vector) in vectors.iter_mut().zip(frame.cell.vectors) {
                for (s, x) in sum.iter_mut().zip(vector) {
                    *s += x / count;
                }
            }
        }
        let cell = Cell { vectors };
        let normal = unit_normal(&cell);
        let first_plane = PlaneFrame::new(&frames[0].cell, normal);
        let start = whole_sheet(&first_plane, &frames[0].positions);
        let spacing = nearest_distance(plane_cell_of(&cell), &start);
        let hop = HOP * spacing;

        let mut sites = vec![[0.0; 3]; start.len()];
        let mut moved = vec![None; start.len()];
        let mut displacements = Displacements::default();
        for (k, frame) in frames.iter().enumerate() {
            let plane = PlaneFrame::new(&frame.cell, normal);
            displacements.measure(&plane, &frame.positions, &start, masses);
            for ((site, d), moved) in sites.iter_mut().zip(&displacements.relative).zip(&mut moved) {
                for (s, x) in site.iter_mut().zip(d) {
                    *s += x / count;
                }
                if moved.is_none() && plane.squared_in_plane(d[0], d[1]) > hop * hop {
                    *moved = Some(k);
                }
            }
        }
        for (site, s) in sites.iter_mut().zip(&start) {
            for (x, y) in site.iter_mut().zip(s) {
                *x += y;
            }
        }
        let homes = sites
            .iter()
            .zip(&start)
            .zip(&moved)
            .map(|((&site, &start), moved)| if moved.is_some() { start } else { site })
            .collect();
        Self {
            sites,
            cell,
            normal,
            spacing,
            moved,
            homes,
        }
    }

    /// The mean cell in the plane.
    #[must_use]
    pub fn plane_cell(&self) -> PlaneCell {
        plane_cell_of(&self.cell)
    }

    /// The in-plane part of the sites, scaled.
    #[must_use]
    pub fn in_plane(&self) -> Vec<[f64; 2]> {
        self.sites.iter().map(|s| [s[0], s[1]]).collect()
    }

    /// Number of atoms.
    #[must_use]
    pub fn len(&self) -> usize {
        self.sites.len()
    }

    /// Whether there is no atom.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.sites.is_empty()
    }
}

fn plane_cell_of(cell: &Cell) -> PlaneCell {
    let [aa, ab, bb] = PlaneFrame::new(cell, unit_normal(cell)).metric;
    PlaneCell::from_metric(aa, ab, bb)
}

/// Sheet coordinates of the first frame with the sheet in one piece: cut where the largest gap along the normal is, so
/// that a sheet wrapped through the lid of the cell is not torn into two halves.
fn whole_sheet(plane: &PlaneFrame, positions: &[[f64; 3]]) -> Vec<[f64; 3]> {
    let mut atoms: Vec<[f64; 3]> = positions.iter().map(|&r| plane.coordinates(r)).collect();
    let (above, gap) = largest_gap(atoms.iter().map(|s| s[2] / plane.lid[2]));
    let floor = above - gap / 2.0;
    for s in &mut atoms {
        let crossings = (s[2] / plane.lid[2] - floor).floor();
        for (x, l) in s.iter_mut().zip(plane.lid) {
            *x -= crossings * l;
        }
    }
    atoms
}

/// The largest gap between numbers on a circle of circumference 1: where it ends (the first number above it, in [0, 1))
/// and its width. One number leaves a gap of 1.
pub(super) fn largest_gap(values: impl Iterator<Item = f64>) -> (f64, f64) {
    let mut sorted: Vec<f64> = values.map(|v| v - v.floor()).collect();
    sorted.sort_by(f64::total_cmp);
    let Some((&first, &last)) = sorted.first().zip(sorted.last()) else {
        return (0.0, 1.0);
    };
    let mut best = (first, first + 1.0 - last);
    for pair in sorted.windows(2) {
        if pair[1] - pair[0] > best.1 {
            best = (pair[1], pair[1] - pair[0]);
        }
    }
    best
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reference_frames_follow_the_powers_of_two() {
        assert_eq!(reference_frame_indices(3), [0, 1, 2]);
        assert_eq!(reference_frame_indices(16), (0..16).collect::<Vec<_>>());
        assert_eq!(reference_frame_indices(31), (0..16).collect::<Vec<_>>());
        assert_eq!(reference_frame_indices(301)[..3], [0, 16, 32]);
        assert_eq!(reference_frame_indices(301)[15], 240);
        assert_eq!(reference_frame_indices(2000), reference_frame_indices(100_000));
        assert_eq!(reference_frame_indices(2000)[15], 960);
    }

    #[test]
    fn the_largest_gap_may_span_the_border() {
        let (end, width) = largest_gap([0.2, 0.3, 0.35, 1.6].into_iter());
        assert!(
            (end - 0.2).abs() < 1e-12 && (width - 0.6).abs() < 1e-12,
            "{end} {width}"
        );
        let (end, width) = largest_gap([-0.05, 0.02, 0.9].into_iter());
        assert!(
            (end - 0.9).abs() < 1e-12 && (width - 0.88).abs() < 1e-12,
            "{end} {width}"
        );
    }
}
