//! The report of an experiment: one HTML file that needs nothing but a browser.
//!
//! It begins with the recommendation and what it rests on; then come each contender's figures, the profiles, the head-to-head
//! table, the problems one by one, what failed, and the runs, each with its trials where a trial log was given. It loads nothing,
//! works by keyboard, in light and dark, and at the width of a phone. Without scripts everything but the table of runs is there.
//!
//! However many records there are, the file stays small: aggregates are whole, and of long lists so many lines are shown as
//! fit, with the count of those left out.

mod figures;
mod page;
mod runs;
mod searches;
mod tables;

use super::analysis::{AnalysisError, CostTable, Measure, Solved, Sweep};
use super::{Record, TrialLog};
use crate::plot::{Picture, WriteError, write_text};
use std::path::Path;
use std::string::String;
use std::vec::Vec;

/// What a report shows, and how.
#[derive(Clone, Debug)]
pub struct Options {
    pub(super) title: String,
    pub(super) solved: Solved,
    pub(super) measures: Vec<Measure>,
    pub(super) sweep: Option<(Sweep, Measure)>,
    pub(super) pictures: Vec<(String, Picture)>,
    pub(super) trials: Vec<TrialLog>,
    pub(super) most_runs: usize,
    pub(super) overwrite: bool,
}

impl Default for Options {
    fn default() -> Self {
        Options {
            title: "An experiment".into(),
            solved: Solved::default(),
            measures: std::vec![Measure::Calls, Measure::Iterations, Measure::Seconds],
            sweep: None,
            pictures: Vec::new(),
            trials: Vec::new(),
            most_runs: 20_000,
            overwrite: false,
        }
    }
}

impl Options {
    /// All defaults, with this title.
    pub fn new(title: &str) -> Self {
        Options {
            title: title.into(),
            ..Self::default()
        }
    }

    /// The convergence test; default [`Solved::Converged`].
    #[must_use]
    pub fn with_solved(self, solved: Solved) -> Self {
        Options { solved, ..self }
    }

    /// The measures of cost, the one that the recommendation goes by first; default calls, iterations, seconds. None given:
    /// calls.
    #[must_use]
    pub fn with_measures(self, measures: &[Measure]) -> Self {
        Options {
            measures: measures.to_vec(),
            ..self
        }
    }

    /// Shows the grid of a sweep, whose costs are in units of `measure`.
    #[must_use]
    pub fn with_sweep(self, sweep: Sweep, measure: Measure) -> Self {
        Options {
            sweep: Some((sweep, measure)),
            ..self
        }
    }

    /// Adds a picture, such as a step profile, with a caption.
    #[must_use]
    pub fn with_picture(mut self, caption: &str, picture: Picture) -> Self {
        self.pictures.push((caption.into(), picture));
        self
    }

    /// Trial logs; their runs come first in the table of runs, each with pictures of its searches.
    #[must_use]
    pub fn with_trials(self, trials: Vec<TrialLog>) -> Self {
        Options { trials, ..self }
    }

    /// The longest table of runs; default 20,000. It ends earlier where its text would pass 8 MB.
    #[must_use]
    pub fn with_most_runs(self, most_runs: usize) -> Self {
        Options { most_runs, ..self }
    }

    /// Whether a file that is there may be written over; default no.
    #[must_use]
    pub fn with_overwrite(self, overwrite: bool) -> Self {
        Options { overwrite, ..self }
    }
}

/// What became of a report.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub struct Written {
    /// Size of the file.
    pub bytes: u64,
    /// Runs in the table.
    pub runs_shown: u64,
    /// Runs that are in the aggregates only.
    pub runs_left_out: u64,
}

/// Why there is no report.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ReportError {
    /// The records cannot be analysed.
    #[error(transparent)]
    Analysis(#[from] AnalysisError),
    /// The file was not written.
    #[error(transparent)]
    Write(#[from] WriteError),
}

/// Writes the report of these records to a file. The folder must be there.
///
/// ```
/// use surefoot::experiment::{Ending, Record, report};
/// let mut record = Record::new("Valley", 2, "weak Wolfe");
/// (record.ending, record.both) = (Ending::Converged, 55);
/// let path = std::env::temp_dir().join(format!("report-{}.html", std::process::id()));
/// let written = report::write(&path, &[record], &report::Options::new("Which rule?"))?;
/// assert_eq!((written.runs_shown, written.runs_left_out), (1, 0));
/// # std::fs::remove_file(path)?;
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// # Errors
/// [`ReportError::Analysis`] if the records cannot be analysed, [`ReportError::Write`] if the file is there already (see
/// [`Options::with_overwrite`]) or cannot be written.
pub fn write(
    path: impl AsRef<Path>,
    records: &[Record],
    options: &Options,
) -> Result<Written, ReportError> {
    let (html, mut written) = compose(records, options)?;
    write_text(path.as_ref(), &html, options.overwrite)?;
    written.bytes = html.len() as u64;
    Ok(written)
}

/// The text of the report.
///
/// # Errors
/// [`ReportError::Analysis`] if the records cannot be analysed.
pub fn html(records: &[Record], options: &Options) -> Result<String, ReportError> {
    Ok(compose(records, options)?.0)
}

fn compose(records: &[Record], options: &Options) -> Result<(String, Written), ReportError> {
    let mut measures = options.measures.clone();
    if measures.is_empty() {
        measures.push(Measure::Calls);
    }
    let tables = measures
        .iter()
        .map(|&measure| CostTable::new(records, measure, options.solved))
        .collect::<Result<Vec<_>, _>>()?;
    let drawn = searches::templates(records, &options.trials);
    let listed = runs::listed(records, &drawn.runs, options.most_runs);
    let written = Written {
        bytes: 0,
        runs_shown: listed.shown as u64,
        runs_left_out: (records.len() - listed.shown) as u64,
    };
    Ok((
        page::page(records, options, &tables, &listed, &drawn),
        written,
    ))
}
