//! The kinds of device on the simulated bench, each a table of headers out of SCPI-1999 vol. 2.

use super::command::{Meaning, Number, Order, Probe, Question, Switch};

/// A kind of device.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Kind {
    /// A programmable supply with its own coarse meters.
    Supply,
    /// A bench meter in series with the board.
    Ammeter,
    /// A bench meter at the board's terminals.
    Voltmeter,
    /// A bench meter at the load, behind the switch.
    LoadVoltmeter,
    /// Supply, ammeter and voltmeter at the terminals behind one port.
    SourceMeasureUnit,
}

type Row = (&'static str, Meaning);

const EVERY_DEVICE: &[Row] = &[
    ("SYSTem:ERRor[:NEXT]", Meaning::Question(Question::Error)),
    ("SYSTem:VERSion", Meaning::Question(Question::Version)),
    ("SYSTem:REMote", Meaning::Order(Order::FrontPanel)),
    ("SYSTem:LOCal", Meaning::Order(Order::FrontPanel)),
    ("SYSTem:RWLock", Meaning::Order(Order::FrontPanel)),
    ("STATus:PRESet", Meaning::Order(Order::PresetStatus)),
    ("STATus:QUEStionable[:EVENt]", Meaning::Question(Question::QuestionableEvent)),
    ("STATus:QUEStionable:CONDition", Meaning::Question(Question::QuestionableCondition)),
    ("STATus:QUEStionable:ENABle", Meaning::Number(Number::QuestionableEnable)),
    ("STATus:OPERation[:EVENt]", Meaning::Question(Question::OperationEvent)),
    ("STATus:OPERation:CONDition", Meaning::Question(Question::OperationCondition)),
    ("STATus:OPERation:ENABle", Meaning::Number(Number::OperationEnable)),
];

const SOURCE: &[Row] = &[
    ("[SOURce:]VOLTage[:LEVel][:IMMediate][:AMPLitude]", Meaning::Number(Number::Volts)),
    ("[SOURce:]CURRent[:LEVel][:IMMediate][:AMPLitude]", Meaning::Number(Number::CurrentLimit)),
    ("[SOURce:]VOLTage:PROTection[:LEVel]", Meaning::Number(Number::OverVoltage)),
    ("OUTPut[:STATe]", Meaning::Switch(Switch::Output)),
];

const OWN_METERS: &[Row] = &[
    ("MEASure[:SCALar]:VOLTage[:DC]", Meaning::Question(Question::Sample(Probe::OwnVolts))),
    ("MEASure[:SCALar]:CURRent[:DC]", Meaning::Question(Question::Sample(Probe::OwnAmps))),
];

const TRIGGERED: &[Row] = &[
    ("READ", Meaning::Question(Question::Read)),
    ("FETCh", Meaning::Question(Question::Fetch)),
    ("INITiate[:IMMediate]", Meaning::Order(Order::Initiate)),
    ("ABORt", Meaning::Order(Order::Abort)),
];

const AMMETER: &[Row] = &[
    ("CONFigure[:SCALar]:CURRent[:DC]", Meaning::Order(Order::Configure(Probe::Current))),
    ("MEASure[:SCALar]:CURRent[:DC]", Meaning::Question(Question::Measure(Probe::Current))),
    ("[SENSe:]CURRent[:DC]:RANGe[:UPPer]", Meaning::Number(Number::Range(Probe::Current))),
    ("[SENSe:]CURRent[:DC]:RANGe:AUTO", Meaning::Switch(Switch::AutoRange(Probe::Current))),
    ("[SENSe:]CURRent[:DC]:NPLCycles", Meaning::Number(Number::LineCycles(Probe::Current))),
];

const VOLTMETER: &[Row] = &[
    ("CONFigure[:SCALar]:VOLTage[:DC]", Meaning::Order(Order::Configure(Probe::Terminals))),
    ("MEASure[:SCALar]:VOLTage[:DC]", Meaning::Question(Question::Measure(Probe::Terminals))),
    ("[SENSe:]VOLTage[:DC]:RANGe[:UPPer]", Meaning::Number(Number::Range(Probe::Terminals))),
    ("[SENSe:]VOLTage[:DC]:RANGe:AUTO", Meaning::Switch(Switch::AutoRange(Probe::Terminals))),
    ("[SENSe:]VOLTage[:DC]:NPLCycles", Meaning::Number(Number::LineCycles(Probe::Terminals))),
];

const LOAD_VOLTMETER: &[Row] = &[
    ("CONFigure[:SCALar]:VOLTage[:DC]", Meaning::Order(Order::Configure(Probe::Load))),
    ("MEASure[:SCALar]:VOLTage[:DC]", Meaning::Question(Question::Measure(Probe::Load))),
    ("[SENSe:]VOLTage[:DC]:RANGe[:UPPer]", Meaning::Number(Number::Range(Probe::Load))),
    ("[SENSe:]VOLTage[:DC]:RANGe:AUTO", Meaning::Switch(Switch::AutoRange(Probe::Load))),
    ("[SENSe:]VOLTage[:DC]:NPLCycles", Meaning::Number(Number::LineCycles(Probe::Load))),
];

/// Here SOURce may be left out, so SENSe may not; and measuring keeps the range, since it must not break the circuit.
const SOURCE_MEASURE_UNIT: &[Row] = &[
    ("CONFigure[:SCALar]:CURRent[:DC]", Meaning::Order(Order::Configure(Probe::Current))),
    ("CONFigure[:SCALar]:VOLTage[:DC]", Meaning::Order(Order::Configure(Probe::Terminals))),
    ("MEASure[:SCALar]:CURRent[:DC]", Meaning::Question(Question::Sample(Probe::Current))),
    ("MEASure[:SCALar]:VOLTage[:DC]", Meaning::Question(Question::Sample(Probe::Terminals))),
    ("SENSe:CURRent[:DC]:RANGe[:UPPer]", Meaning::Number(Number::Range(Probe::Current))),
    ("SENSe:CURRent[:DC]:RANGe:AUTO", Meaning::Switch(Switch::AutoRange(Probe::Current))),
    ("SENSe:CURRent[:DC]:NPLCycles", Meaning::Number(Number::LineCycles(Probe::Current))),
    ("SENSe:VOLTage[:DC]:RANGe[:UPPer]", Meaning::Number(Number::Range(Probe::Terminals))),
    ("SENSe:VOLTage[:DC]:RANGe:AUTO", Meaning::Switch(Switch::AutoRange(Probe::Terminals))),
    ("SENSe:VOLTage[:DC]:NPLCycles", Meaning::Number(Number::LineCycles(Probe::Terminals))),
];

impl Kind {
    /// The headers it understands.
    pub(super) fn rows(self) -> impl Iterator<Item = &'static Row> {
        let own: [&[Row]; 3] = match self {
            Self::Supply => [SOURCE, OWN_METERS, &[]],
            Self::Ammeter => [AMMETER, TRIGGERED, &[]],
            Self::Voltmeter => [VOLTMETER, TRIGGERED, &[]],
            Self::LoadVoltmeter => [LOAD_VOLTMETER, TRIGGERED, &[]],
            Self::SourceMeasureUnit => [SOURCE, SOURCE_MEASURE_UNIT, TRIGGERED],
        };
        EVERY_DEVICE.iter().chain(own.into_iter().flatten())
    }

    /// True when it feeds the board.
    pub(super) fn is_source(self) -> bool {
        matches!(self, Self::Supply | Self::SourceMeasureUnit)
    }

    /// What it can measure; the first is what READ? measures after a reset.
    pub(super) fn probes(self) -> &'static [Probe] {
        match self {
            Self::Supply => &[Probe::OwnVolts, Probe::OwnAmps],
            Self::Ammeter => &[Probe::Current],
            Self::Voltmeter => &[Probe::Terminals],
            Self::LoadVoltmeter => &[Probe::Load],
            Self::SourceMeasureUnit => &[Probe::Current, Probe::Terminals],
        }
    }

    /// The second field of its identity.
    pub(super) fn model(self) -> &'static str {
        match self {
            Self::Supply => "SIM-SUPPLY",
            Self::Ammeter | Self::Voltmeter | Self::LoadVoltmeter => "SIM-METER",
            Self::SourceMeasureUnit => "SIM-SMU",
        }
    }

    /// The first letter of its serial number, so that no two instruments of a bench have the same.
    pub(super) fn letter(self) -> char {
        match self {
            Self::Supply => 'S',
            Self::Ammeter => 'A',
            Self::Voltmeter => 'V',
            Self::LoadVoltmeter => 'L',
            Self::SourceMeasureUnit => 'U',
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const KINDS: [Kind; 5] =
        [Kind::Supply, Kind::Ammeter, Kind::Voltmeter, Kind::LoadVoltmeter, Kind::SourceMeasureUnit];

    /// SCPI-1999 vol. 1, 6.2.1: four letters are their own short form; of longer words the first four letters are,
    /// or the first three when the fourth is a vowel.
    #[test]
    fn every_short_form_follows_the_rule_of_the_standard() {
        for (header, _) in KINDS.into_iter().flat_map(Kind::rows) {
            for word in header.split([':', '[', ']']).filter(|word| !word.is_empty()) {
                let short: String = word.chars().filter(char::is_ascii_uppercase).collect();
                let vowel = word.chars().nth(3).is_some_and(|c| "AEIOUaeiou".contains(c));
                let length = if word.len() > 4 && vowel { 3 } else { word.len().min(4) };
                assert_eq!(short, word[..length].to_uppercase(), "{header}");
            }
        }
    }

    #[test]
    fn no_kind_has_two_meanings_for_one_header() {
        for kind in KINDS {
            let rows: Vec<_> = kind.rows().collect();
            for (header, meaning) in &rows {
                let longest: Vec<&str> =
                    header.split([':', '[', ']']).filter(|word| !word.is_empty()).collect();
                let found: Vec<_> = rows
                    .iter()
                    .filter(|(other, _)| super::super::header::Pattern::new(other).matches(&longest))
                    .collect();
                assert_eq!(found.len(), 1, "{kind:?} {header} {meaning:?} {found:?}");
            }
        }
    }
}
