//! One snapshot of the sheet's atoms.

use super::Cell;

/// One snapshot: the cell and the positions of the selected atoms, in the order of the selection.
#[derive(Clone, Debug, PartialEq)]
pub struct Frame {
    /// Time in ps, where the file has one or the pipeline says how to make one.
    pub time_ps: Option<f64>,
    /// The cell, its normal axis last.
    pub cell: Cell,
    /// Cartesian positions in A, wrapped or not, one for each selected atom.
    pub positions: Vec<[f64; 3]>,
}

impl Frame {
    /// A frame without atoms, to be read into.
    #[must_use]
    pub fn empty() -> Self {
        Self {
            time_ps: None,
            cell: Cell {
                vectors: [[0.0; 3]; 3],
            },
            positions: Vec::new(),
        }
    }
}

/// The atoms of a sheet: what the selection found on the first frame of a run.
#[derive(Clone, Debug, PartialEq)]
pub struct SheetAtoms {
    /// Index of each atom in the file, from 0, ascending.
    pub indices: Vec<usize>,
    /// Species name of each atom; the type's number where the files hold no name.
    pub species: Vec<String>,
    /// Mass of each atom in g/mol; `None` where the files hold none for some atom.
    pub masses: Option<Vec<f64>>,
}
