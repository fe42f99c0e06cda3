//! The lattice of these tests, the files it is written to, and what is asked of them.

use nalgebra::{Matrix3, Vector3};
use planish::frames::{Cell, CellAxis, Clock, Frame, FrameError, RunFrames, RunInput};
use std::fmt::Write as _;
use std::fs;
use std::path::{Path, PathBuf};
use tempfile::TempDir;

pub type Vectors = [[f64; 3]; 3];

/// A triclinic cell as engines write it: a along x, b in the xy plane.
pub const TRICLINIC: Vectors = [[10.0, 0.0, 0.0], [-3.0, 8.0, 0.0], [1.5, 2.0, 20.0]];

/// A general one, as extended XYZ may hold it.
pub const ROTATED: Vectors = [[6.0, 7.0, 1.0], [-5.0, 8.0, 0.5], [1.0, -2.0, 19.0]];

pub const BOX: Vectors = [[10.0, 0.0, 0.0], [0.0, 8.0, 0.0], [0.0, 0.0, 20.0]];

/// The corner of the text dumps' box.
pub const CORNER: [f64; 3] = [1.0, 2.0, -5.0];

/// The scaled coordinates of twelve atoms (more than nine, so that XTC compresses them).
pub fn scaled() -> Vec<[f64; 3]> {
    (0..12)
        .map(f64::from)
        .map(|k| [(k * 0.37) % 1.0, (k * 0.73) % 1.0, 0.45 + 0.01 * k])
        .collect()
}

pub fn cartesian(cell: &Vectors, s: [f64; 3]) -> [f64; 3] {
    std::array::from_fn(|i| s[0] * cell[0][i] + s[1] * cell[1][i] + s[2] * cell[2][i])
}

pub fn scaled_of(cell: &Cell, position: [f64; 3]) -> [f64; 3] {
    let columns = Matrix3::from_columns(&cell.vectors.map(Vector3::from));
    let scaled = columns.try_inverse().expect("a volume") * Vector3::from(position);
    [scaled.x, scaled.y, scaled.z]
}

pub fn folder() -> TempDir {
    TempDir::new().expect("a temporary folder")
}

pub fn write(folder: &TempDir, name: &str, text: impl AsRef<[u8]>) -> PathBuf {
    let path = folder.path().join(name);
    fs::write(&path, text).expect("the temporary folder can be written");
    path
}

/// Extended XYZ frames of the lattice at the given times.
pub fn extended_xyz(cell: &Vectors, times: &[f64]) -> String {
    let mut text = String::new();
    for time in times {
        let lattice: Vec<String> = cell.iter().flatten().map(f64::to_string).collect();
        let lattice = lattice.join(" ");
        writeln!(
            text,
            "12\nLattice=\"{lattice}\" time={time:?} Properties=species:S:1:pos:R:3"
        )
        .expect("memory");
        for (atom, s) in scaled().into_iter().enumerate() {
            let [x, y, z] = cartesian(cell, s);
            writeln!(text, "{} {x:.12} {y:.12} {z:.12}", ["B", "N"][atom % 2]).expect("memory");
        }
    }
    text
}

/// Frames of the lattice at the given times, 1000 steps apart, written through chemfiles.
pub fn write_binary(folder: &TempDir, name: &str, cell: &Vectors, times: &[f64]) -> PathBuf {
    write_with(folder, name, cell, times, |_, _, position| position)
}

/// The same with each position changed, by frame and atom.
pub fn write_with(
    folder: &TempDir,
    name: &str,
    cell: &Vectors,
    times: &[f64],
    change: impl Fn(usize, usize, [f64; 3]) -> [f64; 3],
) -> PathBuf {
    let path = folder.path().join(name);
    let mut file = chemfiles::Trajectory::open(&path, 'w').expect("chemfiles opens");
    for (k, time) in times.iter().enumerate() {
        let mut frame = chemfiles::Frame::new();
        // chemfiles takes the vectors as columns.
        let columns = std::array::from_fn(|i| std::array::from_fn(|j| cell[j][i]));
        frame.set_cell(&chemfiles::UnitCell::from_matrix(columns));
        for (atom, s) in scaled().into_iter().enumerate() {
            let position = change(k, atom, cartesian(cell, s));
            frame.add_atom(&chemfiles::Atom::new("C"), position, None);
        }
        frame.set("time", *time);
        frame.set_step(1000 * k);
        file.write(&frame).expect("chemfiles writes");
    }
    path
}

