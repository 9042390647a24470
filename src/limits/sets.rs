//! The three limit sets of one quantity, and what lies between design and test.

use super::window::Window;

/// Data sheet, design and test limits of one quantity, in volts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LimitSets {
    /// What the detector's data sheet allows, through the nominal divider.
    pub data_sheet: Window,
    /// What the board may do anywhere at any time of its life.
    pub design: Window,
    /// Most a board moves down after its test, by temperature and age.
    pub share_down: f64,
    /// Most it moves up.
    pub share_up: f64,
    /// Design limits less that share: what the true value must keep at the test. `None` where nothing is left.
    pub at_test: Option<Window>,
    /// Kept from either end for what the bench does not know.
    pub guard_band: f64,
    /// What a board must measure: `at_test` less the guard band. `None` where nothing is left.
    pub test: Option<Window>,
}

impl LimitSets {
    /// Takes the share of the environment and the guard band off the design limits.
    ///
    /// `shift` is how far a board moves between test and work. Down-going boards must stay above the lower design
    /// limit afterwards, so the lower limit rises by the way down, and the upper one falls by the way up.
    pub fn new(data_sheet: Window, design: Window, shift: Window, guard_band: f64) -> Self {
        let (share_down, share_up) = ((-shift.min).max(0.0), shift.max.max(0.0));
        let at_test = design.narrowed(share_down, share_up);
        let test = at_test.and_then(|window| window.narrowed(guard_band, guard_band));
        Self { data_sheet, design, share_down, share_up, at_test, guard_band, test }
    }

    /// The test limits in plain decimals, rounded inward: whole millivolts, tenths where the window is small.
    pub fn written(&self) -> Option<Window> {
        self.written_with(self.guard_band)
    }

    /// The same with another guard band.
    pub fn written_with(&self, guard_band: f64) -> Option<Window> {
        let test = self.at_test?.narrowed(guard_band, guard_band)?;
        let steps = if test.width() < COARSE { 1e4 } else { 1e3 };
        // Dust of binary fractions must not cost a whole step.
        let rounded = Window {
            min: (test.min * steps - DUST).ceil() / steps,
            max: (test.max * steps + DUST).floor() / steps,
        };
        (rounded.min < rounded.max).then_some(rounded)
    }
}

/// A window below this, in volts, is written in tenths of millivolts.
const COARSE: f64 = 0.05;

/// Share of a rounding step that counts as nothing.
const DUST: f64 = 1e-6;

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// By hand: 5.80 V + 15 mV + 2 mV and 6.20 V - 20 mV - 2 mV.
    #[test]
    fn share_and_guard_band_come_off_each_end() {
        let around = Window { min: 5.9, max: 6.1 };
        let sets =
            LimitSets::new(around, Window { min: 5.8, max: 6.2 }, Window { min: -0.015, max: 0.02 }, 0.002);
        assert_eq!(sets.written(), Some(Window { min: 5.817, max: 6.178 }));
    }

    #[test]
    fn where_nothing_is_left_there_is_no_test_limit() {
        let window = Window { min: 5.9, max: 6.1 };
        let sets = LimitSets::new(window, window, Window { min: -0.1, max: 0.1 }, 0.0);
        assert_eq!((sets.at_test, sets.test, sets.written()), (None, None, None));
    }

    proptest! {
        #[test]
        fn a_test_limit_is_never_wider_than_the_design_limit(
            low in -5.0..5.0, width in 0.0..2.0, down in -1.0..1.0, up in -1.0..1.0, guard in 0.0..0.5,
        ) {
            let design = Window { min: low, max: low + width };
            let sets = LimitSets::new(design, design, Window { min: down, max: up }, guard);
            if let Some(written) = sets.written() {
                prop_assert!(written.min >= design.min - 1e-9 && written.max <= design.max + 1e-9, "{written:?}");
            }
        }
    }
}
