//! Memory does not grow with the number of frames: frames are streamed, and only the records of blocks are kept.
//! Linux only: the peak is what the kernel counts (VmHWM).
#![cfg(target_os = "linux")]

mod program;

use std::fs;
use std::path::Path;
use std::process::Stdio;
use std::time::Duration;

use program::{Job, Table, pipeline, planish, shipped};

const REPEATS: usize = 20;

/// Positions of one frame of 1008 atoms in memory, in bytes.
const FRAME: usize = 1008 * 24;

/// Peak resident memory of a run of the program, in bytes.
fn peak(pipeline: &Path, out: &Path) -> usize {
    let mut child = planish(&["run", "--threads", "2", "--quiet"])
        .arg(pipeline)
        .arg("--out")
        .arg(out)
        .stdout(Stdio::null())
        .spawn()
        .expect("the program starts");
    let status = format!("/proc/{}/status", child.id());
    let mut peak = 0;
    while child.try_wait().expect("a child").is_none() {
        // The count goes up only; the last look before the end is the peak, but for what the last millisecond adds.
        let text = fs::read_to_string(&status).unwrap_or_default();
        let line = text.lines().find_map(|line| line.strip_prefix("VmHWM:"));
        if let Some(kilobytes) = line.and_then(|rest| rest.trim().strip_suffix(" kB")) {
            peak = peak.max(1024 * kilobytes.parse::<usize>().expect("a number"));
        }
        std::thread::sleep(Duration::from_millis(1));
    }
    assert!(child.wait().expect("a status").success());
    assert!(peak > 0, "the kernel gave no peak");
    peak
}

/// The demo's 300 K run once, and the same frames twenty times over: XTC frames stand one after the other in the file.
#[test]
fn a_run_twenty_times_as_long_takes_no_more_memory() {
    let job = Job::new();
    let once = fs::read(shipped("demo-trajectories/hbn-a-300K.xtc")).expect("the demo");
    let [short, long] = [("once", 1), ("often", REPEATS)].map(|(name, repeats)| {
        let xtc = format!("{name}.xtc");
        job.write(&xtc, once.repeat(repeats));
        let run = format!(
            "trajectory = \"{xtc}\"\ntemperature = \"300 K\"\ntension = \"0 N/m\"\nframe_interval = \"0.4 ps\""
        );
        let out = job.path(name);
        let peak = peak(&job.write(&format!("{name}.toml"), pipeline(&[&run])), &out);
        let runs = Table::read(&out.join("runs.csv"));
        let row = runs.of_run("sheet", name).next().expect("a row");
        assert_eq!(row.number("frames"), (301 * repeats) as f64);
        let stored = out.join(format!("blocks/sheet/{name}.npz"));
        (peak, fs::metadata(stored).expect("stored blocks").len() as usize)
    });
    let growth = long.0.saturating_sub(short.0);
    // What a longer run must keep are its records. They stand in memory four times at most: as records, as the arrays and
    // the bytes of the store, and as the series that estimates are made from.
    let records = 4 * (long.1 - short.1);
    assert!(
        growth < records,
        "peak memory grows by {growth} bytes, four times the records are {records}"
    );
    // Were frames kept, the growth would be at least this, and the bound above would see it.
    let frames = 301 * (REPEATS - 1) * FRAME;
    assert!(2 * records < frames, "records {records}, frames {frames}");
}
