use super::*;
use crate::statistics::distribution::{Distribution, Normal};
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use rand_distr::StandardNormal;

fn between(low: f64, high: f64) -> Bracket {
    Bracket { low, high }
}

fn found(brackets: &[Bracket]) -> Estimate {
    match fit(brackets) {
        Some(Fit::Found(estimate)) => estimate,
        other => panic!("{brackets:?}: {other:?}"),
    }
}

fn close(what: &str, found: f64, wanted: f64, tolerance: f64) {
    assert!((found / wanted - 1.0).abs() < tolerance, "{what}: {found} against {wanted}");
}

/// Brackets of every kind; estimate, information, top of the adjusted profile and the interval about it by mpmath in 30
/// digits, from the definitions.
#[test]
fn a_mixed_bag_agrees_with_thirty_digit_arithmetic() {
    let brackets = [
        between(4.0, 6.0),
        between(5.0, 5.5),
        between(6.0, 8.0),
        between(6.5, 7.0),
        between(7.0, 9.0),
        between(3.0, 5.0),
        between(f64::NEG_INFINITY, 5.2),
        between(8.0, f64::INFINITY),
        between(5.8, 6.1),
        Bracket::read(6.3),
    ];
    let estimate = found(&brackets);
    let (low, high) = standard_deviation_interval(&brackets, 0.95).expect("an interval");
    for (what, value, wanted) in [
        ("mean", estimate.mean, 6.134_030_170_961_33),
        ("standard deviation", estimate.standard_deviation, 1.417_305_398_312_004_8),
        ("mean's uncertainty", estimate.mean_uncertainty, 0.472_332_383_426_584_1),
        ("deviation's uncertainty", estimate.standard_deviation_uncertainty, 0.406_644_568_108_467_4),
        ("correlation", estimate.correlation, -0.015_271_468_657_133_68),
        ("lower bound", low, 0.901_544_159_577_159_4),
        ("upper bound", high, 3.132_367_414_114_953_3),
    ] {
        close(what, value, wanted, 1e-8);
    }
}

/// Values that are read, and brackets next to nothing wide, give mean and standard deviation by `n`; their
/// uncertainties are those of a normal sample, `s / sqrt(n)` and `s / sqrt(2 n)`.
#[test]
fn narrow_brackets_give_the_plain_sample() {
    let readings = [5.9975, 6.0002, 6.0011, 5.9998, 6.0031, 5.9984, 6.0007];
    let count = readings.len() as f64;
    let mean = readings.iter().sum::<f64>() / count;
    let deviation = (readings.iter().map(|reading| (reading - mean).powi(2)).sum::<f64>() / count).sqrt();
    for half in [0.0, 1e-12, 1e-9, 1e-7] {
        let brackets: Vec<Bracket> = readings.iter().map(|x| between(x - half, x + half)).collect();
        let estimate = found(&brackets);
        assert!((estimate.mean - mean).abs() < 1e-9, "{half}: {estimate:?}");
        close("standard deviation", estimate.standard_deviation, deviation, 1e-7);
        close("mean's uncertainty", estimate.mean_uncertainty, deviation / count.sqrt(), 1e-6);
        close(
            "deviation's uncertainty",
            estimate.standard_deviation_uncertainty,
            deviation / (2.0 * count).sqrt(),
            1e-6,
        );
        assert!(estimate.correlation.abs() < 1e-6);
    }
}

/// Three cells have as many free shares as the population has parameters, so that it follows from the shares in
/// closed form.
#[test]
fn three_cells_give_their_quantiles() {
    let cells = [between(f64::NEG_INFINITY, 2.0), between(2.0, 3.0), between(3.0, f64::INFINITY)];
    for counts in [[3, 5, 2], [1, 1, 1], [20, 1, 70]] {
        let brackets: Vec<Bracket> =
            cells.iter().zip(counts).flat_map(|(cell, count)| std::iter::repeat_n(*cell, count)).collect();
        let share = |count: usize| Normal.quantile(count as f64 / brackets.len() as f64).expect("a quantile");
        let (low, high) = (share(counts[0]), share(counts[0] + counts[1]));
        let deviation = 1.0 / (high - low);
        let estimate = found(&brackets);
        close("standard deviation", estimate.standard_deviation, deviation, 1e-9);
        close("mean", estimate.mean, 2.0 - low * deviation, 1e-9);
    }
}

/// Sheppard's correction (1898): grouping into cells of width h adds h squared over twelve to the variance.
#[test]
fn cells_add_no_variance_of_their_own() {
    let seed = 3;
    let mut random = ChaCha8Rng::seed_from_u64(seed);
    let (width, count) = (1.2, 4000);
    let mut middles = Vec::new();
    let brackets: Vec<Bracket> = (0..count)
        .map(|_| {
            let cell = (normal(&mut random) / width).floor() * width;
            middles.push(cell + 0.5 * width);
            between(cell, cell + width)
        })
        .collect();
    let mean = middles.iter().sum::<f64>() / f64::from(count);
    let grouped = middles.iter().map(|middle| (middle - mean).powi(2)).sum::<f64>() / f64::from(count);
    let corrected = (grouped - width * width / 12.0).sqrt();
    let estimate = found(&brackets);
    assert!((estimate.standard_deviation - corrected).abs() < 0.002, "seed {seed}: {estimate:?} {corrected}");
    assert!((estimate.mean - mean).abs() < 0.002, "seed {seed}: {estimate:?} {mean}");
}

