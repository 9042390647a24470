//! What stood at the board's terminals at a set-point, in the state before a change.
//!
//! When the switch opens, the drop in the leads vanishes; when it closes, it returns. So the reading after a change says
//! nothing about the voltage that caused it. A rail is the line of terminal voltage against set-point over the
//! plateaus on which the board stayed in one state: drop and offset of the supply included, noise averaged.

use super::contribution::Contribution;
use super::edges::{Direction, Stay};
use super::plateau::Course;
use crate::statistics::line::{Line, Point};
use crate::trace::Sample;
use crate::units::{Ohms, Volts};

/// Plateaus within this share of the voltage count as near; farther ones only where there are too few.
const NEAR: f64 = 0.05;
/// Fewest plateaus a line is drawn through; below, the terminals are taken as proportional to the set-point.
const FEWEST: usize = 4;
/// Set-points must span this share of the voltage for a slope of their own.
const SPAN: f64 = 0.005;
/// Points farther from the line than this many robust standard deviations had not settled.
const OUTLIER: f64 = 5.0;
/// Median absolute deviation to standard deviation, for a normal distribution.
const MAD_TO_SIGMA: f64 = 1.4826;
/// Deviations below this are arithmetic, in volts.
const ROUNDING: f64 = 1e-9;

/// A plateau a line may be drawn through.
struct Candidate {
    point: Point,
    /// Reached in the direction of the change: a supply that cannot sink lags behind on the way back.
    approached: bool,
    near: bool,
}

/// Terminal voltage against set-point in one state.
#[derive(Clone, Debug)]
pub(super) struct Rail {
    line: Line,
    /// Standard deviation of a plateau about the line, in volts.
    pub(super) scatter: f64,
    /// Plateaus more than the line has parameters; zero where nothing is known of the scatter.
    degrees_of_freedom: usize,
}

impl Rail {
    /// Draws the line near `set` for the state before a change in `direction`; `None` without a single stay there.
    pub(super) fn near(
        course: &Course<'_>,
        stays: &[Stay],
        direction: Direction,
        set: Volts,
    ) -> Option<Self> {
        let candidates: Vec<Candidate> = stays
            .iter()
            .filter(|stay| stay.direction == direction)
            .map(|stay| (point(course, stay.plateau), stay.approached))
            .filter(|(point, _)| point.x.is_finite() && point.y.is_finite())
            .map(|(point, approached)| Candidate {
                point,
                approached,
                near: (point.x - set.0).abs() <= NEAR * set.0.abs(),
            })
            .collect();
        let chosen = |wanted: fn(&Candidate) -> bool| -> Vec<Point> {
            candidates.iter().filter(|candidate| wanted(candidate)).map(|candidate| candidate.point).collect()
        };
        let choices: [fn(&Candidate) -> bool; 3] = [
            |candidate| candidate.approached && candidate.near,
            |candidate| candidate.approached,
            |candidate| candidate.near,
        ];
        let points = choices.into_iter().map(chosen).find(|points| points.len() >= FEWEST);
        let points = points.unwrap_or_else(|| candidates.iter().map(|candidate| candidate.point).collect());
        Self::through(points)
    }

    fn through(mut points: Vec<Point>) -> Option<Self> {
        let first = Self::draw(&points)?;
        let mut deviations: Vec<f64> =
            points.iter().map(|point| (point.y - first.line.at(point.x)).abs()).collect();
        let middle = deviations.len() / 2;
        let (_, median, _) = deviations.select_nth_unstable_by(middle, f64::total_cmp);
        let farthest = OUTLIER * MAD_TO_SIGMA * *median + ROUNDING;
        points.retain(|point| (point.y - first.line.at(point.x)).abs() <= farthest);
        Self::draw(&points).or(Some(first))
    }

