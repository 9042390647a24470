//! The temperature of the room, as the command line says it.

use crate::units::Celsius;

/// A room outside these is a slip of the keys.
const ROOMS: (Celsius, Celsius) = (Celsius(-20.0), Celsius(60.0));

/// Reads a temperature such as `24 degC`.
pub(super) fn room(text: &str) -> Result<Celsius, String> {
    let room = Celsius::parse(text).map_err(|error| error.to_string())?;
    if ROOMS.0 <= room && room <= ROOMS.1 {
        return Ok(room);
    }
    Err(format!("wanted the temperature of a room, {} to {}", ROOMS.0, ROOMS.1))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_room_has_a_unit_and_is_one() {
        assert_eq!(room("24 degC"), Ok(Celsius(24.0)));
        assert!(room("24").expect_err("no unit").contains("the unit is missing"));
        assert!(room("240 degC").expect_err("an oven").contains("-20.00 °C to 60.00 °C"));
    }
}
