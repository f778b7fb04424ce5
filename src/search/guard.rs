//! The guard: the bracket that verdicts draw, and the edge of the domain.
//!
//! Published finders keep brackets of their own, proven for their own rule. Here the last step that was too short and
//! the last that was too long are kept for them, so that any finder works with any rule: for the Wolfe rules and
//! Goldstein an acceptable step lies between the two. A proposal outside is replaced.

use super::bounds::Limits;
use crate::{Real, Side};

#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Guard<T> {
    /// The last step that was too short; 0 to begin with.
    short: T,
    /// The last step that was too long.
    long: Option<T>,
    /// The smallest step outside of the domain.
    edge: Option<T>,
    /// The first step of the search: the scale for growing while nothing was too short.
    first: T,
    /// Smallest width of the bracket so far.
    width: T,
    /// How many trials running left more than `SLOW` of the width.
    slow: u32,
    /// Exponent of the next contraction from the edge while nothing inside is known.
    plunge: u32,
}

/// A bracket that keeps more than this share of its width is slow (the factor of Moré & Thuente 1994, section 4).
const SLOW: f64 = 0.66;
/// So many slow trials running are left to the finder: with 6 no published count of Moré and Thuente's method changed
/// (`tests/published_rays.rs`), and no search of `tests/guard.rs` failed.
const PATIENCE: u32 = 6;
/// Near the edge of the domain a finder sees nothing of the wall: it is given less.
const PATIENCE_AT_EDGE: u32 = 2;

/// Where the next trial goes, or why there is none.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Place<T> {
    /// As the finder proposed.
    Proposed(T),
    /// Moved onto a bound.
    Bound(T),
    /// Put there by the guard.
    Guarded(T),
    /// Everything below the upper bound is too short.
    UpperBound(T),
    /// Everything above the lower bound is too long.
    LowerBound(T),
    /// No number is left between the bracket's ends.
    Narrow { short: T, long: T },
    /// No number is left between the domain and its edge.
    Edge { inside: T, outside: T },
    /// The largest number was too short.
    Endless(T),
}

impl<T: Real> Guard<T> {
    pub(super) fn new(first: T) -> Self {
        Guard {
            short: T::zero(),
            long: None,
            edge: None,
            first,
            width: T::infinity(),
            slow: 0,
            plunge: 1,
        }
    }

    /// A finite trial was refused.
    #[inline]
    pub(super) fn refused(&mut self, step: T, side: Side) {
        let (short, high) = (self.short, self.high());
        match side {
            Side::TooLong if step > short => {
                self.long = Some(self.long.map_or(step, |l| l.min(step)));
            }
            Side::TooShort if high.is_none_or(|h| step < h) => self.short = short.max(step),
            // Only a step that ignored the bracket gets here: it says nothing new about it.
            Side::TooLong | Side::TooShort => {}
        }
        self.measure();
    }

    /// A trial of a finder without guard was finite: where the domain ends above it, the edge is sought from there.
    pub(super) fn inside(&mut self, step: T) {
        if self.edge.is_none_or(|edge| step < edge) {
            self.short = self.short.max(step);
        }
    }

    /// A trial had no finite value.
    pub(super) fn outside(&mut self, step: T) {
        self.edge = Some(self.edge.map_or(step, |e| e.min(step)));
        // A step inside the domain that was too long lies below the edge, or says nothing about what is there.
        if self.long.is_some_and(|long| long >= step) {
            self.long = None;
        }
        if self.short >= step {
            // The domain has a hole: start again below it.
            self.short = T::zero();
            self.width = T::infinity();
        }
        self.measure();
    }

    /// The smallest step outside of the domain so far.
    pub(super) fn edge(&self) -> Option<T> {
        self.edge
    }

    /// The first step of the search, within the bounds.
    pub(super) fn first(&self) -> T {
        self.first
    }

    /// The upper end of where a step may lie, itself excluded.
    fn high(&self) -> Option<T> {
        self.long.or(self.edge)
    }

    #[inline]
    fn measure(&mut self) {
        let Some(high) = self.high() else { return };
        let width = high - self.short;
        if width > T::of(SLOW) * self.width {
            self.slow += 1;
        } else {
            self.slow = 0;
        }
        self.width = self.width.min(width);
    }

