//! What is wrong in a file, and how it is shown: one line for a program, the marked source for a person.

use super::Span;
use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};

/// One thing that is wrong, and where.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Problem {
    /// Bytes of the text it concerns.
    pub span: Span,
    /// What was read and what was wanted.
    pub message: String,
}

impl Problem {
    /// A problem with the text at `span`.
    pub fn new(span: Span, message: String) -> Self {
        Self { span, message }
    }
}

/// All problems of one file, in the order of the text. Never empty.
#[derive(Debug)]
pub struct Problems {
    name: String,
    text: String,
    list: Vec<Problem>,
}

impl Problems {
    pub(super) fn new(name: &str, text: &str, list: Vec<Problem>) -> Self {
        Self { name: name.to_owned(), text: text.to_owned(), list }
    }

    /// One line a problem: `file:line:column: message`.
    pub fn lines(&self) -> impl Iterator<Item = String> + '_ {
        self.list.iter().map(|problem| {
            let (line, column) = self.place(problem.span.start);
            format!("{}:{line}:{column}: {}", self.name, problem.message)
        })
    }

    /// Line and column, counted from 1; columns count characters.
    fn place(&self, byte: usize) -> (usize, usize) {
        let before = self.text.get(..byte).unwrap_or(&self.text);
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        (before.matches('\n').count() + 1, before[line_start..].chars().count() + 1)
    }
}

impl std::error::Error for Problems {}

impl std::fmt::Display for Problems {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let renderer = Renderer::plain();
        for (index, problem) in self.list.iter().enumerate() {
            if index > 0 {
                writeln!(f, "\n")?;
            }
            let span = problem.span.start.min(self.text.len())..problem.span.end.min(self.text.len());
            let snippet =
                Snippet::source(&self.text).path(&self.name).annotation(AnnotationKind::Primary.span(span));
            let report = &[Level::ERROR.primary_title(&problem.message).element(snippet)];
            write!(f, "{}", renderer.render(report))?;
        }
        Ok(())
    }
}
