//! Header patterns in the notation of SCPI-1999: `[SOURce:]VOLTage[:LEVel]`.
//!
//! Capitals are the short form, the whole word is the long form, and nothing between them is understood (vol. 1, 6.2.1);
//! a node in brackets may be left out (6.2.3).

/// A header that a device understands.
#[derive(Clone, Debug)]
pub(super) struct Pattern(Vec<Node>);

#[derive(Clone, Debug)]
struct Node {
    short: String,
    long: String,
    optional: bool,
}

impl Pattern {
    pub(super) fn new(notation: &str) -> Self {
        let mut nodes = Vec::new();
        let mut optional = false;
        for part in notation.split_inclusive([':', '[', ']']) {
            let name = part.trim_end_matches([':', '[', ']']);
            if !name.is_empty() {
                nodes.push(Node {
                    short: name.chars().filter(|c| !c.is_ascii_lowercase()).collect(),
                    long: name.to_ascii_uppercase(),
                    optional,
                });
            }
            match part.chars().last() {
                Some('[') => optional = true,
                Some(']') => optional = false,
                _ => {}
            }
        }
        Self(nodes)
    }

    /// True when the mnemonics sent, each stripped of its numeric suffix, spell this header.
    pub(super) fn matches(&self, path: &[&str]) -> bool {
        matches(&self.0, path)
    }
}

fn matches(nodes: &[Node], path: &[&str]) -> bool {
    let Some((node, further)) = nodes.split_first() else {
        return path.is_empty();
    };
    let taken =
        path.split_first().is_some_and(|(first, rest)| node.is_spelled(first) && matches(further, rest));
    taken || (node.optional && matches(further, path))
}

impl Node {
    fn is_spelled(&self, mnemonic: &str) -> bool {
        mnemonic.eq_ignore_ascii_case(&self.short) || mnemonic.eq_ignore_ascii_case(&self.long)
    }
}

/// Splits a mnemonic from its numeric suffix; none sent means 1 (SCPI-1999 vol. 1, 6.2.5.2).
///
/// `None` stands for a suffix too large to be one.
pub(super) fn split_suffix(mnemonic: &str) -> (&str, Option<u32>) {
    let name = mnemonic.trim_end_matches(|c: char| c.is_ascii_digit());
    let digits = &mnemonic[name.len()..];
    (name, if digits.is_empty() { Some(1) } else { digits.parse().ok() })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// SCPI-1999 vol. 1, 6.2.1.
    #[test]
    fn only_the_exact_short_and_long_form_are_understood() {
        let pattern = Pattern::new("[SOURce:]VOLTage[:LEVel][:IMMediate][:AMPLitude]");
        for header in
            ["VOLT", "volt", "VOLTAGE", "Voltage", "SOUR:VOLT", "SOURCE:VOLTAGE:LEVEL:IMMEDIATE:AMPLITUDE"]
        {
            assert!(pattern.matches(&header.split(':').collect::<Vec<_>>()), "{header}");
        }
        for header in
            ["VOL", "VOLTA", "VOLTAG", "VOLTAGES", "SOURC:VOLT", "SOUR", "LEV", "VOLT:AMPL:IMM", "VOLT:SOUR"]
        {
            assert!(!pattern.matches(&header.split(':').collect::<Vec<_>>()), "{header}");
        }
    }

    #[test]
    fn any_subset_of_the_optional_nodes_may_be_left_out() {
        let pattern = Pattern::new("[SOURce:]VOLTage[:LEVel][:IMMediate][:AMPLitude]");
        for header in ["VOLT:AMPL", "VOLT:IMM", "SOUR:VOLT:LEV:AMPL"] {
            assert!(pattern.matches(&header.split(':').collect::<Vec<_>>()), "{header}");
        }
    }

    #[test]
    fn a_missing_numeric_suffix_means_one() {
        assert_eq!(split_suffix("OUTP"), ("OUTP", Some(1)));
        assert_eq!(split_suffix("OUTP2"), ("OUTP", Some(2)));
        assert_eq!(split_suffix("OUTP99999999999"), ("OUTP", None));
    }
}
