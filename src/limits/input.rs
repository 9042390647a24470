//! One thing that varies from board to board.

/// How the values between the ends are distributed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Shape {
    /// All values as likely: nothing but the ends is known (JCGM 100:2008, 4.3.7).
    Rectangular,
    /// Most likely at the typical value, falling straight to both ends (JCGM 100:2008, 4.3.9, there symmetric).
    Triangular {
        /// The typical value.
        mode: f64,
    },
}

/// An input of a tolerance stack.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Input {
    /// Its value on a board on which every part is as it is called.
    pub nominal: f64,
    /// Smallest value.
    pub low: f64,
    /// Largest value.
    pub high: f64,
    /// What lies between.
    pub shape: Shape,
}

impl Input {
    /// Rectangular about `nominal`.
    pub fn within(nominal: f64, half_width: f64) -> Self {
        Self { nominal, low: nominal - half_width, high: nominal + half_width, shape: Shape::Rectangular }
    }

    /// A value that does not vary.
    pub fn fixed(value: f64) -> Self {
        Self::within(value, 0.0)
    }

    /// False where both ends are the same.
    pub fn varies(&self) -> bool {
        self.high > self.low
    }

    /// Expectation.
    pub fn mean(&self) -> f64 {
        match self.shape {
            Shape::Rectangular => (self.low + self.high) / 2.0,
            Shape::Triangular { mode } => (self.low + mode + self.high) / 3.0,
        }
    }

    /// Standard deviation: half the width over root 3 for a rectangle; for a triangle the textbook formula of three
    /// corners, which is half the width over root 6 when the mode lies in the middle.
    pub fn standard_deviation(&self) -> f64 {
        match self.shape {
            Shape::Rectangular => (self.high - self.low) / 12.0_f64.sqrt(),
            Shape::Triangular { mode } => {
                let (a, b, c) = (self.low, mode, self.high);
                ((a * a + b * b + c * c - a * b - a * c - b * c) / 18.0).max(0.0).sqrt()
            }
        }
    }

    /// The value below which a share `probability` of all boards lies: the inverse of the distribution function.
    pub fn quantile(&self, probability: f64) -> f64 {
        let width = self.high - self.low;
        match self.shape {
            Shape::Rectangular => self.low + width * probability,
            Shape::Triangular { mode } => {
                let rising = mode - self.low;
                if probability * width < rising {
                    self.low + (probability * width * rising).sqrt()
                } else {
                    self.high - ((1.0 - probability) * width * (self.high - mode)).sqrt()
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn close(found: f64, expected: f64) {
        assert!((found - expected).abs() <= 1e-12 * expected.abs().max(1e-3), "{found} and not {expected}");
    }

    /// JCGM 100:2008: a / root 3 in 4.3.7, a / root 6 in 4.3.9, a half the width.
    #[test]
    fn symmetric_shapes_have_the_deviations_of_the_gum() {
        close(Input::within(5.0, 0.3).standard_deviation(), 0.3 / 3.0_f64.sqrt());
        let triangle = Input { shape: Shape::Triangular { mode: 5.0 }, ..Input::within(5.0, 0.3) };
        close(triangle.standard_deviation(), 0.3 / 6.0_f64.sqrt());
        close(triangle.mean(), 5.0);
    }

    /// A triangle of 3, 5 and 8: mean 16/3, variance 19/18, and a share (5 - 3)/(8 - 3) below the mode, by hand.
    #[test]
    fn a_lopsided_triangle_is_worked_out_by_hand() {
        let triangle = Input { nominal: 5.0, low: 3.0, high: 8.0, shape: Shape::Triangular { mode: 5.0 } };
        close(triangle.mean(), 16.0 / 3.0);
        close(triangle.standard_deviation(), (19.0_f64 / 18.0).sqrt());
        close(triangle.quantile(0.4), 5.0);
        close(triangle.quantile(0.1), 4.0);
        close(triangle.quantile(0.0), 3.0);
        close(triangle.quantile(1.0), 8.0);
    }

    #[test]
    fn a_triangle_with_its_mode_at_an_end_is_still_one() {
        let falling = Input { nominal: 0.0, low: 0.0, high: 2.0, shape: Shape::Triangular { mode: 0.0 } };
        close(falling.quantile(0.75), 1.0);
        close(falling.quantile(0.0), 0.0);
    }
}
