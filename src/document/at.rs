//! A value that knows where it was read.

use super::Span;

/// A value with its key, its text and its place. Displayed as it was written: `supply.floor = "5.20 V"`.
#[derive(Clone, Debug, PartialEq)]
pub struct At<T> {
    /// The value.
    pub value: T,
    /// Its key from the root of the file: `supply.floor`.
    pub key: String,
    /// Its text as it stands in the file, quotes included.
    pub written: String,
    /// Where it stands.
    pub span: Span,
}

impl<T> At<T> {
    /// Another value that was read from the same place.
    pub fn with<U>(&self, value: U) -> At<U> {
        At { value, key: self.key.clone(), written: self.written.clone(), span: self.span.clone() }
    }
}

impl<T> std::fmt::Display for At<T> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} = {}", self.key, self.written)
    }
}
