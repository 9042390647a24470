//! How an instrument's serial port is opened and how lines are sent to it.

use crate::document::Table;
use std::time::Duration;

/// Settings of a serial port and habits of the link.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct SerialSettings {
    /// Symbols a second, 300 to 4 000 000.
    pub baud: u32,
    /// Data bits in a character.
    pub data_bits: DataBits,
    /// Parity bit.
    pub parity: Parity,
    /// Stop bits after a character.
    pub stop_bits: StopBits,
    /// Handshake.
    pub flow: FlowControl,
    /// What ends a line sent to the instrument. Replies may end in any of them.
    pub terminator: Terminator,
    /// Pause after each command that has no reply, for instruments without handshake. May be zero.
    pub gap: Duration,
    /// Wait after opening before the first byte is sent: some restart when the port opens. May be zero.
    pub settle: Duration,
}

/// Symbol rates of real ports.
const BAUD: std::ops::RangeInclusive<i64> = 300..=4_000_000;

impl SerialSettings {
    pub(super) fn read(mut table: Table<'_, '_>) -> Option<Self> {
        let baud = table.integer("baud");
        let data_bits = table.integer_choice("data_bits", &[(8, DataBits::Eight), (7, DataBits::Seven)]);
        let parity =
            table.choice("parity", &[("none", Parity::None), ("even", Parity::Even), ("odd", Parity::Odd)]);
        let stop_bits = table.integer_choice("stop_bits", &[(1, StopBits::One), (2, StopBits::Two)]);
        let flow = table.choice(
            "flow",
            &[
                ("none", FlowControl::None),
                ("xon_xoff", FlowControl::XonXoff),
                ("rts_cts", FlowControl::RtsCts),
            ],
        );
        let terminator = table.choice(
            "terminator",
            &[("lf", Terminator::Lf), ("crlf", Terminator::CrLf), ("cr", Terminator::Cr)],
        );
        let gap = table.duration("gap");
        let settle = table.duration("settle");
        let baud = baud?;
        if !BAUD.contains(&baud.value) {
            table.problem(&baud, "wanted 300 to 4000000");
        }
        Some(Self {
            baud: u32::try_from(baud.value).ok()?,
            data_bits: data_bits?.value,
            parity: parity?.value,
            stop_bits: stop_bits?.value,
            flow: flow?.value,
            terminator: terminator?.value,
            gap: gap?.value,
            settle: settle?.value,
        })
    }

    /// Time `characters` spend on the wire: a start bit, the data, parity and stop bits each.
    pub fn wire_time(&self, characters: u32) -> Duration {
        let data = match self.data_bits {
            DataBits::Seven => 7,
            DataBits::Eight => 8,
        };
        let parity = u32::from(self.parity != Parity::None);
        let stop = match self.stop_bits {
            StopBits::One => 1,
            StopBits::Two => 2,
        };
        Duration::from_secs(1) * characters * (1 + data + parity + stop) / self.baud
    }
}

/// Data bits in a character.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum DataBits {
    /// 7
    Seven,
    /// 8
    Eight,
}

/// Parity bit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Parity {
    /// `"none"`
    None,
    /// `"even"`
    Even,
    /// `"odd"`
    Odd,
}

/// Stop bits after a character.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StopBits {
    /// 1
    One,
    /// 2
    Two,
}

/// Handshake of the port.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FlowControl {
    /// `"none"`: three wires.
    None,
    /// `"xon_xoff"`: in band; not every adapter honours it.
    XonXoff,
    /// `"rts_cts"`: needs a cable with these wires.
    RtsCts,
}

/// What ends a line sent to the instrument.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Terminator {
    /// `"lf"`
    Lf,
    /// `"crlf"`
    CrLf,
    /// `"cr"`
    Cr,
}

impl Terminator {
    /// Its characters.
    pub fn text(self) -> &'static str {
        match self {
            Self::Lf => "\n",
            Self::CrLf => "\r\n",
            Self::Cr => "\r",
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ten_bits_a_character_at_9600_baud_take_about_a_millisecond() {
        let settings = SerialSettings {
            baud: 9600,
            data_bits: DataBits::Eight,
            parity: Parity::None,
            stop_bits: StopBits::One,
            flow: FlowControl::None,
            terminator: Terminator::Lf,
            gap: Duration::ZERO,
            settle: Duration::ZERO,
        };
        assert_eq!(settings.wire_time(96), Duration::from_millis(100));
        let longest = SerialSettings { parity: Parity::Even, stop_bits: StopBits::Two, ..settings };
        assert_eq!(longest.wire_time(96), Duration::from_millis(120));
    }
}
