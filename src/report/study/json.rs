//! A study as one JSON object.

use super::StudySheet;
use crate::study::{Estimates, Plan};
use serde::Serialize;

/// The layout of the object.
const SCHEMA: u32 = 1;

#[derive(Serialize)]
struct Object<'r> {
    schema: u32,
    study: &'r str,
    board: &'r str,
    revision: &'r str,
    profile_sha256: &'r str,
    #[serde(skip_serializing_if = "Option::is_none")]
    simulated: Option<&'r str>,
    plan: &'r Plan,
    #[serde(flatten)]
    estimates: &'r Estimates,
}

/// What was ordered and what was found, on one line, in SI units; what is not known is `null` or left out.
///
/// # Errors
/// A value that has no text form: a fault of this program.
pub fn study_json(sheet: &StudySheet<'_>) -> serde_json::Result<String> {
    let heading = sheet.heading;
    serde_json::to_string(&Object {
        schema: SCHEMA,
        study: sheet.name,
        board: &heading.board,
        revision: &heading.revision,
        profile_sha256: &heading.profile_sha256,
        simulated: heading.simulated.as_deref(),
        plan: &heading.plan,
        estimates: sheet.estimates,
    })
}
