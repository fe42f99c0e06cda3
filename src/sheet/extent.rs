//! Whether the selected atoms are a sheet at all: thin along its normal, closed on itself in the plane.

use super::neighbours::SiteBins;
use super::reference_sites::largest_gap;
use super::{PlaneFrame, ReferenceSites, SheetError, unit_normal};
use crate::frames::{Cell, CellAxis, Frame};

/// A sheet leaves at least this much vacuum along its normal, in A; graphite's layers are 3.35 A apart.
const LEAST_VACUUM: f64 = 3.0;

/// An in-plane gap this wide, in A, beside atoms that fill the normal axis says that the axes are mixed up.
const IN_PLANE_GAP: f64 = 6.0;

/// Atoms within this many bond lengths, in the plane, connect: past second neighbours, short of any vacuum.
const CONNECTED: f64 = 2.5;

/// Refuses a selection that is thick along its normal axis. `frame` is any frame of the run, its normal axis last and
/// named `normal` in the file.
///
/// # Errors
/// [`SheetError::NormalNotThin`] and [`SheetError::NoVacuum`].
pub fn check_thin(frame: &Frame, normal: CellAxis) -> Result<(), SheetError> {
    let [a, b, c] = frame.cell.vectors;
    let gap_along = |first: [f64; 3], second: [f64; 3], out: [f64; 3]| {
        let cell = Cell {
            vectors: [first, second, out],
        };
        let plane = PlaneFrame::new(&cell, unit_normal(&cell));
        let height = plane.lid[2];
        let (_, gap) = largest_gap(frame.positions.iter().map(|&r| plane.coordinates(r)[2] / height));
        gap * height.abs()
    };
    let names = match normal {
        CellAxis::A => [CellAxis::B, CellAxis::C, CellAxis::A],
        CellAxis::B => [CellAxis::C, CellAxis::A, CellAxis::B],
        CellAxis::C => [CellAxis::A, CellAxis::B, CellAxis::C],
    };
    let gap = gap_along(a, b, c);
    let (thin, thin_gap) = [(names[0], gap_along(b, c, a)), (names[1], gap_along(c, a, b))]
        .into_iter()
        .fold(
            (normal, gap),
            |best, next| if next.1 > best.1 { next } else { best },
        );
    if thin != normal && thin_gap > IN_PLANE_GAP && gap < thin_gap / 2.0 {
        return Err(SheetError::NormalNotThin {
            named: normal,
            gap,
            thin,
            thin_gap,
        });
    }
    if gap < LEAST_VACUUM {
        return Err(SheetError::NoVacuum {
            axis: normal,
            gap,
            needed: LEAST_VACUUM,
        });
    }
    Ok(())
}

/// Refuses reference sites that do not span the cell.
///
/// # Errors
/// [`SheetError::TooFewAtoms`] and [`SheetError::NotPeriodic`].
pub fn check_spans_cell(reference: &ReferenceSites, normal: CellAxis) -> Result<(), SheetError> {
    const LEAST_ATOMS: usize = 4;
    if reference.len() < LEAST_ATOMS {
        return Err(SheetError::TooFewAtoms {
            found: reference.len(),
            needed: LEAST_ATOMS,
        });
    }
    let connected = connected_directions(reference);
    if connected != [true, true] {
        let names = match normal {
            CellAxis::A => ["b", "c"],
            CellAxis::B => ["c", "a"],
            CellAxis::C => ["a", "b"],
        };
        let open: Vec<&str> = names
            .into_iter()
            .zip(connected)
            .filter(|(_, c)| !c)
            .map(|(n, _)| n)
            .collect();
        return Err(SheetError::NotPeriodic {
            axes: open.join(" and "),
        });
    }
    Ok(())
}

/// Whether bonded atoms connect through the cell's boundary along a and along b: the largest connected piece is followed
/// with its periodic images, and a chain that returns to its start in another image closes the sheet in that direction.
fn connected_directions(reference: &ReferenceSites) -> [bool; 2] {
    let sites = reference.in_plane();
    let bins = SiteBins::new(reference.plane_cell(), &sites, CONNECTED * reference.spacing);
    let mut visited: Vec<Option<[i32; 2]>> = vec![None; sites.len()];
    let mut largest = (0, [false; 2]);
    let mut stack = Vec::new();
    for seed in 0..sites.len() {
        if visited[seed].is_some() {
            continue;
        }
        visited[seed] = Some([0, 0]);
        stack.push(seed);
        let mut size = 0;
        // Two independent returns span the plane even in a cell whose closing chains run diagonally.
        let mut returns: Vec<[i32; 2]> = Vec::new();
        while let Some(j) = stack.pop() {
            size += 1;
            let here = visited[j].unwrap_or([0, 0]);
            bins.around(sites[j], |n| {
                let there = [here[0] + n.image[0], here[1] + n.image[1]];
                match visited[n.index] {
                    None => {
                        visited[n.index] = Some(there);
                        stack.push(n.index);
                    }
                    Some(seen) if seen != there => {
                        let step = [there[0] - seen[0], there[1] - seen[1]];
                        let independent = returns.iter().all(|r| r[0] * step[1] != r[1] * step[0]);
                        if returns.len() < 2 && independent {
                            returns.push(step);
                        }
                    }
                    Some(_) => {}
                }
            });
        }
        let closed = match returns.as_slice() {
            [] => [false, false],
            [one] => [one[0] != 0 && one[1] == 0, one[1] != 0 && one[0] == 0],
            _ => [true, true],
        };
        if size > largest.0 {
            largest = (size, closed);
        }
    }
    largest.1
}
