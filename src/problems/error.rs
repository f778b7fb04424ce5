//! What can be wrong with a call of a reference problem.

use core::ops::RangeInclusive;

/// A slice does not have as many components as the problem has variables.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error(
    "the {what} has length {found} but the problem has {expected} variables; pass a slice of length {expected}"
)]
#[non_exhaustive]
pub struct WrongLength {
    /// Which slice: `"point"` or `"gradient"`.
    pub what: &'static str,
    /// The number of variables of the problem.
    pub expected: usize,
    /// The length of the slice.
    pub found: usize,
}

/// A problem of variable size does not exist in the size asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum WrongSize {
    /// `!(found >= least)`.
    #[error("{problem} has no size {found}; choose a size of at least {least}")]
    TooSmall {
        /// The name of the problem.
        problem: &'static str,
        /// The size asked for.
        found: usize,
        /// The least size.
        least: usize,
    },
    /// `!(found <= greatest)`.
    #[error("{problem} has no size {found}; choose a size of at most {greatest}")]
    TooLarge {
        /// The name of the problem.
        problem: &'static str,
        /// The size asked for.
        found: usize,
        /// The greatest size.
        greatest: usize,
    },
    /// `found` is not one of the sizes that the words name, such as the multiples of 3.
    #[error("{problem} has no size {found}; choose {sizes}")]
    NotAmong {
        /// The name of the problem.
        problem: &'static str,
        /// The size asked for.
        found: usize,
        /// The sizes in words.
        sizes: &'static str,
    },
}

impl WrongSize {
    /// Fails unless `found` is one of the sizes.
    pub(super) fn check(
        problem: &'static str,
        found: usize,
        sizes: RangeInclusive<usize>,
    ) -> Result<(), Self> {
        let (least, greatest) = sizes.into_inner();
        if found < least {
            return Err(WrongSize::TooSmall {
                problem,
                found,
                least,
            });
        }
        if found > greatest {
            return Err(WrongSize::TooLarge {
                problem,
                found,
                greatest,
            });
        }
        Ok(())
    }

    /// Fails unless `found` is a positive multiple of `of`, which `sizes` says in words.
    pub(super) fn check_multiple(
        problem: &'static str,
        found: usize,
        of: usize,
        sizes: &'static str,
    ) -> Result<(), Self> {
        if found == 0 || !found.is_multiple_of(of) {
            return Err(WrongSize::NotAmong {
                problem,
                found,
                sizes,
            });
        }
        Self::check(problem, found, of..=GREATEST)
    }
}

/// More components than this no vector of doubles has.
pub(super) const GREATEST: usize = isize::MAX as usize / size_of::<f64>();
