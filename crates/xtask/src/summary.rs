//! Shows what a test runner prints and keeps the lines with its conclusions.

use std::io::{self, BufRead, BufReader, Read, Write};

/// Passes everything on as it comes, and gives the lines that count tests.
pub(crate) fn forward(from: impl Read, to: &mut dyn Write) -> io::Result<Vec<String>> {
    let mut from = BufReader::new(from);
    let mut conclusions = Vec::new();
    let mut line = Vec::new();
    while from.read_until(b'\n', &mut line)? > 0 {
        to.write_all(&line)?;
        to.flush()?;
        let text = String::from_utf8_lossy(&line);
        if concludes(&text) {
            conclusions.push(text.trim_end().to_owned());
        }
        line.clear();
    }
    Ok(conclusions)
}

/// Whether a line is the conclusion of `cargo test` or pytest over at least one test that was run.
fn concludes(line: &str) -> bool {
    let line = line.trim_matches(['=', ' ', '\r', '\n']);
    let words: Vec<&str> = line
        .split([' ', ';', ','])
        .filter(|word| !word.is_empty())
        .collect();
    let is_count = |word: &str| word.parse::<u64>().is_ok_and(|count| count > 0);
    let is_cargo = line.starts_with("test result: ");
    let is_pytest = line.contains(" in ") && words.first().is_some_and(|word| is_count(word));
    (is_cargo || is_pytest)
        && words
            .windows(2)
            .any(|pair| is_count(pair[0]) && ["passed", "failed"].contains(&pair[1]))
}

#[cfg(test)]
mod tests {
    use super::{concludes, forward};

    #[test]
    fn conclusions_of_both_runners_are_seen() {
        assert!(concludes(
            "test result: ok. 12 passed; 0 failed; 1 ignored; 0 measured; finished in 0.25s\n"
        ));
        assert!(concludes(
            "test result: FAILED. 0 passed; 2 failed; 0 ignored; finished in 0.25s\n"
        ));
        assert!(concludes(
            "============== 4 passed, 1 skipped in 0.11s ===============\n"
        ));
    }

    #[test]
    fn runs_without_a_test_do_not_count() {
        assert!(!concludes(
            "test result: ok. 0 passed; 0 failed; 7 ignored; 0 measured; finished in 0.00s\n"
        ));
        assert!(!concludes(
            "============ no tests ran in 0.01s ============\n"
        ));
        assert!(!concludes("============ 3 skipped in 0.01s ============\n"));
    }

    #[test]
    fn other_lines_do_not_count() {
        assert!(!concludes("\n"));
        assert!(!concludes("12 passed\n"));
        assert!(!concludes("test walls::it_passed in 1 s ... ok\n"));
    }

    #[test]
    fn bytes_that_are_not_text_do_no_harm() {
        let printed = b"\xff\xfe\ntest result: ok. 1 passed; 0 failed\nlast line without an end";
        let mut shown = Vec::new();
        let conclusions = forward(&printed[..], &mut shown).expect("it is read");
        assert_eq!(conclusions, ["test result: ok. 1 passed; 0 failed"]);
        assert_eq!(shown, printed);
    }
}
