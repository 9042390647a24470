//! The search against boards that do exactly what their two thresholds say, and against some that do not.

use super::*;
use crate::trace::{Current, Sample};
use crate::units::Amps;
use std::collections::HashMap;
use std::time::Duration;

const UNIT: Costs = Costs { down: 1.0, up: 1.0 };
const CELL: Volts = Volts(0.002);
const FLOOR: Volts = Volts(5.2);
const LAST: usize = 1200;

fn plan(trip: Option<(f64, f64)>, re_enable: Option<(f64, f64)>) -> SearchPlan {
    let belief = |window: Option<(f64, f64)>| Belief {
        window: window.map(|(low, high)| (Volts(low), Volts(high))),
        earlier: None,
    };
    SearchPlan {
        grid: Grid::new(FLOOR, FLOOR + CELL * LAST as f64, CELL, Volts(0.001)),
        table: SearchPlan::table(UNIT),
        trip: belief(trip),
        re_enable: belief(re_enable),
        tolerance: Volts(0.0),
        overshoot: 0.0,
    }
}

fn armed() -> Sample {
    let volts = FLOOR + CELL * LAST as f64;
    Sample {
        at: Duration::ZERO,
        set: volts,
        sense: Some(volts),
        current: Current::Value(Amps(0.1)),
        load: None,
        range: None,
        limited: Some(false),
        was_limited: None,
    }
}

/// Two windows and nothing outside them, as in the table of the optimum: a search that begins with the board on.
fn bare(cells: usize, largest: usize) -> Search {
    let plan = plan(None, None);
    let side = || Side::new(vec![1.0; 2 * cells + 2], 0, cells, 1);
    let mut search = Search::new(&plan, &armed());
    search.table = Arc::new(Table::new(UNIT, largest));
    (search.trip, search.re_enable) = (side(), side());
    // The re-enable's window lies above the trip's.
    search.re_enable.widest = (cells, 2 * cells);
    search.re_enable.reopen(cells, 2 * cells);
    search
}

/// Expected probes of a search from here on. In windows of cells alike only their sizes matter.
fn expected(search: &Search, known: &mut HashMap<(usize, usize, bool), f64>) -> f64 {
    let sizes = |side: &Side| side.high() - side.low();
    let key = (sizes(&search.trip), sizes(&search.re_enable), search.on);
    if (key.0, key.1) == (1, 1) {
        return 0.0;
    }
    if let Some(cost) = known.get(&key) {
        return *cost;
    }
    let own = if search.on { &search.trip } else { &search.re_enable };
    let through = if search.on { search.trip.low().wrapping_sub(1) } else { search.re_enable.high() - 1 };
    let set_point = if own.window.is_single() { through } else { search.best() };
    let after = |on: bool| {
        let mut search = search.clone();
        // A window without a known changed side is passed in the table all the same.
        if set_point == through {
            search.on = on;
        } else {
            search.note(set_point, on);
        }
        search
    };
    let below = own.window.share_below((set_point.wrapping_add(1)).clamp(own.low(), own.high()));
    let mut cost = 1.0;
    if below > 0.0 {
        cost += below * expected(&after(true), known);
    }
    if below < 1.0 {
        cost += (1.0 - below) * expected(&after(false), known);
    }
    known.insert(key, cost);
    cost
}

/// Expected probes by dynamic programming over all probes, as published with the method's specification; recomputed
/// there from the recursion in [`table`].
const OPTIMUM: [(usize, f64); 6] =
    [(10, 7.44), (20, 9.55), (50, 12.30), (100, 14.37), (200, 16.43), (500, 19.17)];

#[test]
fn the_expected_probes_are_those_of_the_optimum() {
    for (cells, optimum) in OPTIMUM {
        let found = Table::new(UNIT, cells).on(cells as f64, cells as f64);
        assert!((found / optimum - 1.0).abs() < 1e-3, "{cells} cells: {found} probes, {optimum} published");
    }
}

#[test]
fn what_a_run_asks_costs_no_more_than_the_optimum_and_a_hundredth() {
    for (cells, optimum) in OPTIMUM.into_iter().filter(|(cells, _)| *cells <= 200) {
        let found = expected(&bare(cells, table::LARGEST), &mut HashMap::new());
        assert!((found / optimum - 1.0).abs() < 1e-2, "{cells} cells: {found} probes, optimum {optimum}");
    }
}

/// A board with thresholds in these cells, searched to the end; the set-points asked for and what was found.
fn hunt(plan: &SearchPlan, trip: usize, re_enable: usize) -> (usize, Found, Search) {
    let mut search = Search::new(plan, &armed());
    let mut on = true;
    for asked in 0..200 {
        match search.next() {
            Step::Probe(set_point) => {
                // The set-point i is the upper border of cell i.
                on = if on { set_point >= trip } else { set_point >= re_enable };
                search.note(set_point, on);
            }
            Step::Hold(set_point) => {
                let stays = if on { set_point >= trip } else { set_point < re_enable };
                assert!(stays, "held at {set_point}, where a board with {trip} and {re_enable} changes");
                search.stood();
            }
            Step::Done(found) => return (asked, found, search),
        }
    }
    panic!("a board with its thresholds in cells {trip} and {re_enable} was never found");
}