    fn draw(points: &[Point]) -> Option<Self> {
        let count = points.len() as f64;
        let mean_x = points.iter().map(|point| point.x).sum::<f64>() / count;
        let mean_y = points.iter().map(|point| point.y).sum::<f64>() / count;
        let widest = points.iter().map(|point| (point.x - mean_x).abs()).fold(0.0, f64::max);
        let fitted = (points.len() >= FEWEST && widest >= SPAN * mean_x.abs())
            .then(|| Line::fit(points.iter().copied()))
            .flatten();
        if let Some(line) = fitted {
            let degrees_of_freedom = points.len() - 2;
            return Some(Self { line, scatter: line.scatter.unwrap_or(0.0), degrees_of_freedom });
        }
        let line = Line::through(mean_x, mean_y, mean_y / mean_x);
        let squares: f64 = points.iter().map(|point| (point.y - line.at(point.x)).powi(2)).sum();
        let scatter = if points.len() > 1 { (squares / (count - 1.0)).sqrt() } else { 0.0 };
        let degrees_of_freedom = points.len().saturating_sub(1);
        line.at(mean_x).is_finite().then_some(Self { line, scatter, degrees_of_freedom })
    }

    /// Voltage at the terminals at set-point `set`.
    pub(super) fn at(&self, set: Volts) -> Volts {
        Volts(self.line.at(set.0))
    }

    /// Volts at the terminals per volt of the set-point.
    pub(super) fn slope(&self) -> f64 {
        self.line.slope
    }

    /// Standard uncertainty of the middle of a bracket at `set`: the line, and two set-points that scatter about it.
    pub(super) fn uncertainty(&self, set: Volts) -> f64 {
        (self.line.uncertainty_at(set.0, self.scatter).powi(2) + self.scatter.powi(2) / 2.0).sqrt()
    }

    /// The same as a line of the budget; none where nothing scatters.
    pub(super) fn line(&self, set: Volts) -> Option<Contribution> {
        let degrees_of_freedom = self.degrees_of_freedom as f64;
        (self.scatter > 0.0).then(|| {
            Contribution::scatter("scatter of the terminals", self.uncertainty(set), degrees_of_freedom)
        })
    }

    /// True when `plateau` settled on the line.
    pub(super) fn holds(&self, course: &Course<'_>, plateau: usize) -> bool {
        let point = point(course, plateau);
        (point.y - self.line.at(point.x)).abs() <= self.tolerance()
    }

    /// How far from the line a voltage may lie that has arrived, in volts.
    pub(super) fn tolerance(&self) -> f64 {
        OUTLIER * self.scatter + ARRIVED
    }
}

/// A plateau this close to the line has arrived, in volts; a tenth of a common step.
const ARRIVED: f64 = 1e-3;

fn point(course: &Course<'_>, plateau: usize) -> Point {
    let sample = course.settled(plateau);
    Point::plain(sample.set.0, course.terminals(sample).0)
}

/// Resistance of source and leads: the slope of set-point less terminal voltage against current. Without a voltmeter it
/// is what the bench claims; `None` where no current ever flowed.
pub(super) fn source_resistance(course: &Course<'_>) -> Option<Ohms> {
    if !course.has_voltmeter() {
        return course.trace.claims.lead_resistance;
    }
    let samples = course.in_scope().flat_map(|plateau| &course.trace.samples[plateau.samples.clone()]);
    // A supply that limits the current gives way by more than its resistance.
    let regulates = |sample: &&Sample| sample.limited != Some(true) && sample.was_limited != Some(true);
    let drops = samples.filter(regulates).filter_map(|sample| {
        let (amps, terminals) = (sample.current.amps()?, sample.sense.map(|_| course.terminals(sample))?);
        let drop = (sample.set - terminals).0;
        // Terminals far above the set-point are a supply that has not come down.
        let came_down = drop > -(LAGS.0 + LAGS.1 * sample.set.0) && drop.is_finite() && amps.is_finite();
        came_down.then_some(Point::plain(amps.0, drop))
    });
    let most = drops.clone().map(|drop| drop.x).fold(0.0, f64::max);
    let load = course.profile.supply.floor / course.profile.load.resistance;
    if most < FLOWS * load.0 {
        return None;
    }
    let slope = Line::fit(drops)?.slope;
    Some(Ohms(slope.max(0.0)))
}

