//! The box of a text dump: edges and origin, from the bounds that the dump writes.

use super::Cell;

/// The box of one frame, in A.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct DumpBox {
    vectors: [[f64; 3]; 3],
    origin: [f64; 3],
    /// One length unit of the dump in A.
    pub length: f64,
}

impl DumpBox {
    /// Parses the three lines under `ITEM: BOX BOUNDS`; `kind` is the rest of that line, `length` one length unit in A.
    ///
    /// A tilted box is written with the bounds of the box that encloses it, xlo_bound = xlo + min(0, xy, xz, xy + xz),
    /// xhi_bound = xhi + max(0, xy, xz, xy + xz), ylo_bound = ylo + min(0, yz), yhi_bound = yhi + max(0, yz) (LAMMPS
    /// manual, "Howto triclinic"). A general box (`abc origin`) is written as its vectors and its corner.
    pub fn parse(kind: &str, rows: &[String; 3], length: f64) -> Result<Self, String> {
        let general = kind.contains("abc origin");
        let tilted = kind.contains("xy xz yz");
        let wanted = if general { 4 } else { 2 + usize::from(tilted) };
        let mut numbers = [[0.0; 4]; 3];
        for (row, line) in numbers.iter_mut().zip(rows) {
            let mut words = line.split_whitespace();
            for number in row.iter_mut().take(wanted) {
                let word = words.next().ok_or_else(|| {
                    format!("the line \"{line}\" of the box has fewer than {wanted} numbers")
                })?;
                *number = length
                    * word
                        .parse::<f64>()
                        .map_err(|_| format!("\"{word}\" in the box is not a number"))?;
            }
            if words.next().is_some() {
                return Err(format!(
                    "the line \"{line}\" of the box has more than {wanted} numbers"
                ));
            }
        }
        let [
            [x0, x1, xy, x_origin],
            [y0, y1, xz, y_origin],
            [z0, z1, yz, z_origin],
        ] = numbers;
        if general {
            let vectors = numbers.map(|[x, y, z, _]| [x, y, z]);
            return Ok(Self {
                vectors,
                origin: [x_origin, y_origin, z_origin],
                length,
            });
        }
        let low = [x0 - xy.min(xz).min(xy + xz).min(0.0), y0 - yz.min(0.0), z0];
        let high = [x1 - xy.max(xz).max(xy + xz).max(0.0), y1 - yz.max(0.0), z1];
        let vectors = [
            [high[0] - low[0], 0.0, 0.0],
            [xy, high[1] - low[1], 0.0],
            [xz, yz, high[2] - low[2]],
        ];
        Ok(Self {
            vectors,
            origin: low,
            length,
        })
    }

    /// The cell.
    pub fn cell(&self) -> Cell {
        Cell {
            vectors: self.vectors,
        }
    }

    /// The Cartesian position of scaled coordinates, 0 at the box's corner and 1 at the ends of its edges.
    pub fn unscaled(&self, scaled: [f64; 3]) -> [f64; 3] {
        self.shifted(self.origin, scaled)
    }

    /// A position moved by a number of each edge.
    pub fn shifted(&self, position: [f64; 3], edges: [f64; 3]) -> [f64; 3] {
        std::array::from_fn(|component| {
            let [a, b, c] = self.vectors.map(|vector| vector[component]);
            position[component] + edges[0] * a + edges[1] * b + edges[2] * c
        })
    }
}
