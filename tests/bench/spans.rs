//! Stretches of time, and how much of one others cover.

use std::time::Duration;

/// From one time to a later one, on one clock.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Span {
    pub(crate) from: Duration,
    pub(crate) until: Duration,
}

impl Span {
    pub(crate) fn length(self) -> Duration {
        self.until.saturating_sub(self.from)
    }
}

/// Spans in order that do not overlap.
pub(crate) struct Union(Vec<Span>);

impl Union {
    pub(crate) fn of(mut spans: Vec<Span>) -> Self {
        spans.sort_by_key(|span| span.from);
        let mut union: Vec<Span> = Vec::with_capacity(spans.len());
        for span in spans {
            match union.last_mut() {
                Some(last) if span.from <= last.until => last.until = last.until.max(span.until),
                _ => union.push(span),
            }
        }
        Self(union)
    }

    /// How much of `span` is covered.
    pub(crate) fn within(&self, span: Span) -> Duration {
        let first = self.0.partition_point(|covered| covered.until <= span.from);
        let covered = self.0.iter().skip(first).take_while(|covered| covered.from < span.until);
        covered
            .map(|covered| {
                Span { from: covered.from.max(span.from), until: covered.until.min(span.until) }.length()
            })
            .sum()
    }
}
