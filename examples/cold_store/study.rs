//! Everything that is found out about one set of readings.

use crate::contest::{Account, Agreement, TOLERANCE, agreement, by_finder, by_rule, lowest};
use crate::estimates::{Estimates, estimates};
use crate::fit::Fit;
use crate::readings::Row;
use crate::residuals::{Sensor, sensors};
use surefoot::Objective;

/// What was found; its `Display`, in `page.rs`, is the page that a person reads.
#[derive(Clone, Debug)]
pub(crate) struct Study {
    /// Where the readings came from.
    pub(crate) source: String,
    pub(crate) rows: Vec<Row>,
    pub(crate) start_loss: f64,
    /// The common finder under each rule.
    pub(crate) rules: Vec<Account>,
    pub(crate) agreement_of_rules: Agreement,
    /// Each finder under the common rule.
    pub(crate) finders: Vec<Account>,
    pub(crate) agreement_of_finders: Agreement,
    /// Of the run with the lowest loss, and whether that run converged.
    pub(crate) estimates: Estimates,
    pub(crate) converged: bool,
    /// Air, then product.
    pub(crate) sensors: [Sensor; 2],
}

impl Study {
    /// Fits under every rule and with every finder. `None` if the loss is not finite where a fit begins.
    pub(crate) fn new(source: String, rows: Vec<Row>) -> Option<Self> {
        let mut fit = Fit::new(&rows);
        let Ok(start_loss) = fit.value(&fit.origin());
        let (rules, finders) = (by_rule(&fit, TOLERANCE), by_finder(&fit, TOLERANCE));
        let best = lowest(rules.iter().chain(&finders))?;
        let estimates = estimates(&fit, &best.report.point);
        Some(Study {
            source,
            start_loss,
            agreement_of_rules: agreement(&fit, &rules, best, &estimates),
            agreement_of_finders: agreement(&fit, &finders, best, &estimates),
            converged: best.report.converged(),
            sensors: sensors(&rows, &estimates.parameters),
            estimates,
            rules,
            finders,
            rows,
        })
    }
}
