//! A small supply and meter on the parser of the crate `scpi`.

use crate::scripted::{Act, Device as Unused, Scripted};
use scpi::error::Result;
use scpi::parser::format::Character;
use scpi::tree::prelude::{Command, Context, Error, ErrorCode, Node, Parameters, ResponseUnit};
use scpi::{Branch, Leaf, Root, cmd_both, cmd_nquery, cmd_qonly};
use std::collections::BTreeMap;

/// What the instrument on the outside parser remembers.
#[derive(Default)]
pub(super) struct Supply {
    values: BTreeMap<&'static str, f64>,
    errors: Vec<Error>,
    event_status: u8,
}

impl scpi::Device for Supply {
    fn handle_error(&mut self, error: Error) {
        self.event_status |= error.esr_mask();
        self.errors.push(error);
    }
}

/// A number that can be set, within limits, and asked for.
struct Value {
    name: &'static str,
    largest: f64,
}

impl Command<Supply> for Value {
    cmd_both!();

    fn event(&self, supply: &mut Supply, _: &mut Context, mut parameters: Parameters) -> Result<()> {
        let value: f64 = parameters.next_data()?;
        if !(0.0..=self.largest).contains(&value) {
            return Err(ErrorCode::DataOutOfRange.into());
        }
        supply.values.insert(self.name, value);
        Ok(())
    }

    fn query(
        &self,
        supply: &mut Supply,
        _: &mut Context,
        _: Parameters,
        mut reply: ResponseUnit,
    ) -> Result<()> {
        reply.data(supply.values.get(self.name).copied().unwrap_or_default()).finish()
    }
}

/// A boolean that can be set and asked for.
struct Switch(&'static str);

impl Command<Supply> for Switch {
    cmd_both!();

    fn event(&self, supply: &mut Supply, _: &mut Context, mut parameters: Parameters) -> Result<()> {
        let on: bool = parameters.next_data()?;
        supply.values.insert(self.0, f64::from(u8::from(on)));
        Ok(())
    }

    fn query(
        &self,
        supply: &mut Supply,
        _: &mut Context,
        _: Parameters,
        mut reply: ResponseUnit,
    ) -> Result<()> {
        reply.data(supply.values.get(self.0).is_some_and(|value| *value > 0.0)).finish()
    }
}

/// A reading.
struct Reading(f64);

impl Command<Supply> for Reading {
    cmd_qonly!();

    fn query(&self, _: &mut Supply, _: &mut Context, _: Parameters, mut reply: ResponseUnit) -> Result<()> {
        reply.data(self.0).finish()
    }
}

/// A command without parameter that changes nothing here.
struct Bare;

impl Command<Supply> for Bare {
    cmd_nquery!();

    fn event(&self, _: &mut Supply, _: &mut Context, _: Parameters) -> Result<()> {
        Ok(())
    }
}

/// Registers, which are whole numbers.
struct Register(fn(&mut Supply) -> u8);

impl Command<Supply> for Register {
    cmd_qonly!();

    fn query(
        &self,
        supply: &mut Supply,
        _: &mut Context,
        _: Parameters,
        mut reply: ResponseUnit,
    ) -> Result<()> {
        reply.data((self.0)(supply)).finish()
    }
}

struct NextError;

impl Command<Supply> for NextError {
    cmd_qonly!();

    fn query(
        &self,
        supply: &mut Supply,
        _: &mut Context,
        _: Parameters,
        mut reply: ResponseUnit,
    ) -> Result<()> {
        let none = supply.errors.is_empty();
        reply.data(if none { Error::default() } else { supply.errors.remove(0) }).finish()
    }
}

struct WhoAreYou;

impl Command<Supply> for WhoAreYou {
    cmd_qonly!();

    fn query(&self, _: &mut Supply, _: &mut Context, _: Parameters, mut reply: ResponseUnit) -> Result<()> {
        let fields = ["EXAMPLE", "PS-30", "0", "1.0"];
        fields.iter().fold(&mut reply, |reply, field| reply.data(Character(field.as_bytes()))).finish()
    }
}

/// The headers of SCPI-1999, volume 2, that the definitions use, with their optional nodes.
pub(super) const TREE: Node<'static, Supply> = Root![
    Leaf!(b"*IDN" => &WhoAreYou),
    Leaf!(b"*RST" => &Bare),
    Leaf!(b"*CLS" => &Bare),
    Leaf!(b"*ESR" => &Register(|supply| std::mem::take(&mut supply.event_status))),
    Leaf!(b"*STB" => &Register(|_| 0)),
    Leaf!(b"*ESE" => &Value { name: "*ESE", largest: 255.0 }),
    Branch![b"SYSTem"; Branch![b"ERRor"; Leaf!(default b"NEXT" => &NextError)]],
    Branch![b"OUTPut"; Leaf!(default b"STATe" => &Switch("OUTP"))],
    Branch![b"STATus"; Branch![b"QUEStionable";
        Leaf!(default b"EVENt" => &Register(|_| 1)),
        Leaf!(b"CONDition" => &Register(|_| 1))
    ]],
    Branch![b"MEASure";
        Branch![b"CURRent"; Leaf!(default b"DC" => &Reading(2.4e-6))],
        Branch![b"VOLTage"; Leaf!(default b"DC" => &Reading(5.96))]
    ],
    Branch![b"CONFigure";
        Branch![b"CURRent"; Leaf!(default b"DC" => &Bare)],
        Branch![b"VOLTage"; Leaf!(default b"DC" => &Bare)]
    ],
    Leaf!(b"READ" => &Reading(f64::INFINITY)),
    Branch![b"SENSe";
        Branch![b"CURRent";
            Branch![b"RANGe"; Leaf!(default b"UPPer" => &Value { name: "SENS:CURR:RANG", largest: 10.0 })],
            Leaf!(b"NPLCycles" => &Value { name: "SENS:CURR:NPLC", largest: 100.0 })
        ],
        Branch![b"VOLTage";
            Branch![b"RANGe"; Leaf!(default b"UPPer" => &Value { name: "SENS:VOLT:RANG", largest: 1000.0 })],
            Leaf!(b"NPLCycles" => &Value { name: "SENS:VOLT:NPLC", largest: 100.0 })
        ]
    ],
    Branch![default b"SOURce";
        Branch![b"VOLTage";
            Leaf!(default b"LEVel" => &Value { name: "VOLT", largest: 32.0 }),
            Branch![b"PROTection"; Leaf!(default b"LEVel" => &Value { name: "VOLT:PROT", largest: 35.0 })]
        ],
        Branch![b"CURRent"; Leaf!(default b"LEVel" => &Value { name: "CURR", largest: 3.0 })]
    ]
];

/// The instrument on a pseudo-terminal.
pub(super) fn served() -> Scripted {
    let mut supply = Supply { event_status: 128, ..Supply::default() };
    Scripted::start(Unused::default(), move |_, line| {
        let mut reply = Vec::new();
        match TREE.run(line.as_bytes(), &mut supply, &mut Context::default(), &mut reply) {
            Ok(()) if !reply.is_empty() => vec![Act::Say(String::from_utf8(reply).expect("ASCII"))],
            _ => Vec::new(),
        }
    })
}
