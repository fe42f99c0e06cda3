//! Values with their errors as physicists print them: `1.45(12)`.

use crate::parameters::round_for_writing;

/// Largest and smallest decimal exponent of a value that is printed without a power of ten.
const PLAIN_EXPONENTS: std::ops::Range<i32> = -3..5;

/// A value and its standard error in concise form: the error in brackets, two digits of it, in units of the value's last
/// digits; `1.45(12)` is 1.45 +- 0.12, `-3.1(1.2)e-6` is -3.1e-6 +- 1.2e-6, `342.0(9.5)` is 342.0 +- 9.5
/// (IUPAP and JCGM 100:2008, 7.2.2).
#[must_use]
pub fn concise(value: f64, error: f64) -> String {
    if !value.is_finite() || !error.is_finite() || error < 0.0 {
        return format!("{value} +- {error}");
    }
    if error == 0.0 {
        return format!("{}(0)", round_for_writing(value));
    }
    let larger = value.abs().max(error);
    let exponent = decimal_exponent(larger);
    if PLAIN_EXPONENTS.contains(&exponent) {
        mantissa(value, error)
    } else {
        let scale = 10_f64.powi(exponent);
        format!("{}e{exponent}", mantissa(value / scale, error / scale))
    }
}

fn mantissa(value: f64, error: f64) -> String {
    // Two digits of the error decide how many decimals are shown; none are where the error is 10 or more.
    let decimals = 1 - decimal_exponent(round_to_two_digits(error));
    if decimals <= 0 {
        return format!("{value:.0}({error:.0})");
    }
    let decimals = decimals as usize;
    if error < 0.995 {
        let digits = (error * 10_f64.powi(decimals as i32)).round();
        format!("{value:.decimals$}({digits:.0})")
    } else {
        format!("{value:.decimals$}({error:.decimals$})")
    }
}

/// Exponent of the first digit: 2 for 345, -2 for 0.012.
fn decimal_exponent(number: f64) -> i32 {
    number.log10().floor() as i32
}

fn round_to_two_digits(number: f64) -> f64 {
    format!("{number:.1e}").parse().unwrap_or(number)
}

#[cfg(test)]
mod tests {
    use super::concise;

    #[test]
    fn errors_stand_in_brackets() {
        assert_eq!(concise(1.45, 0.12), "1.45(12)");
        assert_eq!(concise(2.70174, 0.000_31), "2.70174(31)");
        assert_eq!(concise(277.3, 12.4), "277(12)");
        assert_eq!(concise(342.04, 9.46), "342.0(9.5)");
        assert_eq!(concise(-3.1e-6, 1.2e-6), "-3.1(1.2)e-6");
        assert_eq!(concise(-3.14e-6, 0.12e-6), "-3.14(12)e-6");
        assert_eq!(concise(0.0, 0.02), "0.000(20)");
        // An error that rounds up to the next power of ten keeps two digits.
        assert_eq!(concise(1.0, 0.0999), "1.00(10)");
        assert_eq!(concise(10.0, 0.996), "10.0(1.0)");
    }
}
