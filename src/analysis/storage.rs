//! How long a battery lasts in store with the switch open: the charge left at the cut-off over what drains it.

use super::contribution::Role;
use super::finding::{About, Finding, FindingCode};
use super::quantity::{Contribution, Quantity, Term};
use crate::profile::{QuantityName, Storage};
use crate::units::{Amps, Unit, prefixed};

/// Remaining charge over off current and self-discharge, from the off current at the stored battery's voltage.
///
/// Charge and self-discharge are the profile's, with its tolerance taken as the limits of a rectangle. The value is the
/// plain quotient, as anybody would check it; U reaches as far to either side as it must to cover the truth, though that
/// lies farther above than below.
pub(super) fn storage_time(off_current: &Quantity, storage: &Storage) -> Quantity {
    let drain = total(off_current, storage);
    let time = storage.remaining / drain;
    let term = Term { factor: -(time / drain.0), title: "off current", quantity: off_current };
    let of_board = Quantity::sum(QuantityName::StorageTime, &[term]).contributions;
    let mut parts: Vec<Contribution> =
        of_board.into_iter().map(|line| line.entering(Role::Divisor)).collect();
    if storage.tolerance > 0.0 {
        let share = storage.self_discharge / drain;
        parts.push(Contribution::rectangular("remaining capacity, as stated", storage.tolerance * time));
        let self_discharge = storage.tolerance * share * time;
        parts.push(
            Contribution::rectangular("self-discharge, as stated", self_discharge).entering(Role::Divisor),
        );
    }
    Quantity::quotient(QuantityName::StorageTime, time, parts)
}

/// What drains the battery, and which of the two more.
pub(super) fn drains(time: &Quantity, off_current: &Quantity, storage: &Storage) -> Finding {
    let (board, cells) = (Amps(off_current.value), storage.self_discharge);
    let lasts = prefixed(time.value, Unit::Second);
    let more = if cells <= Amps::ZERO {
        "the board's own; the profile tells no self-discharge".to_owned()
    } else {
        let (word, larger, smaller) =
            if board > cells { ("the board's own", board, cells) } else { ("self-discharge", cells, board) };
        format!("self-discharge {cells}, so that {word} is the larger drain by {:.1} to 1", larger / smaller)
    };
    Finding {
        code: FindingCode::StorageDrain,
        about: About::Board,
        text: format!("in store {} last {lasts}: off current {board}, {more}.", storage.remaining),
    }
}

fn total(off_current: &Quantity, storage: &Storage) -> Amps {
    Amps(off_current.value) + storage.self_discharge
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::monte_carlo::{Draws, propagate};
    use crate::units::{Coulombs, YEAR};

    fn off(amps: f64) -> Quantity {
        Quantity::new(QuantityName::OffCurrent, amps, vec![Contribution::normal("ammeter", 0.01 * amps)])
    }

    /// 200 mAh, without or with 2 % a month of 2 Ah.
    fn storage(self_discharge: f64) -> Storage {
        Storage { remaining: Coulombs(720.0), self_discharge: Amps(self_discharge), tolerance: 0.0, at: None }
    }

    /// Worked by hand: 200 mAh over 3.85 uA are 51 948 h, 5.9 years; over 29 uA 0.79 and over 44 uA 0.52 years.
    #[test]
    fn the_time_is_charge_over_current() {
        for (amps, years) in [(3.85e-6, 5.926), (29e-6, 0.7867), (44e-6, 0.5185)] {
            let time = storage_time(&off(amps), &storage(0.0));
            assert!((time.value / YEAR / years - 1.0).abs() < 1e-3, "{}", time.value / YEAR);
            assert!((time.standard_uncertainty / time.value - 0.01).abs() < 1e-12, "one per cent of current");
        }
    }

    /// 2 % a month of 2 Ah are 54.8 uA, which leave little to the board: 200 mAh / 58.6 uA = 3412 h, by hand.
    #[test]
    fn self_discharge_dominates_a_good_board() {
        let drained = storage(54.757e-6);
        let time = storage_time(&off(3.85e-6), &drained);
        assert!((time.value / 3600.0 - 3412.5).abs() < 1.0, "{}", time.value / 3600.0);
        // One per cent of the board's current is 0.066 % of all.
        assert!((time.standard_uncertainty / time.value - 0.01 * 3.85 / 58.607).abs() < 1e-6);
        let text = drains(&time, &off(3.85e-6), &drained).text;
        assert!(text.contains("self-discharge is the larger drain by 14.2 to 1"), "{text}");
        let text = drains(&time, &off(200e-6), &drained).text;
        assert!(text.contains("the board's own is the larger drain"), "{text}");
    }

    /// 200 mAh and 2 % a month of 2 Ah, both to 30 %: against trials of the quotient itself (JCGM 101:2008, 7).
    #[test]
    fn the_expanded_uncertainty_covers_trials_of_the_quotient() {
        const SEED: u64 = 5;
        for amps in [3.85e-6, 54.757e-6, 500e-6] {
            let drained = Storage { tolerance: 0.3, ..storage(54.757e-6) };
            let time = storage_time(&off(amps), &drained);
            let lasts = |draws: &mut Draws| {
                let charge = 720.0 * (1.0 + 0.3 * draws.rectangular());
                let board = amps * (1.0 + 0.01 * draws.normal());
                charge / (board + 54.757e-6 * (1.0 + 0.3 * draws.rectangular()))
            };
            let mean = |of: &dyn Fn(f64) -> f64| {
                propagate(SEED, 100_000, |draws| of(lasts(draws))).expect("an outcome").sample
            };
            let u = mean(&|lasts| lasts).standard_deviation.expect("many values");
            assert!((time.standard_uncertainty / u - 1.0).abs() < 0.012, "seed {SEED}: {amps} A, {u} s");
            let expanded = time.expanded_uncertainty(0.95);
            let inside = mean(&|lasts| f64::from(u8::from((lasts - time.value).abs() <= expanded))).mean;
            // Four standard deviations of a share of 100 000.
            assert!((inside - 0.95).abs() < 2.8e-3, "seed {SEED}: {amps} A, {inside} inside");
        }
    }

    #[test]
    fn a_stated_tolerance_counts_as_a_rectangle() {
        let stated = Storage { tolerance: 0.3, ..storage(0.0) };
        let time = storage_time(&Quantity::new(QuantityName::OffCurrent, 3.85e-6, Vec::new()), &stated);
        assert!((time.standard_uncertainty / time.value - 0.3 / 3.0_f64.sqrt()).abs() < 1e-12);
    }
}
