//! A diagnosis in words, with its evidence, about the board or about the bench.

use serde::{Deserialize, Serialize};

/// One finding.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Finding {
    /// A fixed word for programs.
    pub code: FindingCode,
    /// Whom it concerns.
    pub about: About,
    /// What was seen, with numbers, and what to look at first.
    pub text: String,
}

/// Whether a finding concerns the board or the bench.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum About {
    /// The board under test.
    Board,
    /// The instruments, leads, fixture or procedure. Makes the outcome `INVALID` when it stops a judgement.
    Bench,
}

/// Fixed words for findings.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum FindingCode {
    /// The board stays on down to the floor.
    NeverTrips,
    /// The board does not turn on at the start voltage although the load is there.
    NeverOn,
    /// The board does not come back on the way up.
    NeverReEnables,
    /// The board stays on down to the floor, and off where the switch's gate has too little: nothing opens the switch.
    DetectorStuckOn,
    /// A board that must stay off once tripped came back.
    NotLatched,
    /// A board that must stay off once tripped was not brought back up to show it.
    LatchNotTried,
    /// The load stopped by itself while the switch was closed.
    LoadStopped,
    /// Trip and re-enable voltage are off by the same factor, farther than tolerances go.
    WrongDetectorOption,
    /// Trip voltage above its limit.
    TripHigh,
    /// Trip voltage below its limit.
    TripLow,
    /// Re-enable voltage above its limit.
    ReEnableHigh,
    /// Re-enable voltage below its limit.
    ReEnableLow,
    /// Hysteresis below its limit.
    HysteresisNarrow,
    /// Hysteresis above its limit.
    HysteresisWide,
    /// The board took longer to trip than its limit allows.
    DetectDelayLong,
    /// The board tripped sooner than its limit wants.
    DetectDelayShort,
    /// The board took longer to come back than its limit allows.
    ReleaseDelayLong,
    /// The board came back sooner than its limit wants.
    ReleaseDelayShort,
    /// Resistance of the closed switch above its limit.
    OnResistanceHigh,
    /// Resistance of the closed switch below its limit.
    OnResistanceLow,
    /// The load is not connected.
    NoLoad,
    /// Too little to tell an open switch from a missing load.
    NoCurrent,
    /// The board switches on and off by itself.
    Chatter,
    /// Source resistance times load current is more than the hysteresis.
    SourceResistance,
    /// At a resting set-point the board took longer to change than its design allows.
    SlowerThanDesign,
    /// A step was shorter than the board's delay, so the edge is smeared.
    DwellShorterThanDelay,
    /// More current than the load can draw at the pre-check voltage.
    ShortCircuit,
    /// Conducts like a diode at the pre-check voltage: connected the wrong way round?
    Reversed,
    /// Current flows out of the board.
    BackFeed,
    /// The resistance between supply and board jumps: a contact that comes and goes.
    Contact,
    /// The ammeter's leads are swapped.
    MeterReversed,
    /// The supply puts out another voltage than it was set to, without current too.
    SupplyDisagrees,
    /// Hum of the mains on the voltage at the board.
    Ripple,
    /// The board or the room is not as warm as the profile wants for a test.
    Temperature,
    /// Voltage on the board before the output was on.
    LiveBoard,
    /// Noise at the detector moves the thresholds from pass to pass.
    DetectorNoise,
    /// The terminals did not reach the set-point.
    SupplyNotArrived,
    /// The supply limited the current.
    CurrentLimit,
    /// Current between on and off.
    NeitherOnNorOff,
    /// The ammeter was on a range that cannot see the off current, or overloaded.
    RangeNotAdequate,
    /// Off current above what the limit allows, with a hint at the path.
    OffCurrentHigh,
    /// Off current below what the limit allows.
    OffCurrentLow,
    /// The off current grows with voltage by more or less than the off-state budget allows.
    OffPathResistive,
    /// The part of the off current that stays whatever the voltage is not what the off-state budget allows.
    OffPathConstant,
    /// The off current does not go with the voltage in a straight line.
    OffCurrentBends,
    /// The off current was still moving when its reading ended.
    OffCurrentMoves,
    /// A small range of the ammeter shows no current at all where some must flow.
    MeterFuse,
    /// The battery rises by more than the hysteresis once the load is gone.
    Rebound,
    /// The board came back when lifted after its trip as its battery would lift it.
    RestartsAfterRebound,
    /// What drains the stored battery, board or self-discharge.
    StorageDrain,
    /// Instrument accuracy was not stated, so it is not in the uncertainty.
    AccuracyNotIncluded,
    /// No voltmeter at the board: the drop in the leads is not measured.
    NoVoltmeter,
    /// The calibration of an instrument no longer holds.
    CalibrationOverdue,
    /// The room is outside the temperatures for which an instrument's accuracy is stated.
    OutsideTemperature,
    /// An instrument or its link failed.
    BenchFault,
    /// The run was stopped.
    Aborted,
    /// The run never ended: found at the next start.
    Incomplete,
    /// The board was not seen to discharge after the output went off.
    StillCharged,
    /// The output was not confirmed off.
    OutputMayBeOn,
    /// The trace holds too little to find any threshold.
    NothingToSee,
    /// A delay is bounded only so loosely that its limit cannot be judged.
    DelayNotResolved,
    /// What ramps of several rates say about a delay, and that it agrees with the steps; a note.
    DelayFromRamps,
    /// Steps and ramps do not give the same delay, or not the same threshold.
    DelaysDiffer,
    /// Far below the trip the switch conducts again.
    ConductsWhenDeep,
    /// The terminals did not come down to the deep floor.
    DeepFloorNotReached,
    /// The states a board took when switched on between trip and re-enable; a note.
    InBand,
    /// One of those states is not the one the profile wants.
    UnwantedInBand,
    /// The terminals did not drain, so the board could not be switched on anew.
    InBandNotTried,
    /// A limit asks for a quantity that was not measured, or there is no limit at all.
    NotJudged,
}
