//! The trial log of a run, on request.

use std::string::String;
use std::vec::Vec;

use super::record::{number, optional_number};
use crate::search::{Fate, Log};
use crate::{Ray, Side};

/// Every trial of a run, search by search: one line of `trials.jsonl`.
#[derive(Clone, Debug, Default, PartialEq, serde::Serialize, serde::Deserialize)]
#[non_exhaustive]
pub struct TrialLog {
    /// Name of the problem.
    pub problem: String,
    /// Number of variables.
    pub n: usize,
    /// Name of the contender.
    pub contender: String,
    /// Which start, from 0.
    pub start: u32,
    /// Which repetition, from 0.
    pub repetition: u32,
    /// Number of trials after the last one kept.
    pub left_out: u64,
    /// The searches, in order.
    pub searches: Vec<SearchTrials>,
}

/// The trials of one search.
#[derive(Clone, Debug, PartialEq, serde::Serialize, serde::Deserialize)]
#[non_exhaustive]
pub struct SearchTrials {
    /// phi(0), the value where the search begins.
    #[serde(with = "number")]
    pub value: f64,
    /// phi'(0), the slope there.
    #[serde(with = "number")]
    pub slope: f64,
    /// The trials, in order.
    pub trials: Vec<LoggedTrial>,
}

/// One trial.
#[derive(Clone, Copy, Debug, PartialEq, serde::Serialize, serde::Deserialize)]
#[non_exhaustive]
pub struct LoggedTrial {
    /// The step `a`.
    #[serde(with = "number")]
    pub step: f64,
    /// phi(a); NaN where there was none.
    #[serde(with = "number")]
    pub value: f64,
    /// phi'(a), where it was asked for.
    #[serde(with = "optional_number", default)]
    pub slope: Option<f64>,
    /// What became of it.
    pub verdict: TrialVerdict,
}

/// What became of a trial.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, serde::Serialize, serde::Deserialize)]
#[serde(rename_all = "snake_case")]
#[non_exhaustive]
pub enum TrialVerdict {
    /// The rule accepted it.
    Accepted,
    /// Refused as too long.
    TooLong,
    /// Refused as too short.
    TooShort,
    /// Outside of the domain.
    Outside,
    /// The rule could not decide.
    Undecided,
}

impl From<Fate> for TrialVerdict {
    fn from(fate: Fate) -> Self {
        match fate {
            Fate::Accepted => TrialVerdict::Accepted,
            Fate::Refused(Side::TooLong) => TrialVerdict::TooLong,
            Fate::Refused(Side::TooShort) => TrialVerdict::TooShort,
            Fate::Outside => TrialVerdict::Outside,
            Fate::Undecided => TrialVerdict::Undecided,
        }
    }
}

/// Takes trials down while a run is under way.
pub(super) struct TrialKeeper {
    most: usize,
    kept: usize,
    left_out: u64,
    searches: Vec<SearchTrials>,
    /// Trials of the search at hand seen so far; `None` between searches.
    seen: Option<u32>,
}

impl TrialKeeper {
    /// Keeps the first `most` trials.
    pub(super) fn new(most: usize) -> Self {
        TrialKeeper {
            most,
            kept: 0,
            left_out: 0,
            searches: Vec::new(),
            seen: None,
        }
    }

    /// Takes down what is new in the log of the search at hand.
    pub(super) fn look(&mut self, log: &Log<f64>, ray: &Ray<f64>) {
        let begins = self.seen.is_none();
        if begins && self.kept < self.most {
            self.searches.push(SearchTrials {
                value: ray.value,
                slope: ray.slope,
                trials: Vec::new(),
            });
        }
        let seen = self.seen.unwrap_or(0);
        for entry in log.iter().filter(|entry| entry.number > seen) {
            match self.searches.last_mut() {
                Some(search) if self.kept < self.most => {
                    self.kept += 1;
                    search.trials.push(LoggedTrial {
                        step: entry.trial.step,
                        value: entry.trial.value,
                        slope: entry.trial.slope,
                        verdict: entry.fate.into(),
                    });
                }
                _ => self.left_out += 1,
            }
        }
        self.seen = Some(log.trials());
    }

    pub(super) fn is_within_search(&self) -> bool {
        self.seen.is_some()
    }

    /// The search at hand is over: the next look is at another.
    pub(super) fn search_over(&mut self) {
        self.seen = None;
    }

    pub(super) fn into_log(self) -> TrialLog {
        TrialLog {
            left_out: self.left_out,
            searches: self.searches,
            ..TrialLog::default()
        }
    }
}
