//! nalgebra's column vectors: `SVector<T, N>`, and `DVector<T>` where there is an allocator.

use super::slices::forward_to_slice;
use super::{Vector, kernels};
use crate::Real;

impl<T: Real + nalgebra::Scalar, const N: usize> Vector for nalgebra::SVector<T, N> {
    type Scalar = T;
    forward_to_slice!(as_slice, as_mut_slice);
}

#[cfg(feature = "alloc")]
impl<T: Real + nalgebra::Scalar> Vector for nalgebra::DVector<T> {
    type Scalar = T;
    forward_to_slice!(as_slice, as_mut_slice);
}
