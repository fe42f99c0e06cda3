//! Reading a quantity written with its unit: "0.05 N/m".

use thiserror::Error;

use super::Dimension;

/// Why a text is no quantity of the wanted dimension. Displayed, it says what was found and which units are taken;
/// [`QuantityError::remedy`] is the second half alone.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum QuantityError {
    /// The text does not begin with a number.
    #[error("`{text}` does not begin with a number; {}", self.remedy())]
    NotANumber {
        /// What was found.
        text: String,
        /// What was wanted.
        dimension: Dimension,
    },
    /// A number alone, where a unit is needed.
    #[error("`{text}` has no unit; {}", self.remedy())]
    MissingUnit {
        /// What was found.
        text: String,
        /// What was wanted.
        dimension: Dimension,
    },
    /// A unit of another dimension.
    #[error("`{text}` is {} where {} is needed; {}", found.noun(), dimension.noun(), self.remedy())]
    WrongDimension {
        /// What was found.
        text: String,
        /// What its unit measures.
        found: Dimension,
        /// What was wanted.
        dimension: Dimension,
    },
    /// A unit that no dimension has.
    #[error("`{unit}` is no known unit; {}", self.remedy())]
    UnknownUnit {
        /// The number in front of the unit.
        number: String,
        /// The unit found.
        unit: String,
        /// The nearest unit of the wanted dimension.
        nearest: Option<&'static str>,
        /// What was wanted.
        dimension: Dimension,
    },
    /// A temperature on a scale whose zero is not the absolute one.
    #[error("`{text}` is not on the absolute scale; {}", self.remedy())]
    NotAbsolute {
        /// What was found.
        text: String,
    },
}

impl QuantityError {
    /// What to write instead, with the units taken.
    #[must_use]
    pub fn remedy(&self) -> String {
        match self {
            Self::MissingUnit { text, dimension } => {
                format!(
                    "write \"{} {}\"; {}",
                    text,
                    dimension.units()[0].symbol,
                    taken(*dimension)
                )
            }
            Self::UnknownUnit {
                number,
                nearest: Some(nearest),
                dimension,
                ..
            } => format!("did you mean \"{number} {nearest}\"? {}", taken(*dimension)),
            Self::NotANumber { dimension, .. }
            | Self::WrongDimension { dimension, .. }
            | Self::UnknownUnit { dimension, .. } => taken(*dimension),
            Self::NotAbsolute { .. } => {
                "write kelvin, such as \"300 K\": add 273.15 to degrees Celsius".to_owned()
            }
        }
    }

    /// What is wrong, without the remedy.
    #[must_use]
    pub fn problem(&self) -> String {
        let whole = self.to_string();
        let end = whole.len() - self.remedy().len() - "; ".len();
        whole[..end].to_owned()
    }
}

/// "a time is written in ps, fs, ns, us or s"
fn taken(dimension: Dimension) -> String {
    if dimension == Dimension::Number {
        return "a number stands alone (0.05) or as a percentage (\"5 %\")".to_owned();
    }
    let symbols: Vec<&str> = dimension.units().iter().map(|unit| unit.symbol).collect();
    let list = match symbols.split_last() {
        Some((last, [])) => (*last).to_owned(),
        Some((last, rest)) => format!("{} or {last}", rest.join(", ")),
        None => String::new(),
    };
    format!("{} is written in {list}", dimension.noun())
}

impl Dimension {
    /// Reads a number and its unit into the program's unit: `Time.parse("400 fs")` is 0.4.
    ///
    /// Spaces around and within the unit are free; the superscripts ² and ⁻¹ and `**` mean `^`. Upper and lower case
    /// differ (mN/m and MN/m).
    ///
    /// # Errors
    /// Where there is no finite number in front, no unit, or a unit of another dimension.
    pub fn parse(self, text: &str) -> Result<f64, QuantityError> {
        let trimmed = text.trim();
        let (number, unit) = trimmed.split_at(number_length(trimmed));
        let Some(value) = number.parse::<f64>().ok().filter(|value| value.is_finite()) else {
            return Err(QuantityError::NotANumber {
                text: text.to_owned(),
                dimension: self,
            });
        };
        let unit = plain_spelling(unit);
        if let Some(unit) = self.find(&unit) {
            return Ok(value * unit.factor);
        }
        Err(self.refusal(trimmed, number, unit))
    }

    /// Reads a number and its unit, and gives it in `unit` of the same dimension rather than in the program's unit.
    ///
    /// # Errors
    /// As [`Dimension::parse`].
    ///
    /// # Panics
    /// As [`Dimension::one`].
    pub fn parse_in(self, text: &str, unit: &str) -> Result<f64, QuantityError> {
        self.parse(text).map(|value| value / self.one(unit))
    }

