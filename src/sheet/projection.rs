//! Everything about a run's sheet that is found once, and the way of every frame through it.

use serde::{Deserialize, Serialize};

use super::extent::{check_spans_cell, check_thin};
use super::folds::{FoldWatch, check_flat_from_start};
use super::hops::HopWatch;
use super::mode_transform::{ModeTransform, TransformScratch};
use super::{
    Displacements, ModeSet, PlaneFrame, Planes, PrimitiveLattice, ReferenceSites, SheetError, Surface,
};
use crate::frames::{CellAxis, Frame, SheetAtoms, dot, length};
use crate::theory::{BrillouinZone, PlaneCell};

/// Where the height of an atom is taken to be.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Positions {
    /// At the atom's reference site: theory's h is a function of the material point.
    #[default]
    Reference,
    /// Where the atom is in the frame: h as a function of the point in space, which mixes in-plane motion in.
    Instantaneous,
}

/// The sheet of one run: reference sites, planes, lattice, modes; maps frames to surfaces.
#[derive(Clone, Debug)]
pub struct Projection {
    reference: ReferenceSites,
    masses: Option<Vec<f64>>,
    planes: Planes,
    lattice: Option<PrimitiveLattice>,
    folds: FoldWatch,
    hops: HopWatch,
    modes: ModeSet,
    transform: ModeTransform,
    positions: Positions,
    in_plane: Vec<[f64; 2]>,
    /// The same, wrapped into the cell.
    wrapped: Vec<[f64; 2]>,
}

/// Working memory of one thread.
#[derive(Clone, Debug, Default)]
pub struct ProjectionScratch {
    displacements: Displacements,
    heights: Vec<f64>,
    sites: Vec<[f64; 2]>,
    transform: TransformScratch,
}

impl Projection {
    /// Finds the sheet in the reference frames (at least one) of a run.
    ///
    /// `q_max` in 1/A asks for modes beyond the first zone.
    ///
    /// # Errors
    /// Where the selected atoms are no flat periodic sheet: see [`SheetError`].
    pub fn new(
        reference_frames: &[Frame],
        atoms: &SheetAtoms,
        normal: CellAxis,
        positions: Positions,
        q_max: Option<f64>,
    ) -> Result<Self, SheetError> {
        check_thin(&reference_frames[0], normal)?;
        let reference = ReferenceSites::average(reference_frames, atoms.masses.as_deref());
        check_spans_cell(&reference, normal)?;
        let planes = Planes::find(&reference);
        check_flat_from_start(&reference, &planes)?;
        let lattice = PrimitiveLattice::find(&reference, &atoms.species, &planes);
        let zone = BrillouinZone::of_lattice(
            lattice
                .as_ref()
                .map_or_else(|| stand_in_lattice(&reference, &planes), |found| found.vectors),
        );
        let modes = ModeSet::new(reference.plane_cell(), &zone, q_max);
        let in_plane = reference.in_plane();
        let transform = ModeTransform::choose(&in_plane, &modes, positions == Positions::Instantaneous);
        Ok(Self {
            folds: FoldWatch::new(&reference, &planes),
            hops: HopWatch::new(&reference),
            masses: atoms.masses.clone(),
            reference,
            planes,
            lattice,
            modes,
            transform,
            positions,
            wrapped: in_plane.iter().map(|s| s.map(|x| x - x.floor())).collect(),
            in_plane,
        })
    }

    /// The modes that every surface of this run has.
    #[must_use]
    pub fn modes(&self) -> &ModeSet {
        &self.modes
    }

    /// The reference sites.
    #[must_use]
    pub fn reference(&self) -> &ReferenceSites {
        &self.reference
    }

    /// The atomic planes.
    #[must_use]
    pub fn planes(&self) -> &Planes {
        &self.planes
    }

    /// The primitive lattice, where the sites have one.
    #[must_use]
    pub fn lattice(&self) -> Option<&PrimitiveLattice> {
        self.lattice.as_ref()
    }

