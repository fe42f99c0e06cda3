//! Bad input through the program: exit status, and a message that names the file, the frame or line, and what to do.
//! What belongs here: one test for each kind of bad input, with the input made on the fly from `crystals`.

mod crystals;
mod harmonic_sheet;
mod program;

use std::f64::consts::TAU;

use crystals::{Crystal, honeycomb};
use harmonic_sheet::HarmonicSheet;
use planish::fits::Verdict;
use planish::frames::Frame;
use program::{Job, Table, extended_xyz, pipeline};
use rstest::rstest;

const FRAMES: usize = 60;

const RUN: &str = "trajectory = \"run.xyz\"\ntemperature = \"300 K\"\ntension = \"0 N/m\"";

/// A boron nitride sheet as a simulation writes it.
fn sheet(n1: usize, n2: usize, seed: u64) -> HarmonicSheet {
    HarmonicSheet::honeycomb(n1, n2, 1.44, 0.0, seed)
}

fn good_frames() -> Vec<Frame> {
    sheet(9, 7, 7).frames(FRAMES)
}

fn text(frames: &[Frame]) -> String {
    extended_xyz(&honeycomb(9, 7).species, frames)
}

/// The text of some frames after a change to frame `number`.
fn with_frame(number: usize, change: impl Fn(&mut Frame)) -> String {
    let mut frames = good_frames();
    change(&mut frames[number]);
    text(&frames)
}

/// Runs a trajectory on its own: refused, recorded as unusable without a number, status 2, and the message has all parts.
#[track_caller]
fn refused(trajectory: &str, run: &str, parts: &[&str]) {
    let job = Job::new();
    job.write("run.xyz", trajectory);
    let finished = job.run(&pipeline(&[run])).expect(2);
    finished.says(parts);
    finished.says(&["run sheet/run is refused"]);
    let rigidity = job.parameter("bending_rigidity", "run");
    assert_eq!((rigidity.verdict, rigidity.value), (Verdict::Unusable, None));
    assert!(rigidity.note.contains(parts[0]), "{}", rigidity.note);
    let runs = Table::read(&job.path("out").join("runs.csv"));
    let row = runs.of_run("sheet", "run").next().expect("a row");
    assert_eq!(row.text("verdict"), "unusable");
}

/// A pipeline that is wrong before anything is read: status 2, line and column, and no output folder.
#[track_caller]
fn rejected(run: &str, parts: &[&str]) {
    let job = Job::new();
    job.write("run.xyz", text(&good_frames()[..2]));
    let finished = job.run(&pipeline(&[run])).expect(2);
    finished.says(parts);
    finished.says(&["job.toml:", "help: "]);
    assert!(!job.path("out").exists(), "the output folder was made");
}

/// What the other tests spoil is good.
#[test]
fn the_sheet_itself_is_accepted() {
    let job = Job::new();
    job.write("run.xyz", text(&good_frames()));
    job.run(&pipeline(&[RUN])).expect(0);
    assert!(job.parameter("area_per_atom", "run").value.is_some());
}

#[test]
fn a_missing_file_is_named_with_its_line() {
    let run = RUN.replace("run.xyz", "rum.xyz");
    rejected(
        &run,
        &[
            "there is no file `rum.xyz`",
            "job.toml:8:14",
            "did you mean `run.xyz`?",
        ],
    );
}

#[test]
fn a_glob_without_matches_is_named_with_its_line() {
    let run = RUN.replace("run.xyz", "part-*.xtc");
    rejected(
        &run,
        &[
            "no file matches `part-*.xtc`",
            "job.toml:8:14",
            "relative to the pipeline file",
        ],
    );
}

#[rstest]
#[case::not_of_its_format("run.xtc", "this is some text, not a trajectory at all", &["run.xtc", "read as XTC"])]
#[case::unknown_format("run.foo", "1 2 3\n", &["run.foo", "the format of this file is not known", ".xtc"])]
#[case::empty("run.xyz", "", &["run.xyz", "is empty"])]
fn unreadable_files_are_named(#[case] name: &str, #[case] content: &str, #[case] parts: &[&str]) {
    let job = Job::new();
    job.write(name, content);
    let run = RUN.replace("run.xyz", name);
    job.run(&pipeline(&[&run])).expect(2).says(parts);
}

