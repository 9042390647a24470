use super::*;
use serde_json::Value;

/// Tables were computed with 30 digits; what is left over is the rounding of the special functions.
const TOLERANCE: f64 = 2e-14;

fn check(what: &str, found: Option<f64>, wanted: f64, tolerance: f64) {
    let found = found.unwrap_or(f64::NAN);
    let miss = ((found - wanted) / wanted).abs();
    assert!(miss < tolerance, "{what}: {found} against {wanted}, off by {miss:e}");
}

fn number(value: &Value) -> f64 {
    value.as_f64().or_else(|| value.as_str()?.parse().ok()).expect("a number")
}

/// 66 quantiles of the normal, t, chi-squared, F and non-central t distributions, computed with mpmath in 30 digits.
#[test]
fn quantiles_agree_with_thirty_digit_arithmetic() {
    let text = include_str!("../../../tests/data/statistics/quantiles_main.json");
    let file: Value = serde_json::from_str(text).expect("reference data");
    let table = file["data"]["table"].as_array().expect("a table");
    assert_eq!(table.len(), 66);
    for row in table {
        let p = number(&row["p"]);
        let quantile = |distribution: &dyn Distribution| {
            // 0.99999 as a double is off by 1e-17, which is too much for a tail of 0.00001.
            let q = ((1.0 - p) * 1e5).round() / 1e5;
            if p > 0.5 { distribution.upper_quantile(q) } else { distribution.quantile(p) }
        };
        let found = match row["dist"].as_str().expect("a name") {
            "normal" => quantile(&Normal),
            "t" => quantile(&StudentT::new(number(&row["nu"])).expect("t")),
            "chi2" => quantile(&ChiSquared::new(number(&row["nu"])).expect("chi2")),
            "F" => quantile(&Fisher::new(number(&row["nu1"]), number(&row["nu2"])).expect("F")),
            "nct" => quantile(&NonCentralT::new(number(&row["nu"]), number(&row["delta"])).expect("nct")),
            other => panic!("a distribution {other}"),
        };
        check(&row.to_string(), found, number(&row["q"]), TOLERANCE);
    }
}

/// GUM (JCGM 100:2008) Table G.2, at full precision as computed by scipy 1.17.1; its own quantiles are good to 3e-13.
#[test]
fn table_g2_of_the_gum_comes_out() {
    let text = include_str!("../../../tests/data/statistics/gum_table_g2_t_factors.json");
    let file: Value = serde_json::from_str(text).expect("reference data");
    let probabilities = file["data"]["p"].as_array().expect("a list");
    let table = file["data"]["table_full_precision"].as_array().expect("a table");
    let mut checked = 0;
    for row in table {
        let degrees = row[0].as_f64();
        for (index, p) in probabilities.iter().enumerate() {
            let both_sides = 0.5 * (1.0 - number(p));
            let found = match degrees {
                Some(degrees) => StudentT::new(degrees).expect("t").upper_quantile(both_sides),
                None => Normal.upper_quantile(both_sides),
            };
            check(&format!("{degrees:?} {p}"), found, number(&row[index + 1]), 3e-13);
            checked += 1;
        }
    }
    assert_eq!(checked, 162);
}

/// Closed forms: t with one degree is Cauchy's, with two algebraic; chi-squared with two is exponential.
#[test]
fn far_tails_keep_their_digits() {
    let cauchy = StudentT::new(1.0).expect("t");
    let two = StudentT::new(2.0).expect("t");
    let exponential = ChiSquared::new(2.0).expect("chi-squared");
    for exponent in 1..60 {
        let q = 10.0_f64.powi(-5 * exponent);
        check("exponential", exponential.upper_quantile(q), -2.0 * q.ln(), 1e-13);
        check("exponential, left", exponential.quantile(q), -2.0 * (-q).ln_1p(), 1e-13);
        // The squares of larger t leave the range of the numbers.
        if q < 1e-150 {
            continue;
        }
        check("Cauchy", cauchy.upper_quantile(q), 1.0 / (std::f64::consts::PI * q).tan(), 1e-13);
        let algebraic = (1.0 - 2.0 * q) / (2.0 * q * (1.0 - q)).sqrt();
        check("two degrees", two.upper_quantile(q), algebraic, 1e-13);
    }
}

