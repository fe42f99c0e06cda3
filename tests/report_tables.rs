//! The CSV tables: their columns, what an absent value looks like, and kappa against a calculation by hand.

mod report_sample;

use planish::estimates::Tension;
use planish::fits::Verdict;
use planish::report::{RunSummary, SheetReport, area_csv, kappa_points, runs_csv, spectrum_csv};

fn rows(text: &str) -> Vec<Vec<String>> {
    csv::Reader::from_reader(text.as_bytes())
        .records()
        .map(|record| {
            record
                .expect("a readable row")
                .iter()
                .map(str::to_owned)
                .collect()
        })
        .collect()
}

#[test]
fn columns_are_those_that_scripts_rely_on() {
    let estimates = report_sample::sheet("hbn-a");
    let fits = report_sample::fits(&estimates);
    let spectrum = spectrum_csv(&[SheetReport {
        estimates: &estimates,
        fits: &fits,
        q_max: None,
    }]);
    assert!(spectrum.starts_with(
        "sheet,run,temperature_K,q_per_A,modes,height_power_A2,height_power_error_A2,kappa_eV,kappa_error_eV,\
         effective_samples,relaxation_ps,used\n"
    ));
    let area = area_csv(&[&estimates]);
    assert!(area.starts_with("sheet,run,temperature_K,block,time_ps,area_A2,area_error_A2\n"));
    assert!(runs_csv(&[]).starts_with(
        "sheet,run,temperature_K,frames,frames_cut,block_frames,slowest_relaxation_ps,effective_samples,verdict,note\n"
    ));
    let expected: usize = estimates.runs.iter().map(|run| run.spectrum.rows.len()).sum();
    assert_eq!(rows(&spectrum).len(), expected);
    assert_eq!(rows(&area).len(), 18);
}

#[test]
fn used_is_the_window_of_the_run() {
    let estimates = report_sample::sheet("hbn-a");
    let fits = report_sample::fits(&estimates);
    let text = spectrum_csv(&[SheetReport {
        estimates: &estimates,
        fits: &fits,
        q_max: None,
    }]);
    for row in rows(&text) {
        let q: f64 = row[3].parse().expect("a number");
        // The sample's windows start at its longest wave and end at 0.8/A for the run at 300 K, at 1.0/A otherwise.
        let end = if row[1] == "300K" { 0.8 } else { 1.0 };
        assert_eq!(row[11], (q <= end).to_string(), "q = {q} of {}", row[1]);
    }
    let without_fit = spectrum_csv(&[SheetReport {
        estimates: &estimates,
        fits: &[],
        q_max: None,
    }]);
    assert!(rows(&without_fit).iter().all(|row| row[11] == "false"));
}

#[test]
fn absent_values_are_empty_cells() {
    let mut estimates = report_sample::sheet("hbn-a");
    estimates.runs.truncate(1);
    estimates.runs[0].spectrum.rows[0].relaxation_ps = None;
    estimates.runs[0].spectrum.rows[0].weighted_power = 0.0;
    estimates.runs[0].area_blocks[0].time_ps = None;
    let spectrum = rows(&spectrum_csv(&[SheetReport {
        estimates: &estimates,
        fits: &[],
        q_max: None,
    }]));
    assert_eq!([&spectrum[0][7], &spectrum[0][8], &spectrum[0][10]], ["", "", ""]);
    assert!(spectrum[1].iter().all(|cell| !cell.is_empty()));
    let area = rows(&area_csv(&[&estimates]));
    assert_eq!(area[0][4], "");
    assert_eq!(area[2][6], "", "a block of one frame has no error");
    let refused = RunSummary {
        sheet: "hbn-a".to_owned(),
        run: "300K, \"second\"".to_owned(),
        temperature_K: 300.0,
        frames: 7,
        frames_cut: None,
        block_frames: 16,
        slowest_relaxation_ps: None,
        effective_samples: None,
        verdict: Verdict::Unusable,
        note: "frame 7: the sheet folds over itself,\nso its height has two values".to_owned(),
    };
    let read = rows(&runs_csv(std::slice::from_ref(&refused)));
    assert_eq!(
        read[0],
        [
            "hbn-a",
            &refused.run,
            "300.0",
            "7",
            "",
            "16",
            "",
            "",
            "unusable",
            &refused.note
        ]
    );
}

/// kappa from heights of a plate under tension, the numbers worked out beside the program: kB T/(A w) - sigma/q^2 with
/// kB T = 0.025851999786 eV at 300 K (CODATA 2018), A = 52.4 x 51.8 A^2, q = 2 pi/52.4 A.
#[test]
fn kappa_takes_the_held_tension_out_and_carries_its_error() {
    let tension = Tension::Measured {
        value: 0.001,
        error: 0.0004,
    };
    let mut run = report_sample::run("300K", 300.0, tension);
    let row = &mut run.spectrum.rows[0];
    row.weighted_power = 7.0e-6;
    row.weighted_power_error = 0.7e-6;
    assert!((row.length - 0.119_908_116_549_228_75).abs() < 1e-12);
    let point = kappa_points(&run, None)[0];
    let kappa = point.kappa.expect("a value");
    let error = point.error.expect("an error");
    // 0.025851999786/(2714.32 x 7e-6) = 1.3606144; 0.001/0.0143779564 = 0.0695509.
    assert!((kappa - 1.291_063_5).abs() < 1e-7, "{kappa}");
    // sqrt((0.1 x 1.3606144)^2 + (0.0004/0.0143779564)^2) = 0.1388765.
    assert!((error - 0.138_876_5).abs() < 1e-7, "{error}");
}
