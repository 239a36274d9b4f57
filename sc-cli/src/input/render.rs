//! Faults as text, with the lines of the file they are about.

use super::fault::Fault;
use super::place::Span;
use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use std::fmt;

/// Renders faults with the lines they are about, one block each.
///
/// `colour` asks for terminal colours; without it the text is plain and safe for a file. Ends with a line break
/// unless there is nothing to say.
pub fn render_faults<K: fmt::Display>(
    file_name: &str,
    text: &str,
    faults: &[Fault<K>],
    colour: bool,
) -> String {
    render(&Level::ERROR, file_name, text, faults, colour)
}

/// The same for remarks that do not stop the reading.
pub fn render_warnings<K: fmt::Display>(
    file_name: &str,
    text: &str,
    faults: &[Fault<K>],
    colour: bool,
) -> String {
    render(&Level::WARNING, file_name, text, faults, colour)
}

fn render<K: fmt::Display>(
    level: &Level<'_>,
    file_name: &str,
    text: &str,
    faults: &[Fault<K>],
    colour: bool,
) -> String {
    let renderer = if colour { Renderer::styled() } else { Renderer::plain() };
    let mut out = String::new();
    for fault in faults {
        let title = level.clone().primary_title(fault.kind.to_string());
        let mut group = match fault.span {
            Some(span) => {
                let mut snippet = Snippet::source(text)
                    .path(file_name)
                    .annotation(AnnotationKind::Primary.span(within(text, span)));
                for (span, label) in &fault.related {
                    let mark = AnnotationKind::Context.span(within(text, *span)).label(label);
                    snippet = snippet.annotation(mark);
                }
                title.element(snippet)
            }
            None => title.element(annotate_snippets::Origin::path(file_name)),
        };
        if let Some(hint) = &fault.hint {
            group = group.element(Level::HELP.message(hint));
        }
        out.push_str(&renderer.render(&[group]));
        out.push_str("\n\n");
    }
    if out.ends_with("\n\n") {
        out.pop();
    }
    out
}

/// The span cut to whole characters of the text, so that no fault can take the renderer down.
fn within(text: &str, span: Span) -> std::ops::Range<usize> {
    let boundary = |mut at: usize| {
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let start = boundary(span.start.min(text.len()));
    start..boundary(span.end.clamp(start, text.len())).max(start)
}
