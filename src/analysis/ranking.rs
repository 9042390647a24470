//! The order of findings: what explains the most comes first, and what it explains is dropped.
//!
//! Whoever reads a list looks at its first line. So a cause comes before its consequences, the bench before the board,
//! and what was seen before what is merely worth knowing. Two things that do not explain each other are both kept.

use super::finding::{Finding, FindingCode};
use FindingCode::*;

/// Places in the list, first to last, with the reason for each.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Place {
    /// Somebody may be hurt: act before reading on.
    Danger,
    /// Why the run ended before its time. What comes after was read on the way there.
    Ended,
    /// No current can flow where one should, or a foreign one does: no reading is the board's.
    Path,
    /// The supply did not give what was asked for: what the board did it did for that reason.
    Source,
    /// The switch does not do its work at all, or is not seen to, so there is no threshold to speak of.
    Switch,
    /// It conducts where it must not; met on a small range, that looks like switching by itself.
    Deep,
    /// It does not rest; thresholds read meanwhile are those of a board that moves.
    Restless,
    /// Between on and off; why is not known, or a line above would say it.
    Between,
    /// One part explains both thresholds.
    Part,
    /// The load stopped by itself: explains a current that is missing, and no figure that is off.
    Load,
    /// Too much or too little current while off: the figure that was judged, then where it flows.
    OffCurrent,
    /// Through what the off current flows, from its course over the voltage.
    OffPath,
    /// A figure outside its limits, as it is; a tolerance may be all there is to it.
    Figure,
    /// Slower or noisier than the design allows, which moves figures but fails none by itself.
    Slow,
    /// How long a change took, as it was judged; a slow detector may be all there is to it.
    Timing,
    /// What the board did in a trial of its use.
    Trial,
    /// What could not be judged, where nothing above says why.
    Unjudged,
    /// What follows for the battery.
    Battery,
    /// How far the figures can be trusted.
    Trust,
    /// Worth knowing.
    Note,
}

/// The place of each finding.
fn place(code: FindingCode) -> Place {
    match code {
        OutputMayBeOn => Place::Danger,
        BenchFault | Incomplete | Aborted | ShortCircuit | Reversed | LiveBoard => Place::Ended,
        BackFeed | NoLoad | MeterFuse | MeterReversed => Place::Path,
        SupplyDisagrees | Contact | SupplyNotArrived | CurrentLimit | SourceResistance | Ripple
        | Temperature => Place::Source,
        NeverOn | NoCurrent | DetectorStuckOn | NeverTrips | NeverReEnables | NotLatched => Place::Switch,
        ConductsWhenDeep => Place::Deep,
        Chatter => Place::Restless,
        NeitherOnNorOff => Place::Between,
        WrongDetectorOption => Place::Part,
        LoadStopped => Place::Load,
        OffCurrentHigh | OffCurrentLow => Place::OffCurrent,
        OffPathResistive | OffPathConstant | OffCurrentBends => Place::OffPath,
        TripHigh | TripLow | ReEnableHigh | ReEnableLow | HysteresisNarrow | HysteresisWide
        | OnResistanceHigh | OnResistanceLow => Place::Figure,
        SlowerThanDesign | DwellShorterThanDelay | DetectorNoise => Place::Slow,
        DetectDelayLong | DetectDelayShort | ReleaseDelayLong | ReleaseDelayShort => Place::Timing,
        RestartsAfterRebound | UnwantedInBand => Place::Trial,
        RangeNotAdequate | OffCurrentMoves | DelayNotResolved | DelaysDiffer | DeepFloorNotReached
        | InBandNotTried | LatchNotTried | NothingToSee | NotJudged => Place::Unjudged,
        Rebound => Place::Battery,
        AccuracyNotIncluded | NoVoltmeter | CalibrationOverdue | OutsideTemperature => Place::Trust,
        StillCharged | InBand | DelayFromRamps | StorageDrain => Place::Note,
    }
}

impl FindingCode {
    /// Worth knowing and nothing to look into.
    pub fn is_note(self) -> bool {
        place(self) == Place::Note
    }
}

