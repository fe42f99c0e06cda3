//! Which frames of which files are kept, in which order, at which times.

use planish::frames::{Clock, EngineUnits, ReadNote, RunInput};

use super::files::{
    BOX, ROTATED, TRICLINIC, dump, extended_xyz, folder, input, next, open, read, refused, says, words,
    write, write_binary,
};

#[test]
fn from_to_and_stride_choose_frames_by_time() {
    let folder = folder();
    let times: Vec<f64> = (0..20).map(|k| 0.4 * f64::from(k)).collect();
    let path = write_binary(&folder, "t.xtc", &BOX, &times);
    let run = open(&RunInput {
        from: Some(2.4),
        to: Some(6.8),
        stride: 3,
        ..input(&[&path])
    });
    // 2.4 and 6.8 are rounded to single precision in the file, and belong to the part all the same.
    let frames: Vec<usize> = (0..run.len()).map(|k| run.place(k).frame_in_file).collect();
    assert_eq!(frames, [6, 9, 12, 15]);
    let tight = open(&RunInput {
        from: Some(2.4),
        to: Some(6.8),
        ..input(&[&path])
    });
    assert_eq!(tight.place(0).frame_in_file, 6);
    assert_eq!(tight.place(tight.len() - 1).frame_in_file, 17);
    assert_eq!(run.source_len(), 20);
    assert!((run.frame_interval_ps().expect("times") - 1.2).abs() < 1e-6);
    assert!((run.first_time_ps().expect("times") - 2.4).abs() < 1e-6);
    assert_eq!(
        run.place(3).to_string(),
        format!("{}, frame 15 (t = 6 ps)", path.display())
    );
}

#[test]
fn a_restart_that_repeats_frames_is_joined_without_them() {
    let folder = folder();
    // The names sort against the times; the times win.
    let late = write_binary(&folder, "part1.xtc", &BOX, &[2.0, 3.0, 4.0, 5.0]);
    let early = write_binary(&folder, "part2.xtc", &BOX, &[0.0, 1.0, 2.0, 3.0]);
    let mut run = open(&RunInput {
        trajectory: vec![vec![late.clone(), early]],
        ..input(&[])
    });
    let times: Vec<Option<f64>> = (0..run.len()).map(|k| read(&mut run, k).time_ps).collect();
    assert_eq!(times, [0.0, 1.0, 2.0, 3.0, 4.0, 5.0].map(Some));
    assert_eq!(run.place(4).path, late);
    let note = ReadNote::OverlapDropped {
        path: late,
        frames: 2,
        first_ps: 2.0,
        last_ps: 3.0,
    };
    assert!(run.notes().contains(&note), "{:?}", run.notes());
    says(&note.to_string(), &["2 frame(s) from 2 ps to 3 ps"]);
    assert_eq!(run.frame_interval_ps(), Some(1.0));
}

#[test]
fn files_without_times_are_sorted_by_natural_name_and_timed_by_the_interval() {
    let folder = folder();
    let bare = extended_xyz(&BOX, &[0.0]).replace("time=0.0", "");
    let ten = write(&folder, "run10.xyz", &bare);
    let two = write(&folder, "run2.xyz", &bare);
    let asked = RunInput {
        trajectory: vec![vec![ten, two.clone()]],
        ..input(&[])
    };
    let run = open(&asked);
    assert_eq!(run.place(0).path, two);
    assert_eq!((run.frame_interval_ps(), run.first_time_ps()), (None, None));
    assert!(
        run.notes()
            .iter()
            .any(|note| matches!(note, ReadNote::TimesMissing { .. }))
    );
    says(
        &refused(&RunInput {
            to: Some(1.0),
            ..asked.clone()
        }),
        &["`to` needs frame times", "frame_interval"],
    );
    let mut run = open(&RunInput {
        clock: Clock::FrameInterval(0.5),
        from: Some(0.5),
        ..asked
    });
    assert_eq!(run.len(), 1);
    assert_eq!(read(&mut run, 0).time_ps, Some(0.5));
    assert!(
        !run.notes()
            .iter()
            .any(|note| matches!(note, ReadNote::TimesMissing { .. }))
    );
}

#[test]
fn uneven_times_are_all_read_and_noted() {
    let folder = folder();
    // The first two and the last lie on one line; a restart in the middle repeats a time and a gap makes up for it.
    let times = [0.0, 1.0, 2.0, 3.0, 3.0, 4.0, 5.0, 7.0, 8.0, 9.0];
    let path = write_binary(&folder, "t.xtc", &BOX, &times);
    let run = open(&input(&[&path]));
    assert_eq!((run.len(), run.source_len()), (9, 10));
    assert_eq!(run.frame_interval_ps(), Some(1.0));
    let uneven = |note: &&ReadNote| matches!(note, ReadNote::UnevenSpacing { .. });
    let note = run.notes().iter().find(uneven).expect("noted");
    says(
        &note.to_string(),
        &[
            "from 1 ps to 2 ps (before ",
            ", frame 7 (t = 7 ps)",
            "1 ps is used",
        ],
    );
}

#[test]
fn steps_give_times() {
    let folder = folder();
    let path = write_binary(&folder, "t.xtc", &BOX, &[7.0, 8.0, 9.0]);
    let mut run = open(&RunInput {
        clock: Clock::Timestep(0.002),
        ..input(&[&path])
    });
    assert_eq!(read(&mut run, 2).time_ps, Some(4.0));
}