/// Share of the load's current that must have flowed: microamperes say nothing about milliohms.
const FLOWS: f64 = 0.1;

/// Volts, and share of the set-point, by which terminals above it lag behind.
const LAGS: (f64, f64) = (0.02, 0.01);

#[cfg(test)]
mod tests {
    use super::super::edges::Edges;
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;

    /// On, the terminals lie `ohms` times the current below the set-point.
    fn with_leads(readings: &[(f64, f64)], ohms: f64) -> crate::trace::Trace {
        let mut trace = staircase(readings);
        for sample in &mut trace.samples {
            let drop = sample.current.amps().expect("a number").0 * ohms;
            sample.sense = Some(sample.set - Volts(drop));
        }
        trace
    }

    #[test]
    fn the_drop_in_the_leads_is_there_on_and_gone_off() {
        let readings = [on(6.4), on(6.3), on(6.2), on(6.1), off(6.0), off(6.1), off(6.2), off(6.3)];
        let (trace, profile) = (with_leads(&readings, 2.0), profile());
        let course = Course::new(&trace, &profile);
        let stays = Edges::find(&course).stays;
        let rail = |direction| Rail::near(&course, &stays, direction, Volts(6.0)).expect("stays");
        let (on, off) = (rail(Direction::Down), rail(Direction::Up));
        assert!((on.at(Volts(6.0)).0 - 6.0 * (1.0 - 2.0 / 55.0)).abs() < 1e-9);
        assert!((off.at(Volts(6.0)).0 - 6.0).abs() < 1e-4);
        let resistance = source_resistance(&course).expect("both states");
        assert!((resistance.0 - 2.0).abs() < 1e-6, "{resistance}");
    }

    #[test]
    fn a_supply_that_limits_the_current_says_nothing_of_its_resistance() {
        let readings = [on(6.4), on(6.3), on(6.2), on(6.1), off(6.0), off(6.1), off(6.2), off(6.3)];
        for at_rest in [true, false] {
            let mut trace = with_leads(&readings, 2.0);
            let sample = &mut trace.samples[1];
            sample.sense = Some(Volts(3.0));
            (sample.limited, sample.was_limited) = (Some(at_rest), Some(!at_rest));
            let profile = profile();
            let found = source_resistance(&Course::new(&trace, &profile)).expect("both states");
            assert!((found.0 - 2.0).abs() < 1e-6, "{found}");
        }
    }

    #[test]
    fn a_plateau_that_had_not_settled_is_left_out() {
        let sets: Vec<(f64, f64)> = (0..12).map(|step| on(6.4 - 0.01 * f64::from(step))).collect();
        let mut trace = with_leads(&sets, 1.0);
        trace.samples[5].sense = Some(Volts(7.0));
        let profile = profile();
        let course = Course::new(&trace, &profile);
        let stays = Edges::find(&course).stays;
        let rail = Rail::near(&course, &stays, Direction::Down, Volts(6.3)).expect("stays");
        assert!((rail.at(Volts(6.3)).0 - 6.3 * (1.0 - 1.0 / 55.0)).abs() < 1e-6);
        assert!(!rail.holds(&course, 5) && rail.holds(&course, 6));
    }

    #[test]
    fn one_plateau_gives_a_proportion() {
        let (trace, profile) = (with_leads(&[on(7.6), off(5.0)], 1.0), profile());
        let course = Course::new(&trace, &profile);
        let stays = Edges::find(&course).stays;
        let rail = Rail::near(&course, &stays, Direction::Down, Volts(6.0)).expect("one stay");
        assert!((rail.at(Volts(6.0)).0 - 6.0 * (1.0 - 1.0 / 55.0)).abs() < 1e-9);
    }
}
