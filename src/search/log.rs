//! The trial log: what was tried, who proposed it, and what became of it.

use crate::{Real, Side, Trial};

/// How many of the latest trials a [`Log`] keeps. It lives inside the search, so that no trial allocates.
pub const KEPT: usize = 64;

/// What became of a trial.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Fate {
    /// The rule accepted it.
    Accepted,
    /// The rule refused it.
    Refused(Side),
    /// Its value, or a slope that was asked for, was not finite: it lies outside of the domain.
    Outside,
    /// The rule needed a slope that could not be given, or said so although it had one; or it accepted a step that is not
    /// lower, against the evidence of the other trials that the slope at the start is wrong.
    Undecided,
}

/// Who put a trial where it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Origin {
    /// The first step of the search.
    First,
    /// The finder.
    Finder,
    /// The guard, in place of a proposal outside of the bracket or of a bracket that does not shrink.
    Guard,
    /// A bound on the step.
    Bound,
    /// The search itself, closing in on the edge of the domain.
    Edge,
    /// The finder, minimising on after an acceptance.
    Polish,
}

/// One line of the log.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Entry<T> {
    /// Number of the trial, from 1.
    pub number: u32,
    /// Step, value and, where it was asked for, slope. Outside of the domain the value is what was found there, or
    /// NaN.
    pub trial: Trial<T>,
    /// Who put it there.
    pub origin: Origin,
    /// What became of it.
    pub fate: Fate,
}

/// The latest trials of a search, at most [`KEPT`] of them, oldest first.
#[derive(Clone, Debug)]
pub struct Log<T> {
    entries: [Entry<T>; KEPT],
    written: u32,
}

/// Logs are equal when the kept trials are; what an earlier search left behind does not count.
impl<T: Real> PartialEq for Log<T> {
    fn eq(&self, other: &Self) -> bool {
        self.written == other.written && self.iter().eq(other.iter())
    }
}

impl<T: Real> Log<T> {
    pub(super) fn new() -> Self {
        let blank = Entry {
            number: 0,
            trial: Trial {
                step: T::zero(),
                value: T::zero(),
                slope: None,
            },
            origin: Origin::First,
            fate: Fate::Undecided,
        };
        Log {
            entries: [blank; KEPT],
            written: 0,
        }
    }

    pub(super) fn clear(&mut self) {
        self.written = 0;
    }

    #[inline]
    pub(super) fn write(&mut self, trial: Trial<T>, origin: Origin, fate: Fate) {
        self.entries[self.written as usize % KEPT] = Entry {
            number: self.written + 1,
            trial,
            origin,
            fate,
        };
        self.written += 1;
    }

    /// Number of trials of the search, kept or not.
    pub fn trials(&self) -> u32 {
        self.written
    }

    /// The latest trial.
    pub fn latest(&self) -> Option<&Entry<T>> {
        let last = self.written.checked_sub(1)?;
        Some(&self.entries[last as usize % KEPT])
    }

    /// The kept trials, oldest first.
    pub fn iter(&self) -> impl Iterator<Item = &Entry<T>> {
        let kept = (self.written as usize).min(KEPT);
        let oldest = self.written as usize - kept;
        (oldest..oldest + kept).map(|i| &self.entries[i % KEPT])
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::vec::Vec;

    #[test]
    fn a_long_search_keeps_its_latest_trials_in_order() {
        let mut log = Log::new();
        for i in 0..150 {
            let trial = Trial {
                step: f64::from(i),
                value: 0.0,
                slope: None,
            };
            log.write(trial, Origin::Finder, Fate::Refused(Side::TooLong));
        }
        let numbers: Vec<u32> = log.iter().map(|e| e.number).collect();
        assert_eq!(numbers, (87..=150).collect::<Vec<_>>());
        assert!(
            log.iter()
                .all(|e| e.trial.step + 1.0 == f64::from(e.number))
        );
        assert_eq!(log.trials(), 150);
    }
}
