//! A blown fuse in the ammeter: nothing flows, and the meter shows nothing, exactly.

use super::mean::Mean;
use crate::trace::Accuracy;

/// A last digit as small a share of the range as this shows the meter's own noise: five and a half digits and more
/// (common practice). A coarser meter may well show the same number each time.
const SHOWS_NOISE: f64 = 1e-5;

/// Fewer equal readings may be chance.
const ENOUGH: usize = 5;

/// What to think of readings that do not move at all on a range fine enough to show noise.
pub(super) fn suspicion(mean: &Mean, claim: Option<Accuracy>, full_scale: f64) -> Option<String> {
    let shows_noise =
        claim.is_some_and(|claim| claim.resolution > 0.0 && claim.resolution <= SHOWS_NOISE * full_scale);
    if mean.count < ENOUGH || !mean.still || !shows_noise {
        return None;
    }
    let nothing = mean.value == 0.0;
    Some(if nothing {
        format!(
            "{} readings of exactly 0 without any noise, on a range that shows it: is the ammeter's fuse blown, or its \
             lead on the wrong jack? Measure a resistor, and replace the fuse only by the marked type",
            mean.count
        )
    } else {
        format!(
            "{} readings without any noise, on a range that shows it: is the ammeter's display held?",
            mean.count
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    const FINE: Accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 1e-10 };

    fn told(readings: &[f64], claim: Accuracy) -> Option<String> {
        suspicion(&Mean::of(readings).expect("some"), Some(claim), 1e-4)
    }

    #[test]
    fn exact_zeros_on_a_fine_range_are_a_blown_fuse() {
        assert!(told(&[0.0; 20], FINE).expect("suspicious").contains("fuse blown"));
        assert!(told(&[3e-9; 20], FINE).expect("suspicious").contains("display held"));
    }

    #[test]
    fn noise_a_coarse_range_or_few_readings_are_no_ground() {
        let mut noisy = [0.0; 20];
        noisy[7] = 1e-10;
        assert_eq!(told(&noisy, FINE), None);
        assert_eq!(told(&[0.0; 20], Accuracy { resolution: 1e-8, ..FINE }), None);
        assert_eq!(told(&[0.0; 4], FINE), None);
    }
}
