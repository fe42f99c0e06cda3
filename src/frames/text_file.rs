//! A text file read line by line, plain or compressed, in which one can go back to a byte seen before.

use std::fs::File;
use std::io::{self, BufReader, Read, Seek, SeekFrom};
use std::path::{Path, PathBuf};

use bzip2::bufread::MultiBzDecoder;
use flate2::bufread::MultiGzDecoder;
use lzma_rust2::XzReader;
use memchr::{memchr, memchr_iter, memmem, memrchr};

/// Bytes read from the file at once: few enough to stay in a core's cache until they are parsed.
const BUFFER_BYTES: usize = 1 << 18;

/// A text file and the place where its next line starts.
///
/// The compression is told by the file's first bytes: gzip, bzip2 and xz are unpacked while reading. Going back in a
/// compressed file unpacks it from its beginning again.
pub(super) struct TextFile {
    path: PathBuf,
    stream: Stream,
    /// Text read ahead: the bytes `start..end`.
    buffer: Vec<u8>,
    start: usize,
    end: usize,
    /// Bytes of text before the next line.
    position: u64,
}

enum Stream {
    Plain(File),
    Packed(Box<dyn Read + Send>),
}

impl TextFile {
    /// Opens a file at its beginning.
    pub fn open(path: &Path) -> io::Result<Self> {
        let mut file = File::open(path)?;
        let mut magic = Vec::with_capacity(6);
        file.by_ref().take(6).read_to_end(&mut magic)?;
        file.rewind()?;
        let stream = match magic.as_slice() {
            [0x1f, 0x8b, ..] => packed(MultiGzDecoder::new(buffered(file))),
            [b'B', b'Z', b'h', ..] => packed(MultiBzDecoder::new(buffered(file))),
            [0xfd, b'7', b'z', b'X', b'Z', 0] => packed(XzReader::new(buffered(file), true)),
            _ => Stream::Plain(file),
        };
        Ok(Self {
            path: path.to_owned(),
            stream,
            buffer: Vec::new(),
            start: 0,
            end: 0,
            position: 0,
        })
    }

    /// Whether going to any byte is cheap: the file is not compressed.
    pub fn is_plain(&self) -> bool {
        matches!(self.stream, Stream::Plain(_))
    }

    /// Where the next line starts, in bytes of text.
    pub fn position(&self) -> u64 {
        self.position
    }

    /// Goes to a byte of the text.
    pub fn seek(&mut self, position: u64) -> io::Result<()> {
        if position < self.position {
            match &mut self.stream {
                Stream::Plain(file) => {
                    file.seek(SeekFrom::Start(position))?;
                    (self.start, self.end, self.position) = (0, 0, position);
                }
                Stream::Packed(_) => *self = Self::open(&self.path)?,
            }
        }
        loop {
            let ahead = position - self.position;
            let held = (self.end - self.start) as u64;
            if ahead <= held {
                self.consume(ahead as usize);
                return Ok(());
            }
            if let Stream::Plain(file) = &mut self.stream {
                file.seek(SeekFrom::Start(position))?;
                (self.start, self.end, self.position) = (0, 0, position);
                return Ok(());
            }
            self.consume(held as usize);
            if self.fill()? == 0 {
                return Err(io::ErrorKind::UnexpectedEof.into());
            }
        }
    }

    /// Reads the next line with its line break into `line`, replacing it. Returns whether a whole line was there: the end
    /// of a file that was cut off has no line break.
    pub fn read_line(&mut self, line: &mut Vec<u8>) -> io::Result<bool> {
        line.clear();
        loop {
            let held = &self.buffer[self.start..self.end];
            let end = memchr(b'\n', held);
            let used = end.map_or(held.len(), |end| end + 1);
            line.extend_from_slice(&held[..used]);
            self.consume(used);
            if end.is_some() {
                return Ok(true);
            }
            if self.fill()? == 0 {
                return Ok(false);
            }
        }
    }

