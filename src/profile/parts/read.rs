//! Reads the parts of a board from its profile.

use super::{Detector, Divider, Environment, Parts, Spread, Temperatures, check};
use crate::document::{At, Table};
use crate::units::{Amps, Celsius, Ohms, PerKelvin, Unit, Volts};

/// 0 K (SI Brochure, 9th edition, 2.3.1).
const ABSOLUTE_ZERO: Celsius = Celsius(-273.15);

/// The parts as read, with the place of what is compared with the rest of the profile.
pub(in crate::profile) struct PartsDraft {
    pub(in crate::profile) parts: Parts,
    pub(in crate::profile) trip: At<Volts>,
}

/// Takes the tables of the parts from the root table; `None` where there is no detector, or a problem was noted.
pub(in crate::profile) fn read(root: &mut Table<'_, '_>) -> Option<PartsDraft> {
    let detector = root.optional_table("detector");
    let divider = root.optional_table("divider");
    let environment = root.optional_table("environment");
    let drifts_unplaced = environment.is_none();
    if detector.is_none()
        && let Some(divider) = &divider
    {
        divider.problem_here("[divider] stands alone; wanted a [detector] behind it".to_owned());
    }
    // Every table is read before any is found missing, so that all problems are told at once.
    let divider = divider.map(|table| read_divider(table, drifts_unplaced));
    let environment = environment.map_or(Some(Environment::default()), read_environment);
    let (trip, detector) = read_detector(detector?, drifts_unplaced)?;
    Some(PartsDraft { parts: Parts { detector, divider: given(divider)?, environment: environment? }, trip })
}

/// What may be left out, but not be wrong: `None` only when it was given and could not be read.
fn given<T>(read: Option<Option<T>>) -> Option<Option<T>> {
    read.map_or(Some(None), |value| value.map(Some))
}

fn read_detector(mut table: Table<'_, '_>, drifts_unplaced: bool) -> Option<(At<Volts>, Detector)> {
    let trip = table.quantity::<Volts>("trip");
    check::above_zero(&trip, &table);
    let accuracy = table.fraction("accuracy");
    check::tolerance(&accuracy, &table);
    let hysteresis = table
        .table("hysteresis")
        .and_then(|table| read_spread(table, Unit::Percent, Some(0.0), |share| share));
    let tempco = read_tempco(&mut table, drifts_unplaced);
    let ageing = read_ageing(&mut table);
    let minimum_voltage = table.optional_quantity::<Volts>("minimum_voltage");
    check::above_zero(&minimum_voltage, &table);
    let noise = table.optional_quantity::<Volts>("noise");
    check::noise(&noise, &trip, &table);
    let trip = trip?;
    let detector = Detector {
        trip: trip.value,
        accuracy: accuracy?.value,
        hysteresis: hysteresis?,
        tempco,
        ageing,
        minimum_voltage: minimum_voltage.map(|at| at.value),
        noise: noise.map(|at| at.value),
    };
    Some((trip, detector))
}

fn read_divider(mut table: Table<'_, '_>, drifts_unplaced: bool) -> Option<Divider> {
    let top = table.quantity::<Ohms>("top");
    let bottom = table.quantity::<Ohms>("bottom");
    check::above_zero(&top, &table);
    check::above_zero(&bottom, &table);
    let tolerance = table.fraction("tolerance");
    check::tolerance(&tolerance, &table);
    let tempco = read_tempco(&mut table, drifts_unplaced);
    let ageing = read_ageing(&mut table);
    let sense_current =
        table.optional_table("sense_current").map(|table| read_spread(table, Unit::Ampere, None, Amps));
    let switching_current = table.optional_quantity::<Amps>("switching_current");
    check::not_below(Amps::ZERO, &switching_current, &table);
    Some(Divider {
        top: top?.value,
        bottom: bottom?.value,
        tolerance: tolerance?.value,
        tempco,
        ageing,
        sense_current: given(sense_current)?,
        switching_current: switching_current.map(|at| at.value),
    })
}

fn read_tempco(table: &mut Table<'_, '_>, unplaced: bool) -> PerKelvin {
    let tempco = table.optional_quantity::<PerKelvin>("tempco");
    check::not_below(PerKelvin::ZERO, &tempco, table);
    if let Some(tempco) = &tempco
        && unplaced
    {
        table.problem(tempco, "means nothing without temperatures; wanted [environment] with temperature");
    }
    tempco.map_or(PerKelvin::ZERO, |at| at.value)
}

fn read_ageing(table: &mut Table<'_, '_>) -> f64 {
    let ageing = table.optional_fraction("ageing");
    check::tolerance(&ageing, table);
    ageing.map_or(0.0, |at| at.value)
}

/// `{ min, typical, max }`, of which the typical value may be left out.
fn read_spread<T>(
    mut table: Table<'_, '_>,
    unit: Unit,
    least: Option<f64>,
    wrap: fn(f64) -> T,
) -> Option<Spread<T>> {
    let [min, typical, max] = ["min", "typical", "max"].map(|key| table.optional_value(key, unit));
    if !(table.has("min") && table.has("max")) {
        table.problem_here(
            "one end is missing; wanted \"min\" and \"max\", and \"typical\" where known".to_owned(),
        );
    }
    if let Some(least) = least {
        check::not_below(least, &min, &table);
    }
    check::order(&min, &max, &table);
    check::order(&min, &typical, &table);
    check::order(&typical, &max, &table);
    Some(Spread { min: wrap(min?.value), typical: typical.map(|at| wrap(at.value)), max: wrap(max?.value) })
}

fn read_environment(mut table: Table<'_, '_>) -> Option<Environment> {
    let usual = Environment::default();
    let temperature = table.table("temperature").and_then(read_temperatures);
    let test = table.optional_table("test").map_or(Some(usual.test), read_temperatures);
    let reference = table.optional_quantity::<Celsius>("reference");
    Some(Environment {
        temperature: temperature?,
        test: test?,
        reference: reference.map_or(usual.reference, |at| at.value),
    })
}

fn read_temperatures(mut table: Table<'_, '_>) -> Option<Temperatures> {
    let (min, max) = (table.quantity::<Celsius>("min"), table.quantity::<Celsius>("max"));
    check::order(&min, &max, &table);
    check::not_below(ABSOLUTE_ZERO, &min, &table);
    Some(Temperatures { min: min?.value, max: max?.value })
}
