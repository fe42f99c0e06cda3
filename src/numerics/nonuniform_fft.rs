//! Non-uniform fast Fourier transform of type 1 in two dimensions: real strengths at scattered points to modes.
//!
//! Barnett, Magland and af Klinteberg, SIAM J. Sci. Comput. 41, C479 (2019): spread the strengths onto a grid twice as
//! fine as the modes need, transform the grid, divide by the kernel's own transform. The exact sum it approximates is
//! [`mode_by_definition`](super::mode_by_definition).

mod kernel;

use std::fmt;
use std::sync::Arc;

use num_complex::Complex64;
use realfft::{RealFftPlanner, RealToComplex};
use rustfft::{Fft, FftPlanner};

use kernel::Kernel;

/// A transform planned for fixed points: f_m = sum_j c_j exp(-2 pi i (m1 x_j + m2 y_j)), |m1| <= M1, |m2| <= M2.
///
/// Points are in units of the period and need not lie in [0, 1). Everything that depends on the points alone (where each
/// spreads, and with which weights) is kept, so that a frame costs one spreading and one real-to-complex transform. The
/// plan is shared between threads; each thread brings its own [`Scratch`]. Sums run in an order fixed by the points, so
/// the same input gives the same bits.
#[derive(Clone)]
pub struct NonuniformFft {
    axes: [Axis; 2],
    kernel: Kernel,
    /// Real transform along axis 2: one row of the grid.
    rows: Arc<dyn RealToComplex<f64>>,
    /// Complex transform along axis 1: one column of the grid.
    columns: Arc<dyn Fft<f64>>,
    /// The points, sorted by their place on the grid so that neighbours in memory are neighbours on the grid.
    spread: Vec<Spread>,
    /// Weights along axis 1, then along axis 2: shape (points in `spread` order, 2, width).
    weights: Vec<f64>,
}

/// One direction of the grid.
#[derive(Clone)]
struct Axis {
    /// Grid points: at least twice the number of modes, a product of 2, 3 and 5, even.
    grid: usize,
    /// 1/(kernel transform) for |m| = 0..=M.
    deconvolution: Vec<f64>,
}

/// Where one point spreads to.
#[derive(Clone, Copy)]
struct Spread {
    /// First grid index along each axis; the others follow, on a grid padded by the kernel's width.
    start: [usize; 2],
    /// Index of the point in the caller's order.
    point: usize,
}

/// Working memory of one thread for one plan.
#[derive(Clone, Debug)]
pub struct Scratch {
    /// Shape (grid1 + width, grid2 + width): the padding takes what spreads over the edge and is folded back.
    grid: Vec<f64>,
    /// One transformed row: grid2/2 + 1 modes.
    row: Vec<Complex64>,
    /// Shape (M2 + 1, grid1): only the columns that are asked for.
    columns: Vec<Complex64>,
    row_memory: Vec<Complex64>,
    column_memory: Vec<Complex64>,
}

impl NonuniformFft {
    /// Plans for `points` (in units of the period), modes up to `max_modes` = (M1, M2) along each axis, and a largest
    /// error in any mode of `tolerance` times sum |c_j|; tolerances below 1e-14 are taken as 1e-14.
    ///
    /// # Panics
    /// Where a point is NaN or infinite: readers refuse such frames before they get here.
    #[must_use]
    pub fn plan(points: &[[f64; 2]], max_modes: [usize; 2], tolerance: f64) -> Self {
        let kernel = Kernel::for_tolerance(tolerance);
        let axes = max_modes.map(|max_mode| Axis::new(max_mode, &kernel));
        let plan = Self {
            rows: RealFftPlanner::new().plan_fft_forward(axes[1].grid),
            columns: FftPlanner::new().plan_fft_forward(axes[0].grid),
            axes,
            kernel,
            spread: Vec::new(),
            weights: Vec::new(),
        };
        plan.at_points(points)
    }

