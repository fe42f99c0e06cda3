//! The positions of a frame's atoms, read from the table of a text dump.

use std::io;
use std::sync::Arc;

use memchr::memchr;

use super::atom_order::AtomOrder;
use super::dump_box::DumpBox;
use super::dump_columns::{AtomPlace, AtomRow, DumpColumns};
use super::text_file::TextFile;

/// The order of the atoms of a dump, and the memory of one reader of its tables.
#[derive(Debug, Default)]
pub(super) struct DumpTable {
    /// The order of the atoms of the first frame.
    order: Arc<AtomOrder>,
    /// Which places of the frame being read have got their atom.
    filled: Vec<bool>,
}

/// Why a table could not be read.
pub(super) enum TableError {
    Io(io::Error),
    /// What is wrong with which row, from 0.
    Row(usize, String),
}

impl From<io::Error> for TableError {
    fn from(error: io::Error) -> Self {
        Self::Io(error)
    }
}

impl DumpTable {
    /// For a dump whose atoms stand in this order.
    pub fn new(order: AtomOrder) -> Self {
        Self {
            order: Arc::new(order),
            filled: Vec::new(),
        }
    }

    /// The same order, with memory of its own.
    pub fn for_another_thread(&self) -> Self {
        Self {
            order: Arc::clone(&self.order),
            filled: Vec::new(),
        }
    }

    /// Fills `positions` with the atoms of the table that starts with the next line of `text`, in the order of the first
    /// frame.
    pub fn read(
        &mut self,
        text: &mut TextFile,
        columns: &DumpColumns,
        bounds: &DumpBox,
        positions: &mut [[f64; 3]],
    ) -> Result<(), TableError> {
        self.filled.clear();
        self.filled.resize(positions.len(), false);
        let mut row = 0;
        while row < positions.len() {
            let lines = text.whole_lines()?;
            let mut rest = lines;
            while row < positions.len() && !rest.is_empty() {
                let at_row = |reason| TableError::Row(row, reason);
                let (atom, after) = match columns.place(rest, bounds) {
                    Some(read) => read,
                    None => read_slowly(columns, rest, bounds).map_err(at_row)?,
                };
                let place = place_of(&self.order, row, atom.id).map_err(at_row)?;
                // As many atoms as places, and no id comes twice: in the end every place is filled.
                if std::mem::replace(&mut self.filled[place], true) {
                    let id = atom.id.unwrap_or_default();
                    return Err(at_row(format!("two atoms have the id {id}")));
                }
                positions[place] = atom.position;
                rest = after;
                row += 1;
            }
            let used = lines.len() - rest.len();
            if used == 0 {
                return Err(TableError::Row(row, "the file ends within the frame".to_owned()));
            }
            text.consume(used);
        }
        Ok(())
    }
}

/// The place of an atom in the order of the first frame.
#[inline]
fn place_of(order: &AtomOrder, row: usize, id: Option<u64>) -> Result<usize, String> {
    match id {
        Some(id) => order
            .place(id)
            .ok_or_else(|| format!("the atom with id {id} is not in the first frame of the file")),
        None if order.is_of_file() => Ok(row),
        None => Err("the atom has no id".to_owned()),
    }
}

/// The first line of `text`, read by the way that takes every line or says what is wrong with it.
fn read_slowly<'text>(
    columns: &DumpColumns,
    text: &'text [u8],
    bounds: &DumpBox,
) -> Result<(AtomPlace, &'text [u8]), String> {
    let end = memchr(b'\n', text).map_or(text.len(), |end| end + 1);
    let line = std::str::from_utf8(&text[..end]).map_err(|error| error.to_string())?;
    let AtomRow { id, position, .. } = columns.row(line, bounds)?;
    Ok((AtomPlace { id, position }, &text[end..]))
}
