//! Synthetic sheets of known bending rigidity and tension, written as trajectories and run through the program: what went
//! in comes out within three of the errors stated. What belongs here: whole runs whose true parameters are known.

mod crystals;
mod harmonic_sheet;
mod program;

use crystals::three_planes;
use harmonic_sheet::{HarmonicSheet, N_PER_M, TEMPERATURE};
use planish::fits::Verdict;
use program::{Job, extended_xyz, pipeline};

const FRAMES: usize = 400;

/// Runs the program on the trajectory and holds rigidity and tension against what went in.
fn recover(sheet: &HarmonicSheet) {
    let job = Job::new();
    job.write(
        "run.xyz",
        extended_xyz(&sheet.crystal.species, &sheet.frames(FRAMES)),
    );
    let run = format!("trajectory = \"run.xyz\"\ntemperature = \"{TEMPERATURE} K\"");
    let text = format!("{}\n[stage.fit]\nplate = \"harmonic\"\n", pipeline(&[&run]));
    job.run(&text).expect(0);
    // Four hundred independent frames fix the longest wave's kappa q^2 + sigma to a few per cent: with larger errors than a
    // tenth of it the test would be idle.
    let bending = sheet.kappa * sheet.smallest_q().powi(2) * N_PER_M;
    for (name, truth, largest_error) in [
        ("bending_rigidity", sheet.kappa, 0.1 * sheet.kappa),
        ("tension", sheet.tension, 0.1 * bending),
    ] {
        // A second record named `tension` holds what was assumed to be held.
        let sheets = job.sheets();
        let mut all = sheets[0].parameter.iter();
        let found = all
            .find(|p| p.name == name && p.method.starts_with("height-spectrum"))
            .unwrap_or_else(|| panic!("no {name} from the heights"));
        let (value, error) = (found.value.expect("a value"), found.error.expect("an error"));
        assert_eq!(found.verdict, Verdict::Good, "{name}: {}", found.note);
        assert!(
            (value - truth).abs() < 3.0 * error,
            "{name}: {value} +- {error}, {truth} went in"
        );
        assert!(error < largest_error, "{name}: {value} +- {error}");
    }
    let area = job.parameter("area_per_atom", "run");
    let truth = sheet.area() / sheet.crystal.sites.len() as f64;
    let (value, error) = (area.value.expect("a value"), area.error.expect("an error"));
    assert!(
        (value - truth).abs() < 3.0 * error,
        "area: {value} +- {error}, {truth} went in"
    );
}

/// Graphene's bending rigidity of 1.44 eV (density functional theory: Wei, Wang, Wu, Yang and Dunn, Nano Lett. 13, 26
/// (2013)), under tension, on the lattice that `crystals` builds.
#[test]
fn a_sheet_of_graphenes_rigidity_under_tension_is_recovered() {
    recover(&HarmonicSheet::honeycomb(12, 7, 1.44, 1.0, 2013));
}

/// Three planes in an oblique cell, with the rigidity of molybdenum disulphide, about 10 eV (Jiang, Qi, Park and
/// Rabczuk, Nanotechnology 24, 435705 (2013); from memory), without tension.
#[test]
fn a_sheet_of_three_planes_in_an_oblique_cell_is_recovered() {
    let a = 3.16;
    recover(&HarmonicSheet {
        crystal: three_planes(12, 10),
        primitive: [[a, 0.0], [a / 2.0, a * 3.0_f64.sqrt() / 2.0]],
        kappa: 10.0,
        tension: 0.0,
        seed: 435_705,
    });
}
