//! Files that must be refused, and what the message says.

use planish::frames::{Clock, FrameError, ReadNote, RunInput};
use rstest::rstest;
use std::fs;

use super::files::{
    BOX, CORNER, TRICLINIC, check_lattice, dump, empty_frame, extended_xyz, folder, input, next, open,
    refused, refused_frame, says, words, write, write_binary, write_with,
};

#[test]
fn files_that_are_no_trajectories_are_refused() {
    let folder = folder();
    let missing = folder.path().join("missing.xtc");
    says(&refused(&input(&[&missing])), &["missing.xtc", "No such file"]);
    says(&refused(&input(&[folder.path()])), &["is a directory", "*.xtc"]);
    let empty = write(&folder, "empty.xyz", "");
    says(&refused(&input(&[&empty])), &["empty.xyz", "is empty"]);
    let unknown = write(&folder, "run.foo", "1 2 3\n");
    says(&refused(&input(&[&unknown])), &["run.foo", ".lammpstrj", ".xtc"]);
    let nameless = write(&folder, "run", "1 2 3\n");
    says(&refused(&input(&[&nameless])), &["run: the format", "extension"]);
    let garbage = write(
        &folder,
        "run.xtc",
        "this is no xtc file at all, but some text of fair length",
    );
    says(&refused(&input(&[&garbage])), &["run.xtc", "read as XTC"]);
    says(&refused(&input(&[])), &["no trajectory"]);
}

#[test]
fn frames_without_a_whole_cell_are_refused() {
    let folder = folder();
    let good = extended_xyz(&BOX, &[0.0]);
    let second = good
        .replace("Lattice=\"10 0 0 0 8 0 0 0 20\"", "")
        .replace("time=0", "time=1");
    let bare = write(&folder, "bare.xyz", good.clone() + &second);
    let error = refused_frame(&bare);
    assert_eq!(error, FrameError::NoCell { path: bare, frame: 1 });
    says(
        &error.to_string(),
        &["bare.xyz, frame 1: no periodic cell", "Lattice"],
    );
    let flat = write(&folder, "flat.xyz", good.replace("0 0 20\"", "0 0 0\""));
    says(
        &refused_frame(&flat).to_string(),
        &["flat.xyz, frame 0", "cell vector c has zero length"],
    );
}

#[rstest]
#[case("nan", "NaN")]
#[case("inf", "inf")]
fn coordinates_that_are_not_finite_are_refused(#[case] word: &str, #[case] shown: &str) {
    let folder = folder();
    let text = dump("x y z", words, next, 3);
    let (before, last) = text.trim_end().rsplit_once('\n').expect("lines");
    let mut columns: Vec<&str> = last.split(' ').collect();
    let id: usize = columns[0].parse().expect("an id");
    columns[3] = word;
    let path = write(&folder, "t.dump", format!("{before}\n{}\n", columns.join(" ")));
    let message = refused_frame(&path).to_string();
    says(
        &message,
        &["t.dump, frame 2", &format!("y of atom {} is {shown}", id - 1)],
    );
    let path = write_with(&folder, "t.trr", &BOX, &[0.0, 1.0], |k, atom, position| {
        if (k, atom) == (1, 7) {
            [position[0], position[1], word.parse().expect("a float")]
        } else {
            position
        }
    });
    let message = refused_frame(&path).to_string();
    says(&message, &["t.trr, frame 1", &format!("z of atom 7 is {shown}")]);
    // chemfiles does not take the word for a number.
    let text = extended_xyz(&BOX, &[0.0, 1.0]).replacen("N ", &format!("N {word} "), 1);
    let path = write(&folder, "t.xyz", text);
    says(&refused_frame(&path).to_string(), &["t.xyz, frame 0", word]);
}

#[test]
fn a_changing_number_of_atoms_is_refused() {
    let folder = folder();
    let eleven = extended_xyz(&BOX, &[2.0]).replacen("12\n", "11\n", 1);
    let eleven = eleven.trim_end().rsplit_once('\n').expect("lines").0.to_owned() + "\n";
    let path = write(&folder, "t.xyz", extended_xyz(&BOX, &[0.0, 1.0]) + &eleven);
    let error = refused_frame(&path);
    assert_eq!(
        error,
        FrameError::AtomCountChanged {
            path,
            frame: 2,
            found: 11,
            expected: 12
        }
    );
    says(
        &error.to_string(),
        &["t.xyz, frame 2: 11 atoms, but the first frame of the run has 12"],
    );

    let text = dump("xs ys zs", words, next, 1);
    let fewer = text.replace("\n12\n", "\n11\n");
    let fewer = fewer.trim_end().rsplit_once('\n').expect("lines").0.to_owned() + "\n";
    let path = write(&folder, "fewer.dump", text.clone() + &fewer);
    assert_eq!(
        refused_frame(&path),
        FrameError::AtomCountChanged {
            path,
            frame: 1,
            found: 11,
            expected: 12
        }
    );
    // An id far beyond the number of atoms, where a reader that trusts ids would write outside its memory.
    let more = text.replace("\n12\n", "\n13\n") + "4000000 1 0.5 0.5 0.5\n";
    let path = write(&folder, "more.dump", text.clone() + &more);
    assert_eq!(
        refused_frame(&path),
        FrameError::AtomCountChanged {
            path,
            frame: 1,
            found: 13,
            expected: 12
        }
    );
    let other = text.replace("\n12 2 ", "\n4000000 2 ");
    let path = write(&folder, "other.dump", text.clone() + &other);
    says(
        &refused_frame(&path).to_string(),
        &["other.dump, frame 1: atom line 12: the atom with id 4000000 is not in the first frame"],
    );
    let twice = text.replace("\n12 2 ", "\n1 2 ");
    let path = write(&folder, "twice.dump", text + &twice);
    says(
        &refused_frame(&path).to_string(),
        &["twice.dump, frame 1: atom line 12: two atoms have the id 1"],
    );
}

