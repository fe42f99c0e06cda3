//! Pipeline files: those in `data/pipelines/accepted` resolve to the plan expected here, each of those in
//! `data/pipelines/rejected` holds one kind of mistake (`many-problems` several) and stands beside the message it gets.
//! What a run does with a plan is tested elsewhere.

use std::path::{Path, PathBuf};

use planish::fits::{PlateModel, Verdict};
use planish::frames::{CellAxis, Clock, EngineUnits};
use planish::pipeline::keys::{FILE, Kind};
use planish::pipeline::{Diagnostics, ErrorLimit, PipelineFile, Plan};
use planish::sheet::Positions;

fn accepted(name: &str) -> Plan {
    let path = format!("tests/data/pipelines/accepted/{name}.toml");
    Plan::load(Path::new(&path)).unwrap_or_else(|problems| panic!("{problems}"))
}

fn inputs(names: &[&str]) -> Vec<PathBuf> {
    names
        .iter()
        .map(|name| Path::new("tests/data/pipelines/accepted/../inputs").join(name))
        .collect()
}

#[test]
fn every_key_of_a_run_reaches_the_plan() {
    let plan = accepted("contract");
    assert_eq!(plan.name, "drumhead");
    assert_eq!(plan.sheets.len(), 1);
    let sheet = &plan.sheets[0];
    assert_eq!(sheet.name, "hbn-a");
    let run = &sheet.runs[0];
    assert_eq!(run.name, "300K");
    assert_eq!(run.temperature, 300.0);
    assert_eq!(run.tension, Some(0.0));
    assert_eq!(run.replica_of, None);
    assert_eq!(run.input.trajectory, vec![inputs(&["hbn-a-300K.xtc"])]);
    assert_eq!(run.input.topology, Some(inputs(&["hbn-start.data"]).remove(0)));
    assert_eq!(run.input.thermo, Some(inputs(&["hbn-a-300K.csv"]).remove(0)));
    assert_eq!(run.input.species, Some(vec!["B".to_owned(), "N".to_owned()]));
    assert_eq!(run.input.clock, Clock::FrameInterval(0.4));
    assert_eq!(run.input.engine_units, Some(EngineUnits::Metal));
    assert_eq!(
        (run.input.from, run.input.to, run.input.stride),
        (Some(20.0), Some(120.0), 2)
    );
    assert_eq!(
        (run.input.select.as_str(), run.input.normal),
        ("all", CellAxis::C)
    );
    let replica = &sheet.runs[1];
    assert_eq!(replica.replica_of.as_deref(), Some("300K"));
    assert_eq!(replica.input.clock, Clock::Timestep(1e-3));
    assert!(plan.warnings.is_empty());
}

#[test]
fn the_smallest_file_gets_the_documented_defaults() {
    let plan = accepted("smallest");
    let run = &plan.sheets[0].runs[0];
    assert_eq!(run.name, "hbn-a-300K");
    assert_eq!(run.tension, None);
    assert_eq!(run.input.clock, Clock::File);
    assert_eq!((run.input.from, run.input.to, run.input.stride), (None, None, 1));
    assert_eq!(
        (run.input.select.as_str(), run.input.normal),
        ("all", CellAxis::C)
    );
    assert_eq!(
        (&run.input.topology, &run.input.thermo, &run.input.species),
        (&None, &None, &None)
    );
    assert_eq!(run.input.engine_units, None);
    assert_eq!(plan.project.positions, Positions::Reference);
    assert_eq!((plan.spectrum.q_max, plan.spectrum.block_frames), (None, 16));
    assert_eq!(
        (plan.fit.plate, plan.fit.window, plan.fit.wanted_error),
        (PlateModel::Rippled, None, 0.05)
    );
    assert!(plan.gate.is_empty());
    assert_eq!(
        plan.default_output(),
        Path::new("tests/data/pipelines/accepted/smallest.out")
    );
}

