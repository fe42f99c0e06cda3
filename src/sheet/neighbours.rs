//! Which sites of a periodic sheet are near each other, in the plane.

use crate::theory::PlaneCell;

/// Sites sorted into bins of a periodic plane, for finding all pairs within a radius.
pub struct SiteBins<'a> {
    cell: PlaneCell,
    sites: &'a [[f64; 2]],
    radius: f64,
    counts: [i64; 2],
    /// How many bins a radius may reach across, along each axis.
    reach: [i64; 2],
    start: Vec<u32>,
    members: Vec<u32>,
}

/// A site near another one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Neighbour {
    /// Index of the site.
    pub index: usize,
    /// Which periodic image of it: how many a and b its scaled position is to be moved by.
    pub image: [i32; 2],
    /// From the asking site to this image of the neighbour, in A, a along axis 1.
    pub vector: [f64; 2],
}

impl<'a> SiteBins<'a> {
    /// Bins `sites` (scaled coordinates, any image) for searches within `radius` A. More than one image of a site may be
    /// within the radius where the cell is small.
    #[must_use]
    pub fn new(cell: PlaneCell, sites: &'a [[f64; 2]], radius: f64) -> Self {
        let area = cell.area();
        // Perpendicular extent of the cell along each scaled coordinate.
        let extent = [
            area / cell.b[0].hypot(cell.b[1]),
            area / cell.a[0].hypot(cell.a[1]),
        ];
        let limit = (sites.len() as f64).sqrt().ceil().max(1.0);
        let counts = extent.map(|e| (e / radius).floor().clamp(1.0, limit) as i64);
        let reach = std::array::from_fn(|i| (radius * counts[i] as f64 / extent[i]).ceil() as i64);
        let bins = (counts[0] * counts[1]) as usize;
        let bin_of = |s: [f64; 2]| {
            let place = |i: usize| {
                let fraction = s[i] - s[i].floor();
                ((fraction * counts[i] as f64) as i64).min(counts[i] - 1)
            };
            (place(0) * counts[1] + place(1)) as usize
        };
        let mut start = vec![0_u32; bins + 1];
        for &s in sites {
            start[bin_of(s) + 1] += 1;
        }
        for i in 0..bins {
            start[i + 1] += start[i];
        }
        let mut next = start.clone();
        let mut members = vec![0_u32; sites.len()];
        for (j, &s) in sites.iter().enumerate() {
            let slot = &mut next[bin_of(s)];
            members[*slot as usize] = j as u32;
            *slot += 1;
        }
        Self {
            cell,
            sites,
            radius,
            counts,
            reach,
            start,
            members,
        }
    }

    /// Calls `found` for every site image within the radius of the scaled point `centre`, in a fixed order. A site at the
    /// centre itself is among them.
    pub fn around(&self, centre: [f64; 2], mut found: impl FnMut(Neighbour)) {
        let floor = [centre[0].floor(), centre[1].floor()];
        let inside = [centre[0] - floor[0], centre[1] - floor[1]];
        let home: [i64; 2] =
            std::array::from_fn(|i| ((inside[i] * self.counts[i] as f64) as i64).min(self.counts[i] - 1));
        for i in home[0] - self.reach[0]..=home[0] + self.reach[0] {
            for k in home[1] - self.reach[1]..=home[1] + self.reach[1] {
                let wrapped = [i.div_euclid(self.counts[0]), k.div_euclid(self.counts[1])];
                let bin =
                    (i.rem_euclid(self.counts[0]) * self.counts[1] + k.rem_euclid(self.counts[1])) as usize;
                for &j in &self.members[self.start[bin] as usize..self.start[bin + 1] as usize] {
                    let s = self.sites[j as usize];
                    // The image whose wrapped position lies in this bin, carried back to the asker's own image.
                    let image: [f64; 2] =
                        std::array::from_fn(|x| wrapped[x] as f64 - s[x].floor() + floor[x]);
                    let d = [s[0] + image[0] - centre[0], s[1] + image[1] - centre[1]];
                    let vector = [
                        d[0] * self.cell.a[0] + d[1] * self.cell.b[0],
                        d[0] * self.cell.a[1] + d[1] * self.cell.b[1],
                    ];
                    if vector[0] * vector[0] + vector[1] * vector[1] <= self.radius * self.radius {
                        found(Neighbour {
                            index: j as usize,
                            image: image.map(|x| x as i32),
                            vector,
                        });
                    }
                }
            }
        }
    }
}

/// Median over the atoms of the distance to the nearest other atom (or image), in A: the length of a bond. `atoms` are in
/// sheet coordinates (scaled, scaled, height in A).
#[must_use]
pub fn nearest_distance(cell: PlaneCell, atoms: &[[f64; 3]]) -> f64 {
    let sites: Vec<[f64; 2]> = atoms.iter().map(|s| [s[0], s[1]]).collect();
    let mut radius = 1.5 * (cell.area() / atoms.len() as f64).sqrt();
    loop {
        let bins = SiteBins::new(cell, &sites, radius);
        let mut nearest: Vec<f64> = Vec::with_capacity(atoms.len());
        for (j, atom) in atoms.iter().enumerate() {
            let mut squared = f64::INFINITY;
            bins.around(sites[j], |n| {
                if n.index != j || n.image != [0, 0] {
                    let rise = atoms[n.index][2] - atom[2];
                    squared = squared.min(n.vector[0].powi(2) + n.vector[1].powi(2) + rise * rise);
                }
            });
            nearest.push(squared.sqrt());
        }
        let middle = nearest.len() / 2;
        let (_, median, _) = nearest.select_nth_unstable_by(middle, f64::total_cmp);
        // A nearest atom found beyond the radius may hide a nearer one outside it.
        if *median <= radius {
            return *median;
        }
        radius *= 2.0;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Against the plain double loop over many images, in a skew cell smaller and larger than the radius.
    #[test]
    fn finds_what_a_double_loop_finds() {
        for (scale, radius) in [(1.0, 2.5), (1.0, 9.0), (4.0, 3.1)] {
            let cell = PlaneCell {
                a: [6.0 * scale, 0.0],
                b: [2.5 * scale, 5.0 * scale],
            };
            let sites: Vec<[f64; 2]> = (0..23)
                .map(|j| {
                    [
                        (0.37 * f64::from(j)).sin() * 1.7,
                        (0.83 * f64::from(j)).cos() * 2.2,
                    ]
                })
                .collect();
            let bins = SiteBins::new(cell, &sites, radius);
            for &centre in &sites {
                let mut fast = Vec::new();
                bins.around(centre, |n| fast.push((n.index, n.image)));
                let mut slow = Vec::new();
                for (j, s) in sites.iter().enumerate() {
                    for i in -9..=9 {
                        for k in -9..=9 {
                            let d = [s[0] + f64::from(i) - centre[0], s[1] + f64::from(k) - centre[1]];
                            let x = d[0] * cell.a[0] + d[1] * cell.b[0];
                            let y = d[1] * cell.b[1];
                            if x * x + y * y <= radius * radius {
                                slow.push((j, [i, k]));
                            }
                        }
                    }
                }
                fast.sort_unstable();
                slow.sort_unstable();
                assert_eq!(fast, slow);
            }
        }
    }
}
