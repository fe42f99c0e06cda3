//! Projection: sheets whose waves are known in closed form come back as exactly those waves, whatever is done to their
//! atoms that no physics depends on (order, wrapping, drift, image); and what is no sheet is refused.

mod crystals;

use std::f64::consts::TAU;

use crystals::{Crystal, honeycomb, honeycomb_oblique, square, three_planes};
use num_complex::Complex64;
use planish::frames::{CellAxis, Frame, SheetAtoms};
use planish::sheet::{Positions, Projection, ProjectionScratch, SheetError, Surface};

/// Waves put on the sheets below: integers, amplitude in A, phase.
const WAVES: [([i32; 2], f64, f64); 4] = [
    ([1, 0], 1.3, 0.4),
    ([0, 1], 0.8, -1.0),
    ([1, -2], 0.5, 2.2),
    ([3, 2], 0.2, 0.9),
];

fn height(s: [f64; 3]) -> f64 {
    WAVES
        .iter()
        .map(|(m, amplitude, phase)| {
            amplitude * (TAU * (f64::from(m[0]) * s[0] + f64::from(m[1]) * s[1]) + phase).cos()
        })
        .sum()
}

/// h_q of the waves above: a cos(q.R + phase) has h_q = (a/2) exp(i phase).
fn expected(m: [i32; 2]) -> Complex64 {
    WAVES
        .iter()
        .find(|w| w.0 == m)
        .map_or(Complex64::default(), |w| Complex64::from_polar(w.1 / 2.0, w.2))
}

fn rippled(crystal: &Crystal) -> Frame {
    crystal.frame(|j| [0.0, 0.0, height(crystal.sites[j])])
}

fn project(frames: &[Frame], atoms: &SheetAtoms, frame: &Frame) -> (Projection, Surface) {
    let projection =
        Projection::new(frames, atoms, CellAxis::C, Positions::Reference, None).expect("a sheet");
    let surface = projection
        .surface(frame, &mut ProjectionScratch::default())
        .expect("no fold");
    (projection, surface)
}

fn assert_waves(projection: &Projection, surface: &Surface, tolerance: f64, what: &str) {
    for (&m, &found) in projection.modes().integers.iter().zip(&surface.modes) {
        assert!(
            (found - expected(m)).norm() < tolerance,
            "{what}: mode {m:?} is {found}, not {}",
            expected(m)
        );
    }
}

#[test]
fn waves_come_back_exactly_on_every_lattice() {
    for (crystal, what) in [
        (honeycomb(21, 12), "rectangular honeycomb"),
        (honeycomb_oblique(17, 23), "oblique honeycomb"),
        (three_planes(14, 11), "three planes"),
        (square(20, 2.5), "square"),
    ] {
        let frame = rippled(&crystal);
        let (projection, surface) = project(std::slice::from_ref(&frame), &crystal.atoms(), &frame);
        assert_waves(&projection, &surface, 1e-9, what);
        assert!(surface.hopped.is_none());
    }
}

/// A larger sheet takes the fast transform; the same waves must come back.
#[test]
fn waves_come_back_through_the_fast_transform() {
    let crystal = honeycomb(48, 30);
    let frame = rippled(&crystal);
    let (projection, surface) = project(std::slice::from_ref(&frame), &crystal.atoms(), &frame);
    assert_eq!(projection.transform_name(), "non-uniform FFT");
    assert_waves(&projection, &surface, 1e-8, "fast transform");
}

