//! The printed account: certified against found, run by run, and the totals.

use crate::case::{Case, correct_digits};
use crate::solver::Fit;
use std::io::{self, Write};

/// Certified against found, for both starts of a data set.
pub(crate) fn table(out: &mut impl Write, case: &Case, fits: &[Fit; 2]) -> io::Result<()> {
    let data = &case.data;
    let observations = data.responses.len();
    writeln!(
        out,
        "{} ({}), {observations} observations: {}",
        data.name, data.level, data.formula
    )?;
    writeln!(
        out,
        "  {:>4} {:>19} {:>19} {:>7} {:>19} {:>7}",
        "", "certified", "from start 1", "digits", "from start 2", "digits"
    )?;
    for (j, certified) in data.certified.iter().enumerate() {
        row(
            out,
            &format!("b{}", j + 1),
            *certified,
            fits.each_ref().map(|fit| fit.parameters[j]),
        )?;
    }
    row(
        out,
        "rss",
        data.certified_rss,
        fits.each_ref().map(|fit| fit.rss),
    )?;
    let [first, second] = fits.each_ref().map(|fit| case.digits_of_deviations(fit));
    writeln!(
        out,
        "  least digits of the standard deviations {first:>27.1} {second:>27.1}",
    )?;
    for (k, fit) in fits.iter().enumerate() {
        writeln!(
            out,
            "  start {} (rss {:.4e}): {}, ended by {} after {} iterations, {} predictions, {} Jacobians",
            k + 1,
            data.starts[k].rss,
            if case.solved(fit) {
                "solved"
            } else {
                "not solved"
            },
            fit.ending,
            fit.iterations,
            fit.predictions,
            fit.jacobians,
        )?;
    }
    if case.judged_by_parameters() {
        writeln!(
            out,
            "  The sum is beyond double precision: judged by the parameters."
        )?;
    }
    writeln!(out)
}

fn row(out: &mut impl Write, what: &str, certified: f64, found: [f64; 2]) -> io::Result<()> {
    let [first, second] = found;
    let digits = found.map(|found| correct_digits(found, certified));
    writeln!(
        out,
        "  {what:>4} {certified:>19.10e} {first:>19.10e} {:>7.1} {second:>19.10e} {:>7.1}",
        digits[0], digits[1]
    )
}

/// The account of all runs.
#[derive(Debug, Default)]
pub(crate) struct Total {
    runs: usize,
    unsolved: Vec<String>,
    iterations: usize,
    predictions: usize,
    jacobians: usize,
}

impl Total {
    /// Counts one run.
    pub(crate) fn add(&mut self, case: &Case, start: usize, fit: &Fit) {
        self.runs += 1;
        self.iterations += fit.iterations;
        self.predictions += fit.predictions;
        self.jacobians += fit.jacobians;
        if !case.solved(fit) {
            let (name, certified) = (&case.data.name, case.data.certified_rss);
            let found = format!(
                "ended by {} with rss {:.4e}, certified {certified:.4e}",
                fit.ending, fit.rss
            );
            self.unsolved
                .push(format!("{name} from start {start}: {found}"));
        }
    }

    /// The runs that were not solved, the work, and how many were solved.
    pub(crate) fn print(&self, out: &mut impl Write) -> io::Result<()> {
        for run in &self.unsolved {
            writeln!(out, "not solved: {run}")?;
        }
        writeln!(
            out,
            "{} iterations, {} predictions, {} Jacobians",
            self.iterations, self.predictions, self.jacobians
        )?;
        writeln!(
            out,
            "solved {} of {}",
            self.runs - self.unsolved.len(),
            self.runs
        )
    }
}
