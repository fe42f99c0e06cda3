//! Every table and key of the pipeline file, in one place: the reader, the suggestions for misspelt keys, the schema
//! and the documentation derive from it.

use crate::units::Dimension;

/// One table of the pipeline file.
#[derive(Debug)]
pub struct TableKeys {
    /// How the table is opened in the file.
    pub header: &'static str,
    /// What it describes, in one line.
    pub doc: &'static str,
    /// Its keys.
    pub keys: &'static [Key],
}

/// One key of a table.
#[derive(Debug)]
pub struct Key {
    /// The key.
    pub name: &'static str,
    /// What its value is.
    pub kind: Kind,
    /// Whether the file must have it, and otherwise what holds without it.
    pub presence: Presence,
    /// What it says, in one line.
    pub doc: &'static str,
}

/// What the value of a key is.
#[derive(Clone, Copy, Debug)]
pub enum Kind {
    /// A text that is not empty.
    Text,
    /// A name: a text that can also be the name of a folder.
    Name,
    /// A list of texts.
    Texts,
    /// A path or glob.
    Path,
    /// A path or glob, or a list of them.
    Paths,
    /// A whole number of at least this much.
    Count(usize),
    /// One of these words.
    Choice(&'static [&'static str]),
    /// A number with a unit.
    Quantity(Dimension, Bound),
    /// Two numbers with units, the first below the second.
    Range(Dimension, Bound),
    /// A limit of a gate, in the unit of the parameter.
    Limit,
    /// A table.
    Table(&'static TableKeys),
    /// One or more tables.
    Tables(&'static TableKeys),
    /// A table whose keys are names of parameters and whose values are such tables.
    PerParameter(&'static TableKeys),
}

/// Which values of a quantity make sense.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bound {
    /// All.
    Any,
    /// Above zero.
    Positive,
    /// Above zero and below one.
    Share,
}

/// Whether a key must be there.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Presence {
    /// It must.
    Required,
    /// Without it, this holds.
    Default(&'static str),
}

impl TableKeys {
    /// The key of this name.
    #[must_use]
    pub fn find(&self, name: &str) -> Option<&'static Key> {
        self.keys.iter().find(|key| key.name == name)
    }

    /// Every table reachable from this one, itself first.
    #[must_use]
    pub fn with_descendants(&'static self) -> Vec<&'static TableKeys> {
        let mut tables = vec![self];
        for key in self.keys {
            if let Kind::Table(below) | Kind::Tables(below) | Kind::PerParameter(below) = key.kind {
                tables.extend(below.with_descendants());
            }
        }
        tables
    }
}

const fn required(name: &'static str, kind: Kind, doc: &'static str) -> Key {
    Key {
        name,
        kind,
        presence: Presence::Required,
        doc,
    }
}

const fn optional(name: &'static str, kind: Kind, default: &'static str, doc: &'static str) -> Key {
    Key {
        name,
        kind,
        presence: Presence::Default(default),
        doc,
    }
}

/// Frames in a block where the file does not say.
pub const DEFAULT_BLOCK_FRAMES: usize = 16;
/// Wanted relative error where the file does not say.
pub const DEFAULT_WANTED_ERROR: f64 = 0.05;

/// The file as a whole.
pub static FILE: TableKeys = TableKeys {
    header: "the file",
    doc: "A pipeline: which sheets, which runs of each, and how they are measured",
    keys: &[
        required("pipeline", Kind::Table(&PIPELINE), "the job as a whole"),
        required("sheet", Kind::Tables(&SHEET), "the sheets"),
        optional(
            "stage",
            Kind::Table(&STAGE),
            "every stage's defaults",
            "settings of the stages",
        ),
        optional(
            "gate",
            Kind::PerParameter(&GATE_LIMIT),
            "no gate",
            "limits that the parameters must meet for exit status 0",
        ),
    ],
};

/// `[pipeline]`.
pub static PIPELINE: TableKeys = TableKeys {
    header: "[pipeline]",
    doc: "The job as a whole",
    keys: &[required(
        "name",
        Kind::Name,
        "what the job and its output folder are called",
    )],
};

/// `[[sheet]]`.
pub static SHEET: TableKeys = TableKeys {
    header: "[[sheet]]",
    doc: "One material under one interatomic potential",
    keys: &[
        required("name", Kind::Name, "what the sheet is called, unique in the file"),
        optional(
            "select",
            Kind::Text,
            "all",
            "which atoms belong to the sheet, in chemfiles' selection language",
        ),
        optional(
            "normal",
            Kind::Choice(&["a", "b", "c"]),
            "c",
            "cell axis out of the plane",
        ),
        required("run", Kind::Tables(&RUN), "the simulations of this sheet"),
    ],
};

/// `[[sheet.run]]`.
pub static RUN: TableKeys = TableKeys {
    header: "[[sheet.run]]",
    doc: "One simulation at one temperature and one mean tension",
    keys: &[
        optional(
            "name",
            Kind::Name,
            "the first file's stem",
            "what the run is called, unique in its sheet",
        ),
        required(
            "trajectory",
            Kind::Paths,
            "a path, a glob, or a list of them, in time order",
        ),
        optional(
            "topology",
            Kind::Path,
            "none",
            "a file with the species or masses that the trajectory lacks",
        ),
        optional(
            "species",
            Kind::Texts,
            "the file's",
            "names of the numbered types, type 1 first",
        ),
        optional(
            "thermo",
            Kind::Path,
            "none",
            "thermo series: a CSV with units in its column names, or an engine's log",
        ),
        required(
            "temperature",
            Kind::Quantity(Dimension::Temperature, Bound::Positive),
            "temperature of the run",
        ),
        optional(
            "frame_interval",
            Kind::Quantity(Dimension::Time, Bound::Positive),
            "the file's times",
            "time between frames, where the file has no times",
        ),
        optional(
            "timestep",
            Kind::Quantity(Dimension::Time, Bound::Positive),
            "the file's times",
            "time of one step, where the file has steps but no times",
        ),
        optional(
            "engine_units",
            Kind::Choice(&["metal", "real", "electron", "si", "gromacs"]),
            "the file's",
            "what bare numbers are in, where a file does not say",
        ),
        optional(
            "tension",
            Kind::Quantity(Dimension::Tension, Bound::Any),
            "the thermo series' mean",
            "mean in-plane tension held by the barostat, positive when it stretches",
        ),
        optional(
            "from",
            Kind::Quantity(Dimension::Time, Bound::Any),
            "the start",
            "first time used",
        ),
        optional(
            "to",
            Kind::Quantity(Dimension::Time, Bound::Any),
            "the end",
            "last time used",
        ),
        optional("stride", Kind::Count(1), "1", "every how many frames one is used"),
        optional(
            "replica_of",
            Kind::Text,
            "none",
            "run of the same sheet and conditions with another seed, to be pooled with",
        ),
    ],
};

/// `[stage]`, the parent of the stages' tables.
pub static STAGE: TableKeys = TableKeys {
    header: "[stage]",
    doc: "Settings of the stages",
    keys: &[
        optional(
            "project",
            Kind::Table(&PROJECT),
            "its defaults",
            "frames to surfaces",
        ),
        optional(
            "spectrum",
            Kind::Table(&SPECTRUM),
            "its defaults",
            "height spectrum",
        ),
        optional("area", Kind::Table(&AREA), "its defaults", "projected area"),
        optional(
            "strain",
            Kind::Table(&STRAIN),
            "its defaults",
            "strain of the cell",
        ),
        optional("fit", Kind::Table(&FIT), "its defaults", "plate parameters"),
    ],
};

/// `[stage.project]`.
pub static PROJECT: TableKeys = TableKeys {
    header: "[stage.project]",
    doc: "How frames become surfaces",
    keys: &[optional(
        "positions",
        Kind::Choice(&["reference", "instantaneous"]),
        "reference",
        "where in the plane heights stand: at reference sites, or at each frame's positions",
    )],
};

/// `[stage.spectrum]`.
pub static SPECTRUM: TableKeys = TableKeys {
    header: "[stage.spectrum]",
    doc: "The height spectrum",
    keys: &[
        optional(
            "q_max",
            Kind::Quantity(Dimension::WaveNumber, Bound::Positive),
            "from the lattice",
            "largest wave number measured",
        ),
        optional(
            "block_frames",
            Kind::Count(2),
            "16",
            "consecutive frames in a block",
        ),
    ],
};

/// `[stage.area]`.
pub static AREA: TableKeys = TableKeys {
    header: "[stage.area]",
    doc: "The projected area; nothing to set",
    keys: &[],
};

/// `[stage.strain]`.
pub static STRAIN: TableKeys = TableKeys {
    header: "[stage.strain]",
    doc: "The strain of the cell; nothing to set",
    keys: &[],
};

/// `[stage.fit]`.
pub static FIT: TableKeys = TableKeys {
    header: "[stage.fit]",
    doc: "The fit of the plate",
    keys: &[
        optional(
            "plate",
            Kind::Choice(&["rippled", "harmonic"]),
            "rippled",
            "whether the fitted plate is stiffened by its thermal ripples, or harmonic",
        ),
        optional(
            "window",
            Kind::Range(Dimension::WaveNumber, Bound::Positive),
            "chosen by the data",
            "smallest and largest wave number fitted",
        ),
        optional(
            "wanted_error",
            Kind::Quantity(Dimension::Number, Bound::Share),
            "5 %",
            "wanted relative error, for advice on how long a run must be",
        ),
    ],
};

/// One entry of `[gate]`.
pub static GATE_LIMIT: TableKeys = TableKeys {
    header: "[gate.NAME]",
    doc: "What every value of one parameter must meet",
    keys: &[
        optional("min", Kind::Limit, "no limit", "smallest value allowed"),
        optional("max", Kind::Limit, "no limit", "largest value allowed"),
        optional(
            "max_error",
            Kind::Limit,
            "no limit",
            "largest standard error allowed, in the parameter's unit or as a percentage of the value",
        ),
        optional(
            "verdict",
            Kind::Choice(&["good", "weak"]),
            "any",
            "worst verdict allowed",
        ),
    ],
};

#[cfg(test)]
mod tests {
    use super::{DEFAULT_BLOCK_FRAMES, DEFAULT_WANTED_ERROR, FILE, FIT, Presence, SPECTRUM, TableKeys};
    use crate::units::Dimension;

    #[test]
    fn keys_are_unique_and_documented() {
        for table in FILE.with_descendants() {
            let mut names: Vec<&str> = table.keys.iter().map(|key| key.name).collect();
            names.sort_unstable();
            names.dedup();
            assert_eq!(names.len(), table.keys.len(), "{}", table.header);
            assert!(!table.doc.is_empty());
            for key in table.keys {
                assert!(!key.doc.is_empty(), "{}", key.name);
                assert_ne!(key.presence, Presence::Default(""), "{}", key.name);
            }
        }
    }
    #[test]
    fn documented_defaults_are_those_used() {
        let default = |table: &'static TableKeys, name: &str| match table.find(name).unwrap().presence {
            Presence::Default(text) => text,
            Presence::Required => panic!("{name} has no default"),
        };
        assert_eq!(
            default(&SPECTRUM, "block_frames"),
            DEFAULT_BLOCK_FRAMES.to_string()
        );
        assert_eq!(
            Dimension::Number.parse(default(&FIT, "wanted_error")),
            Ok(DEFAULT_WANTED_ERROR)
        );
    }
}