#[test]
fn stages_and_gates_reach_the_plan_in_its_units() {
    let plan = accepted("stages");
    assert_eq!(plan.project.positions, Positions::Instantaneous);
    assert!((plan.spectrum.q_max.unwrap() - 1.2).abs() < 1e-12);
    assert_eq!(plan.spectrum.block_frames, 32);
    assert_eq!(
        (plan.fit.plate, plan.fit.window, plan.fit.wanted_error),
        (PlateModel::Harmonic, Some([0.1, 0.8]), 0.02)
    );
    let run = &plan.sheets[0].runs[0];
    assert_eq!(run.input.normal, CellAxis::A);
    assert_eq!(run.input.select, "name B or name N");
    assert_eq!(
        run.input.trajectory,
        vec![inputs(&["part-1.xtc", "part-2.xtc"]), inputs(&["part-10.xtc"])]
    );
    // 1 eV/A^2 = 16.02176634 N/m (CODATA 2018).
    assert!((run.tension.unwrap() * 16.021_766_34 - 0.05).abs() < 1e-12);
    let gates: Vec<&str> = plan.gate.iter().map(|gate| gate.parameter.as_str()).collect();
    assert_eq!(
        gates,
        [
            "youngs_modulus",
            "bending_rigidity",
            "poisson_ratio",
            "thermal_expansion"
        ]
    );
    assert!((plan.gate[0].min.unwrap() - 160.217_663_4).abs() < 1e-9);
    assert!((plan.gate[0].max.unwrap() - 400.0).abs() < 1e-9);
    assert_eq!(plan.gate[1].max_error, Some(ErrorLimit::Relative(0.05)));
    assert_eq!(plan.gate[1].verdict, Some(Verdict::Good));
    assert_eq!(plan.gate[2].max_error, Some(ErrorLimit::Absolute(0.1)));
    assert_eq!(plan.gate[3].max, Some(-1e-6));
}

#[test]
fn globs_find_files_in_natural_order() {
    let plan = accepted("globs");
    let runs = &plan.sheets[0].runs;
    assert_eq!(
        runs[0].input.trajectory,
        vec![inputs(&["part-1.xtc", "part-2.xtc", "part-10.xtc"])]
    );
    assert_eq!(runs[1].input.trajectory, vec![inputs(&["odd[1].xtc"])]);
    assert_eq!(runs[2].input.thermo, Some(inputs(&["hbn-a-300K.csv"]).remove(0)));
    let names: Vec<&str> = runs.iter().map(|run| run.name.as_str()).collect();
    assert_eq!(names, ["part-1", "odd[1]", "run"]);
}

#[test]
fn warnings_do_not_stop_the_job() {
    insta::with_settings!({snapshot_path => "data/pipelines/accepted", prepend_module_to_snapshot => false, omit_expression => true}, {
        insta::assert_snapshot!("warned", accepted("warned").warnings.to_string());
    });
}

#[test]
fn equal_plans_have_equal_canonical_texts_wherever_they_lie() {
    let relative = accepted("stages");
    let absolute =
        Plan::load(&std::path::absolute("tests/data/pipelines/accepted/stages.toml").unwrap()).unwrap();
    assert_ne!(relative.sheets, absolute.sheets);
    assert_eq!(relative.canonical(), absolute.canonical());
    assert!(!absolute.canonical().contains(env!("CARGO_MANIFEST_DIR")));
    let measured = |plan: &Plan| plan.measured_form(&plan.sheets[0].runs[0]).to_text();
    assert_eq!(measured(&relative), measured(&absolute));

    // What is only fitted measures nothing anew; what is measured does.
    let mut fitted = relative.clone();
    fitted.fit.wanted_error = 0.01;
    fitted.sheets[0].runs[0].temperature = 310.0;
    assert_eq!(measured(&relative), measured(&fitted));
    assert_ne!(relative.canonical(), fitted.canonical());
    let mut other = relative.clone();
    other.spectrum.block_frames = 64;
    assert_ne!(measured(&relative), measured(&other));

    // A run that grew by a file keeps its settings.
    let mut grown = relative.clone();
    grown.sheets[0].runs[0]
        .input
        .trajectory
        .push(inputs(&["seed-2.xtc"]));
    let settings = |plan: &Plan| plan.measured_form(&plan.sheets[0].runs[0]).settings.to_text();
    assert_eq!(settings(&relative), settings(&grown));
    assert_ne!(measured(&relative), measured(&grown));
}

fn rejected(path: &Path) -> Diagnostics {
    match Plan::load(path) {
        Ok(_) => panic!("{} was accepted", path.display()),
        Err(problems) => problems,
    }
}

#[test]
fn every_mistake_gets_its_message() {
    let mut files: Vec<PathBuf> = Path::new("tests/data/pipelines/rejected")
        .read_dir()
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "toml"))
        .collect();
    files.sort();
    assert!(files.len() >= 30);
    for path in files {
        let problems = rejected(&path);
        for problem in problems.sorted() {
            assert!(problem.help.is_some(), "{}: {}", path.display(), problem.message);
        }
        let name = path.file_stem().unwrap().to_string_lossy().into_owned();
        insta::with_settings!({snapshot_path => "data/pipelines/rejected", prepend_module_to_snapshot => false, omit_expression => true}, {
            insta::assert_snapshot!(name, problems.to_string());
        });
    }
}

