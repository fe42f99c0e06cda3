//! A text file read line by line, plain or compressed, in which one can go back to a byte seen before.

use std::fs::File;
use std::io::{self, BufRead, BufReader, Read};
use std::path::{Path, PathBuf};

use bzip2::bufread::MultiBzDecoder;
use flate2::bufread::MultiGzDecoder;
use lzma_rust2::XzReader;

/// Bytes read from the file at once.
const BUFFER_BYTES: usize = 1 << 18;

/// A text file and the place where its next line starts.
///
/// The compression is told by the file's first bytes: gzip, bzip2 and xz are unpacked while reading. Going back in a
/// compressed file unpacks it from its beginning again.
pub(super) struct TextFile {
    path: PathBuf,
    stream: Stream,
    /// Bytes of text before the next line.
    position: u64,
}

enum Stream {
    Plain(BufReader<File>),
    Packed(Box<dyn BufRead + Send>),
}

impl TextFile {
    /// Opens a file at its beginning.
    pub fn open(path: &Path) -> io::Result<Self> {
        let mut file = BufReader::with_capacity(BUFFER_BYTES, File::open(path)?);
        let magic: Vec<u8> = file.fill_buf()?.iter().take(6).copied().collect();
        let stream = match magic.as_slice() {
            [0x1f, 0x8b, ..] => packed(MultiGzDecoder::new(file)),
            [b'B', b'Z', b'h', ..] => packed(MultiBzDecoder::new(file)),
            [0xfd, b'7', b'z', b'X', b'Z', 0] => packed(XzReader::new(file, true)),
            _ => Stream::Plain(file),
        };
        Ok(Self {
            path: path.to_owned(),
            stream,
            position: 0,
        })
    }

    /// Where the next line starts, in bytes of text.
    pub fn position(&self) -> u64 {
        self.position
    }

    /// Goes to a byte of the text.
    pub fn seek(&mut self, position: u64) -> io::Result<()> {
        match &mut self.stream {
            Stream::Plain(file) => {
                let offset = position as i64 - self.position as i64;
                file.seek_relative(offset)?;
            }
            Stream::Packed(_) => {
                if position < self.position {
                    *self = Self::open(&self.path)?;
                }
                let ahead = position - self.position;
                io::copy(&mut self.reader().take(ahead), &mut io::sink())?;
            }
        }
        self.position = position;
        Ok(())
    }

    /// Reads the next line with its line break into `line`, replacing it. Returns whether a whole line was there: the end
    /// of a file that was cut off has no line break.
    pub fn read_line(&mut self, line: &mut Vec<u8>) -> io::Result<bool> {
        line.clear();
        let count = self.reader().read_until(b'\n', line)?;
        self.position += count as u64;
        Ok(line.last() == Some(&b'\n'))
    }

    /// Skips the next `count` lines. Returns whether all of them were there, whole.
    pub fn skip_lines(&mut self, count: usize) -> io::Result<bool> {
        for _ in 0..count {
            let reader = self.reader();
            let mut whole = false;
            let mut skipped = 0;
            while !whole {
                let buffer = reader.fill_buf()?;
                if buffer.is_empty() {
                    break;
                }
                // Bytes up to and with the next line break, or all of the buffer.
                let bytes = buffer
                    .split_inclusive(|&byte| byte == b'\n')
                    .next()
                    .unwrap_or(buffer);
                whole = bytes.last() == Some(&b'\n');
                let used = bytes.len();
                skipped += used as u64;
                reader.consume(used);
            }
            self.position += skipped;
            if !whole {
                return Ok(false);
            }
        }
        Ok(true)
    }

    fn reader(&mut self) -> &mut (dyn BufRead + Send) {
        match &mut self.stream {
            Stream::Plain(file) => file,
            Stream::Packed(reader) => reader.as_mut(),
        }
    }
}

fn packed(reader: impl Read + Send + 'static) -> Stream {
    Stream::Packed(Box::new(BufReader::with_capacity(BUFFER_BYTES, reader)))
}

/// The first bytes of a file's text, unpacked; as many as there are, up to `count`.
pub(super) fn first_bytes(path: &Path, count: usize) -> io::Result<Vec<u8>> {
    let mut file = TextFile::open(path)?;
    let mut bytes = Vec::new();
    file.reader().take(count as u64).read_to_end(&mut bytes)?;
    Ok(bytes)
}

#[cfg(test)]
mod tests {
    use std::io::Write;

    use super::TextFile;

    /// Lines of differing length, one longer than the buffer, the last without its line break.
    fn text() -> Vec<u8> {
        let mut text = Vec::new();
        for k in 0..2000usize {
            writeln!(text, "{}", "x".repeat(k % 97)).expect("writing to memory");
        }
        text.extend(std::iter::repeat_n(b'y', super::BUFFER_BYTES + 3));
        text.extend_from_slice(b"\ncut off");
        text
    }

    fn check(path: &std::path::Path) {
        let text = text();
        let mut file = TextFile::open(path).expect("opens");
        let mut line = Vec::new();
        assert!(file.skip_lines(1500).expect("reads"));
        let place = file.position();
        let mut rest = &text[place as usize..];
        while !rest.is_empty() {
            let end = rest
                .iter()
                .position(|&byte| byte == b'\n')
                .map_or(rest.len(), |at| at + 1);
            let whole = file.read_line(&mut line).expect("reads");
            assert_eq!(line, &rest[..end]);
            assert_eq!(whole, end < rest.len());
            rest = &rest[end..];
        }
        file.seek(place).expect("goes back");
        assert!(file.read_line(&mut line).expect("reads"));
        assert_eq!(line.len(), 1500 % 97 + 1);
        assert!(!file.skip_lines(1000).expect("reads"), "fewer lines are left");
    }

    #[test]
    fn lines_and_places_are_the_same_plain_and_compressed() {
        let folder = tempfile::tempdir().expect("a folder");
        let plain = folder.path().join("a");
        std::fs::write(&plain, text()).expect("writes");
        check(&plain);
        let packed = folder.path().join("b");
        let mut gz = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::fast());
        gz.write_all(&text()).expect("packs");
        std::fs::write(&packed, gz.finish().expect("packs")).expect("writes");
        check(&packed);
        let mut bz = bzip2::write::BzEncoder::new(Vec::new(), bzip2::Compression::fast());
        bz.write_all(&text()).expect("packs");
        std::fs::write(&packed, bz.finish().expect("packs")).expect("writes");
        check(&packed);
    }
}
