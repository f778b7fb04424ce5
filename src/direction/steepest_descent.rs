//! Steepest descent.

use super::{Direction, Moved, negative};
use crate::Vector;
use crate::vector::Survey;

/// Steepest descent: `d = -g`.
///
/// With a Wolfe or Goldstein rule, on a function that is bounded below and has a Lipschitz continuous gradient, the
/// gradient tends to zero (Zoutendijk; Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, theorem 3.2). It is slow
/// where the Hessian is ill-conditioned; good as a reference and as the remedy that the other directions fall back on.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct SteepestDescent;

impl<V: Vector> Direction<V> for SteepestDescent {
    fn direction(&mut self, _: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        negative(g, d);
        None
    }
    fn survey(&mut self, g: &V, _: &V, d: &V) -> Survey<V::Scalar> {
        Survey::slope_alone(g, d)
    }
    fn moved(&mut self, _: Moved<'_, V>) {}
    fn reset(&mut self) {}
}