    /// How modes are computed.
    #[must_use]
    pub fn transform_name(&self) -> &'static str {
        self.transform.name()
    }

    /// Projects one frame.
    ///
    /// # Errors
    /// [`SheetError::Folded`] where the surface turns over.
    pub fn surface(&self, frame: &Frame, scratch: &mut ProjectionScratch) -> Result<Surface, SheetError> {
        let plane = PlaneFrame::new(&frame.cell, self.reference.normal);
        let displacements = &mut scratch.displacements;
        displacements.measure(
            &plane,
            &frame.positions,
            &self.reference.sites,
            self.masses.as_deref(),
        );
        self.folds.check(&plane, displacements)?;
        let hopped = self.hops.first_hop(&plane, displacements);

        let heights = &mut scratch.heights;
        heights.clear();
        heights.extend(
            displacements
                .relative
                .iter()
                .zip(&self.reference.sites)
                .map(|(d, site)| d[2] + site[2]),
        );
        let [aa, ab, bb] = plane.metric;
        let slope = mean_slope(PlaneCell::from_metric(aa, ab, bb), &self.wrapped, heights);
        self.planes.remove_means(heights);

        scratch.sites.clear();
        if self.positions == Positions::Instantaneous {
            let moved = displacements.relative.iter().zip(&self.in_plane);
            scratch
                .sites
                .extend(moved.map(|(d, site)| [site[0] + d[0], site[1] + d[1]]));
        }
        let mut modes = Vec::new();
        self.transform.apply(
            &scratch.sites,
            heights,
            &self.modes,
            &mut scratch.transform,
            &mut modes,
        );
        let [a, b, _] = frame.cell.vectors;
        Ok(Surface {
            modes,
            metric: plane.metric,
            mean_height: displacements.drift[2],
            tilt: [a, b].map(|v| dot(v, self.reference.normal) / length(v)),
            slope,
            hopped,
        })
    }
}

/// Primitive vectors of a triangular lattice with one point for each atom of the fullest plane: the zone of a sheet
/// without a lattice of its own.
fn stand_in_lattice(reference: &ReferenceSites, planes: &Planes) -> [[f64; 2]; 2] {
    let fullest = (0..planes.count())
        .map(|plane| planes.of_atom.iter().filter(|&&p| p == plane).count())
        .max()
        .unwrap_or(1);
    let area = reference.plane_cell().area() / fullest as f64;
    // Area of the triangular lattice's cell: sqrt(3)/2 a^2.
    let a = (2.0 * area / 3.0_f64.sqrt()).sqrt();
    [[a, 0.0], [a / 2.0, a * 3.0_f64.sqrt() / 2.0]]
}

/// Slope along axes 1 and 2 of the least-squares plane through heights over sites (scaled, all in one cell).
fn mean_slope(cell: PlaneCell, sites: &[[f64; 2]], heights: &[f64]) -> [f64; 2] {
    let count = sites.len() as f64;
    let point = |&[s1, s2]: &[f64; 2]| [s1 * cell.a[0] + s2 * cell.b[0], s1 * cell.a[1] + s2 * cell.b[1]];
    let mut mean = [0.0; 3];
    for (site, &h) in sites.iter().zip(heights) {
        let [x, y] = point(site);
        mean = [mean[0] + x, mean[1] + y, mean[2] + h];
    }
    let mean = mean.map(|sum| sum / count);
    let (mut xx, mut xy, mut yy, mut xh, mut yh) = (0.0, 0.0, 0.0, 0.0, 0.0);
    for (site, &h) in sites.iter().zip(heights) {
        let [x, y] = point(site);
        let (x, y, h) = (x - mean[0], y - mean[1], h - mean[2]);
        xx += x * x;
        xy += x * y;
        yy += y * y;
        xh += x * h;
        yh += y * h;
    }
    let determinant = xx * yy - xy * xy;
    [
        (yy * xh - xy * yh) / determinant,
        (xx * yh - xy * xh) / determinant,
    ]
}
