//! Displacements from reference positions: wrapping undone and drift removed, each frame by itself.

use super::PlaneFrame;

/// Where each atom of a frame is, relative to its reference position.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Displacements {
    /// (d1, d2) in scaled units, d3 in A: drift-free, the nearest periodic image.
    pub relative: Vec<[f64; 3]>,
    /// Displacement of the centre of mass from the reference's, (scaled, scaled, A), modulo the cell.
    pub drift: [f64; 3],
}

impl Displacements {
    /// Displacements of `positions` (Cartesian, A) from `reference` (sheet coordinates), both in the same order.
    ///
    /// No frame before it is asked: a sheet that drifts by any distance between frames, wrapped or not, comes out the
    /// same. The centre is the centre of mass where `masses` are known, of the atoms otherwise.
    pub fn measure(
        &mut self,
        plane: &PlaneFrame,
        positions: &[[f64; 3]],
        reference: &[[f64; 3]],
        masses: Option<&[f64]>,
    ) {
        self.relative.clear();
        self.relative
            .extend(positions.iter().zip(reference).map(|(&position, site)| {
                let [s1, s2, h] = plane.coordinates(position);
                [s1 - site[0], s2 - site[1], h - site[2]]
            }));
        let base = self.common_shift(plane);
        for d in &mut self.relative {
            wrap(d, base, plane.lid);
        }
        let centre = weighted_mean(&self.relative, masses);
        for d in &mut self.relative {
            for (x, c) in d.iter_mut().zip(centre) {
                *x -= c;
            }
        }
        self.drift = std::array::from_fn(|i| base[i] + centre[i]);
    }

    /// A shift near which all displacements lie, so that wrapping about it cannot split the sheet.
    ///
    /// The first atom's own is one, unless that atom has wandered by a quarter of the cell against the others (a hop, a
    /// lost atom): then the circular mean of all, which no single atom moves.
    fn common_shift(&self, plane: &PlaneFrame) -> [f64; 3] {
        let Some(&first) = self.relative.first() else {
            return [0.0; 3];
        };
        let lone = self.relative.iter().any(|d| {
            let mut d = *d;
            wrap(&mut d, first, plane.lid);
            d[0].abs() > 0.25 || d[1].abs() > 0.25 || (d[2] / plane.lid[2]).abs() > 0.25
        });
        if !lone {
            return first;
        }
        let height = circular_mean(self.relative.iter().map(|d| d[2] / plane.lid[2])) * plane.lid[2];
        let lowered: Vec<[f64; 3]> = self
            .relative
            .iter()
            .map(|d| {
                let crossings = ((d[2] - height) / plane.lid[2]).round();
                std::array::from_fn(|i| d[i] - crossings * plane.lid[i])
            })
            .collect();
        [
            circular_mean(lowered.iter().map(|d| d[0])),
            circular_mean(lowered.iter().map(|d| d[1])),
            height,
        ]
    }
}

/// Subtracts `base` and then whole cells, so that the rest is the nearest image: first through the lid, then in plane.
fn wrap(d: &mut [f64; 3], base: [f64; 3], lid: [f64; 3]) {
    for (x, b) in d.iter_mut().zip(base) {
        *x -= b;
    }
    let crossings = whole(d[2] / lid[2]);
    if crossings != 0.0 {
        for (x, l) in d.iter_mut().zip(lid) {
            *x -= crossings * l;
        }
    }
    d[0] -= whole(d[0]);
    d[1] -= whole(d[1]);
}

/// The nearest whole number. Nearly always it is zero, and rounding is a call into the mathematics library.
#[inline]
fn whole(x: f64) -> f64 {
    if x.abs() < 0.5 { 0.0 } else { x.round() }
}

/// Mean of numbers on a circle of circumference 1, in (-1/2, 1/2].
fn circular_mean(values: impl Iterator<Item = f64>) -> f64 {
    let (mut cosine, mut sine) = (0.0, 0.0);
    for value in values {
        let (s, c) = (std::f64::consts::TAU * value).sin_cos();
        cosine += c;
        sine += s;
    }
    sine.atan2(cosine) / std::f64::consts::TAU
}