    /// The same modes and tolerance for other points; shares the planned transforms.
    ///
    /// # Panics
    /// As [`NonuniformFft::plan`].
    #[must_use]
    pub fn at_points(&self, points: &[[f64; 2]]) -> Self {
        let width = self.kernel.width;
        let mut spread = Vec::with_capacity(points.len());
        for (point, position) in points.iter().enumerate() {
            assert!(
                position.iter().all(|x| x.is_finite()),
                "point {point} of a non-uniform transform is not finite: {position:?}"
            );
            let start = [0, 1]
                .map(|axis| first_cell(self.axes[axis].place(position[axis]), width, self.axes[axis].grid));
            spread.push(Spread { start, point });
        }
        spread.sort_unstable_by_key(|s| (s.start, s.point));

        let mut weights = Vec::with_capacity(points.len() * 2 * width);
        for s in &spread {
            for axis in [0, 1] {
                let place = self.axes[axis].place(points[s.point][axis]);
                let first = (place - 0.5 * width as f64).ceil();
                weights.extend((0..width).map(|k| self.kernel.value(first + k as f64 - place)));
            }
        }
        Self {
            axes: self.axes.clone(),
            kernel: self.kernel,
            rows: Arc::clone(&self.rows),
            columns: Arc::clone(&self.columns),
            spread,
            weights,
        }
    }

    /// Number of points.
    #[must_use]
    pub fn points(&self) -> usize {
        self.spread.len()
    }

    /// The highest mode (M1, M2) along each axis.
    #[must_use]
    pub fn max_modes(&self) -> [usize; 2] {
        [0, 1].map(|axis| self.axes[axis].max_mode())
    }

    /// Working memory for this plan; good for every plan made from it by [`NonuniformFft::at_points`].
    #[must_use]
    pub fn scratch(&self) -> Scratch {
        let [n1, n2] = [self.axes[0].grid, self.axes[1].grid];
        let width = self.kernel.width;
        Scratch {
            grid: vec![0.0; (n1 + width) * (n2 + width)],
            row: self.rows.make_output_vec(),
            columns: vec![Complex64::default(); (self.axes[1].max_mode() + 1) * n1],
            row_memory: self.rows.make_scratch_vec(),
            column_memory: vec![Complex64::default(); self.columns.get_inplace_scratch_len()],
        }
    }

    /// Writes f_m of every wanted mode m to `out`, in the order of `wanted`.
    ///
    /// # Panics
    /// Where `strengths` is not one per point, `out` not one per wanted mode, a wanted mode lies beyond the planned
    /// ones, or `scratch` belongs to a plan of another size.
    pub fn modes_into(
        &self,
        strengths: &[f64],
        scratch: &mut Scratch,
        wanted: &[[i32; 2]],
        out: &mut [Complex64],
    ) {
        assert_eq!(strengths.len(), self.points(), "one strength a point");
        assert_eq!(wanted.len(), out.len(), "one output a wanted mode");
        self.spread_onto_grid(strengths, &mut scratch.grid);
        self.fold_padding(&mut scratch.grid);
        self.transform(scratch);

        let n1 = self.axes[0].grid;
        for (value, &[m1, m2]) in out.iter_mut().zip(wanted) {
            // Strengths are real: f at -m is the conjugate of f at m, and only m2 >= 0 is computed.
            let conjugate = m2 < 0;
            let along = if conjugate { -i64::from(m1) } else { i64::from(m1) };
            let column = m2.unsigned_abs() as usize;
            let factor =
                self.axes[0].deconvolution[m1.unsigned_abs() as usize] * self.axes[1].deconvolution[column];
            let mode = scratch.columns[column * n1 + along.rem_euclid(n1 as i64) as usize] * factor;
            *value = if conjugate { mode.conj() } else { mode };
        }
    }

    fn spread_onto_grid(&self, strengths: &[f64], grid: &mut [f64]) {
        // With the width known, the compiler unrolls the innermost loop and keeps the weights in registers. Widths up to
        // 16 are all that a kernel can have.
        match self.kernel.width {
            8 => self.spread_with_width::<8>(strengths, grid),
            10 => self.spread_with_width::<10>(strengths, grid),
            12 => self.spread_with_width::<12>(strengths, grid),
            14 => self.spread_with_width::<14>(strengths, grid),
            16 => self.spread_with_width::<16>(strengths, grid),
            _ => self.spread_with_any_width(strengths, grid),
        }
    }

