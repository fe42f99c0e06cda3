//! Names of sheets made safe for the names of files.

use std::fmt::Write;

/// A file name's stem for a sheet: letters, digits, `-`, `_` and `.` (not at the start) stay, every other byte becomes
/// `%` and two hexadecimal digits. Different names give different stems, whatever system reads them (but for systems
/// that do not tell upper from lower case).
#[must_use]
pub fn file_stem(name: &str) -> String {
    let mut stem = String::with_capacity(name.len());
    for (at, byte) in name.bytes().enumerate() {
        let stays = byte.is_ascii_alphanumeric() || matches!(byte, b'-' | b'_') || (byte == b'.' && at > 0);
        if stays {
            stem.push(char::from(byte));
        } else {
            // Writing to a string cannot fail.
            let _ = write!(stem, "%{byte:02X}");
        }
    }
    stem
}

#[cfg(test)]
mod tests {
    use super::file_stem;

    #[test]
    fn no_name_leaves_its_folder() {
        assert_eq!(file_stem("hbn-a"), "hbn-a");
        assert_eq!(file_stem("../x"), "%2E.%2Fx");
        assert_eq!(file_stem("MoS2 (v1.0)"), "MoS2%20%28v1.0%29");
        assert_ne!(file_stem("a b"), file_stem("a_b"));
    }
}
