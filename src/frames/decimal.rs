//! Numbers of a text table, parsed without looking for their ends first.
//!
//! Tables hold decimals of fixed form in their millions. Eight digits are turned into an integer at a time; the integer is
//! divided by a power of ten, which is exact arithmetic but for the one rounding that IEEE 754 defines where both
//! fit a double (Clinger, PLDI 1990, "How to read floating point numbers accurately"). All other numbers go the
//! standard library's way, so that the value is always that of `str::parse`.

/// Powers of ten that a double holds exactly.
const POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18,
    1e19, 1e20, 1e21, 1e22,
];

/// Powers of ten by which a mantissa grows with each group of digits.
const GROWTH: [u64; 9] = [
    1,
    10,
    100,
    1_000,
    10_000,
    100_000,
    1_000_000,
    10_000_000,
    100_000_000,
];

/// Most digits that surely fit a `u64`.
const MOST_DIGITS: usize = 19;

/// Words of a text, taken one after the other.
#[derive(Clone, Copy, Debug)]
pub(super) struct Words<'text> {
    rest: &'text [u8],
}

impl<'text> Words<'text> {
    /// The words of `text`, which starts at a word or at blanks.
    pub fn new(text: &'text [u8]) -> Self {
        Self { rest: text }
    }

    /// Bytes not yet taken.
    pub fn left(&self) -> usize {
        self.rest.len()
    }

    /// Takes the blanks before the next word.
    #[inline]
    fn skip_blanks(&mut self) {
        while let [b' ' | b'\t', rest @ ..] = self.rest {
            self.rest = rest;
        }
    }

    /// Takes the next word of this line, unread. `None` at the end of the line.
    #[inline]
    pub fn skip_word(&mut self) -> Option<()> {
        self.skip_blanks();
        let length = self.rest.iter().position(|&byte| is_blank(byte))?;
        self.rest = &self.rest[length..];
        (length > 0).then_some(())
    }

    /// Takes the end of the line. `None` where another word stands before it.
    #[inline]
    pub fn end_line(&mut self) -> Option<()> {
        self.skip_blanks();
        match self.rest {
            [b'\n', rest @ ..] | [b'\r', b'\n', rest @ ..] => {
                self.rest = rest;
                Some(())
            }
            _ => None,
        }
    }

    /// Takes a whole number without a sign. `None` where there is none, or it stands so near the end of the text that
    /// digits cannot be read eight at a time.
    #[inline]
    pub fn whole_number(&mut self) -> Option<u64> {
        self.skip_blanks();
        let mut digits = Digits::default();
        self.rest = digits.take(self.rest)?;
        (digits.count > 0 && digits.count < MOST_DIGITS && self.at_end_of_word()).then_some(digits.value)
    }

    /// Takes a number. `None` where the word is none, or it stands near the end of the text (see
    /// [`Words::whole_number`]).
    #[inline]
    pub fn number(&mut self) -> Option<f64> {
        self.skip_blanks();
        let word = self.rest;
        let negative = word.first() == Some(&b'-');
        let mut digits = Digits::default();
        let mut rest = digits.take(&word[usize::from(negative)..])?;
        let mut decimals = 0;
        if let [b'.', fraction @ ..] = rest {
            let before = digits.count;
            rest = digits.take(fraction)?;
            decimals = digits.count - before;
        }
        self.rest = rest;
        let exact = digits.count > 0 && digits.count < MOST_DIGITS && digits.value < 1 << 53;
        if exact && self.at_end_of_word() {
            let size = digits.value as f64 / POWERS[decimals];
            return Some(if negative { -size } else { size });
        }
        let length = word.iter().position(|&byte| is_blank(byte))?;
        self.rest = &word[length..];
        std::str::from_utf8(&word[..length]).ok()?.parse().ok()
    }

    #[inline]
    fn at_end_of_word(&self) -> bool {
        self.rest.first().is_some_and(|&byte| is_blank(byte))
    }
}

#[inline]
fn is_blank(byte: u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\n' | b'\r')
}

/// Digits read so far: their value (wrapped, beyond [`MOST_DIGITS`]) and number.
#[derive(Clone, Copy, Debug, Default)]
struct Digits {
    value: u64,
    count: usize,
}

