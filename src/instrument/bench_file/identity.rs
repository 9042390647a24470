//! Who an instrument says it is, against who the bench file says it is.

/// What the reply to `*IDN?` must say; what is absent may be anything.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Identity {
    /// First field.
    pub maker: Option<String>,
    /// Second field.
    pub model: Option<String>,
    /// Third field.
    pub serial: Option<String>,
}

/// Another instrument answers than the bench file names.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error(
    "its {field} is \"{found}\", wanted \"{wanted}\"; read \"{reply}\". Is the cable on the right instrument?"
)]
pub struct WrongIdentity {
    /// Which field differs.
    pub field: &'static str,
    /// What the bench file says.
    pub wanted: String,
    /// What the instrument says.
    pub found: String,
    /// The whole reply.
    pub reply: String,
}

impl Identity {
    /// Compares the reply to `*IDN?`: maker, model, serial number and firmware, parted by commas (IEEE 488.2, 10.14).
    /// Spaces around a field and the case of letters do not count.
    ///
    /// # Errors
    /// The first field that differs.
    pub fn check(&self, reply: &str) -> Result<(), WrongIdentity> {
        let mut fields = reply.split(',').map(str::trim);
        for (field, wanted) in
            [("maker", &self.maker), ("model", &self.model), ("serial number", &self.serial)]
        {
            let found = fields.next().unwrap_or_default();
            if let Some(wanted) = wanted
                && !found.eq_ignore_ascii_case(wanted.trim())
            {
                let (wanted, found, reply) = (wanted.clone(), found.to_owned(), reply.to_owned());
                return Err(WrongIdentity { field, wanted, found, reply });
            }
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const REPLY: &str = "Alder Works, PS-32 ,A1017,2.4";

    fn identity(serial: &str) -> Identity {
        Identity { maker: Some("ALDER WORKS".to_owned()), model: None, serial: Some(serial.to_owned()) }
    }

    #[test]
    fn what_is_named_must_agree_and_the_rest_may_be_anything() {
        assert_eq!(identity("A1017").check(REPLY), Ok(()));
        assert_eq!(Identity::default().check(""), Ok(()));
    }

    #[test]
    fn another_or_a_shortened_identity_is_refused() {
        insta::assert_snapshot!(
            identity("A1018").check(REPLY).expect_err("another serial number"),
            @r#"its serial number is "A1017", wanted "A1018"; read "Alder Works, PS-32 ,A1017,2.4". Is the cable on the right instrument?"#
        );
        assert!(identity("A1017").check("Alder Works").is_err());
    }
}
