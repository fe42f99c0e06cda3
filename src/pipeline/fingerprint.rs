//! Fingerprints of input files: for provenance, and for knowing whether stored blocks still belong to them.

use std::fs::File;
use std::io::{self, Read, Seek, SeekFrom};
use std::path::Path;

/// Files up to this size, in bytes, are hashed whole.
const WHOLE: u64 = 64 << 20;

/// Of a larger file this many pieces are hashed, evenly spread, its first and last bytes among them ...
const PIECES: u64 = 256;

/// ... each this long: reading a night's 500 GB twice to name them would double the work.
const PIECE: u64 = 64 << 10;

/// blake3 of a file as hexadecimal. Of a file above 64 MiB: `sampled-` and the blake3 of its size (eight bytes, little
/// endian) and of 256 pieces of 64 KiB spread evenly over it.
///
/// # Errors
/// Where the file cannot be read.
pub fn fingerprint(path: &Path) -> io::Result<String> {
    let mut file = File::open(path)?;
    let size = file.metadata()?.len();
    let mut hasher = blake3::Hasher::new();
    if size <= WHOLE {
        hasher.update_reader(&mut file)?;
        return Ok(hasher.finalize().to_hex().to_string());
    }
    hasher.update(&size.to_le_bytes());
    let mut piece = vec![0; PIECE as usize];
    for index in 0..PIECES {
        let start = if index + 1 == PIECES {
            size - PIECE
        } else {
            (size - PIECE) / (PIECES - 1) * index
        };
        file.seek(SeekFrom::Start(start))?;
        file.read_exact(&mut piece)?;
        hasher.update(&piece);
    }
    Ok(format!("sampled-{}", hasher.finalize().to_hex()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_hash_of_a_small_file_is_the_published_one() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let file = folder.path().join("a.txt");
        std::fs::write(&file, b"").expect("a small file");
        // BLAKE3 of the empty input: the official test vectors of BLAKE3, input_len 0 (from memory).
        assert_eq!(
            fingerprint(&file).expect("a readable file"),
            "af1349b9f5f9a1a6a0404dea36dcc9499bcb25c9adc112b7cc9a93cae41f3262"
        );
    }

    #[test]
    fn a_large_file_is_sampled_to_its_end() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join("large");
        let file = File::create(&path).expect("a file");
        file.set_len(WHOLE + 1).expect("a sparse file");
        let before = fingerprint(&path).expect("readable");
        assert!(before.starts_with("sampled-"));
        let mut bytes = File::options().write(true).open(&path).expect("writable");
        bytes.seek(SeekFrom::End(-1)).expect("a place");
        io::Write::write_all(&mut bytes, b"x").expect("a byte");
        assert_ne!(fingerprint(&path).expect("readable"), before);
    }
}
