//! XTC through molly against chemfiles on the same files, and files that are cut off, damaged or lean by a hair.

use std::fs;

use planish::frames::{ChemfilesSource, Frame, FrameSource, ReadOptions, XtcSource};
use tempfile::TempDir;

use super::files::{BOX, TRICLINIC, folder, write_binary};

/// The demo's own run: 301 frames of 1008 atoms.
const DEMO: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/demo-trajectories/hbn-a-300K.xtc");

fn open(path: &std::path::Path) -> XtcSource {
    XtcSource::open(path, &ReadOptions::default()).expect("an XTC file")
}

fn assert_same_frames(path: &std::path::Path) {
    let mut own = open(path);
    let mut other = ChemfilesSource::open(path, "XTC", &ReadOptions::default()).expect("an XTC file");
    assert_eq!(own.len(), other.len());
    let (mut found, mut expected) = (Frame::empty(), Frame::empty());
    // Out of order too: a jump must not leave the reader elsewhere.
    for index in (0..own.len()).rev().step_by(7).chain(0..own.len().min(20)) {
        own.read(index, &mut found).expect("a frame");
        other.read(index, &mut expected).expect("a frame");
        assert_eq!(found.time_ps, expected.time_ps, "time of frame {index}");
        assert_eq!(found.positions.len(), expected.positions.len());
        let numbers = |frame: &Frame| -> Vec<f64> {
            frame
                .cell
                .vectors
                .iter()
                .chain(&frame.positions)
                .flatten()
                .copied()
                .collect()
        };
        for (x, y) in numbers(&found).iter().zip(numbers(&expected)) {
            // Single precision in nm: the last digit may be rounded at another place.
            assert!(
                (x - y).abs() <= 1e-6 * y.abs().max(1.0),
                "{x} against {y} in frame {index}"
            );
        }
    }
}

#[test]
fn frames_are_those_that_chemfiles_reads() {
    assert_same_frames(DEMO.as_ref());
    let folder = folder();
    let times: Vec<f64> = (0..12).map(|k| 0.5 * f64::from(k)).collect();
    for (name, cell) in [("box.xtc", &BOX), ("lean.xtc", &TRICLINIC)] {
        assert_same_frames(&write_binary(&folder, name, cell, &times));
    }
}

/// Up to nine atoms are stored without compression.
#[test]
fn few_atoms_are_stored_plainly_and_read() {
    let folder = folder();
    let path = folder.path().join("few.xtc");
    let mut file = chemfiles::Trajectory::open(&path, 'w').expect("chemfiles opens");
    for k in 0..5 {
        let mut frame = chemfiles::Frame::new();
        frame.set_cell(&chemfiles::UnitCell::new([10.0, 11.0, 30.0]));
        for atom in 0..5 {
            let position = [f64::from(atom), 0.25 * f64::from(k), 15.0];
            frame.add_atom(&chemfiles::Atom::new("C"), position, None);
        }
        frame.set("time", f64::from(k));
        file.write(&frame).expect("chemfiles writes");
    }
    drop(file);
    assert_same_frames(&path);
}

/// Cut at every kind of place, what is whole is read and what is not is left out with a note.
#[test]
fn a_cut_file_gives_its_whole_frames() {
    let folder = folder();
    let whole = fs::read(DEMO).expect("the demo");
    let mut source = open(DEMO.as_ref());
    assert!(source.notes().is_empty());
    let mut last = Frame::empty();
    source.read(99, &mut last).expect("a frame");
    let frame_bytes = whole.len() / source.len();
    for cut in [1, 30, 57, 80, frame_bytes / 2] {
        let path = folder.path().join(format!("cut-{cut}.xtc"));
        // Frames differ a little in length: the cut falls somewhere in the hundredth or so.
        fs::write(&path, &whole[..100 * frame_bytes + cut]).expect("written");
        let mut found = open(&path);
        assert!((98..=101).contains(&found.len()), "{} frames", found.len());
        assert_eq!(found.notes().len(), 1, "{:?}", found.notes());
        let mut frame = Frame::empty();
        found
            .read(found.len() - 1, &mut frame)
            .expect("the last whole frame");
    }
}

fn refusal(folder: &TempDir, bytes: &[u8]) -> String {
    let path = folder.path().join("bad.xtc");
    fs::write(&path, bytes).expect("written");
    XtcSource::open(&path, &ReadOptions::default())
        .err()
        .map(|error| error.to_string())
        .unwrap_or_default()
}

#[test]
fn damaged_heads_are_refused_with_their_frame() {
    let folder = folder();
    let mut bytes = fs::read(DEMO).expect("the demo");
    let first_atoms = bytes[4..8].to_vec();
    // A head that claims four billion atoms, twice.
    bytes[4..8].fill(0xff);
    bytes[52..56].fill(0xff);
    let message = refusal(&folder, &bytes);
    assert!(
        message.contains("frame 0") && message.contains("cannot be packed"),
        "{message}"
    );
    bytes[52..56].copy_from_slice(&first_atoms);
    let message = refusal(&folder, &bytes);
    assert!(message.contains("frame 0"), "{message}");
    let start = fs::read(DEMO).expect("the demo");
    let mut second = start.clone();
    let packed = u32::from_be_bytes(start[88..92].try_into().expect("four bytes")) as usize;
    let next = 92 + packed.next_multiple_of(4);
    second[next] = 7;
    let message = refusal(&folder, &second);
    assert!(
        message.contains("frame 1") && message.contains("1995"),
        "{message}"
    );
}

/// A cell that breathes in shear passes through angles that are not quite 90 degrees.
#[test]
fn a_cell_that_leans_by_a_hair_is_read() {
    let folder = folder();
    let mut bytes = fs::read(DEMO).expect("the demo");
    // The first component of b, in nm.
    bytes[28..32].copy_from_slice(&5e-5_f32.to_be_bytes());
    let path = folder.path().join("lean.xtc");
    fs::write(&path, bytes).expect("written");
    let mut frame = Frame::empty();
    open(&path).read(0, &mut frame).expect("a frame");
    assert!((frame.cell.vectors[1][0] - 5e-4).abs() < 1e-9, "{:?}", frame.cell);
}