#[test]
fn a_frame_without_a_cell_is_named() {
    let whole = text(&good_frames());
    let last = whole.rfind("Lattice=").expect("a last frame");
    let end = last + whole[last..].find("time=").expect("its time");
    let bare = [&whole[..last], &whole[end..]].concat();
    refused(&bare, RUN, &["run.xyz, frame 59: no periodic cell", "Lattice"]);
}

#[test]
fn a_cell_axis_without_length_is_named() {
    let flat = with_frame(3, |frame| frame.cell.vectors[2] = [0.0; 3]);
    refused(
        &flat,
        RUN,
        &[
            "run.xyz, frame 3: cell vector c has zero length",
            "vacuum included",
        ],
    );
}

#[test]
fn atoms_that_change_in_number_are_named() {
    let changed = with_frame(20, |frame| {
        frame.positions.pop();
    });
    refused(
        &changed,
        RUN,
        &[
            "run.xyz, frame 20: 251 atoms",
            "the first frame of the run has 252",
            "split the run",
        ],
    );
}

/// A text dump holds the word `nan`; chemfiles takes it for no number in extended XYZ, so this one is written as a dump.
#[rstest]
#[case("nan", "NaN")]
#[case("inf", "inf")]
fn coordinates_that_are_not_finite_are_named(#[case] word: &str, #[case] shown: &str) {
    use std::fmt::Write as _;
    let mut dump = String::new();
    for (k, frame) in good_frames().iter().enumerate() {
        let v = frame.cell.vectors;
        write!(
            dump,
            "ITEM: TIMESTEP\n{k}\nITEM: NUMBER OF ATOMS\n252\nITEM: BOX BOUNDS pp pp pp\n0 {}\n0 {}\n0 {}\nITEM: ATOMS id type x y z\n",
            v[0][0], v[1][1], v[2][2]
        )
        .expect("memory");
        for (j, [x, y, z]) in frame.positions.iter().enumerate() {
            let z = if (k, j) == (41, 11) {
                word.to_owned()
            } else {
                z.to_string()
            };
            writeln!(dump, "{} 1 {x} {y} {z}", j + 1).expect("memory");
        }
    }
    let job = Job::new();
    job.write("run.lammpstrj", dump);
    let run = format!("{}\ntimestep = \"1 fs\"", RUN.replace("run.xyz", "run.lammpstrj"));
    let finished = job.run(&pipeline(&[&run])).expect(2);
    finished.says(&[
        "run.lammpstrj, frame 41",
        &format!("z of atom 11 is {shown}"),
        "end the run before this frame with `to`",
    ]);
}

/// Vacuum along b: a ribbon; along a as well: a flake.
#[rstest]
#[case::ribbon(&[1], "not periodic along b:")]
#[case::flake(&[0, 1], "not periodic along a and b:")]
fn ribbons_and_flakes_are_refused(#[case] open: &[usize], #[case] said: &str) {
    let mut frames = good_frames();
    for frame in &mut frames {
        for &axis in open {
            frame.cell.vectors[axis][axis] += 20.0;
        }
    }
    refused(
        &text(&frames),
        RUN,
        &[
            "ribbons and flakes are not supported yet",
            ", frame 0",
            "run.xyz",
            said,
        ],
    );
}

