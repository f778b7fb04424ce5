//! What a run asks for, and what it may be given.

use crate::{Objective, Vector};

/// What a run asks for at a point.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Want {
    /// The value.
    Value,
    /// The gradient; the value there is known already.
    Gradient,
    /// Both.
    Both,
}

/// A request of a run.
#[derive(Debug)]
#[must_use = "evaluate what is wanted and supply it"]
pub struct Request<'a, V: Vector> {
    /// What is wanted.
    pub want: Want,
    /// A value above this is certain to be refused: a sum of non-negative terms may stop adding there and give what it has.
    pub ceiling: Option<V::Scalar>,
    /// Where.
    pub point: &'a V,
    /// Where a gradient goes; holds arbitrary numbers before.
    pub gradient: &'a mut V,
}

impl<V: Vector> Request<'_, V> {
    /// What `objective` says: for a loop of your own around a run.
    ///
    /// # Errors
    /// Those of the objective.
    pub fn answer<O: Objective<V> + ?Sized>(
        self,
        objective: &mut O,
    ) -> Result<Given<V::Scalar>, O::Error> {
        let (point, gradient) = (self.point, self.gradient);
        match self.want {
            Want::Value => objective.value_up_to(point, self.ceiling).map(Given::Value),
            Want::Gradient => objective
                .gradient(point, gradient)
                .map(|()| Given::Gradient),
            Want::Both => objective
                .value_and_gradient(point, gradient)
                .map(Given::Both),
        }
    }
}

/// What is given to a run. More than was wanted is welcome.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Given<T> {
    /// The value; NaN or infinite outside of the domain.
    Value(T),
    /// The gradient was written.
    Gradient,
    /// The value, and the gradient was written.
    Both(T),
    /// A gradient was wanted, and there is none to be had here.
    NoGradient,
    /// The objective is not defined at this point.
    OutsideDomain,
}

/// A reply that does not fit a run's request.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum RunReply {
    /// Nothing is wanted.
    #[error("the run has ended: nothing is wanted")]
    NothingWanted,
    /// A value is wanted.
    #[error("a value is wanted here, and a gradient alone was given: give the value, or both")]
    ValueWanted,
    /// A gradient is wanted.
    #[error(
        "a gradient is wanted here, and a value alone was given: write the gradient, or say NoGradient"
    )]
    GradientWanted,
}
