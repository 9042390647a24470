//! Integration tests, a module per theme.
