//! How the supply's output moves for a while: not at all, in a straight line, or exponentially towards a level.

/// One stretch of an output voltage over time; always monotone.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Course {
    /// It stays.
    Still,
    /// It changes by `rate` volts in a second.
    Line { rate: f64 },
    /// It approaches `level` with a time constant in seconds.
    Towards { level: f64, time_constant: f64 },
}

impl Course {
    /// The voltage `time` seconds after it was `from`.
    pub(super) fn after(self, from: f64, time: f64) -> f64 {
        match self {
            Self::Still => from,
            Self::Line { rate } => from + rate * time,
            Self::Towards { level, time_constant } => level + (from - level) * (-time / time_constant).exp(),
        }
    }

    /// Volts a second at the moment the voltage is `from`.
    pub(super) fn rate(self, from: f64) -> f64 {
        match self {
            Self::Still => 0.0,
            Self::Line { rate } => rate,
            Self::Towards { level, time_constant } => (level - from) / time_constant,
        }
    }

    /// Seconds until the voltage has gone from `from` to `to`, which must lie on its way.
    pub(super) fn time_between(self, from: f64, to: f64) -> f64 {
        match self {
            Self::Still => f64::INFINITY,
            Self::Line { rate } => (to - from) / rate,
            Self::Towards { level, time_constant } => time_constant * ((from - level) / (to - level)).ln(),
        }
    }

    /// The integral of the voltage over `time` seconds, in which it has gone from `from` to `to`.
    pub(super) fn area(self, from: f64, to: f64, time: f64) -> f64 {
        match self {
            Self::Still => from * time,
            Self::Line { .. } => (from + to) / 2.0 * time,
            Self::Towards { level, time_constant } => level * time + (from - to) * time_constant,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const COURSES: [Course; 2] =
        [Course::Line { rate: -4.0 }, Course::Towards { level: 1.0, time_constant: 0.25 }];

    #[test]
    fn the_time_to_a_level_is_the_inverse_of_the_level_after_a_time() {
        for course in COURSES {
            let to = course.after(5.0, 0.3);
            assert!((course.time_between(5.0, to) - 0.3).abs() < 1e-12, "{course:?}");
        }
    }

    #[test]
    fn the_area_is_what_a_fine_sum_gives() {
        for course in COURSES {
            let sum: f64 = (0..30_000).map(|k| course.after(5.0, (f64::from(k) + 0.5) * 1e-5) * 1e-5).sum();
            let area = course.area(5.0, course.after(5.0, 0.3), 0.3);
            assert!((area - sum).abs() < 1e-8, "{course:?}: {area} and {sum}");
        }
    }
}