#[test]
fn any_board_is_found_wherever_its_thresholds_lie() {
    let plan = plan(Some((5.88, 6.12)), Some((6.24, 6.56)));
    for trip in (0..LAST).step_by(13) {
        for re_enable in [trip + 1, trip + 2, trip + 70, trip + 200, LAST - 3, LAST, LAST + 1] {
            if re_enable <= trip || re_enable > LAST + 1 {
                continue;
            }
            let (asked, found, search) = hunt(&plan, trip, re_enable);
            let wanted = match (trip, re_enable) {
                (0, _) => Found::NeverTrips,
                (_, re_enable) if re_enable > LAST => Found::NeverReEnables,
                _ => Found::Both,
            };
            assert_eq!(found, wanted, "{trip} {re_enable}");
            assert_eq!(search.contradictions(), 0, "{trip} {re_enable}");
            assert!(asked <= 50, "{trip} {re_enable}: {asked} steps");
            if found == Found::Both {
                assert_eq!((search.trip.low(), search.re_enable.low()), (trip, re_enable));
            }
        }
    }
}

#[test]
fn a_prior_that_lies_costs_probes_and_changes_no_answer() {
    let honest = plan(Some((5.88, 6.12)), Some((6.24, 6.56)));
    let mut drawn = honest.clone();
    let earlier = |mean: f64| Some(Spread { mean: Volts(mean), deviation: Volts(0.01) });
    (drawn.trip.earlier, drawn.re_enable.earlier) = (earlier(6.0), earlier(6.4));
    let cell = |volts: f64| ((volts - FLOOR.0) / CELL.0).ceil() as usize;
    let like = hunt(&drawn, cell(6.003), cell(6.395)).0;
    let flat = hunt(&honest, cell(6.003), cell(6.395)).0;
    assert!(like + 2 < flat, "a board like the earlier ones: {like} steps, without them {flat}");
    for (trip, re_enable) in [(5.89, 6.55), (6.11, 6.25), (5.5, 7.0), (5.3, 5.4)] {
        let (asked, found, search) = hunt(&drawn, cell(trip), cell(re_enable));
        assert_eq!(
            (found, search.trip.low(), search.re_enable.low()),
            (Found::Both, cell(trip), cell(re_enable))
        );
        assert!(asked < 50, "{trip} {re_enable}: {asked} steps");
    }
}

#[test]
fn a_board_that_once_said_the_wrong_thing_is_found_out_and_found() {
    let plan = plan(Some((5.88, 6.12)), Some((6.24, 6.56)));
    let (trip, re_enable) = (405, 611);
    for lie in 0..25 {
        let mut search = Search::new(&plan, &armed());
        let (mut on, mut asked) = (true, 0);
        let found = loop {
            asked += 1;
            assert!(asked < 120, "lie {lie}: never found");
            match search.next() {
                Step::Probe(set_point) => {
                    on = if on { set_point >= trip } else { set_point >= re_enable };
                    // A contact opens for one reading: the board itself did what it had to.
                    search.note(set_point, on && asked != lie);
                }
                Step::Hold(set_point) => {
                    let now = if on { set_point >= trip } else { set_point >= re_enable };
                    let said = search.is_on();
                    on = now;
                    if now == said { search.stood() } else { search.note(set_point, now) }
                }
                Step::Done(found) => break found,
            }
        };
        assert_eq!(found, Found::Both, "lie {lie}");
        assert_eq!((search.trip.low(), search.re_enable.low()), (trip, re_enable), "lie {lie}");
    }
}

#[test]
fn a_board_that_moves_while_held_is_looked_for_next_door_and_then_everywhere() {
    let plan = plan(Some((5.88, 6.12)), Some((6.24, 6.56)));
    let mut search = Search::new(&plan, &armed());
    search.trip.window.narrow(400, 401);
    assert_eq!(search.next(), Step::Hold(400));
    assert!(!search.moved(400));
    assert_eq!((search.trip.low(), search.trip.high(), search.on), (401, 402, false));
    search.note(600, true);
    assert_eq!(search.next(), Step::Hold(401));
    assert!(search.moved(401));
    assert_eq!((search.trip.low(), search.trip.high()), (402, LAST + 1));
    assert_eq!(search.contradictions(), 0);
}

/// Mean time of a search in the river logger's windows on a supply that takes `way` for each volt, down and up, when the
/// table counts each probe as going so many volts `on_average`.
fn mean_time(way: (f64, f64), on_average: f64) -> f64 {
    let (down, up) = (0.043, 0.065);
    let mut plan = plan(Some((5.88, 6.12)), Some((6.24, 6.56)));
    plan.table = SearchPlan::table(Costs { down: down + way.0 * on_average, up: up + way.1 * on_average });
    let mut time = 0.0;
    let boards = 60;
    for board in 0..boards {
        let place = |share: f64| (f64::from(board) * share).fract();
        let (trip, back) = (5.90 + 0.2 * place(0.618_034), 6.30 + 0.22 * place(0.754_878));
        let mut search = Search::new(&plan, &armed());
        let mut at = plan.grid.volts(LAST);
        loop {
            let (set_point, holds) = match search.next() {
                Step::Probe(set_point) => (set_point, false),
                Step::Hold(set_point) => (set_point, true),
                Step::Done(_) => break,
            };
            let volts = plan.grid.volts(set_point);
            let far = (volts - at).0;
            time += if far > 0.0 { up + far * way.1 } else { down - far * way.0 };
            at = volts;
            let was_on = search.is_on();
            let on = if was_on { volts.0 > trip } else { volts.0 >= back };
            search.note(set_point, on);
            if holds && on == was_on {
                search.stood();
            }
        }
    }
    time / f64::from(boards)
}

/// So the search does not count it: DEVELOPERS.md tells what was tried.
#[test]
fn counting_the_way_would_make_no_search_quicker() {
    for way in [(0.05, 0.05), (0.5, 0.5), (1.0, 0.0)] {
        let (without, with) = (mean_time(way, 0.0), mean_time(way, 0.2));
        assert!((with / without - 1.0).abs() < 0.03, "{way:?} s/V: {without} s without, {with} s with");
    }
}
