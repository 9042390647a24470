//! Rows of cells under each other, and sentences broken into lines.

/// Widest line of a report.
pub(super) const WIDTH: usize = 100;

/// Rows as lines: every column as wide as its widest cell, two spaces between columns, nothing after the last cell.
pub(super) fn aligned(rows: &[Vec<String>]) -> Vec<String> {
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let width = |column: usize| {
        rows.iter().filter_map(|row| row.get(column)).map(|cell| cell.chars().count()).max().unwrap_or(0)
    };
    let widths: Vec<usize> = (0..columns).map(width).collect();
    let line = |row: &Vec<String>| {
        let cells: Vec<String> =
            row.iter().zip(&widths).map(|(cell, width)| format!("{cell:<width$}")).collect();
        cells.join("  ").trim_end().to_owned()
    };
    rows.iter().map(line).collect()
}

/// `text` in lines of at most [`WIDTH`] letters, each after `indent`. A longer word keeps its line to itself.
pub(super) fn wrapped(text: &str, indent: &str) -> String {
    let mut lines = String::new();
    let mut line = indent.to_owned();
    for word in text.split_whitespace() {
        let is_empty = line.len() == indent.len();
        if !is_empty && line.chars().count() + 1 + word.chars().count() > WIDTH {
            lines.push_str(&line);
            lines.push('\n');
            line = format!("{indent}{word}");
        } else {
            if !is_empty {
                line.push(' ');
            }
            line.push_str(word);
        }
    }
    lines + &line + "\n"
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn columns_align_by_letters_and_not_by_bytes() {
        let rows = [["µA", "x"], ["ohm", "y"]].map(|row| row.map(str::to_owned).to_vec());
        assert_eq!(aligned(&rows), ["µA   x", "ohm  y"]);
    }

    proptest! {
        #[test]
        fn wrapping_keeps_every_word_and_the_width(words in prop::collection::vec("[a-zµ±]{1,30}", 0..40)) {
            let text = words.join(" ");
            let lines = wrapped(&text, "    ");
            prop_assert!(lines.lines().all(|line| line.chars().count() <= WIDTH));
            prop_assert_eq!(lines.split_whitespace().collect::<Vec<_>>(), words);
        }
    }
}
