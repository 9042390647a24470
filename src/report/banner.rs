//! The outcome in letters five lines high, to be read from across the bench.

/// Five rows of five dots a letter; only the letters of the outcomes.
const LETTERS: [(char, [&str; 5]); 17] = [
    ('A', [".###.", "#...#", "#####", "#...#", "#...#"]),
    ('B', ["####.", "#...#", "####.", "#...#", "####."]),
    ('C', [".####", "#....", "#....", "#....", ".####"]),
    ('D', ["####.", "#...#", "#...#", "#...#", "####."]),
    ('E', ["#####", "#....", "####.", "#....", "#####"]),
    ('F', ["#####", "#....", "####.", "#....", "#...."]),
    ('I', ["###", ".#.", ".#.", ".#.", "###"]),
    ('L', ["#....", "#....", "#....", "#....", "#####"]),
    ('M', ["#...#", "##.##", "#.#.#", "#...#", "#...#"]),
    ('N', ["#...#", "##..#", "#.#.#", "#..##", "#...#"]),
    ('O', [".###.", "#...#", "#...#", "#...#", ".###."]),
    ('P', ["####.", "#...#", "####.", "#....", "#...."]),
    ('R', ["####.", "#...#", "####.", "#..#.", "#...#"]),
    ('S', [".####", "#....", ".###.", "....#", "####."]),
    ('T', ["#####", "..#..", "..#..", "..#..", "..#.."]),
    ('V', ["#...#", "#...#", "#...#", ".#.#.", "..#.."]),
    (' ', ["..", "..", "..", "..", ".."]),
];

/// `word` in large letters; a letter that has no large form is left out.
pub(super) fn banner(word: &str) -> Vec<String> {
    let letters: Vec<&[&str; 5]> = word
        .chars()
        .filter_map(|letter| LETTERS.iter().find(|(known, _)| *known == letter))
        .map(|(_, rows)| rows)
        .collect();
    let row = |index: usize| {
        let parts: Vec<&str> = letters.iter().map(|rows| rows[index]).collect();
        parts.join(".").replace('#', "█").replace('.', " ").trim_end().to_owned()
    };
    (0..5).map(row).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::columns::WIDTH;
    use crate::verdict::Outcome;

    #[test]
    fn every_outcome_has_all_its_letters_and_fits_the_width() {
        for outcome in [
            Outcome::Pass,
            Outcome::ConditionalPass,
            Outcome::ConditionalFail,
            Outcome::Fail,
            Outcome::Invalid,
            Outcome::Aborted,
            Outcome::Incomplete,
        ] {
            let word = outcome.word();
            assert!(word.chars().all(|letter| LETTERS.iter().any(|(known, _)| *known == letter)), "{word}");
            assert!(banner(word).iter().all(|row| row.chars().count() <= WIDTH), "{word}");
        }
    }

    #[test]
    fn every_letter_is_a_rectangle() {
        for (letter, rows) in LETTERS {
            assert!(rows.iter().all(|row| row.len() == rows[0].len()), "{letter}");
        }
    }
}