#[test]
fn order_wrapping_drift_and_images_do_not_matter() {
    let crystal = honeycomb(9, 7);
    let flat = crystal.frame(|_| [0.0; 3]);
    let plain = rippled(&crystal);
    let (projection, surface) = project(std::slice::from_ref(&flat), &crystal.atoms(), &plain);
    assert_waves(&projection, &surface, 1e-9, "plain");

    let thrown = Frame {
        positions: plain
            .positions
            .iter()
            .enumerate()
            .map(|(j, r)| {
                let image = [(j % 3) as f64 - 1.0, (j % 4) as f64, (j % 2) as f64 - 1.0];
                let v = crystal.cell.vectors;
                std::array::from_fn(|i| {
                    r[i] + [211.7, -33.1, 17.0][i]
                        + image[0] * v[0][i]
                        + image[1] * v[1][i]
                        + image[2] * v[2][i]
                })
            })
            .collect(),
        ..plain.clone()
    };
    let again = projection
        .surface(&thrown, &mut ProjectionScratch::default())
        .expect("no fold");
    assert_waves(&projection, &again, 1e-9, "thrown about");

    // Shuffled atoms: another order of summation, the same modes.
    let order: Vec<usize> = (0..crystal.sites.len())
        .map(|j| (j * 5 + 3) % crystal.sites.len())
        .collect();
    let shuffle = |frame: &Frame| Frame {
        positions: order.iter().map(|&j| frame.positions[j]).collect(),
        ..frame.clone()
    };
    let atoms = SheetAtoms {
        species: order.iter().map(|&j| crystal.species[j].clone()).collect(),
        ..crystal.atoms()
    };
    let (projection, surface) = project(&[shuffle(&flat)], &atoms, &shuffle(&plain));
    assert_waves(&projection, &surface, 1e-9, "shuffled");
}

/// A sheet that the file holds wrapped through the lid of its cell is one sheet.
#[test]
fn a_sheet_cut_by_the_lid_is_joined() {
    let crystal = honeycomb(9, 7);
    let mut frame = rippled(&crystal);
    for r in &mut frame.positions {
        r[2] = r[2].rem_euclid(40.0);
    }
    let (projection, surface) = project(std::slice::from_ref(&frame), &crystal.atoms(), &frame);
    assert_waves(&projection, &surface, 1e-9, "cut by the lid");
    assert_eq!(projection.planes().count(), 1);
}

/// In-plane motion moves atoms but not their material points: reference sites give the wave, instantaneous ones mix.
#[test]
fn heights_belong_to_material_points() {
    let crystal = honeycomb(21, 12);
    let flat = crystal.frame(|_| [0.0; 3]);
    let moved = crystal.frame(|j| {
        let s = crystal.sites[j];
        [0.8 * (TAU * s[0]).sin(), 0.0, height(s)]
    });
    let (projection, surface) = project(std::slice::from_ref(&flat), &crystal.atoms(), &moved);
    assert_waves(&projection, &surface, 1e-9, "reference sites");
    let other = Projection::new(
        &[flat],
        &crystal.atoms(),
        CellAxis::C,
        Positions::Instantaneous,
        None,
    )
    .expect("a sheet");
    let mixed = other
        .surface(&moved, &mut ProjectionScratch::default())
        .expect("no fold");
    let largest = other
        .modes()
        .integers
        .iter()
        .zip(&mixed.modes)
        .map(|(&m, h)| (h - expected(m)).norm())
        .fold(0.0, f64::max);
    assert!(
        largest > 0.01,
        "in-plane motion must show in the instantaneous projection, largest shift {largest}"
    );
}

/// A cell whose a and b lean out of the mean plane: tilt is reported, and no ramp enters the heights.
#[test]
fn a_leaning_cell_adds_no_ramp() {
    let mut crystal = honeycomb(9, 7);
    let level = crystal.frame(|_| [0.0; 3]);
    crystal.cell.vectors[0][2] = 1.5;
    let leaning = rippled(&crystal);
    let (projection, surface) = project(&[level], &crystal.atoms(), &leaning);
    assert_waves(&projection, &surface, 1e-9, "leaning");
    let sine = 1.5 / crystal.cell.vectors[0][0].hypot(1.5);
    assert!((surface.tilt[0] - sine).abs() < 1e-12 && surface.tilt[1] == 0.0);
}

