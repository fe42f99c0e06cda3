//! The atomic planes of a sheet: one in graphene, three in MX2.

use super::ReferenceSites;
use super::neighbours::SiteBins;

/// Planes closer than this, in A, count as one. Splitting them would change nothing: the buckling of a two-atom basis is a
/// wave at reciprocal lattice vectors, outside the first Brillouin zone.
const SMALLEST_SPACING: f64 = 0.5;

/// Bin width, in A, of the histogram of heights that gaps are looked for in.
const BIN: f64 = 0.1;

/// A bin with less than this share of all atoms counts as empty: tails of thermal motion and stray atoms make no plane.
const EMPTY_SHARE: f64 = 0.002;

/// Which plane each atom belongs to.
#[derive(Clone, Debug, PartialEq)]
pub struct Planes {
    /// Height of each plane over the local mid-surface, in A, ascending.
    pub offsets: Vec<f64>,
    /// Index into `offsets` of each atom.
    pub of_atom: Vec<usize>,
}

impl Planes {
    /// Finds the planes from each site's height over the mean of its neighbourhood, in which ripples longer than a few
    /// atoms cancel, however high they are.
    #[must_use]
    pub fn find(reference: &ReferenceSites) -> Self {
        let sites = reference.in_plane();
        let cell = reference.plane_cell();
        let radius = 4.0 * (cell.area() / sites.len() as f64).sqrt();
        let bins = SiteBins::new(cell, &sites, radius);
        let residual: Vec<f64> = sites
            .iter()
            .zip(&reference.sites)
            .map(|(&centre, site)| {
                let (mut sum, mut count) = (0.0, 0.0);
                bins.around(centre, |n| {
                    sum += reference.sites[n.index][2];
                    count += 1.0;
                });
                site[2] - sum / count
            })
            .collect();
        let offsets = cluster_centres(&residual);
        let of_atom = residual.iter().map(|&r| nearest(&offsets, r)).collect();
        Self { offsets, of_atom }
    }

    /// Number of planes.
    #[must_use]
    pub fn count(&self) -> usize {
        self.offsets.len()
    }

    /// Subtracts from each height the mean height of its own plane in this frame, so that atoms of all planes together
    /// sample the mid-surface.
    pub fn remove_means(&self, heights: &mut [f64]) {
        let mut sum = vec![0.0; self.count()];
        let mut count = vec![0.0; self.count()];
        for (&h, &plane) in heights.iter().zip(&self.of_atom) {
            sum[plane] += h;
            count[plane] += 1.0;
        }
        for (s, c) in sum.iter_mut().zip(count) {
            *s /= c;
        }
        for (h, &plane) in heights.iter_mut().zip(&self.of_atom) {
            *h -= sum[plane];
        }
    }
}

/// Means of the groups of values that gaps of at least [`SMALLEST_SPACING`] separate, ascending.
fn cluster_centres(values: &[f64]) -> Vec<f64> {
    let low = values.iter().copied().fold(f64::INFINITY, f64::min);
    let high = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let bin_of = |v: f64| ((v - low) / BIN) as usize;
    let bins = bin_of(high) + 1;
    let mut counts = vec![0_usize; bins];
    for &v in values {
        counts[bin_of(v)] += 1;
    }
    let least = EMPTY_SHARE * values.len() as f64;
    let gap = (SMALLEST_SPACING / BIN).round() as usize;
    let mut groups: Vec<(usize, usize)> = Vec::new();
    for (bin, _) in counts.iter().enumerate().filter(|&(_, &c)| c as f64 > least) {
        match groups.last_mut() {
            Some((_, last)) if bin - *last < gap => *last = bin,
            _ => groups.push((bin, bin)),
        }
    }
    let centres: Vec<f64> = groups
        .iter()
        .map(|&(first, last)| {
            let members = values.iter().filter(|&&v| (first..=last).contains(&bin_of(v)));
            let (sum, count) = members.fold((0.0, 0.0), |(s, c), v| (s + v, c + 1.0));
            sum / count
        })
        .collect();
    if centres.is_empty() { vec![0.0] } else { centres }
}

fn nearest(offsets: &[f64], value: f64) -> usize {
    let distance = |i: usize| (offsets[i] - value).abs();
    (1..offsets.len()).fold(0, |best, i| if distance(i) < distance(best) { i } else { best })
}
