//! Mean and scatter of readings taken one after the other.

/// Mean and experimental standard deviation of one reading (JCGM 100:2008, 4.2.1 and 4.2.2).
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Mean {
    pub(super) count: usize,
    pub(super) value: f64,
    /// Zero for a single reading, of which nothing is known.
    pub(super) deviation: f64,
    /// All readings are the same, digit by digit.
    pub(super) still: bool,
}

impl Mean {
    /// `None` of no readings.
    pub(super) fn of(readings: &[f64]) -> Option<Self> {
        if readings.is_empty() {
            return None;
        }
        let count = readings.len() as f64;
        let value = readings.iter().sum::<f64>() / count;
        let squares: f64 = readings.iter().map(|reading| (reading - value).powi(2)).sum();
        let deviation = if readings.len() > 1 { (squares / (count - 1.0)).sqrt() } else { 0.0 };
        let still = readings.windows(2).all(|pair| pair[0].total_cmp(&pair[1]).is_eq());
        Some(Self { count: readings.len(), value, deviation, still })
    }

    /// Standard uncertainty of the mean: its scatter (JCGM 100:2008, 4.2.3), and the last digit as a rectangle
    /// (F.2.2.1), which no number of equal readings makes smaller.
    pub(super) fn standard_uncertainty(&self, digit: f64) -> f64 {
        (self.deviation.powi(2) / self.count as f64 + digit.powi(2) / 12.0).sqrt()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// JCGM 100:2008, 4.4.3 and table 1: twenty readings of a temperature, mean 100.145 degC, s = 1.489 degC, and
    /// s of the mean 0.333 degC, each to the last digit printed there (s is printed as 1.49).
    #[test]
    fn mean_and_deviation_are_those_of_the_guide() {
        let readings = [
            96.90, 98.18, 98.25, 98.61, 99.03, 99.49, 99.56, 99.74, 99.89, 100.07, 100.33, 100.42, 100.68,
            100.95, 101.11, 101.20, 101.57, 101.84, 102.36, 102.72,
        ];
        let mean = Mean::of(&readings).expect("twenty");
        assert!((mean.value - 100.145).abs() < 5e-4, "{mean:?}");
        assert!((mean.deviation - 1.489).abs() < 5e-4, "{mean:?}");
        assert!((mean.standard_uncertainty(0.0) - 0.333).abs() < 5e-4, "{mean:?}");
    }

    #[test]
    fn readings_that_do_not_move_leave_the_last_digit() {
        let mean = Mean::of(&[1.5; 100]).expect("a hundred");
        assert!((mean.standard_uncertainty(0.1) - 0.1 / 12.0_f64.sqrt()).abs() < 1e-12);
        assert_eq!(Mean::of(&[]), None);
    }
}
