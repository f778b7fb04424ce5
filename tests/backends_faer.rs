//! faer's columns keep the contract of `Vector`, and runs over them have the bits of runs over `Vec`.

mod backends;

use backends::{N, Numbers, another_length_is_named, none_allocates, same_bits};
use faer::Col;
use surefoot::Real;
use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};

fn column<T: Real>(numbers: &[T]) -> Col<T> {
    Col::from_fn(numbers.len(), |i| numbers[i])
}

#[test]
fn columns_keep_the_contract() {
    fn keeps<T: Real>() {
        for n in [1, 2, 7, 8, 9, 33, 100] {
            assert_eq!(check(column::<T>, n), Ok(()), "length {n}");
        }
        assert_eq!(check_empty(&column::<T>(&[])), Ok(()));
        let ones = |n| column(&vec![T::of(1.0); n]);
        for (one, other) in [(0, 1), (3, 8), (8, 9), (33, 7)] {
            exercise_mismatched(&ones(one), &ones(other));
        }
    }
    keeps::<f64>();
    keeps::<f32>();
}

impl Numbers for Col<f64> {
    fn of(numbers: &[f64]) -> Self {
        column(numbers)
    }
    fn read(&self, numbers: &mut [f64]) {
        numbers
            .iter_mut()
            .zip(self.iter())
            .for_each(|(n, x)| *n = *x);
    }
    fn write(&mut self, numbers: &[f64]) {
        self.iter_mut().zip(numbers).for_each(|(x, n)| *x = *n);
    }
}

#[test]
fn runs_have_the_bits_of_runs_over_vec() {
    same_bits::<Col<f64>>();
}

#[test]
fn no_iteration_allocates() {
    none_allocates::<Col<f64>>();
}

#[test]
fn a_gradient_of_another_length_is_named() {
    another_length_is_named(&column(&[1.0; N + 1]));
    another_length_is_named(&column(&[]));
}
