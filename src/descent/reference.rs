//! What decrease is measured from: the current value, or an older or averaged one.

use crate::Real;

/// What each search of a run measures decrease from. A decrease-type rule with a reference above the current value is
/// *nonmonotone*: it lets single steps rise, which helps along narrow curved valleys and with long Barzilai–Borwein steps.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
#[non_exhaustive]
pub enum Reference {
    /// The current value: a monotone search. The default.
    #[default]
    Current,
    /// The largest of the last `values` values, 1 to [`MOST_VALUES`] of them (10 is usual).
    ///
    /// L. Grippo, F. Lampariello & S. Lucidi, "A nonmonotone line search technique for Newton's method", SIAM J. Numer.
    /// Anal. 23 (1986) 707-716, doi:10.1137/0723046.
    LargestOfLast {
        /// How many values are remembered.
        values: usize,
    },
    /// The weighted average `C+ = (eta Q C + f) / Q+` with `Q+ = eta Q + 1`; `eta` in `[0, 1]`, 0 for the current value, 1
    /// for the mean of all (0.85 is usual).
    ///
    /// H. Zhang & W. W. Hager, "A nonmonotone line search technique and its application to unconstrained optimization",
    /// SIAM J. Optim. 14 (2004) 1043-1056, doi:10.1137/S1052623403428208, eq. 1.2.
    WeightedAverage {
        /// The weight of the past.
        eta: f64,
    },
}

/// The most values that [`Reference::LargestOfLast`] can remember.
pub const MOST_VALUES: usize = 32;

/// Why a [`Reference`] is refused.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ReferenceError {
    /// `!(1 <= values <= MOST_VALUES)`.
    #[error("the largest of the last values needs 1 to 32 values: 10 is usual")]
    Values,
    /// `!(0 <= eta <= 1)`.
    #[error("the weight of the past must lie between 0 and 1: 0.85 is usual")]
    Eta,
}

/// The memory behind a [`Reference`], for a loop of your own; a [`Run`](crate::Run) keeps one itself.
///
/// ```
/// use surefoot::{Ray, descent::{Reference, ReferenceMemory}};
/// let mut memory = ReferenceMemory::new(Reference::LargestOfLast { values: 2 }, 5.0)?;
/// memory.accepted(3.0);
/// memory.accepted(4.0);
/// assert_eq!(memory.value(), 4.0);
/// let ray = Ray::new(4.0, -1.0).with_reference(memory.value());
/// # Ok::<(), surefoot::descent::ReferenceError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ReferenceMemory<T> {
    how: Reference,
    /// The last values, a ring.
    last: [T; MOST_VALUES],
    accepted: usize,
    /// `Q` and `C` of the weighted average.
    weight: T,
    average: T,
}

impl Reference {
    pub(super) fn check(&self) -> Result<(), ReferenceError> {
        match *self {
            Reference::LargestOfLast { values } if !(1..=MOST_VALUES).contains(&values) => {
                Err(ReferenceError::Values)
            }
            Reference::WeightedAverage { eta } if !(0.0..=1.0).contains(&eta) => {
                Err(ReferenceError::Eta)
            }
            _ => Ok(()),
        }
    }
}

impl<T: Real> ReferenceMemory<T> {
    /// A memory that begins with the value at the start.
    ///
    /// # Errors
    /// [`ReferenceError`] for parameters out of range, and for NaN.
    pub fn new(how: Reference, start: T) -> Result<Self, ReferenceError> {
        how.check()?;
        Ok(Self::checked(how, start))
    }

    pub(super) fn checked(how: Reference, start: T) -> Self {
        ReferenceMemory {
            how,
            last: [start; MOST_VALUES],
            accepted: 1,
            weight: T::one(),
            average: start,
        }
    }

    /// Learns the value of an accepted point.
    pub fn accepted(&mut self, value: T) {
        self.last[self.accepted % MOST_VALUES] = value;
        self.accepted += 1;
        if let Reference::WeightedAverage { eta } = self.how {
            let past = T::of(eta) * self.weight;
            self.weight = past + T::one();
            self.average = (past * self.average + value) / self.weight; // eq. 1.2
        }
    }

    /// What decrease is measured from now; never below the last value.
    pub fn value(&self) -> T {
        let newest = self.last[(self.accepted - 1) % MOST_VALUES];
        match self.how {
            Reference::Current => newest,
            Reference::LargestOfLast { values } => (1..=values.min(self.accepted))
                .map(|age| self.last[(self.accepted - age) % MOST_VALUES])
                .fold(newest, T::max),
            // Rounding may leave the average a last bit below the value.
            Reference::WeightedAverage { .. } => self.average.max(newest),
        }
    }
}