    /// Whole lines from the next one on, as many as are at hand; empty where no whole line is left. [`TextFile::consume`]
    /// says how much of them is done with.
    pub fn whole_lines(&mut self) -> io::Result<&[u8]> {
        loop {
            if let Some(last) = memrchr(b'\n', &self.buffer[self.start..self.end]) {
                return Ok(&self.buffer[self.start..=self.start + last]);
            }
            if self.fill()? == 0 {
                return Ok(&[]);
            }
        }
    }

    /// Goes on by `count` bytes of those at hand.
    pub fn consume(&mut self, count: usize) {
        self.start += count;
        self.position += count as u64;
    }

    /// Skips the next `count` lines. Returns whether all of them were there, whole.
    pub fn skip_lines(&mut self, count: usize) -> io::Result<bool> {
        let mut left = count;
        while left > 0 {
            let lines = self.whole_lines()?;
            let mut used = 0;
            for end in memchr_iter(b'\n', lines).take(left) {
                left -= 1;
                used = end + 1;
            }
            if used == 0 {
                return Ok(false);
            }
            self.consume(used);
        }
        Ok(true)
    }

    /// Goes to the next line that starts with `word`, from the next one on. Returns whether there is one; the place is
    /// otherwise the last line.
    pub fn find_line(&mut self, word: &[u8]) -> io::Result<bool> {
        let within: Vec<u8> = [b"\n", word].concat();
        let finder = memmem::Finder::new(&within);
        loop {
            let lines = self.whole_lines()?;
            if lines.is_empty() {
                return Ok(false);
            }
            if lines.starts_with(word) {
                return Ok(true);
            }
            // The line after these lines is looked at when it is at hand.
            let next = finder.find(lines).map_or(lines.len(), |end| end + 1);
            self.consume(next);
        }
    }

    /// Reads more text behind that at hand, moved to the front of the buffer. Returns how much there was.
    fn fill(&mut self) -> io::Result<usize> {
        self.buffer.copy_within(self.start..self.end, 0);
        (self.start, self.end) = (0, self.end - self.start);
        if self.buffer.len() - self.end < BUFFER_BYTES / 2 {
            self.buffer.resize(self.end + BUFFER_BYTES, 0);
        }
        let room = &mut self.buffer[self.end..];
        let count = loop {
            let count = match &mut self.stream {
                Stream::Plain(file) => file.read(room),
                Stream::Packed(reader) => reader.read(room),
            };
            match count {
                Err(error) if error.kind() == io::ErrorKind::Interrupted => {}
                count => break count?,
            }
        };
        self.end += count;
        Ok(count)
    }
}

fn buffered(file: File) -> BufReader<File> {
    BufReader::with_capacity(BUFFER_BYTES, file)
}

fn packed(reader: impl Read + Send + 'static) -> Stream {
    Stream::Packed(Box::new(reader))
}

/// The first bytes of a file's text, unpacked; as many as there are, up to `count`.
pub(super) fn first_bytes(path: &Path, count: usize) -> io::Result<Vec<u8>> {
    let mut file = TextFile::open(path)?;
    while file.end < count && file.fill()? > 0 {}
    file.buffer.truncate(file.end.min(count));
    Ok(file.buffer)
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
        let ends = text.iter().enumerate().filter(|&(_, &byte)| byte == b'\n');
        let starts: Vec<usize> = ends.map(|(end, _)| end + 1).collect();
        file.seek(0).expect("goes back");
        // Line 96 is the first with 96 letters, and the next one is empty; the long line starts with another letter.
        assert!(file.find_line(&[b'x'; 96]).expect("reads"));
        assert_eq!(file.position() as usize, starts[95]);
        assert!(file.find_line(b"y").expect("reads"));
        assert_eq!(file.position() as usize, starts[1999]);
        assert!(
            !file.find_line(b"cut").expect("reads"),
            "a line without its end is none"
        );
        assert_eq!(file.position() as usize, starts[2000]);
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
