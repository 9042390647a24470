//! What the bench file and the room say against the makers' claims.

use super::finding::{About, Finding, FindingCode};
use crate::trace::{Claims, Doubt};

/// A finding for each doubt. None stops a judgement: the readings are there, but their accuracy is not assured.
pub(super) fn findings(claims: &Claims) -> impl Iterator<Item = Finding> {
    claims.doubts.iter().map(|doubt| {
        let (code, text) = match doubt {
            Doubt::CalibrationOverdue { instrument, due } => (
                FindingCode::CalibrationOverdue,
                format!(
                    "the calibration of {instrument} was due {due}: its accuracy is no longer assured. Have it \
                     calibrated, then put the next date into the bench file."
                ),
            ),
            Doubt::OutsideTemperature { instrument, room, from, to } => (
                FindingCode::OutsideTemperature,
                format!(
                    "{instrument} is stated for {from} to {to}, the room is at {room}, and its definition does not \
                     say what a degree adds: its accuracy is not assured. Bring the room into that range, or put \
                     the figures per degree from its manual into the definition."
                ),
            ),
        };
        Finding { code, about: About::Bench, text }
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::Celsius;

    #[test]
    fn every_doubt_names_the_instrument_and_what_to_do() {
        let due = "2026-03-31".parse().expect("a date");
        let claims = Claims {
            doubts: vec![
                Doubt::CalibrationOverdue { instrument: "supply".to_owned(), due },
                Doubt::OutsideTemperature {
                    instrument: "current meter".to_owned(),
                    room: Celsius(31.0),
                    from: Celsius(18.0),
                    to: Celsius(28.0),
                },
            ],
            ..Claims::default()
        };
        let found: Vec<Finding> = findings(&claims).collect();
        assert_eq!(
            found.iter().map(|finding| finding.code).collect::<Vec<_>>(),
            [FindingCode::CalibrationOverdue, FindingCode::OutsideTemperature]
        );
        assert!(found[0].text.contains("supply was due 2026-03-31"), "{}", found[0].text);
        assert!(found[1].text.contains("18.00 °C to 28.00 °C, the room is at 31.00 °C"), "{}", found[1].text);
    }
}
