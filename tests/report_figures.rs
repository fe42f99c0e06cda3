//! Figures and the page: well-formed, the same bytes each time, showing what the data hold, safe for any name.

mod report_sample;

use planish::estimates::Tension;
use planish::fits::{Fitted, Verdict};
use planish::parameters::{Provenance, Sheet};
use planish::report::{
    Figure, PageContent, PageSheet, RunSummary, SheetReport, SummaryStyle, area_figure, kappa_figure,
    kappa_points, page, summary,
};

/// Checks that tags open and close in order, and gives the number of elements of each name. Enough of XML's rules for
/// text that holds no comments, no CDATA and no processing instructions.
fn elements(xml: &str) -> std::collections::BTreeMap<String, usize> {
    let mut open: Vec<String> = Vec::new();
    let mut counts = std::collections::BTreeMap::new();
    let mut rest = xml;
    while let Some(start) = rest.find('<') {
        assert!(
            !rest[..start].contains('>'),
            "a stray > before {:?}",
            &rest[start..]
        );
        let end = start + rest[start..].find('>').expect("every tag ends");
        let tag = &rest[start + 1..end];
        assert_eq!(tag.matches('"').count() % 2, 0, "quotes in pairs: <{tag}>");
        assert!(
            !tag.contains('&') || tag.contains(';'),
            "ampersands are escaped: <{tag}>"
        );
        if let Some(name) = tag.strip_prefix('/') {
            assert_eq!(open.pop().as_deref(), Some(name), "tags close in order");
        } else {
            let name = tag.split([' ', '/']).next().expect("a name").to_owned();
            *counts.entry(name.clone()).or_insert(0) += 1;
            if !tag.ends_with('/') {
                open.push(name);
            }
        }
        rest = &rest[end + 1..];
    }
    assert!(open.is_empty(), "left open: {open:?}");
    counts
}

fn both(name: &str) -> (Figure, Figure) {
    let estimates = report_sample::sheet(name);
    let fits = report_sample::fits(&estimates);
    let report = SheetReport {
        estimates: &estimates,
        fits: &fits,
        q_max: None,
    };
    (
        kappa_figure(&report).expect("kappa to show"),
        area_figure(&report).expect("areas to show"),
    )
}

#[test]
fn figures_are_well_formed_and_deterministic() {
    let (kappa, area) = both("hbn-a");
    assert_eq!((kappa.clone(), area.clone()), both("hbn-a"));
    assert_eq!(elements(&kappa.svg)["svg"], 1);
    assert_eq!(elements(&area.svg)["svg"], 1);
    if let Ok(folder) = std::env::var("PLANISH_SHOW_FIGURES") {
        std::fs::write(format!("{folder}/kappa.svg"), &kappa.svg).expect("a folder for the figures");
        std::fs::write(format!("{folder}/area.svg"), &area.svg).expect("a folder for the figures");
    }
}

#[test]
fn every_point_has_its_marker_and_every_run_its_name() {
    let estimates = report_sample::sheet("hbn-a");
    let fits = report_sample::fits(&estimates);
    let figure = kappa_figure(&SheetReport {
        estimates: &estimates,
        fits: &fits,
        q_max: None,
    })
    .expect("kappa to show");
    let points: usize = estimates.runs.iter().map(|run| run.spectrum.rows.len()).sum();
    // One polygon a point, one a run in the legend, one each for "used" and "not used".
    assert_eq!(
        elements(&figure.svg)["polygon"],
        points + estimates.runs.len() + 2
    );
    for label in ["150 K", "900 K", "window of the fit", "wave vector q (1/\u{c5})"] {
        assert!(figure.svg.contains(label), "{label} is written");
    }
}

#[test]
fn a_sheet_without_fits_still_shows_its_data_and_one_without_runs_shows_nothing() {
    let mut estimates = report_sample::sheet("hbn-a");
    estimates.runs.truncate(1);
    let report = SheetReport {
        estimates: &estimates,
        fits: &[],
        q_max: None,
    };
    assert!(kappa_figure(&report).is_some());
    assert!(area_figure(&report).is_some());
    estimates.runs.clear();
    let report = SheetReport {
        estimates: &estimates,
        fits: &[],
        q_max: None,
    };
    assert!(kappa_figure(&report).is_none());
    assert!(area_figure(&report).is_none());
}

#[test]
fn names_cannot_break_out_of_figures_or_pages() {
    let evil = "<script>alert('x')</script>&\"";
    let (kappa, area) = both(evil);
    elements(&kappa.svg);
    elements(&area.svg);
    let estimates = report_sample::sheet(evil);
    let sheet = Sheet::from_fits(evil, &report_sample::fits(&estimates));
    let text = page_of(&sheet, &kappa, &[evil.to_owned()]);
    assert!(!text.contains("<script"), "no script in the page");
}

