//! The standard event status register, as `*ESR?` gives it (IEEE 488.2-1992, 11.5.1).

/// Bit 7, power on: the instrument was switched on since the register was last read.
const POWER_ON: u8 = 1 << 7;

/// The register's eight bits. Reading it clears it in the instrument.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct EventStatus(pub u8);

impl EventStatus {
    /// Reads the reply to `*ESR?`: a whole number from 0 to 255.
    pub fn parse(reply: &str) -> Option<Self> {
        reply.trim().parse().ok().map(Self)
    }

    /// Whether the instrument was switched on since the register was last read.
    pub fn power_on(self) -> bool {
        self.0 & POWER_ON != 0
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_power_on_bit_is_128() {
        assert!(EventStatus::parse("128").expect("in range").power_on());
        assert!(EventStatus::parse("+160").expect("in range").power_on());
        assert!(!EventStatus::parse("32").expect("in range").power_on());
    }

    #[test]
    fn what_is_not_a_register_is_refused() {
        for text in ["", "256", "-1", "128.0", "ESR"] {
            assert_eq!(EventStatus::parse(text), None, "{text:?}");
        }
    }
}
