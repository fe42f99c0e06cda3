//! The head of a frame in a text dump: all that stands before its atoms.

use std::io;

use super::dump_box::DumpBox;
use super::text_file::TextFile;

/// What the index keeps of a frame.
pub(super) struct FrameHead {
    /// Where the frame starts, in bytes of text.
    pub start: u64,
    pub atoms: usize,
    pub step: u64,
    /// `ITEM: TIME`, in the engine's unit.
    pub time: Option<f64>,
}

/// The parts of a frame before its atoms.
pub(super) struct Header {
    pub head: FrameHead,
    pub units: Option<String>,
    pub bounds: DumpBox,
    pub columns: String,
}

/// Why a header could not be read.
pub(super) enum HeaderError {
    /// The file ends here: between two frames (`true`), or within this one.
    End(bool),
    Io(io::Error),
    Content(String),
}

impl From<io::Error> for HeaderError {
    fn from(error: io::Error) -> Self {
        Self::Io(error)
    }
}

/// Reads the parts of the next frame before its atoms; `length` is one length unit in A.
pub(super) fn read_header(text: &mut TextFile, length: f64) -> Result<Header, HeaderError> {
    let start = text.position();
    let mut first = next_line(text, true)?;
    // A file that was joined by hand may have empty lines between its frames.
    while first.is_empty() {
        first = next_line(text, true)?;
    }
    let mut units = None;
    let mut time = None;
    while first != "ITEM: TIMESTEP" {
        let value = next_line(text, false)?;
        match first.as_str() {
            "ITEM: UNITS" => units = Some(value),
            "ITEM: TIME" => time = Some(number(&value)?),
            _ => return Err(expected("ITEM: TIMESTEP", &first)),
        }
        first = next_line(text, false)?;
    }
    let step = whole_number(&next_line(text, false)?)?;
    expect_line(text, "ITEM: NUMBER OF ATOMS")?;
    let atoms = whole_number(&next_line(text, false)?)? as usize;
    let line = next_line(text, false)?;
    let kind = line
        .strip_prefix("ITEM: BOX BOUNDS")
        .ok_or_else(|| expected("ITEM: BOX BOUNDS", &line))?
        .to_owned();
    let mut rows = [const { String::new() }; 3];
    for row in &mut rows {
        *row = next_line(text, false)?;
    }
    let bounds = DumpBox::parse(&kind, &rows, length).map_err(HeaderError::Content)?;
    let line = next_line(text, false)?;
    let columns = line
        .strip_prefix("ITEM: ATOMS")
        .ok_or_else(|| expected("ITEM: ATOMS", &line))?;
    let head = FrameHead {
        start,
        atoms,
        step,
        time,
    };
    Ok(Header {
        head,
        units,
        bounds,
        columns: columns.to_owned(),
    })
}

fn expect_line(text: &mut TextFile, wanted: &str) -> Result<(), HeaderError> {
    let line = next_line(text, false)?;
    if line == wanted {
        Ok(())
    } else {
        Err(expected(wanted, &line))
    }
}

/// The next line, trimmed. `between` says that a frame has not begun yet.
fn next_line(text: &mut TextFile, between: bool) -> Result<String, HeaderError> {
    let mut bytes = Vec::new();
    let whole = text.read_line(&mut bytes)?;
    if !whole {
        return Err(HeaderError::End(between && bytes.is_empty()));
    }
    let line = std::str::from_utf8(&bytes).map_err(|error| HeaderError::Content(error.to_string()))?;
    Ok(line.trim().to_owned())
}

fn expected(wanted: &str, found: &str) -> HeaderError {
    HeaderError::Content(format!("found \"{found}\" where \"{wanted}\" was expected"))
}

fn number(text: &str) -> Result<f64, HeaderError> {
    text.parse()
        .map_err(|_| HeaderError::Content(format!("\"{text}\" is not a number")))
}

fn whole_number(text: &str) -> Result<u64, HeaderError> {
    text.parse()
        .map_err(|_| HeaderError::Content(format!("\"{text}\" is not a whole number")))
}
