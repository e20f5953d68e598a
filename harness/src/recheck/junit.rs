//! The answer as JUnit XML, as continuous integration reads it: a suite for each requirement file, a case for each
//! claim.
//!
//! It keeps the schema of the Jenkins xUnit plug-in, junit-10.xsd. There is no time in it, so the same answer gives
//! the same bytes.

use quick_junit::{NonSuccessKind, Report, SerializeError, TestCase, TestCaseStatus, TestSuite};

use super::{Claim, Recheck, Standing};
use crate::problem::Problem;

/// A document of all answers.
///
/// # Errors
/// Where it cannot be written as XML.
pub fn answers(answers: &[Recheck]) -> Result<String, SerializeError> {
    document(answers.iter().map(suite).collect())
}

/// A document for a run that failed before it had an answer.
///
/// # Errors
/// Where it cannot be written as XML.
pub fn failure<'p>(problems: impl Iterator<Item = &'p Problem>) -> Result<String, SerializeError> {
    let mut suite = TestSuite::new("input");
    for problem in problems {
        let mut status = TestCaseStatus::non_success(NonSuccessKind::Error);
        status.set_type("bad input").set_message(problem.message());
        status.set_description(
            [problem.message()]
                .into_iter()
                .chain(problem.helps().iter().map(String::as_str))
                .collect::<Vec<_>>()
                .join("\n"),
        );
        let place = match (problem.path(), problem.line_column()) {
            (Some(path), Some((line, column))) => format!("{}:{line}:{column} can be used", path.display()),
            (Some(path), None) => format!("{} can be used", path.display()),
            (None, _) => "the input can be used".to_owned(),
        };
        suite.add_test_case(named(place, "input", status));
    }
    document(vec![suite])
}

fn suite(answer: &Recheck) -> TestSuite {
    let mut suite = TestSuite::new(answer.requirement.as_str());
    for claim in &answer.claims {
        suite.add_test_case(named(claim.claimed.as_str(), claim.subject.word(), status(claim)));
    }
    suite
}

fn named(name: impl Into<quick_junit::XmlString>, class: &str, status: TestCaseStatus) -> TestCase {
    let mut case = TestCase::new(name, status);
    case.set_classname(class);
    case
}

fn status(claim: &Claim) -> TestCaseStatus {
    match &claim.standing {
        Standing::Holds(_) => TestCaseStatus::success(),
        Standing::Broken(remarks) => {
            let mut status = TestCaseStatus::non_success(NonSuccessKind::Failure);
            status.set_type("broken claim").set_description(remarks.join("\n"));
            status.set_message(remarks.first().map(String::as_str).unwrap_or_default());
            status
        }
        Standing::Open(reason) => {
            let mut status = TestCaseStatus::skipped();
            status.set_message(reason.as_str());
            status
        }
    }
}

fn document(suites: Vec<TestSuite>) -> Result<String, SerializeError> {
    let mut report = Report::new("harness recheck");
    report.add_test_suites(suites);
    // The schema knows this count on a suite, where it stands as well, and not on the whole. The first one in the
    // text is that of the whole: only the name of the report stands before it.
    let count = format!(" skipped=\"{}\"", report.skipped);
    Ok(report.to_string()?.replacen(&count, "", 1))
}
