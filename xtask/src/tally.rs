//! How many tests ran, read from what `cargo test` prints.

use std::fmt;
use std::ops::AddAssign;

/// The sum over the `test result:` lines read so far.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub(crate) struct Tally {
    passed: u64,
    failed: u64,
    ignored: u64,
    /// Lines that could not be read, although they claim to be results.
    unread: u64,
}

impl Tally {
    /// Counts `line` if it is the result of a test binary or of a crate's doctests.
    pub(crate) fn read_line(&mut self, line: &str) {
        let Some(result) = line.strip_prefix("test result: ") else { return };
        match parse(result) {
            Some([passed, failed, ignored]) => {
                self.passed += passed;
                self.failed += failed;
                self.ignored += ignored;
            }
            None => self.unread += 1,
        }
    }

    /// Refuses a run that proves less than it seems to: no test at all, tests left out, results not understood.
    pub(crate) fn complete(&self) -> Result<(), String> {
        if self.unread > 0 {
            return Err(format!(
                "result lines that could not be read: {}; so the tests are not counted",
                self.unread
            ));
        }
        if self.ignored > 0 {
            return Err(format!("tests that are ignored: {}; assert what holds today instead", self.ignored));
        }
        if self.passed + self.failed == 0 {
            return Err("no test ran".to_owned());
        }
        Ok(())
    }
}

impl AddAssign for Tally {
    fn add_assign(&mut self, other: Self) {
        self.passed += other.passed;
        self.failed += other.failed;
        self.ignored += other.ignored;
        self.unread += other.unread;
    }
}

impl fmt::Display for Tally {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} passed, {} failed", self.passed, self.failed)
    }
}

/// Passed, failed and ignored in `ok. 3 passed; 0 failed; 0 ignored; 0 measured; ...`.
fn parse(result: &str) -> Option<[u64; 3]> {
    let (_, counts) = result.split_once(". ")?;
    let mut parts = counts.split("; ");
    let mut count = |word: &str| parts.next()?.strip_suffix(word)?.strip_suffix(' ')?.parse().ok();
    Some([count("passed")?, count("failed")?, count("ignored")?])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(output: &str, expected: &str, complete: bool) {
        let mut tally = Tally::default();
        output.lines().for_each(|line| tally.read_line(line));
        assert_eq!(tally.to_string(), expected);
        assert_eq!(tally.complete().is_ok(), complete, "{tally:?}");
    }

    #[test]
    fn tally_several_binaries_are_summed() {
        let output = "\
running 2 tests
test a ... ok
test result: ok. 2 passed; 0 failed; 0 ignored; 0 measured; 0 filtered out; finished in 0.01s

   Doc-tests thing
test result: FAILED. 11 passed; 3 failed; 0 ignored; 0 measured; 0 filtered out; finished in 1.20s

all doctests ran in 0.30s; merged doctests compilation took 0.20s
";
        check(output, "13 passed, 3 failed", true);
    }

    #[test]
    fn tally_coloured_word_is_read() {
        let line = "test result: \u{1b}[32mok\u{1b}(B\u{1b}[m. 4 passed; 0 failed; 0 ignored; 0 measured";
        check(line, "4 passed, 0 failed", true);
    }

    #[test]
    fn tally_text_that_is_no_result_counts_nothing() {
        check(
            "  test result: ok. 2 passed; 0 failed; 0 ignored\n7 passed; 0 failed",
            "0 passed, 0 failed",
            false,
        );
    }

    #[test]
    fn tally_no_test_at_all_is_incomplete() {
        check("", "0 passed, 0 failed", false);
        check("test result: ok. 0 passed; 0 failed; 0 ignored; 0 measured", "0 passed, 0 failed", false);
        check("test result: ok. 1 passed; 0 failed; 0 ignored; 0 measured", "1 passed, 0 failed", true);
    }

    #[test]
    fn tally_ignored_test_is_incomplete() {
        check("test result: ok. 5 passed; 0 failed; 1 ignored; 0 measured", "5 passed, 0 failed", false);
    }

    #[test]
    fn tally_unreadable_result_is_incomplete() {
        let good = "test result: ok. 5 passed; 0 failed; 0 ignored; 0 measured";
        check(
            &format!("{good}\ntest result: ok. many passed; 0 failed; 0 ignored"),
            "5 passed, 0 failed",
            false,
        );
    }

    #[test]
    fn tally_of_two_runs_is_added() {
        let mut sum = Tally::default();
        sum.read_line("test result: ok. 5 passed; 1 failed; 2 ignored; 0 measured");
        sum += sum;
        assert_eq!(sum, Tally { passed: 10, failed: 2, ignored: 4, unread: 0 });
    }
}
