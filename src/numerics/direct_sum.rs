//! The exact Fourier sum over scattered points: the oracle of the fast transform, and the cheaper way for few modes.

use std::f64::consts::TAU;

use num_complex::Complex64;

/// f_m = sum_j c_j exp(-2 pi i (m1 x_j + m2 y_j)), term by term as it is written; points in units of the period.
///
/// # Panics
/// Where `strengths` is not one per point.
#[must_use]
pub fn mode_by_definition(points: &[[f64; 2]], strengths: &[f64], m: [i32; 2]) -> Complex64 {
    assert_eq!(strengths.len(), points.len(), "one strength a point");
    points
        .iter()
        .zip(strengths)
        .map(|(&point, &strength)| phase_factor(point, m) * strength)
        .sum()
}

/// Exact sums at fixed points with every phase computed once: memory and work are modes times points.
#[derive(Clone, Debug)]
pub struct DirectSum {
    points: usize,
    /// Real and imaginary parts of exp(-2 pi i m.s_j), each of shape (modes, points).
    real: Vec<f64>,
    imaginary: Vec<f64>,
}

impl DirectSum {
    /// Computes the phases of the wanted modes at `points`, in units of the period.
    #[must_use]
    pub fn plan(points: &[[f64; 2]], wanted: &[[i32; 2]]) -> Self {
        let phases = || {
            wanted
                .iter()
                .flat_map(|&m| points.iter().map(move |&p| phase_factor(p, m)))
        };
        Self {
            points: points.len(),
            real: phases().map(|phase| phase.re).collect(),
            imaginary: phases().map(|phase| phase.im).collect(),
        }
    }

    /// Number of points.
    #[must_use]
    pub fn points(&self) -> usize {
        self.points
    }

    /// Writes f_m of the planned modes to `out`, in their order.
    ///
    /// # Panics
    /// Where `strengths` is not one per point or `out` not one per planned mode.
    pub fn modes_into(&self, strengths: &[f64], out: &mut [Complex64]) {
        assert_eq!(strengths.len(), self.points, "one strength a point");
        assert_eq!(
            out.len() * self.points,
            self.real.len(),
            "one output a planned mode"
        );
        if self.points == 0 {
            out.fill(Complex64::default());
            return;
        }
        let rows = self
            .real
            .chunks_exact(self.points)
            .zip(self.imaginary.chunks_exact(self.points));
        for (value, (real, imaginary)) in out.iter_mut().zip(rows) {
            *value = Complex64::new(dot(strengths, real), dot(strengths, imaginary));
        }
    }
}

/// Exact sums at points that change from call to call: exp(-2 pi i m1 x) and exp(-2 pi i m2 y) are computed once for each
/// mode number that occurs along an axis, and multiplied.
///
/// # Panics
/// Where `strengths` is not one per point or `out` not one per wanted mode.
pub fn modes_of_moving_points(
    points: &[[f64; 2]],
    strengths: &[f64],
    wanted: &[[i32; 2]],
    out: &mut [Complex64],
) {
    assert_eq!(strengths.len(), points.len(), "one strength a point");
    assert_eq!(wanted.len(), out.len(), "one output a wanted mode");
    let [numbers1, numbers2] = [0, 1].map(|axis| {
        let mut numbers: Vec<i32> = wanted.iter().map(|m| m[axis]).collect();
        numbers.sort_unstable();
        numbers.dedup();
        numbers
    });
    let place = |numbers: &[i32], m: i32| {
        numbers
            .binary_search(&m)
            .expect("every wanted number was gathered")
    };
    let mut along1 = vec![Complex64::default(); numbers1.len()];
    let mut along2 = vec![Complex64::default(); numbers2.len()];
    let places: Vec<[usize; 2]> = wanted
        .iter()
        .map(|m| [place(&numbers1, m[0]), place(&numbers2, m[1])])
        .collect();
    out.fill(Complex64::default());
    for (&[x, y], &strength) in points.iter().zip(strengths) {
        for (factor, &m1) in along1.iter_mut().zip(&numbers1) {
            *factor = phase_factor([x, 0.0], [m1, 0]) * strength;
        }
        for (factor, &m2) in along2.iter_mut().zip(&numbers2) {
            *factor = phase_factor([0.0, y], [0, m2]);
        }
        for (value, &[i1, i2]) in out.iter_mut().zip(&places) {
            *value += along1[i1] * along2[i2];
        }
    }
}

/// exp(-2 pi i m.s). Whole periods are taken off before the angle is formed, so that large coordinates cost no accuracy.
fn phase_factor([x, y]: [f64; 2], [m1, m2]: [i32; 2]) -> Complex64 {
    let turns = f64::from(m1) * (x - x.round()) + f64::from(m2) * (y - y.round());
    let (sine, cosine) = (TAU * (turns - turns.round())).sin_cos();
    Complex64::new(cosine, -sine)
}

/// Scalar product in eight interleaved partial sums: an order that is fixed and that the compiler can vectorise.
fn dot(u: &[f64], v: &[f64]) -> f64 {
    const LANES: usize = 8;
    let mut partial = [0.0; LANES];
    let (u_chunks, v_chunks) = (u.chunks_exact(LANES), v.chunks_exact(LANES));
    let rest: f64 = u_chunks
        .remainder()
        .iter()
        .zip(v_chunks.remainder())
        .map(|(a, b)| a * b)
        .sum();
    for (a, b) in u_chunks.zip(v_chunks) {
        for lane in 0..LANES {
            partial[lane] += a[lane] * b[lane];
        }
    }
    partial.iter().sum::<f64>() + rest
}
