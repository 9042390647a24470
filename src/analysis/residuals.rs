//! Whether points lie about their line as their noise says, or along a bend.

use crate::statistics::line::{Line, Point};

/// How points lie about a line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Shape {
    /// As their noise says.
    Straight,
    /// The current grows faster the higher the voltage, as through a diode.
    BendsUp,
    /// It grows ever more slowly.
    BendsDown,
    /// Farther off than their noise, to no pattern.
    Scattered,
}

/// A chance so small is none.
const CHANCE: f64 = 1e-3;
/// Its standard normal quantile (any table).
const NORMAL: f64 = 3.090;
/// Share of the squares that lies in the bend, for it to be called one.
const MOST: f64 = 0.5;

/// The differences between points and line.
pub(super) struct Residuals {
    /// Sum of the weighted squares.
    squares: f64,
    /// Chance that the points scatter so much about a straight line.
    chance: f64,
    /// The part of them that a parabola explains, as a standard normal under a straight line; positive upwards.
    bend: f64,
    largest: f64,
}

impl Residuals {
    pub(super) fn of(points: &[Point], line: &Line) -> Self {
        let rest = |point: &Point| point.y - line.at(point.x);
        let middle = points.iter().map(|point| point.x).sum::<f64>() / points.len() as f64;
        // The parabola less what a line can follow of it.
        let parabola = |point: &Point| Point { y: (point.x - middle).powi(2), ..*point };
        let followed = Line::fit(points.iter().map(parabola));
        let bow = |point: &Point| parabola(point).y - followed.map_or(0.0, |line| line.at(point.x));
        let product: f64 = points.iter().map(|point| point.weight * bow(point) * rest(point)).sum();
        let size: f64 = points.iter().map(|point| point.weight * bow(point).powi(2)).sum();
        Self {
            squares: points.iter().map(|point| point.weight * rest(point).powi(2)).sum(),
            chance: line.residual_test().unwrap_or(1.0),
            bend: if size > 0.0 { product / size.sqrt() } else { 0.0 },
            largest: points.iter().map(|point| rest(point).abs()).fold(0.0, f64::max),
        }
    }

    /// The largest difference.
    pub(super) fn largest(&self) -> f64 {
        self.largest
    }

    /// Chi-squared of all residuals, and the part of a parabola by itself, each against one in a thousand.
    pub(super) fn shape(&self) -> Shape {
        let scattered = self.chance < CHANCE;
        let bent = self.bend.powi(2) > MOST * self.squares && self.bend.abs() > NORMAL;
        match (scattered, bent) {
            (_, true) if self.bend > 0.0 => Shape::BendsUp,
            (_, true) => Shape::BendsDown,
            (true, false) => Shape::Scattered,
            (false, false) => Shape::Straight,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn shape(rests: &[f64]) -> Shape {
        let point = |(i, rest): (usize, &f64)| Point { x: i as f64, y: i as f64 + rest, weight: 1.0 };
        let points: Vec<Point> = rests.iter().enumerate().map(point).collect();
        let line = Line::fit(points.iter().copied()).expect("a line");
        Residuals::of(&points, &line).shape()
    }

    #[test]
    fn bends_are_told_from_scatter_and_noise() {
        assert_eq!(shape(&[0.5, -0.8, 0.3, 0.9, -0.9]), Shape::Straight);
        assert_eq!(shape(&[0.0, 1.0, 4.0, 9.0, 16.0]), Shape::BendsUp);
        assert_eq!(shape(&[0.0, -1.0, -4.0, -9.0, -16.0]), Shape::BendsDown);
        assert_eq!(shape(&[0.0, 9.0, -9.0, 9.0, 0.0, -9.0]), Shape::Scattered);
    }
}
