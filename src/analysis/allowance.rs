//! The allowance for noise: puts both thresholds of a run where they lie in the light of noise at the detector.

use super::cause::Cause;
use super::contribution::Contribution;
use super::noise::{Evidence, Located, Noise};
use super::threshold::{BRACKET, CONTRADICTION, SCATTER, Search, Threshold};
use crate::profile::Profile;
use crate::units::Unit;

/// Share of a bracket's uncertainty below which noise is not believed to tell where in it the threshold lies: a board that
/// goes back and forth at one set-point lies near it, but how near rests on the law of the noise alone.
const BELIEVED: f64 = 0.5;

impl Search {
    /// Takes into account that noise at the detector moves both thresholds inwards; returns what was found of it.
    pub(super) fn allow_for_noise(profile: &Profile, searches: [&mut Self; 2]) -> Option<Noise> {
        let mut thresholds: Vec<&mut Threshold> = searches
            .into_iter()
            .filter_map(|search| search.threshold.as_mut())
            .filter(|threshold| threshold.evidence.is_some())
            .collect();
        let evidence: Vec<&Evidence> =
            thresholds.iter().filter_map(|threshold| threshold.evidence.as_ref()).collect();
        let volts = thresholds.first()?.value;
        let noise = Noise::find(&evidence, profile.detector_noise(volts), volts)?;
        for (threshold, located) in thresholds.iter_mut().zip(&noise.located) {
            threshold.move_to(located);
        }
        Some(noise)
    }
}

impl Threshold {
    /// Puts the threshold where it lies in the light of noise. The bracket stays the part that is a rectangle; what passes
    /// contradict each other in is noise.
    fn move_to(&mut self, located: &Located) {
        self.value = self.direction.volts(located.along);
        let is_noise = |line: &Contribution| matches!(line.source.as_str(), SCATTER | CONTRADICTION);
        self.contributions.retain(|line| !is_noise(line));
        let bracket = self.contributions.iter_mut().find(|line| line.source == BRACKET);
        let width = bracket.as_ref().map_or(0.0, |line| line.standard_uncertainty);
        let located_own = located.own.max(width * BELIEVED);
        let narrow = width.min(located_own);
        if let Some(bracket) = bracket {
            *bracket = Contribution::rectangular(BRACKET, narrow * 3.0_f64.sqrt())
                .through(1.0, Unit::Volt)
                .estimated(self.value.0);
        }
        let own = (located_own.powi(2) - narrow.powi(2)).max(0.0).sqrt();
        let outwards = self.direction.volts(1.0).0;
        self.contributions.push(Contribution::normal("noise at the detector", own));
        self.contributions.push(
            Contribution::normal("level of that noise", located.level)
                .through(outwards, Unit::Volt)
                .due_to(Cause::DetectorNoise),
        );
    }
}