/// Mean of the displacements, weighted by mass where known.
fn weighted_mean(relative: &[[f64; 3]], masses: Option<&[f64]>) -> [f64; 3] {
    let mut sum = [0.0; 3];
    let mut total = 0.0;
    for (j, d) in relative.iter().enumerate() {
        let weight = masses.map_or(1.0, |m| m[j]);
        total += weight;
        for (s, x) in sum.iter_mut().zip(d) {
            *s += weight * x;
        }
    }
    if total > 0.0 { sum.map(|s| s / total) } else { sum }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::frames::Cell;
    use crate::sheet::plane_frame::unit_normal;

    /// Wrapping every atom anywhere and moving the whole sheet by any vector leaves displacements unchanged.
    #[test]
    fn wrapping_and_drift_do_not_matter() {
        let cell = Cell {
            vectors: [[20.0, 0.0, 0.0], [6.0, 15.0, 0.0], [2.0, 1.0, 30.0]],
        };
        let plane = PlaneFrame::new(&cell, unit_normal(&cell));
        let reference: Vec<[f64; 3]> = (0..40)
            .map(|j| {
                [
                    f64::from(j % 8) / 8.0,
                    f64::from(j / 8) / 5.0,
                    0.1 * f64::from(j % 3),
                ]
            })
            .collect();
        let moved = |j: usize| {
            let j = j as f64;
            [
                0.3 * (1.3 * j).sin(),
                0.25 * (2.1 * j).cos(),
                0.8 * (0.7 * j).sin(),
            ]
        };
        let position = |j: usize| -> [f64; 3] {
            let [s1, s2, h] = reference[j];
            let [a, b, _] = cell.vectors;
            let n = unit_normal(&cell);
            std::array::from_fn(|i| s1 * a[i] + s2 * b[i] + h * n[i] + moved(j)[i])
        };
        let flat: Vec<[f64; 3]> = (0..40).map(position).collect();
        let mut plain = Displacements::default();
        plain.measure(&plane, &flat, &reference, None);
        let thrown: Vec<[f64; 3]> = flat
            .iter()
            .enumerate()
            .map(|(j, r)| {
                let images = [(j % 3) as f64 - 1.0, (j % 5) as f64 - 2.0, (j % 2) as f64];
                std::array::from_fn(|i| {
                    r[i] + [7.3, -41.0, 12.5][i] + (0..3).map(|k| images[k] * cell.vectors[k][i]).sum::<f64>()
                })
            })
            .collect();
        let mut again = Displacements::default();
        again.measure(&plane, &thrown, &reference, None);
        for (x, y) in plain
            .relative
            .iter()
            .flatten()
            .zip(again.relative.iter().flatten())
        {
            assert!((x - y).abs() < 1e-12);
        }
    }

    /// One lost atom does not tear the sheet: the others keep their displacements up to the centre's share.
    #[test]
    fn a_wandering_first_atom_does_not_split_the_sheet() {
        let cell = Cell {
            vectors: [[10.0, 0.0, 0.0], [0.0, 10.0, 0.0], [0.0, 0.0, 30.0]],
        };
        let plane = PlaneFrame::new(&cell, [0.0, 0.0, 1.0]);
        let reference: Vec<[f64; 3]> = (0..25)
            .map(|j| [f64::from(j % 5) / 5.0, f64::from(j / 5) / 5.0, 0.0])
            .collect();
        let mut positions: Vec<[f64; 3]> = reference
            .iter()
            .map(|s| [10.0 * s[0], 10.0 * s[1], 0.0])
            .collect();
        positions[0] = [5.0, 4.9, 3.0];
        let mut found = Displacements::default();
        found.measure(&plane, &positions, &reference, None);
        let others = &found.relative[1..];
        assert!(
            others
                .iter()
                .all(|d| (d[0] - others[0][0]).abs() < 1e-12 && (d[1] - others[0][1]).abs() < 1e-12)
        );
    }
}
