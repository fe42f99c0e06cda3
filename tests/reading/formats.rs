//! Each format gives cell and positions that belong together.

use planish::frames::{CellAxis, Clock, EngineUnits, RunInput};
use rstest::rstest;
use std::fmt::Write as _;

use super::files::{
    BOX, CORNER, ROTATED, TRICLINIC, Vectors, cartesian, check_lattice, dump, extended_xyz, folder, input,
    next, open, read, refused, says, scaled, words, write, write_binary,
};

#[rstest]
fn extended_xyz_keeps_cell_and_positions_together(#[values(&TRICLINIC, &ROTATED, &BOX)] cell: &Vectors) {
    let folder = folder();
    let path = write(&folder, "t.xyz", extended_xyz(cell, &[0.0]));
    let mut run = open(&input(&[&path]));
    check_lattice(&mut run, 0, cell, [0.0; 3], 1e-9);
    assert_eq!(run.atoms().species[..2], ["B", "N"]);
    // Standard atomic masses of boron and nitrogen, IUPAC 2021 abridged: 10.81 and 14.007.
    let masses = run.atoms().masses.as_ref().expect("elements have masses");
    assert!(
        (masses[0] - 10.81).abs() < 0.01 && (masses[1] - 14.007).abs() < 0.001,
        "{masses:?}"
    );
}

/// XTC stores single precision in nm and positions to 0.01 A, GRO three decimals in nm, PDB three in A and angles to 0.01.
#[rstest]
#[case("t.xtc", &TRICLINIC, 2e-3)]
#[case("t.trr", &ROTATED, 1e-5)]
#[case("t.gro", &TRICLINIC, 1e-2)]
#[case("t.xyz.gz", &TRICLINIC, 1e-4)]
#[case("t.xyz.xz", &ROTATED, 1e-4)]
#[case("t.xyz.bz2", &ROTATED, 1e-4)]
#[case("t.lammpstrj.xz", &BOX, 1e-3)]
#[case("t.lammpstrj.bz2", &BOX, 1e-3)]
#[case("t.pdb", &TRICLINIC, 1e-2)]
fn formats_keep_cell_and_positions_together(#[case] name: &str, #[case] cell: &Vectors, #[case] error: f64) {
    let folder = folder();
    let path = write_binary(&folder, name, cell, &[0.0, 0.4, 0.8]);
    let mut run = open(&input(&[&path]));
    assert_eq!((run.len(), run.source_len(), run.source_atoms()), (3, 3, 12));
    for k in [0, 1, 2, 0, 2] {
        check_lattice(&mut run, k, cell, [0.0; 3], error);
    }
}

#[test]
fn a_text_dump_of_a_tilted_box_is_read_with_its_edges_in_every_form() {
    let at = |s: [f64; 3], b: f64| {
        let p = cartesian(&TRICLINIC, [s[0], s[1] + b, s[2]]);
        words(std::array::from_fn(|i| CORNER[i] + p[i]))
    };
    let texts = [
        dump("x y z", |s| at(s, 0.0), next, 3),
        dump("xs ys zs", words, next, 3),
        dump("xu yu zu", |s| at(s, 0.0), next, 3),
        dump("xsu ysu zsu vx", |s| words(s) + " 7", next, 3),
        // Wrapped coordinates one box too low along b, and the image count that says so.
        dump("x y z ix iy iz", |s| at(s, -1.0) + " 0 1 0", next, 3),
        // Ids of a group: larger than the number of atoms, with gaps.
        dump("xs ys zs", words, |atom| 100 + 7 * atom, 3),
    ];
    let folder = folder();
    for (number, text) in texts.iter().enumerate() {
        let mut gz = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::fast());
        std::io::Write::write_all(&mut gz, text.as_bytes()).expect("memory");
        let packed = write(&folder, "t.dump.gz", gz.finish().expect("memory"));
        let plain = write(&folder, "t.lammpstrj", text);
        for path in [plain, packed] {
            let asked = RunInput {
                clock: Clock::Timestep(0.001),
                ..input(&[&path])
            };
            let mut run = open(&asked);
            assert_eq!(run.len(), 3, "dump {number}");
            for k in [0, 1, 2, 1] {
                check_lattice(&mut run, k, &TRICLINIC, CORNER, 1e-8);
            }
            assert!((run.frame_interval_ps().expect("steps give times") - 0.4).abs() < 1e-12);
        }
    }
}

#[test]
fn a_general_box_of_a_text_dump_is_its_vectors_and_corner() {
    let mut text = String::from("ITEM: UNITS\nelectron\nITEM: TIME\n250\nITEM: TIMESTEP\n5\n");
    text += "ITEM: NUMBER OF ATOMS\n12\nITEM: BOX BOUNDS abc origin pp pp pp\n";
    for (vector, origin) in ROTATED.iter().zip(CORNER) {
        writeln!(text, "{} {origin}", words(*vector)).expect("memory");
    }
    text += "ITEM: ATOMS id element x y z\n";
    for (atom, s) in scaled().into_iter().enumerate() {
        let p = cartesian(&ROTATED, s);
        writeln!(
            text,
            "{} C {}",
            atom + 1,
            words(std::array::from_fn(|i| p[i] + CORNER[i]))
        )
        .expect("memory");
    }
    let folder = folder();
    let path = write(&folder, "general.dump", &text);
    let mut run = open(&input(&[&path]));
    // CODATA 2018: the Bohr radius is 0.529177210903 A; times of this unit system are in fs.
    let bohr = |vector: [f64; 3]| vector.map(|component| component * 0.529_177_210_903);
    check_lattice(&mut run, 0, &ROTATED.map(bohr), bohr(CORNER), 1e-9);
    assert_eq!(run.first_time_ps(), Some(0.25));
    assert_eq!(run.atoms().species[0], "C");
    let wrong = RunInput {
        engine_units: Some(EngineUnits::Metal),
        ..input(&[&path])
    };
    says(
        &refused(&wrong),
        &["ITEM: UNITS electron", "engine_units = \"metal\""],
    );
}

#[test]
fn the_normal_axis_comes_last_and_positions_stay() {
    let folder = folder();
    let path = write(&folder, "t.xyz", extended_xyz(&ROTATED, &[0.0]));
    let plain = read(&mut open(&input(&[&path])), 0);
    let turned = read(
        &mut open(&RunInput {
            normal: CellAxis::A,
            ..input(&[&path])
        }),
        0,
    );
    let [a, b, c] = plain.cell.vectors;
    assert_eq!(turned.cell.vectors, [b, c, a]);
    assert_eq!(turned.positions, plain.positions);
    assert!((turned.cell.volume() - plain.cell.volume()).abs() < 1e-9);
}
