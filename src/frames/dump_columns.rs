//! The atom table of a text dump: which columns are there, and one of its lines.

use super::dump_box::DumpBox;

/// The columns of interest of `ITEM: ATOMS`, by their number.
#[derive(Debug)]
pub(super) struct DumpColumns {
    count: usize,
    id: Option<usize>,
    kind: Option<usize>,
    element: Option<usize>,
    mass: Option<usize>,
    position: [usize; 3],
    form: PositionForm,
    /// How often the atom has crossed each face of the box.
    image: Option<[usize; 3]>,
}

/// What the coordinate columns hold.
#[derive(Clone, Copy, Debug, PartialEq)]
enum PositionForm {
    Cartesian,
    Scaled,
}

/// One atom of the table.
pub(super) struct AtomRow<'line> {
    pub id: Option<u64>,
    pub kind: Option<&'line str>,
    pub element: Option<&'line str>,
    pub mass: Option<f64>,
    /// In A, Cartesian; unwrapped where the table allows it.
    pub position: [f64; 3],
}

impl DumpColumns {
    /// Finds the columns. Unwrapped coordinates (xu, xsu) are preferred; wrapped ones (x, xs) are unwrapped with the image
    /// counts ix, iy, iz where these are there.
    pub fn parse(names: &str) -> Result<Self, String> {
        let names: Vec<&str> = names.split_whitespace().collect();
        let column = |name: &str| names.iter().position(|&other| other == name);
        let triple = |x: &str, y: &str, z: &str| Some([column(x)?, column(y)?, column(z)?]);
        let image = triple("ix", "iy", "iz");
        let forms = [
            (triple("xu", "yu", "zu"), PositionForm::Cartesian, None),
            (triple("xsu", "ysu", "zsu"), PositionForm::Scaled, None),
            (triple("x", "y", "z"), PositionForm::Cartesian, image),
            (triple("xs", "ys", "zs"), PositionForm::Scaled, image),
        ];
        let (position, form, image) = forms
            .into_iter()
            .find_map(|(position, form, image)| Some((position?, form, image)))
            .ok_or_else(|| {
                format!(
                    "the atom table has the columns \"{}\", but planish needs all three of x y z, xu yu zu, xs ys zs or xsu ysu zsu",
                    names.join(" ")
                )
            })?;
        Ok(Self {
            count: names.len(),
            id: column("id"),
            kind: column("type"),
            element: column("element"),
            mass: column("mass"),
            position,
            form,
            image,
        })
    }

    /// Reads one line of the table.
    pub fn row<'line>(&self, line: &'line str, bounds: &DumpBox) -> Result<AtomRow<'line>, String> {
        let mut atom = AtomRow {
            id: None,
            kind: None,
            element: None,
            mass: None,
            position: [0.0; 3],
        };
        let mut image = [0.0; 3];
        let mut count = 0;
        for (column, word) in line.split_ascii_whitespace().enumerate() {
            count += 1;
            if let Some(axis) = self.position.iter().position(|&place| place == column) {
                atom.position[axis] = number(word)?;
            } else if self.id == Some(column) {
                atom.id = Some(
                    word.parse()
                        .map_err(|_| format!("the id \"{word}\" is not a whole number"))?,
                );
            } else if self.kind == Some(column) {
                atom.kind = Some(word);
            } else if self.element == Some(column) {
                atom.element = Some(word);
            } else if self.mass == Some(column) {
                atom.mass = Some(number(word)?);
            } else if let Some(axis) = self
                .image
                .and_then(|image| image.iter().position(|&place| place == column))
            {
                image[axis] = number(word)?;
            }
        }
        if count != self.count {
            return Err(format!("{count} columns, but the header names {}", self.count));
        }
        atom.position = match self.form {
            PositionForm::Cartesian => atom.position.map(|component| component * bounds.length),
            PositionForm::Scaled => bounds.unscaled(atom.position),
        };
        if self.image.is_some() {
            atom.position = bounds.shifted(atom.position, image);
        }
        Ok(atom)
    }
}

fn number(word: &str) -> Result<f64, String> {
    word.parse().map_err(|_| format!("\"{word}\" is not a number"))
}
