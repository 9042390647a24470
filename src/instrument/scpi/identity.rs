//! Who an instrument says it is: the reply to `*IDN?` (IEEE 488.2-1992, 10.14).

use std::fmt;

/// The four fields of the reply to `*IDN?`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Identity {
    /// Maker.
    pub maker: String,
    /// Model.
    pub model: String,
    /// Serial number; `None` where the instrument sends `0`, the standard's word for "not available".
    pub serial: Option<String>,
    /// Firmware level; `None` where the instrument sends `0`.
    pub firmware: Option<String>,
}

impl Identity {
    /// Reads the four fields; the last may hold commas. `None` when there are fewer, or no maker or model.
    pub fn parse(reply: &str) -> Option<Self> {
        let mut fields = reply.splitn(4, ',').map(|field| field.trim().to_owned());
        let (maker, model) = (fields.next()?, fields.next()?);
        let (serial, firmware) = (fields.next()?, fields.next()?);
        if maker.is_empty() || model.is_empty() {
            return None;
        }
        let available = |field: String| Some(field).filter(|field| !field.is_empty() && field != "0");
        Some(Self { maker, model, serial: available(serial), firmware: available(firmware) })
    }
}

impl fmt::Display for Identity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let field = |field: &Option<String>| field.clone().unwrap_or_else(|| "0".to_owned());
        write!(f, "{},{},{},{}", self.maker, self.model, field(&self.serial), field(&self.firmware))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// IEEE 488.2-1992, 10.14.3: four fields, ASCII `0` for what is not available.
    #[test]
    fn four_fields_are_read_and_zero_means_not_available() {
        let full = Identity::parse("EXAMPLE, PS-30 ,SN0042,1.2,3").expect("four fields");
        assert_eq!((full.maker.as_str(), full.model.as_str()), ("EXAMPLE", "PS-30"));
        assert_eq!((full.serial.as_deref(), full.firmware.as_deref()), (Some("SN0042"), Some("1.2,3")));
        let bare = Identity::parse("EXAMPLE,PS-30,0,0").expect("four fields");
        assert_eq!((bare.serial.as_deref(), bare.firmware.as_deref()), (None, None));
        assert_eq!(bare.to_string(), "EXAMPLE,PS-30,0,0");
    }

    #[test]
    fn fewer_fields_or_no_name_are_no_identity() {
        for text in ["", "EXAMPLE", "EXAMPLE,PS-30,1", ",PS-30,1,2", "EXAMPLE, ,1,2", "+3.000E+00"] {
            assert_eq!(Identity::parse(text), None, "{text:?}");
        }
    }
}
