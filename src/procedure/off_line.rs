//! Where the off current is read: at what its limit names, over the span of its line, and at the stored battery's
//! voltage.

use crate::profile::{Profile, QuantityName};
use crate::units::Volts;

/// The voltages, lowest first, all below the lowest trip. Where no line is asked for the floor is one of them, so that
/// two points hint at the path of an off current that is too large.
pub(super) fn points(profile: &Profile) -> Vec<Volts> {
    let floor = profile.supply.floor;
    let wanted = profile.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
    let stored = profile.pack.storage.and_then(|storage| storage.at);
    let mut points: Vec<Volts> = wanted.into_iter().chain(stored).collect();
    match profile.off_line() {
        Some(line) => points.extend(line.voltages()),
        None => points.push(floor),
    }
    if points.iter().all(|volts| *volts < floor) {
        // The way up begins at the highest; it need not begin below the floor.
        points.push(floor);
    }
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    points.dedup();
    points
}

#[cfg(test)]
mod tests {
    use super::*;

    const RIVER_NODE: &str = include_str!("../../profiles/river-node.toml");

    fn of(text: &str) -> Vec<f64> {
        let profile = Profile::read("p.toml", text).unwrap_or_else(|problems| panic!("{problems}"));
        points(&profile).iter().map(|volts| (volts.0 * 1e9).round() / 1e9).collect()
    }

    #[test]
    fn a_line_has_its_points_and_all_lie_below_every_trip() {
        assert_eq!(of(RIVER_NODE), [2.0, 2.95, 3.9, 4.85, 5.8]);
        let stored = format!("{RIVER_NODE}storage_voltage = \"5.50 V\"\n");
        assert_eq!(of(&stored), [2.0, 2.95, 3.9, 4.85, 5.5, 5.8]);
    }

    #[test]
    fn without_a_line_there_are_the_floor_and_what_the_limit_names() {
        let (plain, _) = RIVER_NODE.split_once("[off_line]").expect("a line");
        assert_eq!(of(plain), [5.2, 5.8]);
    }
}
