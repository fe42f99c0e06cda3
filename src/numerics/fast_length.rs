//! Lengths for which a Fourier transform is fast.

/// The least product of 2, 3 and 5 that is not below `least`.
///
/// # Panics
/// Never: the range that is searched ends on a power of two.
#[must_use]
pub fn fast_length(least: usize) -> usize {
    (least..=least.next_power_of_two())
        .find(|&length| {
            let mut rest = length;
            for factor in [2, 3, 5] {
                while rest % factor == 0 {
                    rest /= factor;
                }
            }
            rest == 1
        })
        .expect("the range ends on a power of two")
}
