//! What each contender spent its trials on.

use crate::experiment::Record;
use std::collections::HashMap;
use std::string::String;
use std::vec::Vec;

/// Sums over all runs of one contender, solved or not.
#[derive(Clone, Debug, PartialEq)]
pub struct Effort {
    /// Its name.
    pub contender: String,
    /// Number of runs.
    pub runs: u64,
    /// Moves.
    pub iterations: u64,
    /// Calls of the objective.
    pub evaluations: u64,
    /// Trials refused as too long.
    pub too_long: u64,
    /// Trials refused as too short.
    pub too_short: u64,
    /// Trials outside of the domain.
    pub outside: u64,
}

impl Effort {
    /// Trials: one accepted a move, and the refused ones.
    pub fn trials(&self) -> u64 {
        self.iterations + self.too_long + self.too_short + self.outside
    }

    /// Share of trials refused as too long, 0 to 1; `None` without trials.
    pub fn share_too_long(&self) -> Option<f64> {
        ratio(self.too_long, self.trials())
    }

    /// Share of trials refused as too short, 0 to 1; `None` without trials.
    pub fn share_too_short(&self) -> Option<f64> {
        ratio(self.too_short, self.trials())
    }

    /// Share of trials outside of the domain, 0 to 1; `None` without trials.
    pub fn share_outside(&self) -> Option<f64> {
        ratio(self.outside, self.trials())
    }

    /// Calls for each move; `None` without moves.
    pub fn evaluations_per_iteration(&self) -> Option<f64> {
        ratio(self.evaluations, self.iterations)
    }
}

/// The effort of each contender, in the order of their first records.
pub fn effort(records: &[Record]) -> Vec<Effort> {
    let mut numbers: HashMap<&str, usize> = HashMap::new();
    let mut all: Vec<Effort> = Vec::new();
    for record in records {
        let number = *numbers.entry(&record.contender).or_insert_with(|| {
            all.push(Effort {
                contender: record.contender.clone(),
                runs: 0,
                iterations: 0,
                evaluations: 0,
                too_long: 0,
                too_short: 0,
                outside: 0,
            });
            all.len() - 1
        });
        let effort = &mut all[number];
        effort.runs += 1;
        effort.iterations += record.iterations;
        effort.evaluations += record.evaluations();
        effort.too_long += record.too_long;
        effort.too_short += record.too_short;
        effort.outside += record.outside;
    }
    all
}

fn ratio(part: u64, whole: u64) -> Option<f64> {
    (whole > 0).then(|| part as f64 / whole as f64)
}
