//! Diagnostics as text or JSON.

use std::io::{self, IsTerminal, Write};

use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use serde_json::json;

use crate::cli::exit::Exit;
use crate::diag::{Diagnostic, Severity};
use crate::pipeline;
use crate::report::json::diagnostic_json;
use crate::span::Sources;

/// A command that could not do its work.
#[derive(Debug)]
pub(super) struct Failure {
    diagnostics: Vec<Diagnostic>,
    sources: Sources,
    exit: Exit,
}

impl Failure {
    /// Bad input, with its messages.
    pub(super) fn input(diagnostics: Vec<Diagnostic>, sources: &Sources) -> Box<Self> {
        Box::new(Self { diagnostics, sources: sources.clone(), exit: Exit::Input })
    }

    /// An answer that the budget did not reach.
    pub(super) fn unfinished(diagnostic: Diagnostic, sources: &Sources) -> Box<Self> {
        Box::new(Self { diagnostics: vec![diagnostic], sources: sources.clone(), exit: Exit::Unfinished })
    }

    /// Bad usage.
    pub(super) fn usage(diagnostic: Diagnostic) -> Box<Self> {
        Self::input(vec![diagnostic], &Sources::new())
    }

    /// A stage that failed.
    pub(super) fn stage(error: &pipeline::Error, sources: &Sources) -> Box<Self> {
        let exit = match error {
            _ if error.is_fault() => Exit::Fault,
            _ if error.is_unfinished() => Exit::Unfinished,
            _ => Exit::Input,
        };
        let mut diagnostic = error.diagnostic();
        if diagnostic.file.is_none() && diagnostic.labels.is_empty() {
            // What a stage says is about the problem, which was read first.
            diagnostic.file = sources.first_name().map(str::to_owned);
        }
        Box::new(Self { diagnostics: vec![diagnostic], sources: sources.clone(), exit })
    }

    /// Prints the messages: text to standard error, or one JSON object to standard output.
    pub(super) fn print(&self, json: bool) -> Exit {
        if json {
            let all: Vec<_> = self.diagnostics.iter().map(|d| diagnostic_json(d, &self.sources)).collect();
            let first = all.first().cloned().unwrap_or_default();
            let object = json!({ "error": first, "errors": all });
            // If standard output is gone there is nobody to tell.
            let _ = super::print(&format!("{object:#}\n"));
        } else {
            show(&self.diagnostics, &self.sources);
        }
        self.exit
    }
}

/// Messages that are shown at once; a person mends the first ones first.
const MAX_SHOWN: usize = 12;

/// Prints messages to standard error.
pub(super) fn show(diagnostics: &[Diagnostic], sources: &Sources) {
    let mut err = io::stderr().lock();
    let renderer = if coloured() { Renderer::styled() } else { Renderer::plain() };
    // If standard error is gone there is nobody to tell.
    for diagnostic in diagnostics.iter().take(MAX_SHOWN) {
        let _ = writeln!(err, "{}", render(diagnostic, sources, &renderer));
    }
    if diagnostics.len() > MAX_SHOWN {
        let _ = writeln!(err, "and {} more messages; --json gives all of them", diagnostics.len() - MAX_SHOWN);
    }
}

/// Whether standard error wants colour.
fn coloured() -> bool {
    io::stderr().is_terminal() && std::env::var_os("NO_COLOR").is_none_or(|value| value.is_empty())
}

fn render(diagnostic: &Diagnostic, sources: &Sources, renderer: &Renderer) -> String {
    let level = match diagnostic.severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
    };
    let title = match &diagnostic.file {
        Some(file) if diagnostic.labels.is_empty() => format!("{file}: {}", diagnostic.message),
        _ => diagnostic.message.clone(),
    };
    let mut group = level
        .primary_title(&title)
        .id(diagnostic.code.0)
        .elements(Vec::<Snippet<'_, annotate_snippets::Annotation<'_>>>::new());
    for snippet in snippets(diagnostic, sources) {
        group = group.element(snippet);
    }
    let found = diagnostic.found.as_ref().map(|found| format!("found {found}"));
    let expected = diagnostic.expected.as_ref().map(|expected| format!("expected {expected}"));
    for note in found.iter().chain(&expected) {
        group = group.element(Level::NOTE.message(note));
    }
    if let Some(help) = &diagnostic.help {
        group = group.element(Level::HELP.message(help));
    }
    renderer.render(&[group])
}

/// One snippet a file, with every label in that file; the first label is the place of the mistake.
fn snippets<'a>(
    diagnostic: &'a Diagnostic,
    sources: &'a Sources,
) -> Vec<Snippet<'a, annotate_snippets::Annotation<'a>>> {
    let mut files: Vec<_> = diagnostic.labels.iter().map(|label| label.span.file).collect();
    files.dedup();
    let snippet = |&file: &crate::span::FileId| {
        let source = sources.file(file);
        let labels = diagnostic.labels.iter().enumerate().filter(|(_, label)| label.span.file == file);
        let annotations = labels.map(|(at, label)| {
            let kind = if at == 0 { AnnotationKind::Primary } else { AnnotationKind::Context };
            let end = (label.span.hi as usize).min(source.text.len());
            kind.span((label.span.lo as usize).min(end)..end).label(label.text.as_str())
        });
        Snippet::source(&*source.text).line_start(source.first_line).path(&*source.name).annotations(annotations)
    };
    files.iter().map(snippet).collect()
}
