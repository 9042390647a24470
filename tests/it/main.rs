//! Integration tests, a module per theme.

mod sim;
