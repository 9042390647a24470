//! How long a battery lasts in store with the switch open: the charge left at the cut-off over what drains it.

use super::finding::{About, Finding, FindingCode};
use super::quantity::{Contribution, Quantity, Term};
use crate::profile::{QuantityName, Storage};
use crate::units::{Amps, Unit, prefixed};

/// Remaining charge over off current and self-discharge, from the off current at the stored battery's voltage.
///
/// Charge and self-discharge are the profile's, with its tolerance taken as the limits of a rectangle.
pub(super) fn storage_time(off_current: &Quantity, storage: &Storage) -> Quantity {
    let drain = total(off_current, storage);
    let time = storage.remaining / drain;
    let term = Term { factor: -(time / drain.0), title: "off current", quantity: off_current };
    let mut parts = Quantity::sum(QuantityName::StorageTime, &[term]).contributions;
    if storage.tolerance > 0.0 {
        let share = storage.self_discharge / drain;
        parts.push(Contribution::rectangular("remaining capacity, as stated", storage.tolerance * time));
        parts.push(Contribution::rectangular("self-discharge, as stated", storage.tolerance * share * time));
    }
    Quantity::new(QuantityName::StorageTime, time, parts)
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

    #[test]
    fn a_stated_tolerance_counts_as_a_rectangle() {
        let stated = Storage { tolerance: 0.3, ..storage(0.0) };
        let time = storage_time(&Quantity::new(QuantityName::OffCurrent, 3.85e-6, Vec::new()), &stated);
        assert!((time.standard_uncertainty / time.value - 0.3 / 3.0_f64.sqrt()).abs() < 1e-12);
    }
}