#[test]
fn the_unit_has_no_part_in_it() {
    let brackets =
        [between(1.0, 2.0), between(2.0, 3.0), between(2.5, 3.5), between(0.0, 1.5), between(1.8, 2.9)];
    let plain = found(&brackets);
    for (origin, unit) in [(6.0, 1e-6), (0.0, 1e-12), (-1e6, 1.0), (1e3, 1e9)] {
        let moved: Vec<Bracket> =
            brackets.iter().map(|b| between(origin + unit * b.low, origin + unit * b.high)).collect();
        let estimate = found(&moved);
        close("standard deviation", estimate.standard_deviation, unit * plain.standard_deviation, 1e-6);
        close(
            "its uncertainty",
            estimate.standard_deviation_uncertainty,
            unit * plain.standard_deviation_uncertainty,
            1e-6,
        );
        assert!((estimate.mean - origin - unit * plain.mean).abs() < 1e-6 * unit);
    }
}

/// All in one cell of width w, n times: closed form, `(2 Phi(w / 2 s) - 1)^(n - 1) = 0.05`.
#[test]
fn one_cell_bounds_the_spread_from_above_only() {
    for count in [2, 5, 30] {
        let brackets = vec![between(6.0, 6.01); count];
        assert_eq!(fit(&brackets), Some(Fit::NoSpreadSeen { common: between(6.0, 6.01) }));
        let share = 0.05_f64.powf(1.0 / (count as f64 - 1.0));
        let wanted = 0.005 / Normal.quantile(0.5 + 0.5 * share).expect("a quantile");
        close("bound", largest_standard_deviation(&brackets, 0.95).expect("a bound"), wanted, 1e-7);
        assert_eq!(standard_deviation_interval(&brackets, 0.95), None);
    }
    let touching = [between(0.0, 1.0), between(1.0, 2.0), between(0.0, 1.0)];
    assert_eq!(fit(&touching), Some(Fit::NoSpreadSeen { common: between(1.0, 1.0) }));
    assert!(largest_standard_deviation(&touching, 0.95).is_some_and(|bound| bound > 0.5));
    assert_eq!(largest_standard_deviation(&[between(0.0, 1.0)], 0.95), None);
    assert_eq!(largest_standard_deviation(&[between(0.0, f64::INFINITY); 4], 0.95), None);
    assert_eq!(largest_standard_deviation(&[Bracket::read(1.0); 4], 0.95), None);
    assert_eq!(largest_standard_deviation(&[between(0.0, 1.0), between(2.0, 3.0)], 0.95), None);
}

#[test]
fn values_above_what_others_are_below_bound_nothing() {
    let contrary =
        [between(1.0, f64::INFINITY), between(f64::NEG_INFINITY, 0.0), between(1.0, f64::INFINITY)];
    assert!(matches!(fit(&contrary), Some(Fit::Found(_) | Fit::NoBoundSeen)));
    let apart =
        [between(f64::NEG_INFINITY, 0.0), between(f64::NEG_INFINITY, 0.0), between(1.0, f64::INFINITY)];
    assert_eq!(fit(&apart), Some(Fit::NoBoundSeen));
}

#[test]
fn nonsense_has_no_fit() {
    assert_eq!(fit(&[]), None);
    for wrong in [
        between(f64::NAN, 1.0),
        between(1.0, f64::NAN),
        between(2.0, 1.0),
        between(f64::NEG_INFINITY, f64::INFINITY),
        Bracket::read(f64::INFINITY),
    ] {
        assert_eq!(fit(&[between(0.0, 1.0), wrong]), None, "{wrong:?}");
    }
    let good = [between(0.0, 1.0), between(2.0, 3.0)];
    for wrong in [0.0, 1.0, f64::NAN] {
        assert_eq!(standard_deviation_interval(&good, wrong), None);
        assert_eq!(largest_standard_deviation(&[between(0.0, 1.0); 3], wrong), None);
    }
}

fn normal(random: &mut ChaCha8Rng) -> f64 {
    random.sample(StandardNormal)
}

/// Cells of a grid at a random offset: the interval, or the bound where no spread was seen, holds the truth as often as
/// stated. 300 samples a row, so that 92 % is more than two standard errors below 95 %.
#[test]
fn the_interval_holds_the_truth_as_often_as_stated() {
    for (seed, count, deviation) in
        [(1, 3, 3.0), (2, 10, 3.0), (3, 10, 1.0), (4, 10, 0.5), (5, 5, 0.2), (6, 20, 0.3)]
    {
        let mut random = ChaCha8Rng::seed_from_u64(seed);
        let replicates = 300;
        let mut holds = 0;
        for _ in 0..replicates {
            let mean: f64 = random.random();
            let mut bracket = || {
                let cell = (mean + deviation * normal(&mut random)).floor();
                between(cell, cell + 1.0)
            };
            let brackets: Vec<Bracket> = (0..count).map(|_| bracket()).collect();
            let (low, high) = standard_deviation_interval(&brackets, 0.95)
                .or_else(|| Some((0.0, largest_standard_deviation(&brackets, 0.95)?)))
                .expect("an interval or a bound");
            holds += usize::from(low <= deviation && deviation <= high);
        }
        let share = f64::from(u32::try_from(holds).expect("few")) / f64::from(replicates);
        assert!(
            share >= 0.92,
            "seed {seed}, {count} cells of width 1, standard deviation {deviation}: {share}"
        );
    }
}