/// With no non-centrality the non-central t is Student's; with many degrees of freedom it is the normal about delta.
#[test]
fn the_non_central_t_has_its_limits() {
    for degrees in [1.0, 2.0, 5.5, 30.0, 1000.0] {
        let student = StudentT::new(degrees).expect("t");
        let central = NonCentralT::new(degrees, 0.0).expect("non-central t");
        for p in [1e-6, 0.01, 0.3, 0.9, 1.0 - 1e-9] {
            check("central", central.quantile(p), student.quantile(p).expect("quantile"), 1e-12);
        }
    }
    for (degrees, delta) in [(3.0, 4.0), (9.0, -2.5), (200.0, 30.0)] {
        let distribution = NonCentralT::new(degrees, delta).expect("non-central t");
        let turned = NonCentralT::new(degrees, -delta).expect("non-central t");
        for t in [-70.0, -3.0, 0.0, 0.5, 7.0, 33.0] {
            let tails = distribution.tails(t);
            assert!((tails.lower + tails.upper - 1.0).abs() < 1e-13, "{degrees} {delta} {t}: {tails:?}");
            assert!((tails.lower - turned.tails(-t).upper).abs() < 1e-14);
        }
        check("zero", Some(distribution.lower(0.0)), Normal.lower(-delta), 1e-12);
    }
}

#[test]
fn densities_are_the_slopes_of_the_tails() {
    let student = StudentT::new(4.5).expect("t");
    for x in [-3.0, -0.4, 0.7, 2.5] {
        let slope = |below: f64, above: f64| (above - below) / 2e-5;
        let normal = slope(Normal.lower(x - 1e-5), Normal.lower(x + 1e-5));
        check("normal", Some(Normal::density(x)), normal, 1e-8);
        check("t", Some(student.density(x)), slope(student.lower(x - 1e-5), student.lower(x + 1e-5)), 1e-8);
    }
}

#[test]
fn what_is_no_probability_has_no_quantile() {
    let distributions: [&dyn Distribution; 5] = [
        &Normal,
        &StudentT::new(3.0).expect("t"),
        &ChiSquared::new(3.0).expect("chi-squared"),
        &Fisher::new(3.0, 4.0).expect("F"),
        &NonCentralT::new(3.0, 1.0).expect("non-central t"),
    ];
    for distribution in distributions {
        for p in [0.0, 1.0, -0.1, 1.1, f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
            assert_eq!(distribution.quantile(p), None);
            assert_eq!(distribution.upper_quantile(p), None);
        }
        assert!(distribution.lower(f64::NAN).is_nan());
        assert!(distribution.upper(f64::INFINITY) == 0.0);
        assert!(distribution.lower(f64::NEG_INFINITY) == 0.0);
        for p in [1e-12, 0.5 - 1e-9, 0.5, 0.5 + 1e-9, 1.0 - 1e-12] {
            let quantile = distribution.quantile(p).expect("a quantile");
            check("back", Some(distribution.lower(quantile)), p, 1e-11);
        }
    }
}

#[test]
fn what_are_no_degrees_of_freedom_make_no_distribution() {
    for wrong in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert_eq!(StudentT::new(wrong), None);
        assert_eq!(ChiSquared::new(wrong), None);
        assert_eq!(Fisher::new(1.0, wrong), None);
        assert_eq!(Fisher::new(wrong, 1.0), None);
        assert_eq!(NonCentralT::new(wrong, 1.0), None);
    }
    assert_eq!(NonCentralT::new(1.0, f64::NAN), None);
}