    /// Why `unit`, which is none of this dimension's, is refused.
    fn refusal(self, text: &str, number: &str, unit: String) -> QuantityError {
        if unit.is_empty() {
            return QuantityError::MissingUnit {
                text: number.to_owned(),
                dimension: self,
            };
        }
        if self == Self::Temperature && names_other_temperature_scale(&unit) {
            return QuantityError::NotAbsolute {
                text: text.to_owned(),
            };
        }
        if let Some(found) = Self::of_unit(&unit) {
            return QuantityError::WrongDimension {
                text: text.to_owned(),
                found,
                dimension: self,
            };
        }
        QuantityError::UnknownUnit {
            number: number.to_owned(),
            nearest: self.nearest_unit(&unit),
            unit,
            dimension: self,
        }
    }

    /// The unit whose spelling differs from `unit` in case only, or in one letter of at least four.
    fn nearest_unit(self, unit: &str) -> Option<&'static str> {
        let lower = unit.to_lowercase();
        let spellings = || {
            self.units().iter().flat_map(|known| {
                std::iter::once(known.symbol)
                    .chain(known.spellings.iter().copied())
                    .map(|spelling| (spelling, known.symbol))
            })
        };
        spellings()
            .find(|(spelling, _)| spelling.to_lowercase() == lower)
            .or_else(|| {
                spellings().find(|(spelling, _)| {
                    spelling.len() >= 4 && strsim::osa_distance(&spelling.to_lowercase(), &lower) == 1
                })
            })
            .map(|(_, symbol)| symbol)
    }
}

/// Length in bytes of the number at the start of `text`: sign, digits, point, exponent.
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |start: usize| {
        bytes[start..]
            .iter()
            .take_while(|byte| byte.is_ascii_digit())
            .count()
    };
    let mut end = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    end += digits_from(end);
    if bytes.get(end) == Some(&b'.') {
        end += 1;
        end += digits_from(end);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let digits = digits_from((end + 1 + sign).min(bytes.len()));
        if digits > 0 {
            end += 1 + sign + digits;
        }
    }
    end
}

/// The unit without spaces, with powers as `^2` and `^-1`, and one of the two micro signs.
fn plain_spelling(unit: &str) -> String {
    let mut plain = String::with_capacity(unit.len());
    for letter in unit.chars().filter(|letter| !letter.is_whitespace()) {
        match letter {
            '²' => plain.push_str("^2"),
            '³' => plain.push_str("^3"),
            '⁻' => plain.push_str("^-"),
            '¹' => plain.push('1'),
            '\u{b5}' => plain.push('μ'),
            '\u{212b}' => plain.push('Å'),
            '·' => plain.push('*'),
            other => plain.push(other),
        }
    }
    plain.replace("**", "^").replace("^-^", "^-")
}

fn names_other_temperature_scale(unit: &str) -> bool {
    matches!(
        unit.to_lowercase().as_str(),
        "c" | "°c" | "℃" | "degc" | "celsius" | "f" | "°f" | "degf" | "fahrenheit"
    )
}

#[cfg(test)]
mod tests {
    use super::{Dimension, QuantityError, number_length, plain_spelling};

    fn close(found: f64, expected: f64) {
        assert!((found / expected - 1.0).abs() < 1e-9, "{found} is not {expected}");
    }

    #[test]
    fn reads_what_people_write() {
        for (dimension, text, expected) in [
            (Dimension::Temperature, "300 K", 300.0),
            (Dimension::Temperature, "300K", 300.0),
            (Dimension::Time, "0.4 ps", 0.4),
            (Dimension::Time, "1 fs", 1e-3),
            (Dimension::Time, " 20 ns ", 2e4),
            (Dimension::Time, "-5 µs", -5e6),
            (Dimension::Length, "12 angstrom", 12.0),
            (Dimension::Length, "1.2e1 Å", 12.0),
            (Dimension::Area, "1 nm²", 100.0),
            (Dimension::WaveNumber, "1.2 1/angstrom", 1.2),
            (Dimension::WaveNumber, "12 nm⁻¹", 1.2),
            (Dimension::WaveNumber, "1.2 A^-1", 1.2),
            (Dimension::Energy, "10 eV", 10.0),
            (Dimension::Energy, "1eV", 1.0),
            (Dimension::Tension, "0.3 eV/A^2", 0.3),
            (Dimension::Tension, "0.3 eV / A**2", 0.3),
            (Dimension::Number, "5 %", 0.05),
            (Dimension::Number, "0.05", 0.05),
        ] {
            close(dimension.parse(text).unwrap(), expected);
        }
    }

