//! How every number of a result file is rounded.

/// Decimal digits kept in parameter files and tables.
///
/// Two platforms' mathematical libraries may differ in the last bits of a logarithm or an exponential; eight digits are
/// thousands of times finer than any error bar here and coarse enough that such bits do not reach a file (but for a value
/// that happens to lie within those bits of a rounding border).
pub const SIGNIFICANT_DIGITS: usize = 8;

/// The double nearest to `number` rounded to [`SIGNIFICANT_DIGITS`] decimal digits. Minus zero becomes zero; what is not
/// finite is returned as it is.
#[must_use]
pub fn round_for_writing(number: f64) -> f64 {
    if !number.is_finite() || number == 0.0 {
        return number + 0.0;
    }
    let decimals = SIGNIFICANT_DIGITS - 1;
    format!("{number:.decimals$e}").parse().unwrap_or(number)
}

/// The text of a number in a table: rounded, shortest form that reads back as the same double, always with a point or an
/// exponent. Empty for an absent number and for one that is not finite.
#[must_use]
pub fn written(number: Option<f64>) -> String {
    match number {
        Some(number) if number.is_finite() => format!("{:?}", round_for_writing(number)),
        _ => String::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn eight_digits_are_kept() {
        assert_eq!(round_for_writing(2.998_765_432_1), 2.998_765_4);
        assert_eq!(round_for_writing(-6.022_140_76e23), -6.022_140_8e23);
        assert_eq!(round_for_writing(300.0), 300.0);
        assert!(round_for_writing(-0.0).is_sign_positive());
    }

    #[test]
    fn the_last_bits_do_not_show() {
        let number = 1.234_567_8_f64;
        assert_eq!(round_for_writing(number * (1.0 + 4.0 * f64::EPSILON)), number);
    }

    #[test]
    fn a_float_stays_a_float_and_absence_is_empty() {
        assert_eq!(written(Some(300.0)), "300.0");
        assert_eq!(written(Some(7.5e-9)), "7.5e-9");
        assert_eq!(written(None), "");
        assert_eq!(written(Some(f64::NAN)), "");
    }
}