fn page_of(sheet: &Sheet, figure: &Figure, warnings: &[String]) -> String {
    let run = RunSummary {
        sheet: sheet.name.clone(),
        run: "300K".to_owned(),
        temperature_K: 300.0,
        frames: 301,
        frames_cut: Some(21),
        block_frames: 16,
        slowest_relaxation_ps: Some(1.7),
        effective_samples: Some(34.2),
        verdict: Verdict::Good,
        note: String::new(),
    };
    let provenance = Provenance {
        program: Provenance::this_program(),
        pipeline: "drumhead.toml".to_owned(),
        pipeline_blake3: "af13".to_owned(),
        input: vec![],
        run: vec![],
    };
    page(&PageContent {
        title: "drumhead",
        provenance: &provenance,
        sheets: vec![PageSheet {
            sheet,
            runs: vec![&run],
            figures: vec![(figure, "Bending rigidity against wave vector.")],
        }],
        warnings,
    })
}

#[test]
fn the_page_stands_alone_and_says_the_verdicts_in_words() {
    let estimates = report_sample::sheet("hbn-a");
    let sheet = Sheet::from_fits("hbn-a", &report_sample::fits(&estimates));
    let (kappa, _) = both("hbn-a");
    let text = page_of(&sheet, &kappa, &["the tension is not known".to_owned()]);
    for outside in ["<script", "<link", "src=", "@import", "url("] {
        assert!(
            !text.contains(outside),
            "{outside} would need something outside the page"
        );
    }
    for shown in [
        "good",
        "unusable",
        "3 effective samples",
        "the tension is not known",
        "<svg",
        "bending_rigidity_bare",
    ] {
        assert!(text.contains(shown), "{shown} is on the page");
    }
    if let Ok(folder) = std::env::var("PLANISH_SHOW_FIGURES") {
        std::fs::write(format!("{folder}/report.html"), &text).expect("a folder for the page");
    }
}

#[test]
fn a_point_without_a_positive_kappa_is_left_out_of_the_logarithmic_plot() {
    let mut estimates = report_sample::sheet("hbn-a");
    // A held tension far above what the heights show makes kappa negative at long waves.
    estimates.runs = vec![report_sample::run("300K", 300.0, Tension::Stated(0.05))];
    let report = SheetReport {
        estimates: &estimates,
        fits: &[],
        q_max: None,
    };
    let shown = elements(&kappa_figure(&report).expect("short waves stay").svg)["polygon"];
    let points = kappa_points(&estimates.runs[0], None);
    let positive = points
        .iter()
        .filter(|point| point.kappa.is_some_and(|kappa| kappa > 0.0))
        .count();
    assert!(positive < points.len(), "the sample has points to leave out");
    // Three more in the legend: the run, "used" and "not used".
    assert_eq!(shown, positive + 3);
}

#[test]
fn the_summary_shows_values_with_errors_and_respects_the_width() {
    let estimates = report_sample::sheet("hbn-a");
    let sheet = Sheet::from_fits("hbn-a", &report_sample::fits(&estimates));
    let plain = SummaryStyle {
        width: None,
        colour: false,
    };
    let text = summary(&sheet, plain);
    insta::assert_snapshot!(text);
    let narrow = summary(
        &sheet,
        SummaryStyle {
            width: Some(80),
            colour: false,
        },
    );
    let table_lines = narrow.lines().filter(|line| !line.starts_with("  "));
    assert!(table_lines.clone().count() > 5);
    for line in table_lines {
        assert!(line.chars().count() <= 80, "{line}");
    }
    assert!(!text.contains('\u{1b}'), "no colour codes unless asked");
    let coloured = summary(
        &sheet,
        SummaryStyle {
            width: None,
            colour: true,
        },
    );
    assert!(coloured.contains('\u{1b}'));
}

#[test]
fn an_expansion_between_two_runs_is_shown_too() {
    let quantities = vec![
        report_sample::quantity(
            "area_per_atom",
            "A^2",
            Some("150K"),
            Some(150.0),
            Some((2.7, 0.001)),
        ),
        report_sample::quantity(
            "area_per_atom",
            "A^2",
            Some("300K"),
            Some(300.0),
            Some((2.7, 0.001)),
        ),
        report_sample::quantity(
            "thermal_expansion",
            "1/K",
            None,
            Some(225.0),
            Some((-3.1e-6, 4e-7)),
        ),
    ];
    let fitted = Fitted {
        quantities,
        ..Fitted::default()
    };
    let plain = SummaryStyle {
        width: None,
        colour: false,
    };
    let text = summary(&Sheet::from_fits("a", &[fitted]), plain);
    assert!(text.contains("thermal_expansion at 225 K"), "{text}");
    assert!(text.contains("-3.10(40)e-6 good"), "{text}");
}
