//! faer's columns.

use super::slices::forward_to_slice;
use super::{Vector, kernels};
use crate::Real;
use faer::Col;

/// faer 0.24 (feature `faer`): the owned column `Col<T>`, of any length.
///
/// Iterates have the same bits as those over a `Vec<T>`. faer is built without its own features (no `std`, no `rayon`): switch
/// on in your own manifest what your objective needs of it. It takes a minute to build from scratch.
///
/// ```
/// use faer::Col;
/// use surefoot::{Descent, acceptance::WeakWolfe, direction::Lbfgs, finder::ThreePoint};
/// // A chain of four springs of stiffness 1 to 4, its far end pulled with a force of 12.
/// let descent = Descent::new(Lbfgs::new(5)?, ThreePoint::new(), WeakWolfe::default());
/// let report = descent.minimize_fn(Col::zeros(4), |x: &Col<f64>, g| {
///     let (mut energy, mut at) = (-12.0 * x[3], 0.0);
///     g.fill(0.0);
///     g[3] = -12.0;
///     for i in 0..4 {
///         let (stiffness, longer) = ((i + 1) as f64, x[i] - at);
///         energy += 0.5 * stiffness * longer * longer;
///         g[i] += stiffness * longer;
///         if i > 0 { g[i - 1] -= stiffness * longer; }
///         at = x[i];
///     }
///     energy
/// })?;
/// assert!(report.converged());
/// // Each spring carries the whole force: 12 / 1, 12 / 2, 12 / 3, 12 / 4.
/// for (x, rest) in report.point.iter().zip([12.0, 18.0, 22.0, 25.0]) {
///     assert!((x - rest).abs() < 1e-3);
/// }
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
impl<T: Real> Vector for Col<T> {
    type Scalar = T;
    forward_to_slice!(numbers, numbers_mut);
}

/// What the kernels ask of a column.
trait Numbers<T> {
    fn len(&self) -> usize;
    fn numbers(&self) -> &[T];
    fn numbers_mut(&mut self) -> &mut [T];
}

// An owned column has no gaps, so there is always a slice.
impl<T> Numbers<T> for Col<T> {
    fn len(&self) -> usize {
        self.nrows()
    }

    fn numbers(&self) -> &[T] {
        match self.try_as_col_major() {
            Some(column) => column.as_slice(),
            None => &[],
        }
    }

    fn numbers_mut(&mut self) -> &mut [T] {
        match self.try_as_col_major_mut() {
            Some(column) => column.as_slice_mut(),
            None => &mut [],
        }
    }
}
