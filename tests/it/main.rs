//! Integration tests, a module per theme.

mod sim;
#[cfg(unix)]
mod simulated_bench;
