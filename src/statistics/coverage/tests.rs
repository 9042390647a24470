use super::*;
use crate::statistics::distribution::{Distribution, Normal, StudentT};
use crate::statistics::monte_carlo::propagate;
use proptest::prelude::*;
use serde_json::Value;
use std::f64::consts::PI;

/// What is promised of a coverage factor.
const PROMISED: f64 = 1e-4;

fn rectangles(standard_uncertainties: &[f64]) -> Vec<Influence> {
    standard_uncertainties.iter().map(|u| Influence::rectangular(*u)).collect()
}

fn factor(p: f64, influences: &[Influence]) -> f64 {
    coverage_factor(p, influences).unwrap_or(f64::NAN)
}

fn close(found: f64, wanted: f64, what: &str) {
    assert!((found - wanted).abs() < PROMISED, "{what}: {found} against {wanted}");
}

/// JCGM 101:2008 (GUM Supplement 1), 9.2: an additive model of four inputs, half widths at 95 %. The exact figures hold to
/// what is promised of a factor; the printed ones (that of the dominant rectangle is from memory, and a Monte Carlo
/// figure) to half a unit of their last digit.
#[test]
fn the_additive_examples_of_supplement_1_come_out() {
    let text = include_str!("../../../tests/data/statistics/gums1_additive.json");
    let file: Value = serde_json::from_str(text).expect("reference data");
    let published = file["published"].as_array().expect("a list");
    for (influences, label, last_digit) in [
        (vec![Influence::normal(1.0); 4], "half_case1", 0.01),
        (rectangles(&[1.0; 4]), "half_case2", 0.01),
        (rectangles(&[1.0, 1.0, 1.0, 10.0]), "half_case3_mcm", 0.1),
    ] {
        let entry = published.iter().find(|entry| entry["label"] == label).expect("the label");
        let exact = entry["recomputed"].as_f64().expect("a number");
        let printed: f64 = entry["printed"].as_str().expect("text").parse().expect("a number");
        let spread = Spread::new(&influences).expect("a spread");
        let found = spread.half_width(0.95).expect("a half width");
        close(found / spread.standard_uncertainty, exact / spread.standard_uncertainty, label);
        assert!((found - printed).abs() < last_digit / 2.0, "{label}: {found} against {printed}");
    }
    // Annex E gives that of four rectangles in closed form.
    let closed = 2.0 * 3.0_f64.sqrt() * (2.0 - 0.6_f64.powf(0.25));
    close(factor(0.95, &rectangles(&[1.0; 4])), closed / 2.0, "four rectangles");
}

/// EA-4/02, example S10 (figure and formula from memory): 1.83 for the caliper, whose two rectangles of 50 um and 25 um
/// make a trapezoid. The formula holds on the trapezoid's slopes.
#[test]
fn the_caliper_of_ea_4_02_comes_out() {
    let caliper = rectangles(&[50.0 / 3.0_f64.sqrt(), 25.0 / 3.0_f64.sqrt()]);
    assert!((factor(0.95, &caliper) - 1.83).abs() < 0.005, "{}", factor(0.95, &caliper));
    for narrow in [1.0, 0.7, 0.3, 0.1, 0.02] {
        let beta: f64 = (1.0 - narrow) / (1.0 + narrow);
        for p in [0.5, 0.6827, 0.95, 0.99, 0.9973] {
            if p / (2.0 - p) < beta {
                continue;
            }
            let root = ((1.0 - p) * (1.0 - beta * beta)).sqrt();
            let closed = (1.0 - root) / ((1.0 + beta * beta) / 6.0).sqrt();
            close(factor(p, &rectangles(&[1.0, narrow])), closed, &format!("{narrow} {p}"));
        }
    }
}

#[test]
fn one_influence_alone_has_its_own_factor() {
    close(factor(0.95, &[Influence::normal(3.0)]), 1.959_964, "normal");
    close(factor(0.95, &rectangles(&[3.0])), 0.95 * 3.0_f64.sqrt(), "rectangle");
    // GUM (JCGM 100:2008) Table G.2: 2.92 for 99 % and 16 degrees of freedom.
    close(factor(0.99, &[Influence::scatter(3.0, 16.0)]), 2.920_78, "scatter");
    // A rectangle whose width is in doubt is a bell.
    let doubtful = Influence { shape: Shape::Rectangular, ..Influence::scatter(1.0, 16.0) };
    close(factor(0.99, &[doubtful]), 2.920_78, "doubtful rectangle");
    let exact = Influence { degrees_of_freedom: Some(f64::INFINITY), ..Influence::rectangular(1.0) };
    close(factor(0.95, &[exact]), 0.95 * 3.0_f64.sqrt(), "a rectangle known exactly");
}

