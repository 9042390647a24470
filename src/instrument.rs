//! Instruments: as data, and at work.
//!
//! As data: the role each plays, the definition that says what it can do and what to send it, and the bench file that
//! puts them together. What a definition says is the maker's claim; what is true, a bench measures.

pub mod bench_file;
pub mod definition;
pub mod library;
pub mod scpi;
