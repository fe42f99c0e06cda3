//! The atom table of a text dump: which columns are there, and one of its lines.

use super::decimal::Words;
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
    /// What each column is to a frame that is read for its positions.
    roles: Vec<Role>,
}

/// What a column is to a frame that is read for its positions.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Role {
    Unused,
    Id,
    Position(usize),
    Image(usize),
}

/// What the coordinate columns hold.
#[derive(Clone, Copy, Debug, PartialEq)]
enum PositionForm {
    Cartesian,
    Scaled,
}

/// Where an atom of the table is.
pub(super) struct AtomPlace {
    pub id: Option<u64>,
    /// In A, Cartesian; unwrapped where the table allows it.
    pub position: [f64; 3],
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
        let id = column("id");
        let role = |place: usize| {
            let axis = |columns: [usize; 3]| columns.iter().position(|&column| column == place);
            if let Some(axis) = axis(position) {
                Role::Position(axis)
            } else if id == Some(place) {
                Role::Id
            } else {
                image.and_then(axis).map_or(Role::Unused, Role::Image)
            }
        };
        let roles = (0..names.len()).map(role).collect();
        Ok(Self {
            count: names.len(),
            roles,
            id,
            kind: column("type"),
            element: column("element"),
            mass: column("mass"),
            position,
            form,
            image,
        })
    }

    /// Reads the id and position of the atom whose line starts at `text`, and returns what follows the line.
    ///
    /// `None` where the line holds anything unusual, or is the last of the text: [`DumpColumns::row`] then says what, or
    /// reads it. Both give the same position, to the last bit.
    #[inline]
    pub fn place<'text>(&self, text: &'text [u8], bounds: &DumpBox) -> Option<(AtomPlace, &'text [u8])> {
        let mut words = Words::new(text);
        let mut id = None;
        let (mut position, mut image) = ([0.0; 3], [0.0; 3]);
        for role in &self.roles {
            match *role {
                Role::Unused => words.skip_word()?,
                Role::Id => id = Some(words.whole_number()?),
                Role::Position(axis) => position[axis] = words.number()?,
                Role::Image(axis) => image[axis] = words.number()?,
            }
        }
        words.end_line()?;
        let position = self.cartesian(position, image, bounds);
        Some((AtomPlace { id, position }, &text[text.len() - words.left()..]))
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
        atom.position = self.cartesian(atom.position, image, bounds);
        Ok(atom)
    }

    /// The position in A from the coordinates and image counts as written.
    #[inline]
    fn cartesian(&self, written: [f64; 3], image: [f64; 3], bounds: &DumpBox) -> [f64; 3] {
        let position = match self.form {
            PositionForm::Cartesian => written.map(|component| component * bounds.length),
            PositionForm::Scaled => bounds.unscaled(written),
        };
        if self.image.is_some() {
            bounds.shifted(position, image)
        } else {
            position
        }
    }
}

fn number(word: &str) -> Result<f64, String> {
    word.parse().map_err(|_| format!("\"{word}\" is not a number"))
}