    /// Where the next trial goes, for a proposal of the finder (`None` where it has no say).
    #[inline]
    pub(super) fn place(&mut self, proposal: Option<T>, limits: &Limits<T>) -> Place<T> {
        let (short, high) = (self.short, self.high());
        if short >= limits.upper() {
            return Place::UpperBound(short);
        }
        if high.is_some_and(|h| h <= limits.lower()) {
            return self.nothing_left(limits);
        }
        let inside = |a: T| a > short && high.is_none_or(|h| a < h) && a.is_finite();
        let patience = match self.long {
            None if self.edge.is_some() => PATIENCE_AT_EDGE,
            _ => PATIENCE,
        };
        // While every trial was too long a finder may shorten as slowly as it says: backtracking by 0.9 is by 0.9.
        let one_sided = short == T::zero() && self.edge.is_none();
        let free = high.is_none() || self.slow < patience || one_sided;
        let (step, proposed) = match proposal {
            Some(p) if free && inside(p) => (p, true),
            _ => (self.own(), false),
        };
        let bounded = limits.nearest(step);
        if inside(bounded) && !self.at_edge() {
            if bounded != step {
                Place::Bound(bounded)
            } else if proposed {
                Place::Proposed(bounded)
            } else {
                Place::Guarded(bounded)
            }
        } else {
            self.nothing_left(limits)
        }
    }

    /// The guard's own step: the middle of the bracket, or twice the longest step while nothing is too long.
    fn own(&mut self) -> T {
        let (short, half) = (self.short, T::of(0.5));
        match (self.high(), self.long) {
            (None, _) => T::of(2.0) * if short > T::zero() { short } else { self.first },
            (Some(high), None) if short == T::zero() => {
                // Nothing inside is known: 1/2, 1/4, 1/16, 1/256, .. of the edge reach any scale in a few trials.
                let share = (1..self.plunge).fold(half, |s, _| s * s);
                self.plunge = (self.plunge + 1).min(7); // 2^-64, which f32 still holds
                high * share
            }
            (Some(high), _) => {
                self.slow = 0;
                let ratio = high / short;
                if self.long.is_none() && ratio > T::of(4.0) && ratio.is_finite() {
                    short * ratio.sqrt()
                } else {
                    short + half * (high - short)
                }
            }
        }
    }

    /// Whether the domain's edge is known to two units in the last place.
    fn at_edge(&self) -> bool {
        match (self.long, self.edge) {
            (None, Some(edge)) => edge - self.short <= T::of(2.0) * T::epsilon() * edge,
            _ => false,
        }
    }

    fn nothing_left(&self, limits: &Limits<T>) -> Place<T> {
        match (self.long, self.edge) {
            (Some(long), _) if long <= limits.lower() => Place::LowerBound(limits.lower()),
            (Some(long), _) => Place::Narrow {
                short: self.short,
                long,
            },
            (None, Some(outside)) => Place::Edge {
                inside: self.short,
                outside,
            },
            (None, None) => Place::Endless(self.short),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_proposal_outside_of_the_bracket_is_replaced_by_its_middle() {
        let limits = Limits::default();
        let mut guard = Guard::new(1.0);
        guard.refused(4.0, Side::TooLong);
        guard.refused(2.0, Side::TooShort);
        assert_eq!(guard.place(Some(3.5), &limits), Place::Proposed(3.5));
        assert_eq!(guard.place(Some(4.0), &limits), Place::Guarded(3.0));
        assert_eq!(guard.place(Some(f64::NAN), &limits), Place::Guarded(3.0));
    }

    #[test]
    fn any_scale_below_the_edge_is_reached_in_a_few_trials() {
        let limits = Limits::default();
        let mut guard = Guard::new(1.0);
        let mut step = 1.0;
        let mut trials = 0;
        while step > 1e-70 {
            guard.outside(step);
            let Place::Guarded(next) = guard.place(None, &limits) else {
                panic!("nothing placed")
            };
            assert!(next < step);
            step = next;
            trials += 1;
        }
        assert!(trials <= 9, "{trials}");
    }

    #[test]
    fn growth_ends_at_the_largest_number() {
        let mut guard = Guard::new(f64::MAX / 1.5);
        guard.refused(f64::MAX / 1.5, Side::TooShort);
        assert_eq!(
            guard.place(None, &Limits::default()),
            Place::Endless(f64::MAX / 1.5)
        );
    }
}