    /// Values of the NIST reference on constants, units and uncertainty (CODATA 2018 conversion factors):
    /// 1 eV = 96.485 332 12 kJ/mol, 1 hartree = 27.211 386 245 988 eV, 1 bohr = 0.529 177 210 903 A,
    /// 1 eV/A^3 = 160.217 6634 GPa, 1 kcal = 4.184 kJ.
    #[test]
    fn conversion_factors_are_those_of_codata() {
        close(Dimension::Energy.parse("96.48533212 kJ/mol").unwrap(), 1.0);
        close(Dimension::Energy.parse("23.06054783 kcal/mol").unwrap(), 1.0);
        close(Dimension::Energy.parse("1 hartree").unwrap(), 27.211_386_245_988);
        close(Dimension::Length.parse("1 bohr").unwrap(), 0.529_177_210_903);
        close(Dimension::Pressure.parse("160.2176634 GPa").unwrap(), 1.0);
        close(
            Dimension::Pressure.parse("1 atm").unwrap(),
            Dimension::Pressure.parse("1.01325 bar").unwrap(),
        );
        close(Dimension::Tension.parse("16.02176634 N/m").unwrap(), 1.0);
        close(Dimension::Tension.parse("16021.76634 mN/m").unwrap(), 1.0);
    }

    #[test]
    fn a_value_comes_back_in_the_unit_asked_for() {
        close(Dimension::Tension.parse_in("340 N/m", "N/m").unwrap(), 340.0);
        close(
            Dimension::Tension.parse_in("1 eV/A^2", "N/m").unwrap(),
            16.021_766_34,
        );
        close(Dimension::Area.parse_in("0.026 nm^2", "A^2").unwrap(), 2.6);
    }

    #[test]
    fn refuses_and_says_which_units_are_taken() {
        let message = |dimension: Dimension, text: &str| dimension.parse(text).unwrap_err().to_string();
        assert_eq!(
            message(Dimension::Time, "0.4"),
            "`0.4` has no unit; write \"0.4 ps\"; a time is written in ps, fs, ns, us or s"
        );
        assert_eq!(
            message(Dimension::Temperature, "0.4 ps"),
            "`0.4 ps` is a time where a temperature is needed; a temperature is written in K or mK"
        );
        assert_eq!(
            message(Dimension::Temperature, "300 k"),
            "`k` is no known unit; did you mean \"300 K\"? a temperature is written in K or mK"
        );
        assert_eq!(
            message(Dimension::Length, "3 angstorm"),
            "`angstorm` is no known unit; did you mean \"3 angstrom\"? \
             a length is written in angstrom, nm, pm, um, bohr or m"
        );
        assert_eq!(
            message(Dimension::Temperature, "27 °C"),
            "`27 °C` is not on the absolute scale; write kelvin, such as \"300 K\": add 273.15 to degrees Celsius"
        );
        assert!(matches!(
            Dimension::Time.parse("soon"),
            Err(QuantityError::NotANumber { .. })
        ));
        for text in ["", "inf ps", "nan ps", "1e999 ps", ". ps", "- ps", "--1 ps"] {
            assert!(
                matches!(Dimension::Time.parse(text), Err(QuantityError::NotANumber { .. })),
                "{text}"
            );
        }
        assert_eq!(
            Dimension::Time.parse("0.4").unwrap_err().problem(),
            "`0.4` has no unit"
        );
    }

    #[test]
    fn a_spelling_means_one_unit_only() {
        let mut spellings: Vec<&str> = Dimension::ALL
            .into_iter()
            .flat_map(Dimension::units)
            .flat_map(|unit| std::iter::once(unit.symbol).chain(unit.spellings.iter().copied()))
            .collect();
        let all = spellings.len();
        spellings.sort_unstable();
        spellings.dedup();
        assert_eq!(all, spellings.len());
    }

    #[test]
    fn every_example_is_taken() {
        for dimension in Dimension::ALL {
            dimension.parse(dimension.example()).unwrap();
        }
    }

    #[test]
    fn splits_numbers_from_units() {
        for (text, length) in [
            ("1eV", 1),
            ("1e3eV", 3),
            ("-1.5e-3ps", 7),
            (".5", 2),
            ("1e", 1),
            ("", 0),
        ] {
            assert_eq!(number_length(text), length, "{text}");
        }
        assert_eq!(plain_spelling(" N / m "), "N/m");
    }
}