#[test]
fn runs_may_move_between_threads_and_be_read_side_by_side() {
    let folder = folder();
    let a = write(&folder, "a.xyz", extended_xyz(&ROTATED, &[0.0, 1.0, 2.0]));
    let b = write_binary(&folder, "b.xtc", &TRICLINIC, &[0.0, 1.0, 2.0]);
    std::thread::scope(|scope| {
        for (path, cell) in [(&a, &ROTATED), (&b, &TRICLINIC), (&a, &ROTATED)] {
            let mut run = open(&input(&[path]));
            scope.spawn(move || {
                for round in 0..20 {
                    let frame = read(&mut run, round % 3);
                    assert!((frame.cell.vectors[1][0] - cell[1][0]).abs() < 1e-4);
                }
            });
        }
    });
}

#[test]
fn times_stand_in_the_title_of_gro_frames() {
    let folder = folder();
    let frames = ["7.00000", "9.50000"].map(|time| {
        // Columns of the atom line: residue 5 and 5, atom 5 and 5, then three of 8.
        let atom = "    1C        C    1   0.100   0.200   0.300";
        format!("sheet t= {time} step= 0\n    1\n{atom}\n   1.0 2.0 3.0\n")
    });
    let path = write(&folder, "t.gro", frames.concat());
    let run = open(&input(&[&path]));
    assert_eq!(
        (run.first_time_ps(), run.frame_interval_ps()),
        (Some(7.0), Some(2.5))
    );
}

#[test]
fn times_in_an_unknown_unit_are_not_used() {
    let folder = folder();
    let timed = dump("xs ys zs", words, next, 2).replace("ITEM: TIMESTEP", "ITEM: TIME\n250\nITEM: TIMESTEP");
    let path = write(&folder, "t.dump", timed);
    let asked = input(&[&path]);
    let run = open(&asked);
    let note = run
        .notes()
        .iter()
        .find(|note| matches!(note, ReadNote::TimesMissing { .. }))
        .expect("noted");
    says(&note.to_string(), &["its ITEM: TIME has no unit", "engine_units"]);
    let real = open(&RunInput {
        engine_units: Some(EngineUnits::Real),
        ..asked
    });
    // 250 fs; the second frame says the same time and is an overlap.
    assert_eq!((real.first_time_ps(), real.len()), (Some(0.25), 1));

    let path = write_binary(&folder, "t.dcd", &BOX, &[0.0, 1.0]);
    let run = open(&input(&[&path]));
    assert!(
        run.notes()
            .iter()
            .any(|note| note.to_string().contains("a DCD does not say"))
    );
    assert_eq!(
        open(&RunInput {
            clock: Clock::FrameInterval(0.5),
            ..input(&[&path])
        })
        .frame_interval_ps(),
        Some(0.5)
    );
}

#[test]
fn a_run_of_more_files_than_are_kept_open_is_read_in_any_order() {
    let folder = folder();
    let files: Vec<_> = (0..70)
        .map(|k| {
            write_binary(
                &folder,
                &format!("part{k}.xtc"),
                &BOX,
                &[2.0 * f64::from(k), 2.0 * f64::from(k) + 1.0],
            )
        })
        .collect();
    let mut run = open(&RunInput {
        trajectory: vec![files],
        ..input(&[])
    });
    assert_eq!(run.len(), 140);
    for k in (0..140).rev().step_by(3).chain(0..140) {
        assert_eq!(read(&mut run, k).time_ps, Some(k as f64));
    }
}

#[test]
fn an_overlap_is_found_where_times_are_rounded() {
    let folder = folder();
    // Single precision rounds 0.1 k differently for each k, and the times between are interpolated.
    let times =
        |from: usize, to: usize| -> Vec<f64> { (from..to).map(|k| 1000.0 + 0.1 * k as f64).collect() };
    for (overlap, end) in (1..12).flat_map(|overlap| (100..112).map(move |end| (overlap, end))) {
        let first = write_binary(&folder, "a.xtc", &BOX, &times(0, 57));
        let second = write_binary(&folder, "b.xtc", &BOX, &times(57 - overlap, end));
        let run = open(&input(&[&first, &second]));
        assert_eq!(run.len(), end, "{overlap} frames overlap");
    }
}

#[test]
fn late_and_dense_frames_are_not_taken_for_one_another() {
    let folder = folder();
    // A microsecond of a dump whose frames are 0.02 ps apart: closer than single precision could tell.
    let dense = |from: usize| {
        let text = dump("xs ys zs", words, next, 4);
        (0..4).fold(text, |text, k| {
            text.replace(
                &format!("TIMESTEP\n{}\n", 400 * k),
                &format!("TIMESTEP\n{}\n", from + 10 * k),
            )
        })
    };
    let first = write(&folder, "a.dump", dense(500_000_000));
    let second = write(&folder, "b.dump", dense(500_000_040));
    let asked = RunInput {
        clock: Clock::Timestep(0.002),
        ..input(&[&first, &second])
    };
    let run = open(&asked);
    assert_eq!(run.len(), 8);
    let part = open(&RunInput {
        from: Some(1_000_000.04),
        to: Some(1_000_000.1),
        ..asked
    });
    assert_eq!(part.len(), 4);
}
