//! The contest as records of an experiment, and its report.

use crate::contest::{Account, COMMON_FINDER, COMMON_RULE, TOLERANCE};
use crate::study::Study;
use std::path::Path;
use surefoot::RunEnding;
use surefoot::experiment::analysis::{Measure, Solved};
use surefoot::experiment::report::{Options, write};
use surefoot::experiment::{Ending, Record};

/// Writes the report of the contest to a new file, and says so in a sentence.
///
/// # Errors
/// A sentence if there is a file already, or it cannot be written.
pub(crate) fn report(path: &Path, study: &Study) -> Result<String, String> {
    let by_rule = study
        .rules
        .iter()
        .map(|a| record(study, a, format!("{}, {COMMON_FINDER}", a.label)));
    // Of the finders the common one is among the rules already.
    let finders = study.finders.iter().filter(|a| a.label != COMMON_FINDER);
    let by_finder = finders.map(|a| record(study, a, format!("{COMMON_RULE}, {}", a.label)));
    let records: Vec<Record> = by_rule.chain(by_finder).collect();
    let options = Options::new("A cold store fitted rule by rule, finder by finder")
        .with_solved(Solved::Gradient(TOLERANCE))
        // The contest takes no times.
        .with_measures(&[Measure::Calls, Measure::Iterations]);
    match write(path, &records, &options) {
        Ok(written) => Ok(format!(
            "the report of {} runs is in {}",
            written.runs_shown,
            path.display()
        )),
        Err(error) => Err(error.to_string()),
    }
}

fn record(study: &Study, account: &Account, contender: String) -> Record {
    let report = &account.report;
    let (calls, refused) = (report.evaluations, report.refusals);
    let mut record = Record::new("cold store", report.point.len(), contender);
    record.ending = ending(&report.ending);
    record.note = report.ending.to_string();
    record.iterations = report.iterations;
    (record.values, record.gradients, record.both) = (calls.values, calls.gradients, calls.both);
    (record.too_long, record.too_short, record.outside) =
        (refused.too_long, refused.too_short, refused.outside);
    (record.start_value, record.value) = (study.start_loss, report.value);
    record.gradient_max = report.gradient_max.unwrap_or(f64::NAN);
    record
}

fn ending(ending: &RunEnding<f64>) -> Ending {
    match ending {
        RunEnding::Converged(_) => Ending::Converged,
        RunEnding::AtRounding => Ending::AtRounding,
        RunEnding::SearchFailed(_) => Ending::SearchFailed,
        RunEnding::NotDescent { .. } => Ending::NotDescent,
        RunEnding::IterationsSpent => Ending::IterationsSpent,
        RunEnding::EvaluationsSpent => Ending::EvaluationsSpent,
        RunEnding::Fault(_) => Ending::Fault,
        _ => Ending::Failed,
    }
}