/// The sum of equal rectangles has the distribution of Irwin and Hall, in closed form.
#[test]
fn many_equal_rectangles_follow_irwin_and_hall() {
    for count in [3, 5, 8, 12] {
        let p = 0.95;
        let k = factor(p, &rectangles(&vec![1.0; count]));
        // Over unit intervals the sum is shifted by count / 2 and has a variance of count / 12.
        let x = 0.5 * count as f64 + k * (count as f64 / 12.0).sqrt();
        let (mut sum, mut term) = (0.0, 1.0);
        for index in 0..count {
            if index as f64 >= x {
                break;
            }
            sum += term * (x - index as f64).powi(count as i32);
            term *= -((count - index) as f64) / (index + 1) as f64;
        }
        let factorial: f64 = (1..=count).map(|number| number as f64).product();
        let miss = 2.0 * (sum / factorial) - 1.0 - p;
        // The density at the factor is above 0.11 there.
        assert!(miss.abs() / (2.0 * 0.055) < PROMISED, "{count}: {miss}");
    }
}

/// Any mix with a normal part, against the inversion of the characteristic function (Gil-Pelaez 1951), which decays
/// like the normal's and is integrated here by the trapezoidal rule.
#[test]
fn mixtures_agree_with_the_characteristic_function() {
    for (normal, half_widths) in [
        (1.0, vec![1.0]),
        (1.0, vec![0.02]),
        (0.3, vec![5.0, 1.0]),
        (0.1, vec![1.0, 0.9, 0.5, 0.2, 0.05]),
        (0.05, vec![1.0, 0.01, 0.01]),
        (2.0, vec![1.0, 1.0, 0.7, 0.1]),
    ] {
        let mut influences = rectangles(&half_widths.iter().map(|a| a / 3.0_f64.sqrt()).collect::<Vec<_>>());
        influences.push(Influence::normal(normal));
        let u = combined(&influences).expect("an uncertainty");
        let probability = |c: f64| {
            let end = 9.0 / normal;
            let step = PI / (20.0 * (c + half_widths.iter().sum::<f64>() + 9.0 * normal));
            let mut sum = 0.5 * c;
            for index in 1..(end / step) as usize {
                let t = index as f64 * step;
                let sharp: f64 = half_widths.iter().map(|a| (a * t).sin() / (a * t)).product();
                sum += (c * t).sin() / t * sharp * (-0.5 * (normal * t).powi(2)).exp();
            }
            2.0 / PI * step * sum
        };
        for p in [0.6827, 0.95, 0.9973] {
            let c = factor(p, &influences) * u;
            let density = (probability(c + 1e-3 * u) - probability(c - 1e-3 * u)) / 2e-3;
            let miss = (probability(c) - p) / density;
            assert!(miss.abs() < PROMISED, "{normal} {half_widths:?} {p}: off by {miss:e}");
            let within = Spread::new(&influences).expect("a spread").within(c);
            assert!((within - p).abs() < 1e-5, "{within} against {p}");
        }
    }
}

/// Scatter and one rectangle: the mean of Student's t over the rectangle, by Simpson's rule.
#[test]
fn scatter_beside_a_rectangle_agrees_with_direct_integration() {
    for (degrees, scale, half_width) in [
        (1.0, 1.0, 1.0),
        (2.0, 0.05, 1.0),
        (4.0, 1.0, 3.0),
        (0.5, 0.2, 1.0),
        (9.0, 1.0, 0.1),
        (60.0, 0.3, 1.0),
    ] {
        let student = StudentT::new(degrees).expect("t");
        let influences =
            [Influence::scatter(scale, degrees), Influence::rectangular(half_width / 3.0_f64.sqrt())];
        let u = combined(&influences).expect("an uncertainty");
        let outside = |c: f64| {
            let cells = 4000;
            let at = |index: i32| {
                let r = half_width * (2.0 * f64::from(index) / f64::from(cells) - 1.0);
                student.upper((c - r) / scale)
            };
            let weight = |index: i32| {
                if index == 0 || index == cells {
                    1.0
                } else if index % 2 == 1 {
                    4.0
                } else {
                    2.0
                }
            };
            2.0 * (0..=cells).map(|index| weight(index) * at(index)).sum::<f64>() / (3.0 * f64::from(cells))
        };
        for p in [0.6827, 0.95, 0.9973] {
            let c = factor(p, &influences) * u;
            let density = (outside(c * 0.999) - outside(c * 1.001)) / (0.002 * c / u);
            let miss = (outside(c) - (1.0 - p)) / density;
            // Few degrees of freedom make factors of hundreds: there the promise is relative.
            let promised = PROMISED * (c / u).max(1.0);
            assert!(miss.abs() < promised, "{degrees} {scale} {half_width} {p}: k {} off by {miss:e}", c / u);
        }
    }
}

#[test]
fn what_is_negligible_changes_nothing() {
    let plain = factor(0.95, &rectangles(&[1.0]));
    for small in [0.0, 1e-300, 1e-12, 1e-6, 1e-4] {
        for other in [Influence::normal(small), Influence::rectangular(small), Influence::scatter(small, 3.0)]
        {
            close(factor(0.95, &[other, Influence::rectangular(1.0)]), plain, &format!("{other:?}"));
        }
    }
    let many: Vec<Influence> =
        [Influence::normal(1.0)].into_iter().chain(vec![Influence::rectangular(1e-5); 100]).collect();
    close(factor(0.95, &many), Normal.quantile(0.975).expect("a quantile"), "a hundred small ones");
}

