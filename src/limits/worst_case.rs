//! All parts at their worst ends at once.
//!
//! A model that rises or falls steadily with each input, whatever the others are, takes its extremes where every input
//! stands at one of its ends. All these corners are tried, so the result is exact for such a model.

use super::input::Input;
use super::window::Window;

/// The extremes of `model` over all corners of `inputs`. Takes 2 to the power of the varying inputs evaluations.
pub fn extremes(inputs: &[Input], model: impl Fn(&[f64]) -> f64) -> Window {
    let nominal = model(&nominals(inputs));
    let mut window = Window { min: nominal, max: nominal };
    each_corner(inputs, |values| window = window.with(model(values)));
    window
}

/// What each input does alone, from end to end, with all others nominal: the value at its low end and at its high end,
/// less the nominal value.
pub fn alone(inputs: &[Input], model: impl Fn(&[f64]) -> f64) -> Vec<[f64; 2]> {
    let mut values = nominals(inputs);
    let nominal = model(&values);
    let mut alone = Vec::with_capacity(inputs.len());
    for (index, input) in inputs.iter().enumerate() {
        let mut at = |value| {
            values[index] = value;
            model(&values) - nominal
        };
        alone.push([at(input.low), at(input.high)]);
        values[index] = input.nominal;
    }
    alone
}

/// The nominal value of each input.
pub fn nominals(inputs: &[Input]) -> Vec<f64> {
    inputs.iter().map(|input| input.nominal).collect()
}

/// Hands every combination of the ends of the varying inputs to `visit`; the others stay nominal.
pub fn each_corner(inputs: &[Input], mut visit: impl FnMut(&[f64])) {
    let mut values = nominals(inputs);
    let varying: Vec<usize> = (0..inputs.len()).filter(|index| inputs[*index].varies()).collect();
    for corner in 0_u64..1 << varying.len() {
        for (bit, index) in varying.iter().enumerate() {
            let input = &inputs[*index];
            values[*index] = if corner >> bit & 1 == 0 { input.low } else { input.high };
        }
        visit(&values);
    }
}