#[test]
fn a_second_file_of_other_atoms_is_refused() {
    let folder = folder();
    let first = write(&folder, "a.xyz", extended_xyz(&BOX, &[0.0]));
    let one = "1\nLattice=\"10 0 0 0 8 0 0 0 20\" time=1.0 Properties=species:S:1:pos:R:3\nB 0 0 0\n";
    let second = write(&folder, "b.xyz", one);
    let mut run = open(&input(&[&first, &second]));
    let error = run.read(1, &mut empty_frame()).expect_err("other atoms");
    let path = second.clone();
    assert_eq!(
        error,
        FrameError::AtomCountChanged {
            path,
            frame: 0,
            found: 1,
            expected: 12
        }
    );
    let asked = RunInput {
        topology: Some(second),
        ..input(&[&first])
    };
    says(&refused(&asked), &["b.xyz has 1 atoms", "a.xyz has 12"]);
}

#[test]
fn a_last_frame_that_was_cut_off_is_left_out_or_named() {
    let folder = folder();
    let whole = fs::read(write_binary(&folder, "whole.xtc", &BOX, &[0.0, 1.0, 2.0])).expect("reads");
    let cut = write(&folder, "cut.xtc", &whole[..whole.len() - 11]);
    let mut run = open(&input(&[&cut]));
    assert_eq!(run.len(), 2);
    assert!(
        run.notes()
            .contains(&ReadNote::IncompleteFrame { path: cut, frame: 2 })
    );
    check_lattice(&mut run, 1, &BOX, [0.0; 3], 2e-3);

    let text = dump("xs ys zs", words, next, 3);
    let last = text.rfind("ITEM: TIMESTEP").expect("a last frame");
    // Within the last line, the table, the box, and the first line of the frame.
    for end in [text.len() - 3, text.len() - 100, last + 70, last + 7] {
        let cut = write(&folder, "cut.dump", &text[..end]);
        let mut run = open(&input(&[&cut]));
        assert_eq!(run.len(), 2, "{end} of {} bytes", text.len());
        assert!(
            run.notes()
                .contains(&ReadNote::IncompleteFrame { path: cut, frame: 2 })
        );
        check_lattice(&mut run, 1, &TRICLINIC, CORNER, 1e-8);
    }

    let text = extended_xyz(&BOX, &[0.0, 1.0]);
    let cut = write(&folder, "cut.xyz", &text[..text.len() - 100]);
    says(
        &refused(&input(&[&cut])),
        &["cut.xyz", "remove its last, incomplete frame"],
    );
}

#[test]
fn selections_and_clocks_that_do_not_fit_are_refused() {
    let folder = folder();
    let path = write(&folder, "t.xyz", extended_xyz(&BOX, &[0.0, 1.0]));
    let asked = input(&[&path]);
    let message = refused(&RunInput {
        select: "nam C".to_owned(),
        ..asked.clone()
    });
    says(&message, &["select = \"nam C\"", "examples"]);
    says(
        &refused(&RunInput {
            select: "pairs: all".to_owned(),
            ..asked.clone()
        }),
        &["groups of 2"],
    );
    let message = refused(&RunInput {
        clock: Clock::Timestep(0.001),
        ..asked.clone()
    });
    says(&message, &["t.xyz (XYZ) stores none", "frame_interval"]);
    let message = refused(&RunInput {
        from: Some(5.0),
        ..asked
    });
    says(&message, &["leave none of the 2 frames", "from 0 ps to 1 ps"]);
}

#[test]
fn malformed_text_dumps_are_refused_with_their_frame() {
    let folder = folder();
    let text = dump("xs ys zs", words, next, 2);
    let cases = [
        (
            text.replace("xs ys zs", "xs ys foo"),
            "frame 0: the atom table has the columns \"id type xs ys foo\"",
        ),
        (
            text.replacen("ITEM: BOX BOUNDS", "ITEM: BOX", 1),
            "frame 0: found \"ITEM: BOX xy xz yz pp pp pp\"",
        ),
        (
            text.replace("\n400\n", "\nfour\n"),
            "frame 1: \"four\" is not a whole number",
        ),
        (
            text.replace("-2.0 12.5 -3.0", "-2.0 12.5"),
            "frame 0: the line \"-2.0 12.5\" of the box has fewer than 3",
        ),
        (
            text.replacen("\n1 1 0 0 0.45", "\n1 1 0 0", 1),
            "frame 0: atom line 1: 4 columns, but the header names 5",
        ),
        (
            text.replacen("\n1 1 0 0 0.45", "\n1 1 0 o 0.45", 1),
            "frame 0: atom line 1: \"o\" is not a number",
        ),
        (
            text.replacen("\n2 2 ", "\n1 2 ", 1),
            "frame 0: two atoms have the id 1",
        ),
        (
            format!("ITEM: UNITS\nlj\n{text}"),
            "ITEM: UNITS lj, which planish does not know",
        ),
    ];
    for (text, part) in cases {
        let path = write(&folder, "t.dump", text);
        says(&refused_frame(&path).to_string(), &["t.dump", part]);
    }
}
