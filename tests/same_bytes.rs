//! The same input gives the same bytes: whatever the number of threads, measured anew or taken from stored blocks.
//! What belongs here: runs of the binary whose result files are compared byte by byte.

mod program;

use std::fs;
use std::path::Path;
use std::time::SystemTime;

use program::{Job, results, run, shipped};

#[track_caller]
fn assert_same(one: &Path, other: &Path, with_blocks: bool) {
    let (one, other) = (results(one, with_blocks), results(other, with_blocks));
    let names = |files: &[(String, Vec<u8>)]| files.iter().map(|file| file.0.clone()).collect::<Vec<_>>();
    assert_eq!(names(&one), names(&other));
    for wanted in [
        "parameters.toml",
        "parameters.json",
        "spectrum.csv",
        "area.csv",
        "runs.csv",
        "report.html",
    ] {
        assert!(one.iter().any(|(name, _)| name == wanted), "no {wanted}");
    }
    assert!(one.iter().any(|(name, _)| name.starts_with("figures")));
    for ((name, left), (_, right)) in one.iter().zip(&other) {
        assert!(left == right, "{name} differs");
    }
}

/// Name and time of last change of every stored run.
fn stored(out: &Path) -> Vec<(String, SystemTime)> {
    let mut found = Vec::new();
    for sheet in fs::read_dir(out.join("blocks")).expect("stored blocks") {
        for file in fs::read_dir(sheet.expect("an entry").path()).expect("a folder") {
            let path = file.expect("an entry").path();
            let changed = path.metadata().and_then(|data| data.modified()).expect("a time");
            found.push((path.display().to_string(), changed));
        }
    }
    found.sort();
    assert!(!found.is_empty());
    found
}

#[test]
fn threads_and_stored_blocks_do_not_change_a_byte() {
    let job = Job::new();
    let demo = shipped("pipelines/drumhead.toml");
    let outs = ["1", "2", "3"].map(|threads| {
        let out = job.path(&format!("threads-{threads}"));
        run(&demo, &out, &["--threads", threads]).expect(0);
        out
    });
    assert_same(&outs[0], &outs[1], true);
    assert_same(&outs[0], &outs[2], true);

    let before = stored(&outs[1]);
    let again = run(&demo, &outs[1], &["--threads", "2", "--verbose"]).expect(0);
    assert_eq!(again.stderr.matches("taken from stored blocks").count(), 10);
    assert_eq!(stored(&outs[1]), before, "stored blocks were written again");
    assert_same(&outs[0], &outs[1], true);
}

fn one_run(stages: &str) -> String {
    let trajectory = shipped("demo-trajectories/hbn-b-600K.xtc");
    format!(
        "{}\n{stages}",
        program::pipeline(&[&format!(
            "trajectory = '{}'\ntemperature = \"600 K\"\ntension = \"0 N/m\"",
            trajectory.display()
        )])
    )
}

/// Another fit takes the stored blocks, and gives what a fresh run with that fit gives.
#[test]
fn another_fit_reads_no_frame() {
    let job = Job::new();
    job.run(&one_run("")).expect(0);
    let out = job.path("out");
    let (before, rippled) = (stored(&out), results(&out, false));

    let harmonic = one_run("[stage.fit]\nplate = \"harmonic\"\n");
    let finished = job.run(&harmonic).expect(0);
    finished.says(&["sheet/hbn-b-600K: taken from stored blocks"]);
    assert_eq!(stored(&out), before, "stored blocks were written again");
    assert!(results(&out, false) != rippled, "the fit changed nothing");

    let fresh = job.path("fresh");
    run(&job.path("job.toml"), &fresh, &[]).expect(0);
    assert_same(&out, &fresh, true);

    // Other blocks are measured anew.
    let finished = job
        .run(&one_run("[stage.spectrum]\nblock_frames = 32\n"))
        .expect(0);
    assert!(!finished.stderr.contains("stored blocks"), "{}", finished.stderr);
    assert_ne!(stored(&out), before);
}

/// Blocks that are damaged are measured again.
#[test]
fn damaged_blocks_are_measured_again() {
    let job = Job::new();
    job.run(&one_run("")).expect(0);
    let out = job.path("out");
    let good = results(&out, true);
    let path = &stored(&out)[0].0;
    let bytes = fs::read(path).expect("a file");
    fs::write(path, &bytes[..bytes.len() / 2]).expect("written");
    job.run(&one_run("")).expect(0);
    assert!(results(&out, true) == good);
}
