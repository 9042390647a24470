//! The least that narrowing two windows can cost: plain dynamic programming over all probes, none left out. Knows nothing
//! of the program.
//!
//! With the board on, its trip in one of `f` cells and its re-enable voltage in one of `r`, all alike likely, a probe
//! `k` cells up leaves it on with a chance of k/f, and straight through it trips; off is the mirror image.

/// Expected cost and number of probes.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Cost {
    /// In the unit of what a probe costs.
    pub(crate) cost: f64,
    /// How many probes that takes.
    pub(crate) probes: f64,
}

const NOTHING: Cost = Cost { cost: 0.0, probes: 0.0 };
const NEVER: Cost = Cost { cost: f64::INFINITY, probes: f64::INFINITY };

impl Cost {
    /// One probe of `cost` that leads to `below` with this chance, and otherwise to `above`.
    fn probe(cost: f64, chance: f64, below: Self, above: Self) -> Self {
        let mean = |below: f64, above: f64| chance * below + (1.0 - chance) * above;
        Self { cost: cost + mean(below.cost, above.cost), probes: 1.0 + mean(below.probes, above.probes) }
    }

    fn less(self, other: Self) -> Self {
        if other.cost < self.cost { other } else { self }
    }
}

/// Least expected cost with the board on, `trip` and `re_enable` cells wide, a probe down costing `down` and one up `up`.
pub(crate) fn optimum(trip: usize, re_enable: usize, down: f64, up: f64) -> Cost {
    let width = re_enable + 1;
    let mut on = vec![NOTHING; (trip + 1) * width];
    let mut off = on.clone();
    for f in 1..=trip {
        for r in 1..=re_enable {
            if (f, r) == (1, 1) {
                continue;
            }
            let (mut split_down, mut split_up) = (NEVER, NEVER);
            for k in 1..f {
                let chance = k as f64 / f as f64;
                let probe = Cost::probe(down, chance, on[k * width + r], off[(f - k) * width + r]);
                split_down = split_down.less(probe);
            }
            for k in 1..r {
                let chance = k as f64 / r as f64;
                let probe = Cost::probe(up, chance, on[f * width + k], off[f * width + r - k]);
                split_up = split_up.less(probe);
            }
            on[f * width + r] = split_down.less(Cost::probe(down, 1.0, split_up, split_up));
            off[f * width + r] = split_up.less(Cost::probe(up, 1.0, split_down, split_down));
        }
    }
    on[trip * width + re_enable]
}
