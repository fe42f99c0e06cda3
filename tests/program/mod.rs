//! The program as its users meet it: a folder with inputs and a pipeline file, a run of the binary, and what it leaves.

#![allow(dead_code, reason = "each test file uses its own part")]

use std::fmt::Write as _;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

use planish::frames::Frame;
use planish::parameters::{Parameter, ParameterFile, Sheet};
use tempfile::TempDir;

/// What a run of the program left on its streams.
#[derive(Debug)]
pub struct Finished {
    pub status: Option<i32>,
    pub stdout: String,
    pub stderr: String,
}

impl Finished {
    /// Asserts the exit status.
    #[track_caller]
    pub fn expect(self, status: i32) -> Self {
        assert_eq!(self.status, Some(status), "{}{}", self.stdout, self.stderr);
        self
    }

    /// Asserts that the messages hold every part.
    #[track_caller]
    pub fn says(&self, parts: &[&str]) {
        for part in parts {
            assert!(self.stderr.contains(part), "no {part:?} in: {}", self.stderr);
        }
    }
}

/// The program with `words`, in the root of the repository, without colours.
pub fn planish(words: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_planish"));
    command
        .args(words)
        .env("NO_COLOR", "1")
        .current_dir(env!("CARGO_MANIFEST_DIR"));
    command
}

/// `planish run PIPELINE --out OUT` with more words.
pub fn run(pipeline: &Path, out: &Path, more: &[&str]) -> Finished {
    let output = planish(&["run"])
        .arg(pipeline)
        .arg("--out")
        .arg(out)
        .args(more)
        .output()
        .expect("the program starts");
    Finished {
        status: output.status.code(),
        stdout: String::from_utf8(output.stdout).expect("UTF-8"),
        stderr: String::from_utf8(output.stderr).expect("UTF-8"),
    }
}

/// A file of the repository.
pub fn shipped(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(name)
}

/// A temporary folder with the inputs of one job.
pub struct Job {
    folder: TempDir,
}

impl Job {
    pub fn new() -> Self {
        Self {
            folder: TempDir::new().expect("a temporary folder"),
        }
    }

    pub fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub fn write(&self, name: &str, content: impl AsRef<[u8]>) -> PathBuf {
        let path = self.path(name);
        fs::write(&path, content).expect("the temporary folder can be written");
        path
    }

    /// Writes the pipeline file and runs it into the folder `out`.
    pub fn run(&self, pipeline: &str) -> Finished {
        run(
            &self.write("job.toml", pipeline),
            &self.path("out"),
            &["--verbose"],
        )
    }

    pub fn sheets(&self) -> Vec<Sheet> {
        sheets(&self.path("out"))
    }

    /// A parameter of the first sheet.
    #[track_caller]
    pub fn parameter(&self, name: &str, run: &str) -> Parameter {
        self.sheets()[0]
            .find(name, Some(run))
            .unwrap_or_else(|| panic!("no {name} of {run}"))
            .clone()
    }
}

/// A pipeline of one sheet with the given runs.
pub fn pipeline(runs: &[&str]) -> String {
    let mut text = "[pipeline]\nname = \"job\"\n\n[[sheet]]\nname = \"sheet\"\n".to_owned();
    for run in runs {
        write!(text, "\n[[sheet.run]]\n{run}\n").expect("memory");
    }
    text
}

/// The sheets of the parameter file in an output folder.
pub fn sheets(out: &Path) -> Vec<Sheet> {
    ParameterFile::read(&out.join("parameters.toml"))
        .expect("a parameter file")
        .sheet
}

/// A CSV table of an output folder.
pub struct Table {
    header: csv::StringRecord,
    rows: Vec<csv::StringRecord>,
}

impl Table {
    pub fn read(path: &Path) -> Self {
        let mut reader = csv::Reader::from_path(path).expect("a CSV file");
        let header = reader.headers().expect("a header").clone();
        let rows = reader.records().map(|row| row.expect("a row")).collect();
        Self { header, rows }
    }

    /// Rows of one run, each as a look-up by column.
    pub fn of_run<'a>(&'a self, sheet: &'a str, run: &'a str) -> impl Iterator<Item = Row<'a>> {
        self.rows
            .iter()
            .map(|row| Row { table: self, row })
            .filter(move |row| row.text("sheet") == sheet && row.text("run") == run)
    }
}

/// One row of a table.
#[derive(Clone, Copy)]
pub struct Row<'a> {
    table: &'a Table,
    row: &'a csv::StringRecord,
}

impl<'a> Row<'a> {
    #[track_caller]
    pub fn text(&self, column: &str) -> &'a str {
        let place = self.table.header.iter().position(|name| name == column);
        &self.row[place.unwrap_or_else(|| panic!("no column {column}"))]
    }

    #[track_caller]
    pub fn number(&self, column: &str) -> f64 {
        let text = self.text(column);
        text.parse()
            .unwrap_or_else(|_| panic!("{column} is {text:?}, no number"))
    }
}

/// Every file of an output folder but the log, which holds dates and timings, by name; stored blocks only where asked.
pub fn results(out: &Path, with_blocks: bool) -> Vec<(String, Vec<u8>)> {
    fn collect(folder: &Path, root: &Path, found: &mut Vec<(String, Vec<u8>)>) {
        for entry in fs::read_dir(folder).expect("a folder") {
            let path = entry.expect("an entry").path();
            if path.is_dir() {
                collect(&path, root, found);
            } else {
                let name = path
                    .strip_prefix(root)
                    .expect("inside")
                    .to_string_lossy()
                    .into_owned();
                found.push((name, fs::read(&path).expect("a file")));
            }
        }
    }
    let mut found = Vec::new();
    collect(out, out, &mut found);
    found.retain(|(name, _)| name != "run.log" && (with_blocks || !name.starts_with("blocks")));
    found.sort();
    found
}

/// Frames as extended XYZ, times from the frames.
pub fn extended_xyz<'a>(species: &[String], frames: impl IntoIterator<Item = &'a Frame>) -> String {
    let mut text = String::new();
    for frame in frames {
        let lattice: Vec<String> = frame
            .cell
            .vectors
            .iter()
            .flatten()
            .map(|x| format!("{x:.8}"))
            .collect();
        writeln!(
            text,
            "{}\nLattice=\"{}\" time={:?} Properties=species:S:1:pos:R:3",
            frame.positions.len(),
            lattice.join(" "),
            frame.time_ps.unwrap_or(0.0)
        )
        .expect("memory");
        for (name, [x, y, z]) in species.iter().zip(&frame.positions) {
            writeln!(text, "{name} {x:.7} {y:.7} {z:.7}").expect("memory");
        }
    }
    text
}
