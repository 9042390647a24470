//! Whether the board was as warm as its profile wants for a test.

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;

/// Thresholds drift by some hundred ppm a kelvin, and the leakage of semiconductors doubles every ten or so: limits
/// hold at the temperatures of the profile. A thermometer in the fixture counts before one in the room.
pub(super) fn temperature(course: &Course<'_>) -> Option<Finding> {
    let wanted = course.profile.parts?.environment.test;
    let claims = &course.trace.claims;
    let (place, at) = match (claims.fixture, claims.room) {
        (Some(fixture), _) => ("the fixture", fixture),
        (None, room) => ("the room", room?),
    };
    let fits = at >= wanted.min && at <= wanted.max;
    (!fits).then(|| Finding {
        code: FindingCode::Temperature,
        about: About::Bench,
        text: format!(
            "{place} is at {at}, the profile wants {} to {} for a test: thresholds drift and leakage grows with temperature, so \
             the limits do not hold. Let the board come to that temperature, then test it again.",
            wanted.min, wanted.max
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::units::Celsius;

    fn text(fixture: Option<f64>, room: Option<f64>) -> Option<String> {
        let mut trace = staircase(&[on(7.6)]);
        (trace.claims.fixture, trace.claims.room) = (fixture.map(Celsius), room.map(Celsius));
        let profile = profile();
        temperature(&Course::new(&trace, &profile)).map(|finding| finding.text)
    }

    #[test]
    fn outside_what_the_profile_wants_is_told_with_the_place() {
        assert_eq!(text(None, None), None);
        assert_eq!(text(None, Some(28.0)), None);
        assert_eq!(text(Some(23.0), Some(31.0)), None, "the board itself is right");
        let hot = text(Some(60.0), Some(23.0)).expect("too hot");
        assert!(
            hot.starts_with("the fixture is at 60.00 °C, the profile wants 18.00 °C to 28.00 °C"),
            "{hot}"
        );
        let cold = text(None, Some(17.9)).expect("too cold");
        assert!(cold.starts_with("the room is at 17.90 °C"), "{cold}");
        assert!(text(Some(f64::NAN), None).is_some(), "no number is no temperature that fits");
    }
}