impl Digits {
    /// Takes all digits at the start of `text` and returns what follows; `None` near the end of the text.
    #[inline]
    fn take<'text>(&mut self, mut text: &'text [u8]) -> Option<&'text [u8]> {
        loop {
            let eight = u64::from_le_bytes(*text.first_chunk()?) ^ 0x3030_3030_3030_3030;
            // A digit is now 0 to 9; the high bit of every other byte is set by this sum, in which no byte overflows.
            let others =
                (((eight & 0x7f7f_7f7f_7f7f_7f7f) + 0x7676_7676_7676_7676) | eight) & 0x8080_8080_8080_8080;
            let found = (others.trailing_zeros() / 8) as usize;
            if found > 0 {
                self.value = self
                    .value
                    .wrapping_mul(GROWTH[found])
                    .wrapping_add(eight_digits(eight << (8 * (8 - found))));
                self.count += found;
                text = &text[found..];
            }
            if found < 8 {
                return Some(text);
            }
        }
    }
}

/// The value of eight digits, the first in the lowest byte: pairs, then fours, then all of them.
#[inline]
fn eight_digits(digits: u64) -> u64 {
    let pairs = digits.wrapping_mul(10).wrapping_add(digits >> 8);
    let low = (pairs & 0x0000_00ff_0000_00ff).wrapping_mul(100 + (1_000_000 << 32));
    let high = ((pairs >> 16) & 0x0000_00ff_0000_00ff).wrapping_mul(1 + (10_000 << 32));
    low.wrapping_add(high) >> 32
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::Words;

    /// What follows a number in these tests, so that it never stands at the end of the text.
    const TAIL: &str = " and more words\n";

    fn number(word: &str) -> Option<f64> {
        Words::new(format!("{word}{TAIL}").as_bytes()).number()
    }

    #[track_caller]
    fn same_as_the_standard_library(word: &str) {
        let wanted = word.parse::<f64>().ok();
        assert_eq!(
            number(word).map(f64::to_bits),
            wanted.map(f64::to_bits),
            "\"{word}\": {:?} against {wanted:?}",
            number(word)
        );
    }

    #[test]
    fn odd_words_are_read_as_the_standard_library_reads_them() {
        let words = [
            "0",
            "-0",
            "-0.0",
            "+1.5",
            "1.",
            ".5",
            "-.5",
            ".",
            "-",
            "",
            "1e5",
            "1.5E-7",
            "-2.5e+300",
            "1e",
            "nan",
            "-inf",
            "1.2.3",
            "12a",
            "--1",
            "9007199254740991",
            "9007199254740992",
            "9007199254740993",
            "999999999999999999",
            "9999999999999999999",
            "18446744073709551616.5",
            "0.0000000000000000000000000001",
            "0.1",
            "0.30000000000000004",
            "123456789.123456789",
            "00000000000000000001.5",
            "1\u{b2}",
            "1_000",
            "179769313486231580793e289",
        ];
        for word in words {
            if !word.is_empty() {
                same_as_the_standard_library(word);
            }
        }
    }

    #[test]
    fn whole_numbers_and_ends_of_lines() {
        let text = b"  17 word\t4 \r\n5 12345678901234567890 ........";
        let mut words = Words::new(text);
        assert_eq!(words.whole_number(), Some(17));
        assert_eq!(words.end_line(), None);
        assert_eq!(words.skip_word(), Some(()));
        assert_eq!(words.whole_number(), Some(4));
        assert_eq!(words.end_line(), Some(()));
        assert_eq!(words.whole_number(), Some(5));
        assert_eq!(words.whole_number(), None, "too long for the short way");
        assert_eq!(Words::new(b"17\n").whole_number(), None, "too near the end");
    }

    proptest! {
        #[test]
        fn decimals_are_those_of_the_standard_library(word in "-?[0-9]{0,12}(\\.[0-9]{0,12})?") {
            prop_assume!(!word.is_empty());
            same_as_the_standard_library(&word);
        }

        #[test]
        fn numbers_of_any_length_are_those_of_the_standard_library(word in "-?[0-9]{1,24}(\\.[0-9]{0,24})?(e-?[0-9]{1,3})?") {
            same_as_the_standard_library(&word);
        }

        #[test]
        fn doubles_come_back_from_their_shortest_form(bits: u64) {
            let value = f64::from_bits(bits);
            prop_assume!(value.is_finite());
            prop_assert_eq!(number(&value.to_string()).map(f64::to_bits), Some(bits));
        }

        #[test]
        fn any_other_word_is_refused_as_the_standard_library_refuses_it(word in "[-+.0-9eEinfa]{1,9}") {
            same_as_the_standard_library(&word);
        }
    }
}
