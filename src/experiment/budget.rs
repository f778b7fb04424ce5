use std::format;
use std::string::String;
use std::time::{Duration, Instant};

use super::record::Ending;

/// What a run may cost at most; looked at before each evaluation.
///
/// A run that would exceed it is stopped there, with [`Ending::EvaluationsSpent`] or [`Ending::TimeSpent`] and the best point
/// so far. The limits of the driver's own [`Stopping`](crate::Stopping) hold besides. An evaluation that never returns is stopped
/// by [`Isolation`](super::Isolation) alone.
///
/// ```
/// use std::time::Duration;
/// use surefoot::experiment::Budget;
/// let budget = Budget { evaluations: Some(20_000), time: Some(Duration::from_secs(10)) };
/// assert_eq!(Budget::default(), Budget { evaluations: None, time: None });
/// ```
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Budget {
    /// Calls of the objective, of any kind. Default: no limit.
    pub evaluations: Option<u64>,
    /// Time from the building of the driver; positive. What a run reaches within it depends on the machine, so its record is
    /// not the same twice. Default: no limit.
    pub time: Option<Duration>,
}

impl Budget {
    /// Why a run begun then must stop after so many calls.
    pub(super) fn spent(&self, calls: u64, begin: Instant) -> Option<(Ending, String)> {
        if let Some(most) = self.evaluations.filter(|&most| calls >= most) {
            let note = format!(
                "the experiment's limit of {most} evaluations was reached: allow more if this run matters"
            );
            return Some((Ending::EvaluationsSpent, note));
        }
        let most = self.time.filter(|&most| begin.elapsed() > most)?;
        let note = format!(
            "the experiment's limit of {} s was reached: allow more if this run matters",
            most.as_secs_f64()
        );
        Some((Ending::TimeSpent, note))
    }
}