/// The sheet bent along a without stretching, its tangent swinging to 1.9 radians either side of level, so that it lies
/// over itself; the cell shrinks to the projected length.
fn folded(crystal: &Crystal, frame: &mut Frame) {
    let length = crystal.cell.vectors[0][0];
    let steps = 20_000;
    let step = length / f64::from(steps);
    let mut path = vec![[0.0; 2]];
    let mut end = [0.0; 2];
    for k in 0..steps {
        let tangent = 1.9 * (TAU * (f64::from(k) + 0.5) / f64::from(steps)).sin();
        end = [end[0] + tangent.cos() * step, end[1] + tangent.sin() * step];
        path.push(end);
    }
    *frame = crystal.frame(|_| [0.0; 3]);
    for (r, s) in frame.positions.iter_mut().zip(&crystal.sites) {
        let [x, z] = path[(s[0] * f64::from(steps)).round() as usize];
        *r = [x, r[1], z];
    }
    frame.cell.vectors[0][0] = end[0];
}

#[rstest]
#[case::from_the_start(0)]
#[case::later(50)]
fn a_folded_sheet_is_refused(#[case] since: usize) {
    let crystal = honeycomb(21, 6);
    let mut frames = sheet(21, 6, 8).frames(FRAMES);
    for (k, frame) in frames.iter_mut().enumerate().skip(since) {
        folded(&crystal, frame);
        frame.time_ps = Some(10.0 * k as f64);
    }
    let said = format!(", frame {since}");
    refused(
        &extended_xyz(&crystal.species, &frames),
        RUN,
        &[
            "the sheet folds over itself",
            &said,
            "run.xyz",
            "use a part of the run",
        ],
    );
}

/// Two atoms change places for good in frame 45: the run goes on, at most weak, and the frame is named.
#[test]
fn a_hop_names_the_frame_and_costs_the_verdict() {
    let mut frames = good_frames();
    for frame in &mut frames[45..] {
        frame.positions.swap(100, 102);
    }
    let job = Job::new();
    job.write("run.xyz", text(&frames));
    job.run(&pipeline(&[RUN])).expect(0);
    let area = job.parameter("area_per_atom", "run");
    assert_eq!(area.verdict, Verdict::Weak, "{}", area.note);
    for sheet in job.sheets() {
        // A stated tension is what the barostat held, not what the frames say.
        for parameter in sheet.parameter.iter().filter(|p| p.method != "stated") {
            assert_ne!(parameter.verdict, Verdict::Good, "{}", parameter.name);
        }
    }
    let runs = Table::read(&job.path("out").join("runs.csv"));
    let row = runs.of_run("sheet", "run").next().expect("a row");
    for note in [&area.note, row.text("note")] {
        for part in [", frame 45", "run.xyz", "atom 101 left its site"] {
            assert!(note.contains(part), "no {part:?} in: {note}");
        }
    }
}

#[test]
fn a_normal_that_is_not_the_thin_axis_is_refused() {
    let job = Job::new();
    job.write("run.xyz", text(&good_frames()));
    let pipeline = pipeline(&[RUN]).replace("name = \"sheet\"", "name = \"sheet\"\nnormal = \"a\"");
    let finished = job.run(&pipeline).expect(2);
    finished.says(&[
        ", frame 0",
        "run.xyz",
        "the normal axis a is not the thin one",
        "set normal = \"c\"",
    ]);
}

#[test]
fn a_selection_of_nothing_is_refused() {
    let job = Job::new();
    job.write("run.xyz", text(&good_frames()));
    let pipeline = pipeline(&[RUN]).replace("name = \"sheet\"", "name = \"sheet\"\nselect = \"name C\"");
    let finished = job.run(&pipeline).expect(2);
    finished.says(&[
        "select = \"name C\" matches none of the 252 atoms",
        "run.xyz",
        "B",
    ]);
}

#[rstest]
#[case::missing("", &["temperature"])]
#[case::zero("temperature = \"0 K\"", &["job.toml:9:15", "temperature"])]
#[case::negative("temperature = \"-300 K\"", &["job.toml:9:15", "temperature"])]
#[case::bare_number("temperature = 300", &["job.toml:9:15", "K"])]
#[case::wrong_unit("temperature = \"300 ps\"", &["job.toml:9:15", "K"])]
#[case::wrong_type("temperature = [\"300 K\"]", &["job.toml:9:15"])]
#[case::unknown_key("temperature = \"300 K\"\ntensoin = \"0 N/m\"", &["job.toml:10:1", "`tensoin`", "`tension`"])]
fn mistakes_in_the_pipeline_are_placed(#[case] lines: &str, #[case] parts: &[&str]) {
    rejected(&format!("trajectory = \"run.xyz\"\n{lines}"), parts);
}