/// A cause, what is dropped beside it, and why.
pub(crate) const EXPLAINS: &[(FindingCode, &[FindingCode], &str)] = &[
    (NoLoad, &[NeverOn, NoCurrent], "without a load a closed switch draws as little as an open one"),
    (
        BackFeed,
        &[NeverTrips, DetectorStuckOn, NeitherOnNorOff],
        "the other source feeds the load or turns its current round",
    ),
    (
        CurrentLimit,
        &[NeverOn, NoCurrent, Chatter, NeitherOnNorOff],
        "a supply that gives way takes the board below its trip",
    ),
    (SourceResistance, &[NeitherOnNorOff], "a reading across several changes shows their average"),
    (MeterFuse, &[OffCurrentLow], "what the ammeter does not pass it does not show"),
    (DetectorStuckOn, &[NeverTrips], "says of a board that never trips why"),
    (Chatter, &[NeitherOnNorOff], "as above"),
    (
        WrongDetectorOption,
        &[TripHigh, TripLow, ReEnableHigh, ReEnableLow, HysteresisNarrow, HysteresisWide],
        "another option scales all three",
    ),
    (TripHigh, &[ReEnableHigh], "the re-enable voltage is the trip and the hysteresis"),
    (TripLow, &[ReEnableLow], "as above"),
    (HysteresisNarrow, &[ReEnableLow], "as above"),
    (HysteresisWide, &[ReEnableHigh], "as above"),
];

/// Puts `findings` in order and drops what others among them explain; those of one place keep the order they came in.
pub(super) fn rank(mut findings: Vec<Finding>) -> Vec<Finding> {
    let explained: Vec<FindingCode> = EXPLAINS
        .iter()
        .filter(|(cause, _, _)| findings.iter().any(|finding| finding.code == *cause))
        .flat_map(|(_, consequences, _)| consequences.iter().copied())
        .collect();
    findings.retain(|finding| !explained.contains(&finding.code));
    findings.sort_by_key(|finding| place(finding.code));
    findings
}

#[cfg(test)]
mod tests {
    use super::super::finding::About;
    use super::*;

    fn ranked(codes: &[FindingCode]) -> Vec<FindingCode> {
        let finding = |code: &FindingCode| Finding { code: *code, about: About::Board, text: String::new() };
        rank(codes.iter().map(finding).collect()).iter().map(|finding| finding.code).collect()
    }

    #[test]
    fn the_bench_comes_before_the_board_and_causes_before_figures() {
        assert_eq!(
            ranked(&[NoVoltmeter, TripHigh, OffPathResistive, OffCurrentHigh, CurrentLimit]),
            [CurrentLimit, OffCurrentHigh, OffPathResistive, TripHigh, NoVoltmeter]
        );
        assert_eq!(ranked(&[HysteresisNarrow, SourceResistance]), [SourceResistance, HysteresisNarrow]);
        assert_eq!(ranked(&[Chatter, ConductsWhenDeep]), [ConductsWhenDeep, Chatter]);
        assert_eq!(ranked(&[BenchFault, OutputMayBeOn]), [OutputMayBeOn, BenchFault]);
        assert_eq!(
            ranked(&[DetectDelayLong, SlowerThanDesign]),
            [SlowerThanDesign, DetectDelayLong],
            "that it is slow comes before by how much"
        );
    }

    #[test]
    fn what_a_cause_explains_is_dropped() {
        assert_eq!(ranked(&[Chatter, NeitherOnNorOff, SourceResistance]), [SourceResistance, Chatter]);
        assert_eq!(ranked(&[NeverTrips, BackFeed]), [BackFeed]);
        assert_eq!(ranked(&[NeverOn, NoLoad]), [NoLoad]);
        assert_eq!(ranked(&[NeverTrips, DetectorStuckOn]), [DetectorStuckOn]);
        assert_eq!(ranked(&[ReEnableLow, TripLow, WrongDetectorOption]), [WrongDetectorOption]);
        assert_eq!(ranked(&[ReEnableHigh, TripHigh]), [TripHigh]);
        assert_eq!(
            ranked(&[ReEnableHigh, HysteresisNarrow]),
            [ReEnableHigh, HysteresisNarrow],
            "too high is not for want of hysteresis"
        );
    }

    #[test]
    fn two_that_do_not_explain_each_other_are_both_kept() {
        assert_eq!(ranked(&[OffCurrentHigh, WrongDetectorOption]), [WrongDetectorOption, OffCurrentHigh]);
        assert_eq!(ranked(&[TripHigh, OffCurrentHigh]), [OffCurrentHigh, TripHigh]);
        assert_eq!(ranked(&[SlowerThanDesign, OffCurrentHigh]), [OffCurrentHigh, SlowerThanDesign]);
    }

    #[test]
    fn those_of_one_place_keep_their_order() {
        assert_eq!(ranked(&[HysteresisNarrow, TripHigh]), [HysteresisNarrow, TripHigh]);
        assert_eq!(ranked(&[TripHigh, HysteresisNarrow]), [TripHigh, HysteresisNarrow]);
    }

    #[test]
    fn every_cause_stands_before_or_beside_what_it_explains() {
        for (cause, consequences, why) in EXPLAINS {
            assert!(!why.is_empty());
            for consequence in *consequences {
                assert!(place(*cause) <= place(*consequence), "{cause:?} after {consequence:?}");
            }
        }
    }
}
