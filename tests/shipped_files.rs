//! What a new user reads and copies: the README and the pipelines that come with the program.
//! What belongs here: that these name every key and every parameter, and that what they show is accepted.

use std::fs;
use std::path::{Path, PathBuf};

use planish::parameters::PARAMETER_NAMES;
use planish::pipeline::keys::{FILE, Kind};
use planish::pipeline::{Diagnostics, PipelineFile, Plan};

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn readme() -> String {
    fs::read_to_string(root().join("README.md")).expect("README.md")
}

/// The TOML blocks of the README that are pipelines.
fn pipelines_in_readme() -> Vec<String> {
    readme()
        .split("```toml\n")
        .skip(1)
        .filter_map(|block| block.split_once("\n```").map(|(toml, _)| toml.to_owned()))
        .filter(|toml| toml.contains("[pipeline]"))
        .collect()
}

#[test]
fn readme_explains_every_parameter_with_its_unit() {
    let readme = readme();
    for row in PARAMETER_NAMES {
        let name = format!("`{}`", row.name);
        let line = readme
            .lines()
            .find(|line| line.starts_with("| `") && line.contains(&name))
            .unwrap_or_else(|| panic!("the README has no table row with {name}"));
        let units = line.split('|').nth(2).expect("the second column");
        assert!(
            units.split(',').any(|unit| unit.trim() == row.unit),
            "{name} is in {}, the README says {units}",
            row.unit
        );
    }
}

#[test]
fn readme_shows_every_pipeline_key() {
    let shown = pipelines_in_readme().join("\n");
    for table in FILE.with_descendants() {
        for key in table.keys {
            if matches!(key.kind, Kind::Table(_) | Kind::Tables(_) | Kind::PerParameter(_)) {
                continue;
            }
            let written = format!("{} = ", key.name);
            assert!(
                shown.contains(&written),
                "`{}` of {} is not in the README",
                key.name,
                table.header
            );
        }
    }
}

#[test]
fn pipelines_in_the_readme_are_accepted() {
    let pipelines = pipelines_in_readme();
    assert!(
        pipelines.len() >= 2,
        "the README shows a short pipeline and a full one"
    );
    for source in pipelines {
        let mut problems = Diagnostics::new(Path::new("README.md"), &source);
        let _ = PipelineFile::parse(&source, &mut problems);
        assert!(problems.is_empty(), "{}", problems.render(false));
    }
}

/// Every file that the shipped pipelines name is there, and nothing in them is doubtful.
#[test]
fn shipped_pipelines_resolve_without_a_warning() {
    let mut pipelines: Vec<PathBuf> = fs::read_dir(root().join("pipelines"))
        .expect("pipelines/")
        .map(|entry| entry.expect("a readable entry").path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "toml"))
        .collect();
    pipelines.sort();
    assert!(pipelines.len() >= 3, "found only {pipelines:?}");
    for path in pipelines {
        let plan = Plan::load(&path).unwrap_or_else(|problems| panic!("{}", problems.render(false)));
        assert!(plan.warnings.is_empty(), "{}", plan.warnings.render(false));
        assert_eq!(
            path.file_stem().and_then(|stem| stem.to_str()),
            Some(plan.name.as_str())
        );
    }
}

/// The demo: six and four temperatures, all at the held tension.
#[test]
fn the_drumhead_has_ten_runs_at_zero_tension() {
    let plan = Plan::load(&root().join("pipelines/drumhead.toml")).expect("the demo pipeline is right");
    let runs: Vec<usize> = plan.sheets.iter().map(|sheet| sheet.runs.len()).collect();
    assert_eq!(runs, [6, 4]);
    for run in plan.sheets.iter().flat_map(|sheet| &sheet.runs) {
        assert_eq!(run.tension, Some(0.0), "{}", run.name);
        assert_eq!(run.name, format!("{}K", run.temperature));
    }
}
