//! What a run says: at a glance for the technician, in full for the engineer, as JSON and CSV for programs.
//!
//! Everything here turns values into text. Nothing is measured, judged or printed.

mod banner;
mod bench_page;
mod budget;
mod cautions;
mod columns;
mod csv;
mod full;
mod json;
mod limits;
mod list;
mod next;
mod paint;
mod quantities;
mod sheet;
mod study;
mod text;
mod words;

pub use bench_page::{bench_json, bench_text};
pub use budget::budgets;
pub use cautions::CAUTIONS;
pub use csv::runs_csv;
pub use full::full;
pub use json::{json, run_json, runs_json};
pub use limits::{LimitsSheet, limits_csv, limits_json, limits_text};
pub use list::{Filter, list};
pub use next::{OUTPUT_MAY_BE_ON, next_action};
pub use paint::Paint;
pub use sheet::Sheet;
pub use study::{StudySheet, rate_text, study_csv, study_json, study_text};
pub use text::text;
