//! What a study found: for the design engineer, and for programs.

mod csv;
mod json;
mod text;

pub use csv::study_csv;
pub use json::study_json;
pub use text::study_text;

use crate::record::StudyHeading;
use crate::study::Estimates;
use crate::units::{Unit, prefixed};

/// What is to be said of a study.
#[derive(Clone, Copy, Debug)]
pub struct StudySheet<'r> {
    /// Its name.
    pub name: &'r str,
    /// What was ordered.
    pub heading: &'r StudyHeading,
    /// What was found.
    pub estimates: &'r Estimates,
}

/// A rate of the ramp for people, V/s.
pub fn rate_text(rate: Option<f64>) -> String {
    rate.map_or("at rest".to_owned(), |rate| format!("{}/s", prefixed(rate, Unit::Volt)))
}
