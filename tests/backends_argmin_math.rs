//! Types with the arithmetic of argmin-math, wrapped, keep the contract of `Vector`; runs are those over `Vec` to rounding.

mod backends;

use argmin_math::{ArgminAdd, ArgminDot, ArgminMul};
use backends::{N, Numbers, WAYS, allocations, another_length_is_named, same_to_rounding};
use surefoot::vector::MathVec;
use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};
use surefoot::{Real, Vector};

/// A type of the caller's own that has nothing but what the adapter asks for, and panics where argmin-math's own `Vec`
/// does: at empty vectors and unequal lengths.
#[derive(Clone, Debug, PartialEq)]
struct Own(Vec<f64>);

impl ArgminDot<Own, f64> for Own {
    fn dot(&self, other: &Own) -> f64 {
        assert!(!self.0.is_empty() && self.0.len() == other.0.len());
        // Last to first: an order of its own.
        let products = self.0.iter().zip(&other.0).map(|(x, y)| x * y);
        products.rev().sum()
    }
}

impl ArgminAdd<Own, Own> for Own {
    fn add(&self, other: &Own) -> Own {
        assert!(!self.0.is_empty() && self.0.len() == other.0.len());
        Own(self.0.iter().zip(&other.0).map(|(x, y)| x + y).collect())
    }
}

impl ArgminMul<f64, Own> for Own {
    fn mul(&self, factor: &f64) -> Own {
        assert!(!self.0.is_empty());
        Own(self.0.iter().map(|x| x * factor).collect())
    }
}

/// From this and the addition, argmin-math makes the scaled addition.
impl ArgminMul<Own, Own> for f64 {
    fn mul(&self, own: &Own) -> Own {
        own.mul(self)
    }
}

impl<'a> IntoIterator for &'a Own {
    type Item = &'a f64;
    type IntoIter = std::slice::Iter<'a, f64>;
    fn into_iter(self) -> Self::IntoIter {
        self.0.iter()
    }
}

const LENGTHS: [usize; 6] = [1, 2, 7, 8, 9, 33];
const UNEQUAL: [(usize, usize); 4] = [(0, 1), (3, 8), (8, 9), (33, 7)];

#[test]
fn vec_keeps_the_contract_through_its_arithmetic() {
    macro_rules! keeps {
        ($T:ty) => {
            for n in LENGTHS {
                let make = |numbers: &[$T]| MathVec(numbers.to_vec());
                assert_eq!(check(make, n), Ok(()), "length {n}");
            }
            assert_eq!(check_empty(&MathVec(Vec::<$T>::new())), Ok(()));
            let ones = |n| MathVec(vec![<$T>::of(1.0); n]);
            for (one, other) in UNEQUAL {
                exercise_mismatched(&ones(one), &ones(other));
            }
        };
    }
    keeps!(f64);
    keeps!(f32);
}

#[test]
fn a_type_of_ones_own_keeps_the_contract() {
    let make = |numbers: &[f64]| MathVec(Own(numbers.to_vec()));
    for n in LENGTHS {
        assert_eq!(check(make, n), Ok(()), "length {n}");
    }
    assert_eq!(check_empty(&make(&[])), Ok(()));
    for (one, other) in UNEQUAL {
        let (x, y) = (make(&vec![1.0; one]), make(&vec![1.0; other]));
        exercise_mismatched(&x, &y);
        assert!(Vector::dot(&x, &y).is_nan());
        let mut unchanged = x.clone();
        unchanged.assign(&y);
        unchanged.add_scaled(2.0, &y);
        assert_eq!(unchanged, x);
    }
}

impl Numbers for MathVec<Vec<f64>> {
    fn of(numbers: &[f64]) -> Self {
        MathVec(numbers.to_vec())
    }
    fn read(&self, numbers: &mut [f64]) {
        numbers.copy_from_slice(&self.0);
    }
    fn write(&mut self, numbers: &[f64]) {
        self.0.copy_from_slice(numbers);
    }
}

impl Numbers for MathVec<Own> {
    fn of(numbers: &[f64]) -> Self {
        MathVec(Own(numbers.to_vec()))
    }
    fn read(&self, numbers: &mut [f64]) {
        numbers.copy_from_slice(&self.0.0);
    }
    fn write(&mut self, numbers: &[f64]) {
        self.0.0.copy_from_slice(numbers);
    }
}

#[test]
fn runs_are_those_over_vec_to_rounding() {
    same_to_rounding::<MathVec<Vec<f64>>>();
    same_to_rounding::<MathVec<Own>>();
}

#[test]
fn iterations_allocate_as_the_documentation_says() {
    for way in WAYS {
        assert!(allocations::<MathVec<Vec<f64>>>(way) > 0, "{way}");
    }
    // One for the scaled vector and one for the sum.
    let (mut y, x) = (MathVec(vec![1.0; N]), MathVec(vec![2.0; N]));
    let counted = allocation_counter::measure(|| y.add_scaled(0.5, &x));
    assert_eq!((counted.count_total, y.0[N - 1]), (2, 2.0));
}

#[test]
fn a_gradient_of_another_length_is_named() {
    another_length_is_named(&MathVec(vec![1.0; N + 1]));
    another_length_is_named(&MathVec(Own(Vec::new())));
}