/// The number of independent waves of a crystal is the number of its primitive cells (Born and von Karman; Ashcroft and
/// Mermin, Solid State Physics, ch. 8): weights of +-q and of q = 0 add up to it.
#[test]
fn the_zone_holds_one_wave_a_primitive_cell() {
    for (crystal, cells) in [
        (honeycomb(21, 12), 504),
        (honeycomb_oblique(17, 23), 17 * 23),
        (three_planes(14, 11), 14 * 11),
        (square(20, 2.5), 400),
        (square(21, 2.5), 441),
    ] {
        let frame = rippled(&crystal);
        let (projection, _) = project(std::slice::from_ref(&frame), &crystal.atoms(), &frame);
        assert_eq!(projection.lattice().map(|l| l.cells), Some(cells));
        let weight: f64 = projection.modes().zone_weight.iter().sum();
        assert!(
            (2.0 * weight + 1.0 - cells as f64).abs() < 1e-6,
            "{weight} for {cells}"
        );
    }
}

/// Thermal scatter of the sites and vacancies do not hide the lattice; a random sheet has none.
#[test]
fn the_lattice_is_found_through_scatter_and_vacancies() {
    let crystal = honeycomb(21, 12);
    let noise = |j: usize, k: f64| 0.09 * ((j as f64 * 12.9898 + k).sin() * 43758.5453).fract();
    let mut frame = crystal.frame(|j| [noise(j, 1.0), noise(j, 2.0), 3.0 * noise(j, 3.0)]);
    let mut atoms = crystal.atoms();
    for gone in [700, 333, 12] {
        frame.positions.remove(gone);
        atoms.species.remove(gone);
        atoms.indices.pop();
    }
    let (projection, _) = project(std::slice::from_ref(&frame), &atoms, &frame);
    assert_eq!(projection.lattice().map(|l| l.cells), Some(504));

    let wild = crystal.frame(|j| [8.0 * noise(j, 1.0), 8.0 * noise(j, 2.0), 0.0]);
    let (projection, _) = project(std::slice::from_ref(&wild), &crystal.atoms(), &wild);
    assert_eq!(projection.lattice(), None);
}

#[test]
fn three_planes_are_told_apart_under_ripples_higher_than_their_spacing() {
    let crystal = three_planes(40, 36);
    let frame = crystal.frame(|j| [0.0, 0.0, 6.0 * (TAU * crystal.sites[j][0]).sin()]);
    let (projection, _) = project(std::slice::from_ref(&frame), &crystal.atoms(), &frame);
    let offsets = &projection.planes().offsets;
    assert_eq!(offsets.len(), 3, "{offsets:?}");
    for (found, known) in offsets.iter().zip([-1.56, 0.0, 1.56]) {
        assert!((found - known).abs() < 0.1, "{offsets:?}");
    }
}

fn refusal(frame: Frame, atoms: &SheetAtoms, normal: CellAxis) -> SheetError {
    Projection::new(&[frame], atoms, normal, Positions::Reference, None).expect_err("must be refused")
}

#[test]
fn ribbons_and_flakes_are_refused() {
    let mut ribbon = honeycomb(9, 7);
    ribbon.cell.vectors[1][1] += 20.0;
    let shrunk = |crystal: &Crystal| {
        let full = honeycomb(9, 7);
        Frame {
            cell: crystal.cell,
            ..full.frame(|_| [0.0; 3])
        }
    };
    let error = refusal(shrunk(&ribbon), &ribbon.atoms(), CellAxis::C);
    assert_eq!(error, SheetError::NotPeriodic { axes: "b".into() });
    assert!(
        error
            .to_string()
            .contains("ribbons and flakes are not supported yet"),
        "{error}"
    );
    let mut flake = ribbon.clone();
    flake.cell.vectors[0][0] += 20.0;
    let error = refusal(shrunk(&flake), &flake.atoms(), CellAxis::C);
    assert_eq!(
        error,
        SheetError::NotPeriodic {
            axes: "a and b".into()
        }
    );
}

