//! The two streams of a command: results on stdout, messages on stderr.

use std::io::{self, IsTerminal, Write};

use crate::report::SummaryStyle;

/// What is known of the streams the program was started with.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Terminal {
    /// How summaries on stdout are to look.
    pub summary: SummaryStyle,
    /// Whether stderr is a terminal.
    pub interactive: bool,
    /// Whether messages on stderr may be coloured.
    pub messages_in_colour: bool,
}

impl Terminal {
    /// Looks at the streams and at `NO_COLOR` and its kin.
    #[must_use]
    pub fn detect() -> Self {
        let interactive = io::stderr().is_terminal();
        let colour = anstream::AutoStream::choice(&io::stdout()) != anstream::ColorChoice::Never;
        let width = io::stdout().is_terminal().then(|| console_width(80));
        Self {
            summary: SummaryStyle { width, colour },
            interactive,
            messages_in_colour: anstream::AutoStream::choice(&io::stderr()) != anstream::ColorChoice::Never,
        }
    }

    /// Prints results. A reader that has gone away (`planish ... | head`) is no error: it has what it wanted.
    ///
    /// # Errors
    /// Where stdout cannot be written for another reason.
    pub fn print(self, text: &str) -> io::Result<()> {
        let mut stdout = anstream::stdout().lock();
        match stdout.write_all(text.as_bytes()).and_then(|()| stdout.flush()) {
            Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(()),
            other => other,
        }
    }
}

/// Prints one message to stderr; where even that fails there is nobody left to tell.
pub(super) fn tell(kind: Message, message: &str) {
    let (word, colour) = match kind {
        Message::Error => ("error", anstyle::AnsiColor::Red),
        Message::Warning => ("warning", anstyle::AnsiColor::Yellow),
        Message::Note => ("note", anstyle::AnsiColor::Cyan),
    };
    let style = colour.on_default().bold();
    let _ = writeln!(anstream::stderr().lock(), "{style}{word}{style:#}: {message}");
}

/// Kinds of message.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Message {
    Error,
    Warning,
    Note,
}

/// Columns of the terminal, or the customary number where the system does not say.
fn console_width(customary: u16) -> u16 {
    let table = comfy_table::Table::new();
    table.width().unwrap_or(customary)
}
