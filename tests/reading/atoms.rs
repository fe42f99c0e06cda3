//! Which atoms are the sheet's, and what they are.

use planish::frames::{ReadNote, RunInput};
use std::fmt::Write as _;

use super::files::{
    BOX, dump, extended_xyz, folder, input, open, read, refused, says, words, write, write_binary,
};

#[test]
fn a_selection_keeps_the_order_of_the_file() {
    let folder = folder();
    let path = write(&folder, "t.xyz", extended_xyz(&BOX, &[0.0, 1.0]));
    let mut run = open(&RunInput {
        select: "name N and index > 2".to_owned(),
        ..input(&[&path])
    });
    assert_eq!(run.atoms().indices, [3, 5, 7, 9, 11]);
    let all = read(&mut open(&input(&[&path])), 1);
    assert_eq!(
        read(&mut run, 1).positions,
        [3, 5, 7, 9, 11].map(|atom: usize| all.positions[atom])
    );
}

#[test]
fn species_and_masses_come_from_the_topology() {
    let folder = folder();
    let path = write_binary(&folder, "t.xtc", &BOX, &[0.0, 1.0]);
    let mut data =
        String::from("sheet\n\n12 atoms\n2 atom types\n\n0 10 xlo xhi\n0 8 ylo yhi\n0 20 zlo zhi\n");
    data += "\nMasses\n\n1 11.0\n2 15.0\n\nAtoms # atomic\n\n";
    for atom in 0..12 {
        writeln!(data, "{} {} 0 0 {atom}", atom + 1, 1 + atom / 6).expect("memory");
    }
    let data = write(&folder, "start.data", data);
    let bare = open(&input(&[&path]));
    assert_eq!(
        (bare.atoms().species[0].as_str(), &bare.atoms().masses),
        ("X", &None)
    );
    assert!(bare.notes().contains(&ReadNote::SpeciesUnknown { atoms: 12 }));

    let numbered = RunInput {
        topology: Some(data),
        ..input(&[&path])
    };
    assert_eq!(open(&numbered).atoms().species[5..7], ["1", "2"]);
    let both = vec!["B".to_owned(), "N".to_owned()];
    let named = RunInput {
        species: Some(both),
        ..numbered.clone()
    };
    let run = open(&RunInput {
        select: "name N or index 0".to_owned(),
        ..named.clone()
    });
    assert_eq!(run.atoms().indices, [0, 6, 7, 8, 9, 10, 11]);
    assert_eq!(run.atoms().species, ["B", "N", "N", "N", "N", "N", "N"]);
    // The file's masses, not the elements'.
    assert_eq!(run.atoms().masses.as_ref().expect("masses")[..2], [11.0, 15.0]);
    let by_type = open(&RunInput {
        select: "type \"2\"".to_owned(),
        ..named
    });
    assert_eq!(by_type.atoms().indices.len(), 6);

    let short = RunInput {
        species: Some(vec!["B".to_owned()]),
        ..numbered.clone()
    };
    says(&refused(&short), &["type 2", "start.data"]);
    let none = RunInput {
        select: "name Mo".to_owned(),
        ..numbered
    };
    says(&refused(&none), &["\"name Mo\"", "none of the 12 atoms", "1, 2"]);
}

#[test]
fn one_species_name_serves_a_file_without_types() {
    let folder = folder();
    let path = write_binary(&folder, "t.xtc", &BOX, &[0.0]);
    let run = open(&RunInput {
        species: Some(vec!["C".to_owned()]),
        ..input(&[&path])
    });
    assert_eq!(run.atoms().species[11], "C");
    // Standard atomic mass of carbon, IUPAC 2021 abridged: 12.011.
    assert!((run.atoms().masses.as_ref().expect("an element")[0] - 12.011).abs() < 1e-3);
    let two = RunInput {
        species: Some(vec!["B".to_owned(), "N".to_owned()]),
        ..input(&[&path])
    };
    says(&refused(&two), &["no types", "topology"]);
}

#[test]
fn a_text_dump_serves_as_topology_in_the_order_of_its_ids() {
    let folder = folder();
    let path = write_binary(&folder, "t.xtc", &BOX, &[0.0]);
    // The ids of a group, and the rows in another order.
    let text = dump(
        "mass xs ys zs",
        |s| format!("15.0 {}", words(s)),
        |atom| 100 + 7 * (11 - atom),
        1,
    );
    let topology = write(&folder, "start.dump", text);
    let asked = RunInput {
        topology: Some(topology),
        ..input(&[&path])
    };
    let run = open(&RunInput {
        species: Some(vec!["B".to_owned(), "N".to_owned()]),
        ..asked
    });
    assert_eq!(run.atoms().species[..3], ["N", "B", "N"]);
    assert_eq!(run.atoms().masses.as_ref().expect("masses")[0], 15.0);
}
