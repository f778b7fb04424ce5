//! nalgebra's vectors and matrices keep the contract of `Vector`, and runs over them have the bits of runs over `Vec`.

mod backends;

use backends::{N, Numbers, another_length_is_named, none_allocates, same_bits};
use nalgebra::allocator::Allocator;
use nalgebra::{
    DMatrix, DVector, DefaultAllocator, Dim, Dyn, Matrix2x3, OMatrix, SMatrix, SVector, U4,
};
use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};
use surefoot::{Real, Vector};

/// Checked at this shape and length.
fn matrix<T: Real + nalgebra::Scalar, R: Dim, C: Dim>(rows: R, columns: C)
where
    DefaultAllocator: Allocator<R, C>,
    OMatrix<T, R, C>: Vector<Scalar = T>,
{
    let (r, c) = (rows.value(), columns.value());
    let make = |numbers: &[T]| OMatrix::from_column_slice_generic(rows, columns, numbers);
    assert_eq!(check(make, r * c), Ok(()), "{r} x {c}");
}

fn shapes<T: Real + nalgebra::Scalar>() {
    for (r, c) in [(1, 1), (1, 7), (7, 1), (2, 4), (3, 3), (11, 3), (5, 20)] {
        matrix::<T, _, _>(Dyn(r), Dyn(c));
    }
    matrix::<T, _, _>(U4, Dyn(9));
    matrix::<T, _, _>(Dyn(9), U4);
    matrix::<T, _, _>(U4, U4);
    let empty = |r, c| DMatrix::<T>::from_element(r, c, T::of(1.0));
    for (r, c) in [(0, 0), (0, 3), (3, 0)] {
        assert_eq!(check_empty(&empty(r, c)), Ok(()));
    }
    assert_eq!(check_empty(&SMatrix::<T, 0, 3>::zeros()), Ok(()));
}

#[test]
fn matrices_of_every_kind_keep_the_contract() {
    shapes::<f64>();
    shapes::<f32>();
}

#[test]
fn a_matrix_of_another_shape_makes_nothing_panic() {
    let ones = |r, c| DMatrix::from_element(r, c, 1.0);
    for (one, other) in [
        (ones(2, 3), ones(3, 2)),
        (ones(6, 1), ones(2, 3)),
        (ones(2, 3), ones(4, 5)),
        (ones(0, 3), ones(9, 9)),
    ] {
        exercise_mismatched(&one, &other);
    }
}

/// The inner product of matrices is that of their components, `tr(X' Y)`.
#[test]
fn the_inner_product_of_matrices_is_the_trace() {
    let x = Matrix2x3::new(1.0, 2.0, 3.0, 4.0, 5.0, 6.0);
    let y = Matrix2x3::new(-1.0, 3.0, 0.5, 2.0, 0.25, 7.0);
    assert_eq!(Vector::dot(&x, &y), (x.transpose() * y).trace());
    assert_eq!(Vector::dot(&x, &y), 57.75); // -1 + 6 + 1.5 + 8 + 1.25 + 42
}

macro_rules! numbers {
    ($($V:ty => $make:expr),+ $(,)?) => {$(
        impl Numbers for $V {
            fn of(numbers: &[f64]) -> Self {
                $make(numbers)
            }
            fn read(&self, numbers: &mut [f64]) {
                numbers.copy_from_slice(self.as_slice());
            }
            fn write(&mut self, numbers: &[f64]) {
                self.as_mut_slice().copy_from_slice(numbers);
            }
        }
    )+};
}

numbers!(
    DVector<f64> => DVector::from_column_slice,
    SVector<f64, N> => SVector::from_column_slice,
    DMatrix<f64> => |numbers| DMatrix::from_column_slice(4, 6, numbers),
    SMatrix<f64, 4, 6> => SMatrix::from_column_slice,
    OMatrix<f64, U4, Dyn> => OMatrix::<f64, U4, Dyn>::from_column_slice,
);

#[test]
fn runs_have_the_bits_of_runs_over_vec() {
    same_bits::<DVector<f64>>();
    same_bits::<SVector<f64, N>>();
    same_bits::<DMatrix<f64>>();
    same_bits::<SMatrix<f64, 4, 6>>();
    same_bits::<OMatrix<f64, U4, Dyn>>();
}

#[test]
fn no_iteration_allocates() {
    none_allocates::<DVector<f64>>();
    none_allocates::<SVector<f64, N>>();
    none_allocates::<DMatrix<f64>>();
    none_allocates::<SMatrix<f64, 4, 6>>();
    none_allocates::<OMatrix<f64, U4, Dyn>>();
}

#[test]
fn a_gradient_of_another_length_is_named() {
    another_length_is_named(&DVector::from_element(N - 1, 1.0));
    another_length_is_named(&DVector::from_element(0, 1.0));
    another_length_is_named(&DMatrix::from_element(4, 7, 1.0));
    another_length_is_named(&OMatrix::<f64, U4, Dyn>::from_element(5, 1.0));
}