/// The unit of the quantity has no part in it: femtoamps and gigaohms have the same factor.
#[test]
fn the_unit_has_no_part_in_it() {
    let influences = |unit: f64| {
        [Influence::rectangular(3.0 * unit), Influence::normal(unit), Influence::scatter(0.5 * unit, 4.0)]
    };
    for unit in [1e-200, 1e-15, 1e9, 1e200] {
        close(factor(0.95, &influences(unit)), factor(0.95, &influences(1.0)), &unit.to_string());
    }
}

#[test]
fn nonsense_has_no_factor() {
    let good = Influence::rectangular(1.0);
    for p in [0.0, 1.0, -1.0, 2.0, f64::NAN] {
        assert_eq!(coverage_factor(p, &[good, Influence::normal(1.0)]), None);
        assert_eq!(coverage_factor(p, &[good]), None);
        assert_eq!(coverage_factor(p, &[Influence::normal(1.0)]), None);
    }
    for wrong in [Influence::normal(f64::NAN), Influence::rectangular(-1.0), Influence::scatter(1.0, -2.0)] {
        assert_eq!(coverage_factor(0.95, &[good, wrong]), None);
    }
    assert_eq!(coverage_factor(0.95, &[]), None);
    assert_eq!(coverage_factor(0.95, &[Influence::rectangular(0.0)]), None);
}

#[test]
fn the_sides_of_a_spread_add_up() {
    let sharp = Spread::new(&[Influence::rectangular(1.0), Influence::normal(0.2)]).expect("a spread");
    let bell = Spread::new(&[Influence::normal(2.0)]).expect("a spread");
    assert!((bell.beyond(20.0) / Normal.upper(10.0) - 1.0).abs() < 1e-12);
    for spread in [sharp, bell] {
        assert!((spread.beyond(0.0) - 0.5).abs() < 1e-12);
        for deviation in [0.3, 1.0, 2.0, 50.0] {
            assert!((spread.beyond(deviation) + spread.beyond(-deviation) - 1.0).abs() < 1e-12);
            assert!((1.0 - 2.0 * spread.beyond(deviation) - spread.within(deviation)).abs() < 1e-12);
        }
        assert!(spread.beyond(f64::NAN).is_nan());
        assert!(spread.beyond(f64::INFINITY) < 1e-9);
    }
}

/// The repeated-sampling promise of the GUM (G.3, G.4): scatter whose standard deviation is itself worked out from six
/// readings, beside exactly known influences. 4000 samples; four standard errors are 1.4 %.
#[test]
fn the_factor_covers_as_often_as_stated() {
    let (seed, degrees, samples) = (11, 5.0, 4000);
    for (normal, rectangle) in [(0.5, 1.5), (0.0, 2.0), (1.0, 0.0), (0.2, 0.1)] {
        let known = [Influence::normal(normal), Influence::rectangular(rectangle)];
        let covered = std::cell::Cell::new(0);
        propagate(seed, samples, |draws| {
            let scatter = (0..5).map(|_| draws.normal().powi(2)).sum::<f64>() / degrees;
            let mut influences = vec![Influence::scatter(scatter.sqrt(), degrees)];
            influences.extend(known);
            let half_width = Spread::new(&influences).and_then(|s| s.half_width(0.95)).unwrap_or(f64::NAN);
            let error = draws.normal() + known.iter().map(|part| draws.deviation(part)).sum::<f64>();
            covered.set(covered.get() + usize::from(error.abs() <= half_width));
            error
        });
        let share = covered.get() as f64 / samples as f64;
        assert!((share - 0.95).abs() < 0.014, "seed {seed}, {normal}, {rectangle}: {share}");
    }
}

fn any_influence() -> impl Strategy<Value = Influence> {
    (-14.0..4.0_f64, any::<bool>(), proptest::option::of(0.5..200.0_f64)).prop_map(
        |(log, sharp, degrees_of_freedom)| {
            let shape = if sharp { Shape::Rectangular } else { Shape::Normal };
            Influence { standard_uncertainty: 10.0_f64.powf(log), shape, degrees_of_freedom }
        },
    )
}

proptest! {
    /// Whatever the mix, there is a factor; it holds what it promises, and more probability asks for more.
    #[test]
    fn every_mix_has_a_factor(
        influences in proptest::collection::vec(any_influence(), 1..9),
        p in 0.01..0.9999_f64,
    ) {
        let spread = Spread::new(&influences).expect("a spread");
        let half_width = spread.half_width(p).expect("a half width");
        prop_assert!(half_width.is_finite() && half_width > 0.0);
        let within = spread.within(half_width);
        prop_assert!((within - p).abs() < 2e-5, "{within} against {p}");
        prop_assert!(spread.half_width(0.5 * (1.0 + p)).is_some_and(|wider| wider > half_width));
    }
}
