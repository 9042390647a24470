//! A board that has passed already is tested again only on purpose, and the record says so.

use super::terminal::typed;
use super::workplace::{BOARD, Workplace};
use ebbmark::record::Occasion;

const TEST: [&str; 6] = ["test", "profile.toml", "--bench", "bench.toml", "--serial-number", BOARD];

/// A bench at which the board has passed.
fn passed() -> Workplace {
    let place = Workplace::new();
    place.test(&[]).ended(0);
    place
}

#[test]
fn without_a_terminal_a_board_that_passed_is_refused_unless_it_is_wanted() {
    let place = passed();
    let first = place.runs().remove(0).identity.run;
    let said = place.test(&[]);
    said.refuses(2, &["board RN-204 RN000123 passed 0 min ago", first.as_str(), "with --again"]);
    assert_eq!((said.out.as_str(), place.runs().len(), place.bench.output()), ("", 1, false), "{said}");
    place.test_board("RN000124", &[]).ended(0);

    let said = place.test(&["--again", "--format", "json"]);
    said.ended(0);
    said.warns(&["passed 0 min ago", "it is tested again, as --again asks for"]);
    assert_eq!(said.json()["occasion"]["again"], first.as_str(), "{said}");
    let runs = place.runs();
    assert_eq!(runs.len(), 3);
    assert_eq!((&runs[2].identity.occasion, runs[2].identity.attempt), (&Occasion::Again(first), 2));
    assert_eq!(runs[0].identity.occasion, Occasion::Production);
}

#[test]
fn at_a_terminal_the_answer_decides() {
    let place = passed();
    let said = typed(place.folder(), &TEST, &[""]);
    said.refuses(2, &["passed 0 min ago", "is it to be tested again?", "the board was not tested again"]);
    assert!(place.runs().len() == 1 && !place.bench.output(), "{said}");

    let said = typed(place.folder(), &TEST, &["y"]);
    said.ended(0);
    let runs = place.runs();
    assert_eq!(runs[1].identity.occasion, Occasion::Again(runs[0].identity.run.clone()));
    assert!(said.out.contains(&format!("again, passed in {}", runs[0].identity.run)), "{said}");
}
