//! The parameter file as a whole: TOML and JSON of the same content.

use std::path::{Path, PathBuf};

use serde::{Deserialize, Serialize};
use thiserror::Error;
use toml::Spanned;

use crate::fits::{Covariance, Fitted};

use super::{Parameter, Provenance, round_for_writing};

/// Name and version of the format.
pub const SCHEMA: &str = "planish.parameters/1";

/// A parameter file.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ParameterFile {
    /// Always [`SCHEMA`].
    pub schema: String,
    /// Where the numbers came from.
    pub provenance: Provenance,
    /// The sheets, in the order of the pipeline.
    pub sheet: Vec<Sheet>,
}

/// The parameters of one sheet.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Sheet {
    /// Name of the sheet.
    pub name: String,
    /// Its parameters, in the order of the fits.
    pub parameter: Vec<Parameter>,
    /// Covariance of those that were fitted jointly.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub covariance: Option<JointCovariance>,
}

/// `[sheet.covariance]`: rows and columns in the order of `names`; between parameters that were not fitted jointly 0.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct JointCovariance {
    /// A parameter's name, or `name@run` for the parameter of one run.
    pub names: Vec<String>,
    /// Symmetric, in the products of the parameters' units.
    pub matrix: Vec<Vec<f64>>,
}

/// Why a parameter file cannot be used.
#[derive(Debug, Error)]
pub enum ParameterFileError {
    /// The file could not be read.
    #[error("cannot read the parameter file {path}: {reason}")]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the system said.
        reason: String,
    },
    /// It is not TOML, or not of the right shape.
    #[error("{path}, line {line}, column {column}: {reason}")]
    Malformed {
        /// The file.
        path: PathBuf,
        /// Line, from 1.
        line: usize,
        /// Column in characters, from 1.
        column: usize,
        /// What was found, what was expected, what to do.
        reason: String,
    },
}

impl ParameterFile {
    /// A file of this version of the format.
    #[must_use]
    pub fn new(provenance: Provenance, sheet: Vec<Sheet>) -> Self {
        Self {
            schema: SCHEMA.to_owned(),
            provenance,
            sheet,
        }
    }

    /// The TOML text, numbers rounded by [`round_for_writing`]. A float is always written as one (`300.0`).
    ///
    /// # Panics
    /// Never: every part of the type has a TOML form.
    #[must_use]
    pub fn to_toml(&self) -> String {
        toml::to_string(&self.rounded()).expect("every part of a parameter file has a TOML form")
    }

    /// The JSON text of the same content, with a final newline.
    ///
    /// # Panics
    /// Never: every part of the type has a JSON form.
    #[must_use]
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string_pretty(&self.rounded())
            .expect("every part of a parameter file has a JSON form");
        text.push('\n');
        text
    }

    /// Reads a file.
    ///
    /// # Errors
    /// Where it cannot be read, or as [`Self::from_toml`].
    pub fn read(path: &Path) -> Result<Self, ParameterFileError> {
        let text = std::fs::read_to_string(path).map_err(|error| ParameterFileError::Unreadable {
            path: path.to_owned(),
            reason: error.to_string(),
        })?;
        Self::from_toml(&text, path)
    }

    /// Parses TOML text; `path` is for messages. Keys that this version does not know are passed over, so that a file of
    /// a later program with more keys still reads.
    ///
    /// # Errors
    /// Where the text is not TOML, lacks a key, has another schema, or a record contradicts itself.
    pub fn from_toml(text: &str, path: &Path) -> Result<Self, ParameterFileError> {
        let malformed = |offset: usize, reason: String| {
            let (line, column) = place(text, offset);
            ParameterFileError::Malformed {
                path: path.to_owned(),
                line,
                column,
                reason,
            }
        };
        let read: ReadFile = toml::from_str(text).map_err(|error| {
            let offset = error.span().map_or(0, |span| span.start);
            malformed(offset, error.message().to_owned())
        })?;
        if read.schema.get_ref() != SCHEMA {
            let reason = format!(
                "found schema {:?}, expected {SCHEMA:?}; write the file with a matching version of planish",
                read.schema.get_ref()
            );
            return Err(malformed(read.schema.span().start, reason));
        }
        let mut sheets = Vec::with_capacity(read.sheet.len());
        for sheet in read.sheet {
            let mut parameters = Vec::with_capacity(sheet.parameter.len());
            for parameter in sheet.parameter {
                let offset = parameter.span().start;
                let parameter = parameter.into_inner();
                if let Some(fault) = parameter.fault() {
                    let reason = format!("parameter {} of sheet {}: {fault}", parameter.name, sheet.name);
                    return Err(malformed(offset, reason));
                }
                parameters.push(parameter);
            }
            let covariance = match sheet.covariance {
                None => None,
                Some(covariance) => {
                    if let Some(fault) = covariance.get_ref().fault() {
                        let reason = format!("covariance of sheet {}: {fault}", sheet.name);
                        return Err(malformed(covariance.span().start, reason));
                    }
                    Some(covariance.into_inner())
                }
            };
            sheets.push(Sheet {
                name: sheet.name,
                parameter: parameters,
                covariance,
            });
        }
        Ok(Self::new(read.provenance, sheets))
    }

    /// The content with every number rounded as files hold it.
    #[must_use]
    pub fn rounded(&self) -> Self {
        let sheet = self.sheet.iter().map(Sheet::rounded).collect();
        Self {
            sheet,
            ..self.clone()
        }
    }
}

