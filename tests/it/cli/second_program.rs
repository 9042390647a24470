//! Two programs on one bench: the second is turned away, and the first does not notice.

use super::workplace::Workplace;
use ebbmark::verdict::Outcome;

#[test]
fn a_second_program_is_refused_by_the_log_and_by_the_port() {
    let place = Workplace::new();
    // Longer than both others together take.
    place.edit("profile.toml", "step = \"60 mV\"", "step = \"5 mV\"");
    let first = place.test_under_way(&[]);

    let same_log = place.test(&[]);
    same_log.refuses(2, &["logs/sim/.lock is in use by process ", "a second program on the same bench"]);
    assert!(place.bench.output(), "the first goes on\n{same_log}");

    let same_port = place.test(&["--station", "other"]);
    same_port.refuses(3, &["supply on ", "the port is taken by another program"]);
    assert!(place.bench.output(), "the first goes on\n{same_port}");
    assert_eq!((same_log.out, same_port.out), (String::new(), String::new()));

    first.signal("TERM");
    first.end().ended(4);
    assert!(!place.bench.output());
    assert_eq!(place.kept().0.outcome, Outcome::Aborted, "or it was disturbed");
}
