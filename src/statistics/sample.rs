//! Mean and standard deviation of a sample.

/// Mean and scatter of some values.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sample {
    /// How many values there are.
    pub count: usize,
    /// Their mean.
    pub mean: f64,
    /// Their experimental standard deviation, with `count - 1` degrees of freedom (JCGM 100:2008, 4.2.2); `None` for a
    /// single value.
    pub standard_deviation: Option<f64>,
}

impl Sample {
    /// Of all `values`; `None` without any, and where one is not a number.
    pub fn of(values: &[f64]) -> Option<Self> {
        let first = *values.first()?;
        let count = values.len();
        // In two passes, each about a value inside the sample, so that readings far from zero lose no digits.
        let mean = first + values.iter().map(|value| value - first).sum::<f64>() / count as f64;
        if !mean.is_finite() {
            return None;
        }
        let rest = values.iter().map(|value| value - mean).sum::<f64>();
        let squares: f64 = values.iter().map(|value| (value - mean).powi(2)).sum();
        let variance = (squares - rest * rest / count as f64) / (count as f64 - 1.0);
        let mean = mean + rest / count as f64;
        Some(Self { count, mean, standard_deviation: (count > 1).then(|| variance.max(0.0).sqrt()) })
    }

    /// Standard uncertainty of the mean of independent values (JCGM 100:2008, 4.2.3).
    pub fn mean_uncertainty(&self) -> Option<f64> {
        Some(self.standard_deviation? / (self.count as f64).sqrt())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::distribution::{Distribution, StudentT};
    use serde_json::Value;

    /// NIST Statistical Reference Datasets, univariate summary statistics. Compared are the digits that survive the
    /// rounding of the data themselves: of 1 000 000.2 with a scatter of 0.1 only ten.
    #[test]
    fn the_sets_of_nist_come_out_as_certified() {
        for (text, digits) in [
            (include_str!("../../tests/data/nist/strd_univ_lew.json"), 14),
            (include_str!("../../tests/data/nist/strd_univ_mavro.json"), 12),
            (include_str!("../../tests/data/nist/strd_univ_michelso.json"), 13),
            (include_str!("../../tests/data/nist/strd_univ_numacc1.json"), 15),
            (include_str!("../../tests/data/nist/strd_univ_numacc3.json"), 9),
        ] {
            let file: Value = serde_json::from_str(text).expect("reference data");
            let values = match &file["data"]["y"] {
                // NumAcc3 is given by its rule: one value, then 500 pairs.
                Value::Null => {
                    [1_000_000.2].into_iter().chain([1_000_000.1, 1_000_000.3].repeat(500)).collect()
                }
                list => serde_json::from_value::<Vec<f64>>(list.clone()).expect("a list"),
            };
            assert_eq!(Some(values.len() as u64), file["data"]["n"].as_u64());
            let sample = Sample::of(&values).expect("a sample");
            for (label, found) in
                [("mean", sample.mean), ("sd", sample.standard_deviation.expect("more than one value"))]
            {
                let published = file["published"].as_array().expect("a list");
                let entry = published.iter().find(|entry| entry["label"] == label).expect("the label");
                let wanted: f64 = entry["printed"].as_str().expect("text").parse().expect("a number");
                let miss = (found / wanted - 1.0).abs();
                assert!(miss < 10.0_f64.powi(-digits), "{} {label}: {found} against {wanted}", file["id"]);
            }
        }
    }

    /// NIST/SEMATECH e-Handbook, 1.3.5.2: the confidence limits of the mean of 195 values. The handbook's own output
    /// (printed digits from memory) is of single precision, so six digits of it are compared; the figures worked out
    /// anew with scipy from the same data agree to twelve, as many as data of seven digits leave in a double.
    #[test]
    fn the_mean_and_its_interval_are_those_of_the_handbook() {
        let text = include_str!("../../tests/data/nist/nist_zarr13_mean_ci.json");
        let file: Value = serde_json::from_str(text).expect("reference data");
        let values: Vec<f64> = serde_json::from_value(file["data"]["y"].clone()).expect("a list");
        let sample = Sample::of(&values).expect("a sample");
        let student = StudentT::new(sample.count as f64 - 1.0).expect("t");
        let factor = student.quantile(0.975).expect("a quantile");
        let half_width = factor * sample.mean_uncertainty().expect("many values");
        let deviation = sample.standard_deviation.expect("many values");
        for (label, found) in [
            ("n", sample.count as f64),
            ("mean", sample.mean),
            ("sd", deviation),
            ("t_crit", factor),
            ("ci_lo", sample.mean - half_width),
            ("ci_hi", sample.mean + half_width),
        ] {
            let published = file["published"].as_array().expect("a list");
            let entry = published.iter().find(|entry| entry["label"] == label).expect("the label");
            let exact = entry["recomputed"].as_f64().expect("a number");
            let printed: f64 = entry["printed"].as_str().expect("text").parse().expect("a number");
            assert!((found / exact - 1.0).abs() < 1e-12, "{label}: {found} against {exact}");
            // Single precision holds six digits; t is printed with five.
            let digits = if label == "t_crit" { 4e-5 } else { 1e-6 };
            assert!((found / printed - 1.0).abs() < digits, "{label}: {found} against {printed}");
        }
    }

    #[test]
    fn few_values_say_little() {
        assert_eq!(Sample::of(&[]), None);
        assert_eq!(Sample::of(&[1.0, f64::NAN]), None);
        assert_eq!(Sample::of(&[f64::INFINITY]), None);
        let one = Sample::of(&[5.0]).expect("a sample");
        assert_eq!((one.mean, one.standard_deviation, one.mean_uncertainty()), (5.0, None, None));
        let two = Sample::of(&[5.0, 7.0]).expect("a sample");
        assert!(two.mean_uncertainty().is_some_and(|u| (u - 1.0).abs() < 1e-15));
    }
}
