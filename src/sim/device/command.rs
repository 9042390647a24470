//! What the headers of a device mean, as data: each kind of device is a table of header patterns and these words.

/// What is measured, and where.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Probe {
    /// Voltage at the supply's own terminals, by its own meter.
    OwnVolts,
    /// Current out of the supply, by its own meter.
    OwnAmps,
    /// Current into the board.
    Current,
    /// Voltage at the board's terminals.
    Terminals,
    /// Voltage at the load, behind the switch.
    Load,
}

/// What a header stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Meaning {
    /// A number that is set, and asked for with a question mark.
    Number(Number),
    /// A state that is set, and asked for with a question mark.
    Switch(Switch),
    /// Only asked.
    Question(Question),
    /// Only told.
    Order(Order),
}

/// A number that can be set.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Number {
    /// Set-point of the supply, V.
    Volts,
    /// Current limit of the supply, A.
    CurrentLimit,
    /// Over-voltage protection of the supply, V.
    OverVoltage,
    /// Full scale of a meter, A or V.
    Range(Probe),
    /// Integration time of a meter in power line cycles.
    LineCycles(Probe),
    /// Which questionable events are summed up in the status byte.
    QuestionableEnable,
    /// Which operation events are summed up in the status byte.
    OperationEnable,
}

/// A state that can be set.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Switch {
    /// The supply's output.
    Output,
    /// Whether a meter looks for its range itself.
    AutoRange(Probe),
}

/// Something only asked.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Question {
    /// Configures afresh and measures: the range is looked for unless one is given, one line cycle is integrated.
    Measure(Probe),
    /// Measures as configured for this probe.
    Sample(Probe),
    /// Measures what was configured last.
    Read,
    /// The last reading again.
    Fetch,
    /// The oldest error.
    Error,
    /// The year of SCPI the device follows.
    Version,
    /// Questionable conditions as they stand.
    QuestionableCondition,
    /// Questionable events since last asked.
    QuestionableEvent,
    /// Operation conditions as they stand.
    OperationCondition,
    /// Operation events since last asked.
    OperationEvent,
}

/// Something only told.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Order {
    /// Chooses what is measured.
    Configure(Probe),
    /// Measures and keeps the reading.
    Initiate,
    /// Stops a measurement; none ever runs on.
    Abort,
    /// Remote or local: there is no front panel to lock.
    FrontPanel,
    /// Enables no event.
    PresetStatus,
}
