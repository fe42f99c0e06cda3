//! What is wrong with a pipeline file, and where: collected, never printed.

use std::fmt;
use std::ops::Range;
use std::path::{Path, PathBuf};

use annotate_snippets::{Annotation, AnnotationKind, Group, Level, Renderer, Snippet};

/// Whether a diagnostic stops the job.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Severity {
    /// The file cannot be used.
    Error,
    /// The file can be used, and the user should look at this.
    Warning,
}

/// A second place that explains the first, such as the earlier of two equal names.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Related {
    /// Bytes of the file.
    pub span: Range<usize>,
    /// What stands there.
    pub label: String,
}

/// One problem of a pipeline file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Whether it stops the job.
    pub severity: Severity,
    /// What is wrong: what was found.
    pub message: String,
    /// Bytes of the file it is about; `None` where it is about the file as a whole.
    pub span: Option<Range<usize>>,
    /// What was expected at the place.
    pub label: String,
    /// A second place.
    pub related: Option<Related>,
    /// What to do.
    pub help: Option<String>,
}

impl Diagnostic {
    /// A problem that stops the job.
    #[must_use]
    pub fn error(message: impl Into<String>) -> Self {
        Self {
            severity: Severity::Error,
            message: message.into(),
            span: None,
            label: String::new(),
            related: None,
            help: None,
        }
    }

    /// A problem that does not stop the job.
    #[must_use]
    pub fn warning(message: impl Into<String>) -> Self {
        Self {
            severity: Severity::Warning,
            ..Self::error(message)
        }
    }

    /// Sets the place and what was expected there.
    #[must_use]
    pub fn at(mut self, span: Range<usize>, label: impl Into<String>) -> Self {
        self.span = Some(span);
        self.label = label.into();
        self
    }

    /// Adds a second place.
    #[must_use]
    pub fn related(mut self, span: Range<usize>, label: impl Into<String>) -> Self {
        self.related = Some(Related {
            span,
            label: label.into(),
        });
        self
    }

    /// Says what to do.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }
}

/// All problems of one pipeline file, with its text to show them in.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostics {
    path: PathBuf,
    source: String,
    items: Vec<Diagnostic>,
}

impl Diagnostics {
    /// No problem yet, for the file `path` (as the user named it) with the text `source`.
    #[must_use]
    pub fn new(path: &Path, source: &str) -> Self {
        Self {
            path: path.to_owned(),
            source: source.to_owned(),
            items: Vec::new(),
        }
    }

    /// Adds a problem.
    pub fn push(&mut self, diagnostic: Diagnostic) {
        self.items.push(diagnostic);
    }

    /// Whether any problem stops the job.
    #[must_use]
    pub fn has_errors(&self) -> bool {
        self.items.iter().any(|item| item.severity == Severity::Error)
    }

    /// Whether there is no problem at all.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.items.is_empty()
    }

    /// The problems in the order of their places in the file, those about the whole file first.
    #[must_use]
    pub fn sorted(&self) -> Vec<&Diagnostic> {
        let mut sorted: Vec<&Diagnostic> = self.items.iter().collect();
        sorted.sort_by_key(|item| item.span.as_ref().map(|span| (span.start, span.end)));
        sorted
    }

    /// Line and column, from 1, of a byte of the file; columns count characters.
    #[must_use]
    pub fn line_and_column(&self, byte: usize) -> (usize, usize) {
        let before = &self.source[..self.source.floor_char_boundary(byte)];
        let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
        (
            before.matches('\n').count() + 1,
            before[line_start..].chars().count() + 1,
        )
    }

    /// Every problem with file, line and column, the line itself with a pointer under the place, and what to do.
    /// Coloured for a terminal, or plain.
    #[must_use]
    pub fn render(&self, coloured: bool) -> String {
        let renderer = if coloured {
            Renderer::styled()
        } else {
            Renderer::plain()
        };
        let path = self.path.display().to_string();
        let rendered: Vec<String> = self
            .sorted()
            .into_iter()
            .map(|item| renderer.render(&[self.group(item, &path)]))
            .collect();
        rendered.join("\n\n")
    }

    fn group<'a>(&'a self, item: &'a Diagnostic, path: &'a str) -> Group<'a> {
        let level = match item.severity {
            Severity::Error => Level::ERROR,
            Severity::Warning => Level::WARNING,
        };
        let mut group = match &item.span {
            None => level
                .primary_title(format!("{path}: {}", item.message))
                .elements(Option::<Snippet<'_, Annotation<'_>>>::None),
            Some(span) => {
                let place = AnnotationKind::Primary.span(self.within(span));
                let place = if item.label.is_empty() {
                    place
                } else {
                    place.label(&item.label)
                };
                let related = item.related.as_ref().map(|related| {
                    AnnotationKind::Context
                        .span(self.within(&related.span))
                        .label(&related.label)
                });
                level.primary_title(&item.message).element(
                    Snippet::source(&self.source)
                        .path(path)
                        .annotation(place)
                        .annotations(related),
                )
            }
        };
        if let Some(help) = &item.help {
            group = group.element(Level::HELP.message(help));
        }
        group
    }

    /// The span cut to the text, on character boundaries.
    fn within(&self, span: &Range<usize>) -> Range<usize> {
        let start = self.source.floor_char_boundary(span.start);
        let end = self.source.ceil_char_boundary(span.end);
        start..end.max(start)
    }
}

/// As [`Diagnostics::render`], plain.
impl fmt::Display for Diagnostics {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        formatter.write_str(&self.render(false))
    }
}

impl std::error::Error for Diagnostics {}