    /// [`NonuniformFft::spread_with_any_width`] for `WIDTH`: the same sums in the same order.
    fn spread_with_width<const WIDTH: usize>(&self, strengths: &[f64], grid: &mut [f64]) {
        let stride = self.axes[1].grid + WIDTH;
        grid.fill(0.0);
        let (weights, _) = self.weights.as_chunks::<WIDTH>();
        for (s, weights) in self.spread.iter().zip(weights.chunks_exact(2)) {
            let [along1, along2] = [weights[0], weights[1]];
            let strength = strengths[s.point];
            let block = &mut grid[s.start[0] * stride..][..WIDTH * stride];
            for (row, weight1) in block.chunks_exact_mut(stride).zip(along1) {
                let scaled = strength * weight1;
                if let Some(cells) = row[s.start[1]..].first_chunk_mut::<WIDTH>() {
                    for (cell, weight2) in cells.iter_mut().zip(along2) {
                        *cell += scaled * weight2;
                    }
                }
            }
        }
    }

    fn spread_with_any_width(&self, strengths: &[f64], grid: &mut [f64]) {
        let width = self.kernel.width;
        let stride = self.axes[1].grid + width;
        grid.fill(0.0);
        for (s, weights) in self.spread.iter().zip(self.weights.chunks_exact(2 * width)) {
            let (along1, along2) = weights.split_at(width);
            let strength = strengths[s.point];
            for (row, weight1) in (s.start[0]..).zip(along1) {
                let begin = row * stride + s.start[1];
                let scaled = strength * weight1;
                for (cell, weight2) in grid[begin..begin + width].iter_mut().zip(along2) {
                    *cell += scaled * weight2;
                }
            }
        }
    }

    /// Adds what spread over the far edges to where it belongs in the periodic grid.
    fn fold_padding(&self, grid: &mut [f64]) {
        let width = self.kernel.width;
        let [n1, n2] = [self.axes[0].grid, self.axes[1].grid];
        let stride = n2 + width;
        let (inside, padding) = grid.split_at_mut(n1 * stride);
        for (cell, extra) in inside.iter_mut().zip(padding.iter()) {
            *cell += extra;
        }
        for row in inside.chunks_exact_mut(stride) {
            let (inside, padding) = row.split_at_mut(n2);
            for (cell, extra) in inside.iter_mut().zip(padding.iter()) {
                *cell += extra;
            }
        }
    }

    fn transform(&self, scratch: &mut Scratch) {
        let [n1, n2] = [self.axes[0].grid, self.axes[1].grid];
        let stride = n2 + self.kernel.width;
        for (index, row) in scratch.grid.chunks_exact_mut(stride).take(n1).enumerate() {
            self.rows
                .process_with_scratch(&mut row[..n2], &mut scratch.row, &mut scratch.row_memory)
                .expect("row, output and scratch have the lengths the planner asked for");
            for (column, &value) in scratch.columns.chunks_exact_mut(n1).zip(&scratch.row) {
                column[index] = value;
            }
        }
        self.columns
            .process_with_scratch(&mut scratch.columns, &mut scratch.column_memory);
    }
}

impl fmt::Debug for NonuniformFft {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("NonuniformFft")
            .field("points", &self.points())
            .field("max_modes", &self.max_modes())
            .field("grid", &[self.axes[0].grid, self.axes[1].grid])
            .field("kernel", &self.kernel)
            .finish_non_exhaustive()
    }
}

impl Axis {
    fn new(max_mode: usize, kernel: &Kernel) -> Self {
        let grid = next_even_smooth((2 * (2 * max_mode + 1)).max(2 * kernel.width));
        let deconvolution = kernel
            .transform(max_mode, grid)
            .iter()
            .map(|phi| 1.0 / phi)
            .collect();
        Self { grid, deconvolution }
    }

    fn max_mode(&self) -> usize {
        self.deconvolution.len() - 1
    }

    /// A scaled coordinate in grid cells, wrapped into [0, grid].
    fn place(&self, x: f64) -> f64 {
        (x - x.floor()) * self.grid as f64
    }
}

/// First of the `width` grid cells within half a width of `place`, wrapped into the grid.
fn first_cell(place: f64, width: usize, grid: usize) -> usize {
    let first = (place - 0.5 * width as f64).ceil() as i64;
    first.rem_euclid(grid as i64) as usize
}

/// The smallest even product of 2, 3 and 5 that is at least `least`: lengths that the fast transform likes.
fn next_even_smooth(least: usize) -> usize {
    let mut candidate = least.next_multiple_of(2);
    loop {
        let mut rest = candidate;
        for prime in [2, 3, 5] {
            while rest.is_multiple_of(prime) {
                rest /= prime;
            }
        }
        if rest == 1 {
            return candidate;
        }
        candidate += 2;
    }
}