/// Fewer than 20 frames: nothing wrong, and no number.
#[test]
fn too_few_frames_give_no_number_and_no_fault() {
    for frames in [19, 1] {
        let job = Job::new();
        job.write("run.xyz", text(&good_frames()[..frames]));
        job.run(&pipeline(&[RUN])).expect(0);
        for name in ["bending_rigidity", "area_per_atom"] {
            let parameter = job.parameter(name, "run");
            assert_eq!(
                (parameter.verdict, parameter.value, parameter.error),
                (Verdict::Unusable, None, None),
                "{name} from {frames} frames"
            );
            assert!(parameter.note.contains("frame"), "{}", parameter.note);
        }
        for sheet in job.sheets() {
            // A stated tension is what the barostat held.
            let mut measured = sheet.parameter.iter().filter(|p| p.method != "stated");
            assert!(measured.all(|p| p.value.is_none()), "{frames} frames");
        }
    }
}

/// One bad run among three: the others are what they would have been without it.
#[test]
fn one_bad_run_does_not_lose_the_others() {
    let good = good_frames();
    let named = |name: &str, file: &str| format!("name = \"{name}\"\n{}", RUN.replace("run.xyz", file));
    let [first, bad, last] = [("first", "one.xyz"), ("bad", "two.xyz"), ("last", "three.xyz")]
        .map(|(name, file)| named(name, file));
    let job = Job::new();
    let alone = Job::new();
    for job in [&job, &alone] {
        job.write("one.xyz", text(&good));
        job.write(
            "two.xyz",
            with_frame(33, |frame| frame.cell.vectors[0] = [0.0; 3]),
        );
        job.write("three.xyz", text(&sheet(9, 7, 9).frames(FRAMES)));
    }
    let finished = job.run(&pipeline(&[&first, &bad, &last])).expect(2);
    finished.says(&["run sheet/bad is refused", "two.xyz, frame 33"]);
    alone.run(&pipeline(&[&first, &last])).expect(0);
    for name in ["bending_rigidity", "area_per_atom"] {
        assert_eq!(job.parameter(name, "bad").value, None);
        for run in ["first", "last"] {
            assert_eq!(job.parameter(name, run), alone.parameter(name, run));
        }
    }
    let runs = Table::read(&job.path("out").join("runs.csv"));
    for run in ["first", "bad", "last"] {
        let row = runs.of_run("sheet", run).next().expect("a row");
        assert_eq!(
            row.text("note").contains("frame 33"),
            run == "bad",
            "{}",
            row.text("note")
        );
    }
}

/// Results hold no path of the machine: what is said of a refused run names files as the pipeline does.
#[test]
fn results_name_files_from_the_pipeline() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    std::fs::write(folder.path().join("words.xtc"), "this is no trajectory").expect("written");
    let pipeline = folder.path().join("job.toml");
    let text = "[pipeline]\nname = \"job\"\n[[sheet]]\nname = \"s\"\n[[sheet.run]]\ntrajectory = \"words.xtc\"\n\
                temperature = \"300 K\"\n";
    std::fs::write(&pipeline, text).expect("written");
    let status = std::process::Command::new(env!("CARGO_BIN_EXE_planish"))
        .arg("run")
        .arg(&pipeline)
        .arg("--quiet")
        .status()
        .expect("the program starts");
    assert_eq!(status.code(), Some(2));
    for name in ["parameters.toml", "runs.csv", "report.html"] {
        let text = std::fs::read_to_string(folder.path().join("job.out").join(name)).expect(name);
        assert!(text.contains("words.xtc"), "{name}");
        assert!(
            !text.contains(folder.path().to_str().expect("a plain path")),
            "{name}"
        );
    }
}
