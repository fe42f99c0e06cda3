//! The atoms of a sheet: which ones, of which species, of which mass.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

use chemfiles::{Selection, Trajectory};

use super::chemfiles_thread::take_warnings;
use super::error::unreadable;
use super::lammps_dump::{DumpAtom, LammpsDumpSource, frame_of};
use super::reader::{chemfiles_format, unknown_format};
use super::text_file::first_bytes;
use super::{FrameError, FrameSource, ReadOptions, SheetAtoms};

/// Name of an atom whose species no file tells.
pub(super) const UNKNOWN_SPECIES: &str = "X";

/// What the pipeline says of the atoms of a run.
#[derive(Clone, Debug)]
pub(super) struct AtomRequest {
    pub topology: Option<PathBuf>,
    pub species: Option<Vec<String>>,
    pub select: String,
}

/// Finds the sheet's atoms on the first frame of a trajectory.
///
/// Names, types and masses come from the trajectory, or from the topology file where one is given. A type that is a number
/// gets its name from `species` (type 1 the first), else from the element column of a dump, else it stays the number.
/// One name alone in `species` names all atoms of files without types. Masses are those of the files; where they hold none,
/// the standard atomic mass of the species' name in chemfiles' periodic table; where there is none either for some
/// selected atom, no mass is returned at all.
///
/// The selection sees the species as `name` and the file's type as `type`.
///
/// # Errors
/// Where the topology cannot be read or has another number of atoms, `species` does not fit the types, or the selection is
/// malformed or empty.
pub(super) fn find_atoms(
    source: &mut dyn FrameSource,
    request: &AtomRequest,
) -> Result<SheetAtoms, FrameError> {
    let path = source.path().to_owned();
    let request = request.clone();
    let topology = request
        .topology
        .as_deref()
        .map(TopologyFile::look_at)
        .transpose()?;
    source.with_first_frame(Box::new(move |mut frame| {
        if let Some(topology) = topology {
            topology.apply(&mut frame, &path)?;
        }
        let file = request.topology.as_deref().unwrap_or(&path);
        let species = name_species(&mut frame, file, request.species.as_deref())?;
        select(&frame, &path, &request.select, &species)
    }))
}

/// A topology file, as far as it is read before the first frame is.
struct TopologyFile {
    path: PathBuf,
    content: TopologyContent,
}

enum TopologyContent {
    /// A text dump, read by its own reader.
    Dump(Vec<DumpAtom>),
    /// A file that chemfiles reads in this format.
    Chemfiles(String),
}

impl TopologyFile {
    fn look_at(path: &Path) -> Result<Self, FrameError> {
        let metadata = std::fs::metadata(path).map_err(|error| unreadable(path, &error))?;
        if metadata.is_dir() {
            return Err(FrameError::Directory {
                path: path.to_owned(),
                expected: "topology",
            });
        }
        let head = first_bytes(path, 64).map_err(|error| unreadable(path, &error))?;
        let content = if head.starts_with(b"ITEM:") {
            let mut dump = LammpsDumpSource::open(path, &ReadOptions::default())?;
            TopologyContent::Dump(dump.first_atoms()?)
        } else {
            let format = chemfiles_format(path, &head).map_err(|reason| unknown_format(path, reason))?;
            TopologyContent::Chemfiles(format)
        };
        Ok(Self {
            path: path.to_owned(),
            content,
        })
    }

    /// Replaces the topology of the frame of a trajectory. Runs on the chemfiles thread.
    fn apply(self, frame: &mut chemfiles::Frame, trajectory: &Path) -> Result<(), FrameError> {
        let refuse = |error: chemfiles::Error| FrameError::Unreadable {
            path: self.path.clone(),
            reason: format!("{} (wanted as topology)", error.message),
        };
        let first = match &self.content {
            TopologyContent::Dump(atoms) => frame_of(atoms),
            TopologyContent::Chemfiles(format) => {
                let mut first = chemfiles::Frame::new();
                let mut file =
                    Trajectory::open_with_format(&self.path, 'r', format.as_str()).map_err(refuse)?;
                file.read_step(0, &mut first).map_err(refuse)?;
                take_warnings();
                first
            }
        };
        if first.size() != frame.size() {
            return Err(FrameError::TopologyAtomCount {
                topology: self.path.clone(),
                trajectory: trajectory.to_owned(),
                found: first.size(),
                expected: frame.size(),
            });
        }
        frame.set_topology(&first.topology()).map_err(refuse)
    }
}