impl Sheet {
    /// What all fits say about one sheet.
    #[must_use]
    pub fn from_fits(name: &str, fits: &[Fitted]) -> Self {
        let quantities = fits.iter().flat_map(|fitted| &fitted.quantities);
        let covariances = fits.iter().flat_map(|fitted| &fitted.covariances);
        Self {
            name: name.to_owned(),
            parameter: quantities.map(Parameter::from_quantity).collect(),
            covariance: JointCovariance::block_diagonal(covariances),
        }
    }

    /// The parameter of this name that belongs to `run` (`None`: to several runs).
    #[must_use]
    pub fn find(&self, name: &str, run: Option<&str>) -> Option<&Parameter> {
        self.parameter
            .iter()
            .find(|parameter| parameter.name == name && parameter.run.as_deref() == run)
    }

    fn rounded(&self) -> Self {
        Self {
            name: self.name.clone(),
            parameter: self.parameter.iter().map(Parameter::rounded).collect(),
            covariance: self.covariance.as_ref().map(JointCovariance::rounded),
        }
    }
}

impl JointCovariance {
    /// One matrix of several: each fit's own on the diagonal, 0 elsewhere. `None` of none. A covariance that holds a
    /// number which is not finite is left out, as its parameters are unusable.
    fn block_diagonal<'a>(covariances: impl Iterator<Item = &'a Covariance>) -> Option<Self> {
        let usable: Vec<&Covariance> = covariances
            .filter(|covariance| covariance.matrix.iter().all(|entry| entry.is_finite()))
            .collect();
        let size = usable.iter().map(|covariance| covariance.names.len()).sum();
        if size == 0 {
            return None;
        }
        let mut names = Vec::with_capacity(size);
        let mut matrix = vec![vec![0.0; size]; size];
        for covariance in usable {
            let first = names.len();
            for ((i, j), entry) in covariance.matrix.indexed_iter() {
                matrix[first + i][first + j] = *entry;
            }
            names.extend(covariance.names.iter().map(|name| match &covariance.run {
                Some(run) => format!("{name}@{run}"),
                None => name.clone(),
            }));
        }
        Some(Self { names, matrix })
    }

    fn rounded(&self) -> Self {
        let round_row = |row: &Vec<f64>| row.iter().copied().map(round_for_writing).collect();
        Self {
            names: self.names.clone(),
            matrix: self.matrix.iter().map(round_row).collect(),
        }
    }

    fn fault(&self) -> Option<String> {
        let size = self.names.len();
        if self.matrix.len() != size || self.matrix.iter().any(|row| row.len() != size) {
            return Some(format!(
                "found {size} names and a matrix that is not {size} by {size}"
            ));
        }
        for (i, row) in self.matrix.iter().enumerate() {
            for (j, entry) in row.iter().enumerate() {
                if !entry.is_finite() || *entry != self.matrix[j][i] {
                    return Some(format!(
                        "found {entry} for {} with {} and {} the other way round; expected a finite symmetric matrix",
                        self.names[i], self.names[j], self.matrix[j][i]
                    ));
                }
            }
        }
        None
    }
}

/// The file as it is read: the same keys, with their places for messages.
#[derive(Deserialize)]
struct ReadFile {
    schema: Spanned<String>,
    provenance: Provenance,
    #[serde(default)]
    sheet: Vec<ReadSheet>,
}

#[derive(Deserialize)]
struct ReadSheet {
    name: String,
    #[serde(default)]
    parameter: Vec<Spanned<Parameter>>,
    covariance: Option<Spanned<JointCovariance>>,
}

/// Line and column, both from 1, of a byte offset.
fn place(text: &str, offset: usize) -> (usize, usize) {
    let before = text.get(..offset).unwrap_or(text);
    let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
    (
        before.matches('\n').count() + 1,
        before[line_start..].chars().count() + 1,
    )
}