#[test]
fn a_normal_that_is_not_the_thin_axis_is_named() {
    let crystal = honeycomb(9, 7);
    let mut frame = rippled(&crystal);
    frame.cell = frame.cell.with_normal_last(CellAxis::A);
    let error = refusal(frame, &crystal.atoms(), CellAxis::A);
    assert!(
        matches!(
            error,
            SheetError::NormalNotThin {
                named: CellAxis::A,
                thin: CellAxis::C,
                ..
            }
        ),
        "{error:?}"
    );
    assert!(error.to_string().contains("set normal = \"c\""), "{error}");
}

#[test]
fn a_bulk_crystal_is_refused() {
    let crystal = three_planes(6, 6);
    let mut frame = crystal.frame(|_| [0.0; 3]);
    frame.cell.vectors[2][2] = 5.0;
    assert!(matches!(
        refusal(frame, &crystal.atoms(), CellAxis::C),
        SheetError::NoVacuum { .. }
    ));
}

/// The sheet bent along a without stretching, its tangent swinging to `angle` (radians) either side: beyond pi/2 it lies
/// over itself. The cell shrinks to the projected length.
fn swinging_tangent(crystal: &Crystal, angle: f64) -> Frame {
    let length = crystal.cell.vectors[0][0];
    let steps = 20_000;
    let mut path = vec![[0.0; 2]];
    for k in 0..steps {
        let tangent = angle * (TAU * (k as f64 + 0.5) / steps as f64).sin();
        let [x, z] = path[k];
        path.push([
            x + tangent.cos() * length / steps as f64,
            z + tangent.sin() * length / steps as f64,
        ]);
    }
    let mut frame = crystal.frame(|_| [0.0; 3]);
    for (r, s) in frame.positions.iter_mut().zip(&crystal.sites) {
        let [x, z] = path[(s[0] * steps as f64).round() as usize];
        *r = [x, r[1], z];
    }
    frame.cell.vectors[0][0] = path[steps][0];
    frame
}

#[test]
fn a_sheet_that_turns_over_during_the_run_is_refused() {
    let crystal = honeycomb(21, 12);
    let (projection, _) = project(&[rippled(&crystal)], &crystal.atoms(), &rippled(&crystal));
    let folded = swinging_tangent(&crystal, 1.9);
    let error = projection
        .surface(&folded, &mut ProjectionScratch::default())
        .expect_err("folded");
    assert!(matches!(error, SheetError::Folded { .. }), "{error}");
    assert!(error.to_string().contains("folds over itself"), "{error}");
}

#[test]
fn a_sheet_folded_from_the_start_is_refused() {
    let crystal = honeycomb(21, 12);
    let error = refusal(swinging_tangent(&crystal, 1.9), &crystal.atoms(), CellAxis::C);
    assert!(matches!(error, SheetError::Folded { .. }), "{error}");
}

/// Two neighbours that change places are told, whenever it happens: after the reference frames or between them.
#[test]
fn hops_are_told() {
    let crystal = honeycomb(9, 7);
    let start = rippled(&crystal);
    let mut swapped = start.clone();
    swapped.positions.swap(100, 102);
    let (projection, _) = project(std::slice::from_ref(&start), &crystal.atoms(), &start);
    let surface = projection
        .surface(&swapped, &mut ProjectionScratch::default())
        .expect("no fold");
    assert_eq!(surface.hopped, Some(100));

    let half: Vec<Frame> = (0..16)
        .map(|k| if k < 9 { start.clone() } else { swapped.clone() })
        .collect();
    let (projection, before) = project(&half, &crystal.atoms(), &start);
    assert_eq!(before.hopped, None);
    let after = projection
        .surface(&swapped, &mut ProjectionScratch::default())
        .expect("no fold");
    assert_eq!(after.hopped, Some(100));
    assert_eq!(projection.reference().moved[100], Some(9));
}

#[test]
fn too_few_atoms_are_refused() {
    let crystal = square(1, 3.0);
    assert!(matches!(
        refusal(crystal.frame(|_| [0.0; 3]), &crystal.atoms(), CellAxis::C),
        SheetError::TooFewAtoms { found: 1, .. }
    ));
}