/// The species of every atom of the frame; where it came from `species`, it also becomes the atom's name.
fn name_species(
    frame: &mut chemfiles::Frame,
    file: &Path,
    species: Option<&[String]>,
) -> Result<Vec<String>, FrameError> {
    let mismatch = |reason: String| FrameError::SpeciesMismatch {
        path: file.to_owned(),
        reason,
    };
    let mut names = Vec::with_capacity(frame.size());
    for index in 0..frame.size() {
        let mut atom = frame.atom_mut(index);
        let kind = atom.atomic_type();
        let label = atom.name();
        let name = match (kind.parse::<usize>(), species) {
            (Ok(number), Some(species)) => {
                let place = number.checked_sub(1);
                let name = place.and_then(|place| species.get(place)).ok_or_else(|| {
                    mismatch(format!(
                        "atom {index} has type {number}, but `species` names the types 1 to {}; name every type",
                        species.len()
                    ))
                })?;
                name.clone()
            }
            (Ok(_), None) if label.is_empty() => kind,
            (Ok(_), None) => label,
            (Err(_), Some([only])) if kind.is_empty() => only.clone(),
            (Err(_), Some(species)) if kind.is_empty() => {
                return Err(mismatch(format!(
                    "{} names are given, but the file holds no types to give them to; add a `topology` file with the types",
                    species.len()
                )));
            }
            (Err(_), _) if kind.is_empty() && label.is_empty() => UNKNOWN_SPECIES.to_owned(),
            (Err(_), _) if kind.is_empty() => label,
            (Err(_), _) => kind,
        };
        if name != UNKNOWN_SPECIES {
            atom.set_name(name.as_str());
        }
        names.push(name);
    }
    Ok(names)
}

fn select(
    frame: &chemfiles::Frame,
    path: &Path,
    selection: &str,
    species: &[String],
) -> Result<SheetAtoms, FrameError> {
    let bad = |reason: String| FrameError::BadSelection {
        selection: selection.to_owned(),
        reason,
    };
    let mut parsed = Selection::new(selection).map_err(|error| bad(error.message))?;
    if parsed.size() != 1 {
        return Err(bad(format!(
            "it selects groups of {} atoms, but single atoms are wanted",
            parsed.size()
        )));
    }
    let mut indices = parsed.list(frame);
    indices.sort_unstable();
    indices.dedup();
    if indices.is_empty() {
        return Err(FrameError::EmptySelection {
            selection: selection.to_owned(),
            path: path.to_owned(),
            atoms: frame.size(),
            present: present(frame, species),
        });
    }
    let mut masses = Vec::with_capacity(indices.len());
    for &index in &indices {
        masses.push(mass(frame.atom(index).mass(), &species[index]));
    }
    let species = indices.iter().map(|&index| species[index].clone()).collect();
    Ok(SheetAtoms {
        indices,
        species,
        masses: masses.into_iter().collect(),
    })
}

/// The mass in g/mol: the file's, which is zero where there is none, else the element's.
fn mass(file_mass: f64, species: &str) -> Option<f64> {
    let known = |mass: f64| (mass.is_finite() && mass > 0.0).then_some(mass);
    known(file_mass).or_else(|| known(chemfiles::Atom::new(species).mass()))
}

/// The names and types that a selection could ask for.
fn present(frame: &chemfiles::Frame, species: &[String]) -> String {
    let list = |words: BTreeSet<String>| {
        let shown: Vec<_> = words
            .iter()
            .filter(|word| !word.is_empty())
            .take(12)
            .cloned()
            .collect();
        if shown.is_empty() {
            "none".to_owned()
        } else {
            shown.join(", ")
        }
    };
    let names = species
        .iter()
        .filter(|name| *name != UNKNOWN_SPECIES)
        .cloned()
        .collect();
    let types = (0..frame.size())
        .map(|index| frame.atom(index).atomic_type())
        .collect();
    format!("names in it: {}; types: {}", list(names), list(types))
}