/// A text dump of the triclinic lattice, 400 steps between frames, the atoms in another order in each. The bounds are worked
/// out by hand from the manual's formula: xlo + min(0, xy, xz, xy + xz) = xlo - 3, xhi + 1.5, ylo, yhi + 2.
pub fn dump(
    columns: &str,
    row: impl Fn([f64; 3]) -> String,
    id: impl Fn(usize) -> usize,
    frames: usize,
) -> String {
    let bounds = "ITEM: BOX BOUNDS xy xz yz pp pp pp\n-2.0 12.5 -3.0\n2.0 12.0 1.5\n-5.0 15.0 2.0";
    let mut text = String::new();
    for k in 0..frames {
        let step = 400 * k;
        write!(
            text,
            "ITEM: TIMESTEP\n{step}\nITEM: NUMBER OF ATOMS\n12\n{bounds}\n"
        )
        .expect("memory");
        writeln!(text, "ITEM: ATOMS id type {columns}").expect("memory");
        for place in 0..12 {
            let atom = (place + 5 * k) % 12;
            writeln!(text, "{} {} {}", id(atom), 1 + atom % 2, row(scaled()[atom])).expect("memory");
        }
    }
    text
}

pub fn words(s: [f64; 3]) -> String {
    format!("{} {} {}", s[0], s[1], s[2])
}

pub fn next(atom: usize) -> usize {
    atom + 1
}

pub fn input(paths: &[&Path]) -> RunInput {
    RunInput {
        trajectory: paths.iter().map(|path| vec![path.to_path_buf()]).collect(),
        topology: None,
        species: None,
        select: "all".to_owned(),
        normal: CellAxis::C,
        clock: Clock::File,
        engine_units: None,
        from: None,
        to: None,
        stride: 1,
        thermo: None,
    }
}

pub fn open(asked: &RunInput) -> RunFrames {
    RunFrames::open(asked).expect("the run is good")
}

pub fn empty_frame() -> Frame {
    Frame {
        time_ps: None,
        cell: Cell {
            vectors: [[0.0; 3]; 3],
        },
        positions: Vec::new(),
    }
}

pub fn read(run: &mut RunFrames, k: usize) -> Frame {
    let mut frame = empty_frame();
    run.read(k, &mut frame).expect("the frame is good");
    frame
}

/// The message of a run that is refused when it is opened.
pub fn refused(asked: &RunInput) -> String {
    match RunFrames::open(asked) {
        Ok(_) => panic!("the run was opened"),
        Err(error) => error.to_string(),
    }
}

/// The error of the first frame that is refused.
pub fn refused_frame(path: &Path) -> FrameError {
    match RunFrames::open(&input(&[path])) {
        Ok(mut run) => {
            let mut frame = empty_frame();
            (0..run.len())
                .find_map(|k| run.read(k, &mut frame).err())
                .expect("some frame is bad")
        }
        Err(error) => error,
    }
}

#[track_caller]
pub fn says(message: &str, parts: &[&str]) {
    for part in parts {
        assert!(message.contains(part), "\"{part}\" is not in: {message}");
    }
}

#[track_caller]
pub fn check_lattice(run: &mut RunFrames, k: usize, cell: &Vectors, corner: [f64; 3], error: f64) {
    let frame = read(run, k);
    for (found, wanted) in frame.cell.vectors.iter().flatten().zip(cell.iter().flatten()) {
        assert!(
            (found - wanted).abs() < error,
            "{:?} is not {cell:?}",
            frame.cell.vectors
        );
    }
    assert_eq!(frame.positions.len(), 12);
    for (position, wanted) in frame.positions.iter().zip(scaled()) {
        let found = scaled_of(&frame.cell, std::array::from_fn(|i| position[i] - corner[i]));
        for (found, wanted) in found.iter().zip(wanted) {
            assert!((found - wanted).abs() < error, "{found} is not {wanted}");
        }
    }
}
