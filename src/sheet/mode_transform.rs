//! From heights at sites to the modes of the surface: the exact sum or the non-uniform FFT, whichever is cheaper.

use num_complex::Complex64;

use super::ModeSet;
use crate::numerics::{DirectSum, NonuniformFft, Scratch, modes_of_moving_points};

/// Largest error of a mode of the fast transform, relative to the sum of |h| over the atoms.
pub const TOLERANCE: f64 = 1e-10;

/// Up to this many phases (modes times atoms) the exact sum over fixed sites is the cheaper way. It costs a multiplication
/// and an addition for each phase and component, as long as the planned phases (16 bytes each) stay in the cache; the fast
/// transform costs the square of its kernel's width for each atom, and the transform of its grid. Measured with
/// `benches/nonuniform_fft.rs`.
const MOST_FIXED_PHASES: usize = 1 << 17;

/// The same where sites move with the frame: phases are then multiplied together each time, and the fast transform
/// computes its weights again.
const MOST_MOVING_PHASES: usize = 1 << 16;

/// How h_q = (1/N) sum_j h_j exp(-i q.R_j) is computed for the modes of a run.
#[derive(Clone, Debug)]
pub enum ModeTransform {
    /// Fixed sites, every phase computed once.
    Direct(DirectSum),
    /// Fixed sites, spreading weights computed once.
    Fast(Box<NonuniformFft>),
    /// Sites that move with the frame, exact sum.
    MovingDirect,
    /// Sites that move with the frame, fast transform planned again for each.
    MovingFast(Box<NonuniformFft>),
}

/// Working memory of one thread.
#[derive(Clone, Debug, Default)]
pub struct TransformScratch(Option<Scratch>);

impl ModeTransform {
    /// Chooses the transform for `sites` (scaled) and `modes`; `moving` when sites will differ from frame to frame.
    #[must_use]
    pub fn choose(sites: &[[f64; 2]], modes: &ModeSet, moving: bool) -> Self {
        let phases = sites.len() * modes.len();
        let highest = [0, 1].map(|i| {
            modes
                .integers
                .iter()
                .map(|m| m[i].unsigned_abs() as usize)
                .max()
                .unwrap_or(0)
        });
        let most = if moving {
            MOST_MOVING_PHASES
        } else {
            MOST_FIXED_PHASES
        };
        match (moving, phases <= most) {
            (false, true) => Self::Direct(DirectSum::plan(sites, &modes.integers)),
            (false, false) => Self::Fast(Box::new(NonuniformFft::plan(sites, highest, TOLERANCE))),
            (true, true) => Self::MovingDirect,
            (true, false) => Self::MovingFast(Box::new(NonuniformFft::plan(sites, highest, TOLERANCE))),
        }
    }

    /// Short name, for plans and logs.
    #[must_use]
    pub fn name(&self) -> &'static str {
        match self {
            Self::Direct(_) | Self::MovingDirect => "exact sum",
            Self::Fast(_) | Self::MovingFast(_) => "non-uniform FFT",
        }
    }

    /// Writes h_q of every mode to `out`. `sites` are those of this frame; fixed transforms have theirs planned in.
    pub fn apply(
        &self,
        sites: &[[f64; 2]],
        heights: &[f64],
        modes: &ModeSet,
        scratch: &mut TransformScratch,
        out: &mut Vec<Complex64>,
    ) {
        out.clear();
        out.resize(modes.len(), Complex64::default());
        match self {
            Self::Direct(sum) => sum.modes_into(heights, out),
            Self::Fast(transform) => {
                let scratch = scratch.0.get_or_insert_with(|| transform.scratch());
                transform.modes_into(heights, scratch, &modes.integers, out);
            }
            Self::MovingDirect => modes_of_moving_points(sites, heights, &modes.integers, out),
            Self::MovingFast(template) => {
                let scratch = scratch.0.get_or_insert_with(|| template.scratch());
                template
                    .at_points(sites)
                    .modes_into(heights, scratch, &modes.integers, out);
            }
        }
        let atoms = heights.len() as f64;
        for mode in out {
            *mode /= atoms;
        }
    }
}
