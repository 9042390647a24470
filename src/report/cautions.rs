//! What everybody at the bench should know before the output goes on.

/// The cautions, to be shown once before a bench is used. Local rules and trained practice come first.
pub const CAUTIONS: &str = "\
Before the output goes on. Local codes, site rules and trained or licensed practice come first.
 1. Check polarity and voltage before connecting a board. Reversed or shorted supplies and batteries
    can burn, vent or explode. Prefer a current-limited supply; fuse a battery at its terminal.
 2. Set current limit and over-voltage protection in the instrument. Software is no safety device.
 3. Load resistors get hot enough to burn. Mount and shield them, and let them cool.
 4. Capacitors keep their charge after the output is off. Wait until the program has measured that
    the board is discharged; do not go by time.
 5. Work on an earthed mat with a wrist strap of 1 megohm, and not near exposed mains.
 6. Do not charge or deeply discharge cells in this fixture. Do not test damaged or swollen ones.
 7. Packs above 60 V DC, and packs of high energy, are outside the scope of this program.
 8. A meter lead in the wrong jack can short the supply. Replace fuses only by the marked kind.
 9. In an emergency cut the mains of the supply: a stop by software needs a link that works.
10. The program gives measurements. It does not certify that a product is safe.
";

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::columns::WIDTH;

    #[test]
    fn the_cautions_defer_to_local_rules_and_fit_a_terminal() {
        assert!(CAUTIONS.lines().next().is_some_and(|line| line.contains("Local codes")));
        assert!(CAUTIONS.lines().all(|line| line.chars().count() <= WIDTH));
    }
}
