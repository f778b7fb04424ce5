//! nalgebra's owned vectors and matrices, of fixed and of dynamic shape.

use super::slices::forward_to_slice;
use super::{Contiguous, Vector, kernels};
use crate::Real;
use nalgebra::allocator::Allocator;
use nalgebra::{DefaultAllocator, Dim, OMatrix};

/// nalgebra 0.35 (feature `nalgebra`): every owned matrix `OMatrix<T, R, C>`, so `SVector<T, N>`, `SMatrix<T, R, C>`, and with
/// the feature `alloc` also `DVector<T>`, `DMatrix<T>` and those with one fixed side.
///
/// A matrix is the vector of its `R C` components, column by column, with the inner product `tr(X' Y)`. Iterates have the
/// same bits as those over a `Vec<T>` that holds the columns one after the other.
///
/// [`dim`](Vector::dim) is `R C`: a driver cannot tell a gradient that was swapped for one of another shape with as many
/// components. Types of fixed shape rule it out at compile time.
///
/// ```
/// use nalgebra::DMatrix;
/// use surefoot::{Descent, acceptance::WeakWolfe, direction::Lbfgs, finder::ThreePoint};
/// // The symmetric square root of A: the least of |X X - A|^2 / 4, begun at the unit matrix.
/// let a = DMatrix::from_row_slice(2, 2, &[5.0, 4.0, 4.0, 5.0]);
/// let descent = Descent::new(Lbfgs::new(5)?, ThreePoint::new(), WeakWolfe::default());
/// let report = descent.minimize_fn(DMatrix::identity(2, 2), |x, g| {
///     let off: DMatrix<f64> = x * x - &a;
///     g.copy_from(&((&off * x.transpose() + x.transpose() * &off) * 0.5));
///     0.25 * off.norm_squared()
/// })?;
/// assert!(report.converged());
/// let root = DMatrix::from_row_slice(2, 2, &[2.0, 1.0, 1.0, 2.0]);
/// assert!((report.point - root).amax() < 1e-4);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
impl<T: Real + nalgebra::Scalar, R: Dim, C: Dim> Vector for OMatrix<T, R, C>
where
    DefaultAllocator: Allocator<R, C>,
{
    type Scalar = T;
    forward_to_slice!(as_slice, as_mut_slice);
}

impl<T: Real + nalgebra::Scalar, R: Dim, C: Dim> Contiguous for OMatrix<T, R, C>
where
    DefaultAllocator: Allocator<R, C>,
{
    fn numbers(&self) -> &[T] {
        self.as_slice()
    }
    fn numbers_mut(&mut self) -> &mut [T] {
        self.as_mut_slice()
    }
}
