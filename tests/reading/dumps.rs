//! Text dumps of every layout, generated, against positions worked out from the words that were written; and against
//! chemfiles where it reads a dump as the engine means it.

use chemfiles::Trajectory;
use planish::frames::{Clock, RunInput};
use proptest::prelude::*;
use std::fmt::Write as _;

use super::files::{dump, empty_frame, folder, input, next, open, read, refused_frame, says, words, write};

/// The rectangular box of these dumps: corner and edges.
const LOW: [f64; 3] = [-1.25, 2.5, 0.0];
const EDGES: [f64; 3] = [8.5, 4.0, 16.25];

/// How positions are written.
#[derive(Clone, Copy, Debug)]
struct Layout {
    names: [&'static str; 3],
    scaled: bool,
    images: bool,
}

const LAYOUTS: [Layout; 6] = [
    layout(["x", "y", "z"], false, false),
    layout(["x", "y", "z"], false, true),
    layout(["xu", "yu", "zu"], false, false),
    layout(["xs", "ys", "zs"], true, false),
    layout(["xs", "ys", "zs"], true, true),
    layout(["xsu", "ysu", "zsu"], true, false),
];

const fn layout(names: [&'static str; 3], scaled: bool, images: bool) -> Layout {
    Layout {
        names,
        scaled,
        images,
    }
}

/// A number as some engine might write it.
fn number() -> impl Strategy<Value = String> {
    prop_oneof![
        (-20_000_000i64..20_000_000).prop_map(|n| format!("{:.6}", n as f64 * 1e-6)),
        (-50.0..50.0f64).prop_map(|x| format!("{x:.3}")),
        (-50.0..50.0f64).prop_map(|x| format!("{x}")),
        (-50.0..50.0f64).prop_map(|x| format!("{x:e}")),
        (-50.0..50.0f64).prop_map(|x| format!("{x:.17}")),
        (-50i32..50).prop_map(|n| n.to_string()),
    ]
}

#[derive(Clone, Debug)]
struct Written {
    id: usize,
    numbers: [String; 3],
    images: [i32; 3],
}

fn atoms() -> impl Strategy<Value = Vec<Written>> {
    let atom = (number(), number(), number(), [-2i32..3, -2..3, -2..3]);
    (proptest::collection::vec(atom, 1..40), 1usize..12, 1usize..60).prop_map(|(atoms, step, first)| {
        let with_id = |(k, (x, y, z, images))| Written {
            id: first + step * k,
            numbers: [x, y, z],
            images,
        };
        atoms.into_iter().enumerate().map(with_id).collect()
    })
}

/// The position that an atom's words stand for, by the definitions of the manual ("dump" page).
fn position(atom: &Written, layout: Layout) -> [f64; 3] {
    std::array::from_fn(|i| {
        let number: f64 = atom.numbers[i].parse().expect("a number");
        let place = if layout.scaled {
            LOW[i] + number * EDGES[i]
        } else {
            number
        };
        place + f64::from(atom.images[i]) * if layout.images { EDGES[i] } else { 0.0 }
    })
}

/// A dump of the frames, the columns in the given order, lines separated as given.
fn text(frames: &[Vec<Written>], layout: Layout, columns: &[usize], blank: &str, end: &str) -> String {
    let mut names = vec!["id", "type", "mol", "vx"];
    names.extend(layout.names);
    names.extend(["ix", "iy", "iz"].iter().filter(|_| layout.images));
    let columns: Vec<usize> = columns.iter().copied().filter(|&c| c < names.len()).collect();
    let mut text = String::new();
    for (step, atoms) in frames.iter().enumerate() {
        let count = atoms.len();
        write!(text, "ITEM: TIMESTEP\n{step}\nITEM: NUMBER OF ATOMS\n{count}\n").expect("memory");
        text += "ITEM: BOX BOUNDS pp pp pp\n";
        for (low, edge) in LOW.iter().zip(EDGES) {
            writeln!(text, "{low} {}", low + edge).expect("memory");
        }
        let heading: Vec<&str> = columns.iter().map(|&c| names[c]).collect();
        writeln!(text, "ITEM: ATOMS {}", heading.join(" ")).expect("memory");
        for atom in atoms {
            let mut words = vec![
                atom.id.to_string(),
                "1".to_owned(),
                "0".to_owned(),
                "-1.5e-3".to_owned(),
            ];
            words.extend(atom.numbers.iter().cloned());
            words.extend(atom.images.iter().map(i32::to_string));
            let line: Vec<&str> = columns.iter().map(|&c| words[c].as_str()).collect();
            text += &line.join(blank);
            text += end;
        }
    }
    text
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    #[test]
    fn generated_dumps_give_the_positions_that_were_written(
        atoms in atoms(),
        layout in proptest::sample::select(LAYOUTS.to_vec()),
        columns in Just((0..10).collect::<Vec<usize>>()).prop_shuffle(),
        blank in proptest::sample::select(vec![" ", "\t", "  "]),
        end in proptest::sample::select(vec!["\n", " \n", "\r\n"]),
        turn in 0usize..40,
    ) {
        let mut turned = atoms.clone();
        turned.rotate_left(turn % atoms.len());
        let frames = [turned.clone(), atoms.clone(), turned.into_iter().rev().collect()];
        let folder = folder();
        let path = write(&folder, "t.dump", text(&frames, layout, &columns, blank, end));
        let asked = RunInput { clock: Clock::Timestep(0.5), ..input(&[&path]) };
        let mut run = open(&asked);
        let mut other = run.another().expect("opens again").expect("a plain dump is read by many");
        prop_assert_eq!(run.len(), 3);
        for k in [2, 0, 1] {
            let frame = read(&mut run, k);
            prop_assert_eq!(frame.time_ps, Some(0.5 * k as f64));
            for (found, atom) in frame.positions.iter().zip(&atoms) {
                for (found, wanted) in found.iter().zip(position(atom, layout)) {
                    prop_assert!((found - wanted).abs() < 1e-12, "{} is not {}", found, wanted);
                    // As written, numbers come to the last bit.
                    prop_assert!(layout.scaled || layout.images || *found == wanted);
                }
            }
            prop_assert_eq!(read(&mut other, k), frame);
        }
    }
}

/// chemfiles reads a dump as the engine means it where the box is rectangular, its corner at zero, and ids run from one.
#[test]
fn plain_dumps_are_the_frames_that_chemfiles_reads() {
    let mut text = String::new();
    for step in 0..3 {
        write!(
            text,
            "ITEM: TIMESTEP\n{step}\nITEM: NUMBER OF ATOMS\n20000\nITEM: BOX BOUNDS pp pp pp\n"
        )
        .expect("memory");
        text += "0 50\n0 60\n0 20\nITEM: ATOMS id type x y z\n";
        for place in 0..20_000 {
            let id = 1 + (place * 7 + step) % 20_000;
            let [x, y, z] = [0.37, 0.73, 0.11].map(|share| (f64::from(id + step) * share) % 20.0);
            writeln!(text, "{id} 1 {x:.6} {y:.7} {z}").expect("memory");
        }
    }
    let folder = folder();
    let path = write(&folder, "t.lammpstrj", &text);
    let mut run = open(&input(&[&path]));
    let mut theirs = Trajectory::open(&path, 'r').expect("chemfiles opens");
    let mut frame = chemfiles::Frame::new();
    for k in 0..3 {
        theirs.read_step(k, &mut frame).expect("chemfiles reads");
        let ours = read(&mut run, k);
        assert_eq!(ours.positions.len(), 20_000);
        for (one, other) in ours.positions.iter().zip(frame.positions()) {
            for (one, other) in one.iter().zip(other) {
                assert!((one - other).abs() < 1e-12, "{one} is not {other}");
            }
        }
    }
}

#[test]
fn a_table_of_another_length_than_its_head_says_is_refused_where_it_stands() {
    let folder = folder();
    let good = dump("x y z", words, next, 3);
    let lines: Vec<&str> = good.lines().collect();
    // Nine lines of head and twelve atoms a frame.
    let mut longer = lines.clone();
    longer.insert(21 + 21, "13 1 0 0 0");
    let path = write(&folder, "long.dump", longer.join("\n") + "\n");
    says(
        &refused_frame(&path).to_string(),
        &["long.dump, frame 1", "found \"13 1 0 0 0\" after the 12 atoms"],
    );
    let mut shorter = lines.clone();
    shorter.remove(21 + 15);
    let path = write(&folder, "short.dump", shorter.join("\n") + "\n");
    says(
        &refused_frame(&path).to_string(),
        &["short.dump, frame 1", "atom line 12"],
    );
    // Blank lines between frames are none of a table's.
    let mut spaced = lines;
    spaced.insert(21, "");
    let path = write(&folder, "spaced.dump", spaced.join("\n") + "\n");
    let mut run = open(&input(&[&path]));
    let mut frame = empty_frame();
    (0..3).for_each(|k| run.read(k, &mut frame).expect("every frame is good"));
}