#[test]
fn all_problems_are_reported_at_once_with_line_and_column() {
    let problems = rejected(Path::new("tests/data/pipelines/rejected/many-problems.toml"));
    let places: Vec<(usize, usize)> = problems
        .sorted()
        .into_iter()
        .map(|problem| problems.line_and_column(problem.span.clone().unwrap().start))
        .collect();
    assert_eq!(
        places,
        [
            (2, 1),
            (6, 10),
            (9, 16),
            (10, 17),
            (11, 12),
            (13, 3),
            (14, 16),
            (15, 10),
            (18, 9)
        ]
    );
}

#[test]
fn a_file_that_cannot_be_read_is_named() {
    let problems = rejected(Path::new("tests/data/pipelines/absent.toml"));
    let text = problems.to_string();
    assert!(
        text.contains("tests/data/pipelines/absent.toml: cannot read the pipeline file"),
        "{text}"
    );
    let folder = tempfile::tempdir().unwrap();
    let binary = folder.path().join("trajectory.xtc");
    std::fs::write(&binary, b"[pipeline]\n\xff\xfe").unwrap();
    let text = rejected(&binary).to_string();
    assert!(text.contains("line 2 is not UTF-8 text"), "{text}");
}

#[test]
fn colour_changes_nothing_but_colour() {
    let problems = rejected(Path::new("tests/data/pipelines/rejected/bare-number.toml"));
    let coloured = problems.render(true);
    assert!(coloured.contains('\u{1b}'));
    assert_eq!(
        anstream::adapter::strip_str(&coloured).to_string(),
        problems.render(false)
    );
}

fn problems_of(source: &str) -> Diagnostics {
    let mut problems = Diagnostics::new(Path::new("pipeline.toml"), source);
    let _ = PipelineFile::parse(source, &mut problems);
    problems
}

/// A key that is declared and never read would be accepted and without effect.
#[test]
fn every_declared_key_is_read() {
    let mut tried = 0;
    for table in FILE.with_descendants() {
        let header = match table.header {
            "the file" | "[stage]" => continue,
            "[[sheet.run]]" => "[[sheet]]\n[[sheet.run]]",
            "[gate.NAME]" => "[gate.tension]",
            header => header,
        };
        for key in table.keys {
            if matches!(key.kind, Kind::Tables(_)) {
                continue;
            }
            let problems = problems_of(&format!("{header}\n{} = 1979-05-27\n", key.name));
            let wanted = format!("`{}` is a date", key.name);
            assert!(
                problems
                    .sorted()
                    .iter()
                    .any(|problem| problem.message.starts_with(&wanted)),
                "{} {}: {problems}",
                table.header,
                key.name
            );
            tried += 1;
        }
    }
    assert!(tried > 20);
}

/// Half-written files, cut anywhere or with any one letter replaced, give messages and never a panic.
#[test]
fn damaged_files_are_answered() {
    for name in ["contract", "stages"] {
        let whole = std::fs::read_to_string(format!("tests/data/pipelines/accepted/{name}.toml")).unwrap();
        assert!(problems_of(&whole).is_empty());
        for (place, letter) in whole.char_indices() {
            let _ = problems_of(&whole[..place]).to_string();
            for other in ["[", "\"", "=", "é", "\u{0}", "\n"] {
                let damaged = format!(
                    "{}{other}{}",
                    &whole[..place],
                    &whole[place + letter.len_utf8()..]
                );
                let problems = problems_of(&damaged);
                if problems.has_errors() {
                    assert!(!problems.render(false).is_empty());
                }
            }
        }
    }
}

/// An editor on another system ends lines with a carriage return too, and may begin the file with a byte order mark.
#[test]
fn other_line_ends_change_no_place() {
    let source = std::fs::read_to_string("tests/data/pipelines/rejected/bare-number.toml").unwrap();
    let place = |problems: &Diagnostics| {
        let span = problems.sorted()[0].span.clone().unwrap();
        problems.line_and_column(span.start)
    };
    let plain = problems_of(&source);
    let windows = problems_of(&source.replace('\n', "\r\n"));
    assert_eq!(place(&plain), (9, 15));
    assert_eq!(place(&windows), (9, 15));
    assert!(
        problems_of("\u{feff}[pipeline]\nname = \"job\"\n")
            .sorted()
            .iter()
            .all(|problem| problem.message.contains("[[sheet]]"))
    );
}
