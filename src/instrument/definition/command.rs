//! A command with a place for one number.

/// Text of a command with exactly one `{}`, where the number goes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Template(String);

impl Template {
    const PLACE: &'static str = "{}";

    /// `text` as a template; `None` unless it holds exactly one `{}`.
    pub fn new(text: &str) -> Option<Self> {
        (text.matches(Self::PLACE).count() == 1).then(|| Self(text.to_owned()))
    }

    /// The command with `value` in its place, in SI units.
    pub fn with(&self, value: f64) -> String {
        self.0.replace(Self::PLACE, &decimal(value))
    }
}

/// `value` as decimal numeric program data in NR2 form (IEEE 488.2, 7.7.2): no exponent, no unit.
///
/// Nine decimals: a nanovolt or nanoampere, finer than anything that can be set.
fn decimal(value: f64) -> String {
    let text = format!("{value:.9}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_number_stands_in_its_place_without_exponent_or_rounding_dust() {
        let set = Template::new("VOLT {}").expect("one place");
        assert_eq!(set.with(6.0), "VOLT 6");
        assert_eq!(set.with(0.1 + 0.2), "VOLT 0.3");
        assert_eq!(set.with(1e-4), "VOLT 0.0001");
        assert_eq!(set.with(-0.0), "VOLT 0");
        assert_eq!(set.with(30.0), "VOLT 30");
    }

    #[test]
    fn a_command_without_a_place_or_with_two_is_no_template() {
        assert_eq!(Template::new("VOLT 6"), None);
        assert_eq!(Template::new("APPL {},{}"), None);
    }
}
