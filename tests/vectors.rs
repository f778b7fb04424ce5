//! The vectors of the crate keep the contract of `Vector`, and the conformance check finds every way to break it.
#![cfg(feature = "alloc")]

use std::cell::RefCell;
use std::rc::Rc;
use surefoot::vector::conformance::{Broken, check, check_empty, exercise_mismatched};
use surefoot::{Real, Vector};

const LENGTHS: [usize; 6] = [1, 2, 7, 8, 9, 33];

#[test]
fn vec_keeps_the_contract() {
    fn keeps<T: Real>() {
        for n in LENGTHS {
            assert_eq!(check(<[T]>::to_vec, n), Ok(()), "length {n}");
        }
        assert_eq!(check_empty(&Vec::<T>::new()), Ok(()));
        let ones = |n| vec![T::of(1.0); n];
        for (one, other) in [(0, 1), (3, 8), (8, 9), (33, 7)] {
            exercise_mismatched(&ones(one), &ones(other));
        }
    }
    keeps::<f64>();
    keeps::<f32>();
}

#[test]
fn arrays_keep_the_contract() {
    fn keeps<T: Real, const N: usize>() {
        let make = |components: &[T]| -> [T; N] { components.try_into().unwrap() };
        assert_eq!(check(make, N), Ok(()), "length {N}");
    }
    fn keep<T: Real>() {
        assert_eq!(check_empty::<[T; 0]>(&[]), Ok(()));
        keeps::<T, 1>();
        keeps::<T, 2>();
        keeps::<T, 7>();
        keeps::<T, 8>();
        keeps::<T, 9>();
        keeps::<T, 33>();
    }
    keep::<f64>();
    keep::<f32>();
}

#[cfg(feature = "nalgebra")]
mod nalgebra_vectors {
    use super::LENGTHS;
    use nalgebra::{DVector, SVector};
    use surefoot::Real;
    use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};

    fn dynamic<T: Real + nalgebra::Scalar>() {
        for n in LENGTHS {
            assert_eq!(
                check(DVector::<T>::from_column_slice, n),
                Ok(()),
                "length {n}"
            );
        }
        let ones = |n| DVector::from_element(n, T::of(1.0));
        assert_eq!(check_empty(&ones(0)), Ok(()));
        for (one, other) in [(0, 1), (3, 8), (8, 9), (33, 7)] {
            exercise_mismatched(&ones(one), &ones(other));
        }
    }

    fn fixed<T: Real + nalgebra::Scalar, const N: usize>() {
        assert_eq!(
            check(SVector::<T, N>::from_column_slice, N),
            Ok(()),
            "length {N}"
        );
    }

    #[test]
    fn vectors_of_nalgebra_keep_the_contract() {
        dynamic::<f64>();
        dynamic::<f32>();
        fixed::<f64, 1>();
        fixed::<f64, 2>();
        fixed::<f64, 7>();
        fixed::<f64, 8>();
        fixed::<f64, 9>();
        fixed::<f64, 33>();
        fixed::<f32, 9>();
        assert_eq!(check_empty(&SVector::<f64, 0>::zeros()), Ok(()));
    }
}

/// The order of additions is one for all vectors of the crate, so sums have the same bits.
#[test]
fn all_vectors_add_in_the_same_order() {
    let numbers: [f64; 33] = std::array::from_fn(|i| 1.0 / (i as f64 + 3.0));
    let vector = numbers.to_vec();
    assert_eq!(
        numbers.dot(&numbers).to_bits(),
        vector.dot(&vector).to_bits()
    );
    #[cfg(feature = "nalgebra")]
    {
        let column = nalgebra::DVector::from_column_slice(&numbers);
        assert_eq!(
            vector.dot(&vector).to_bits(),
            Vector::dot(&column, &column).to_bits()
        );
    }
}

/// What a deliberately broken vector does wrong.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Fault {
    None,
    /// `dim` counts one too many.
    Dim,
    /// A method leaves out the component at this place.
    DotSkips(usize),
    AssignSkips(usize),
    ScaleSkips(usize),
    AddScaledSkips(usize),
    StepFromSkips(usize),
    MaxAbsSkips(usize),
    /// `dot` forgets the sign.
    DotOfMagnitudes,
    /// `add_scaled` takes `a` for 1.
    AddScaledIgnoresFactor,
    /// `step_from` keeps what was there.
    StepFromAccumulates,
    /// `max_abs` forgets the sign, and sees no negative component.
    MaxAbsIsMax,
    /// `max_abs` compares in a way that drops every NaN.
    MaxAbsDropsNan,
    /// `max_abs` keeps a NaN only where it comes last.
    MaxAbsKeepsTheLastNan,
    /// `max_abs` drops an infinity.
    MaxAbsDropsInfinity,
    /// `dot` leaves out what is not finite.
    DotDropsNonFinite,
}

#[derive(Clone, Debug)]
struct Faulty {
    numbers: Vec<f64>,
    fault: Fault,
}

impl Faulty {
    fn unless(&self, skip: Option<usize>, mut change: impl FnMut(usize)) {
        (0..self.numbers.len())
            .filter(|i| Some(*i) != skip)
            .for_each(&mut change);
    }
}

impl Vector for Faulty {
    type Scalar = f64;
    fn dim(&self) -> usize {
        self.numbers.len() + usize::from(self.fault == Fault::Dim)
    }
    fn dot(&self, other: &Self) -> f64 {
        let skip = if let Fault::DotSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let mut sum = 0.0;
        self.unless(skip, |i| {
            let product = self.numbers[i] * other.numbers[i];
            sum += match self.fault {
                Fault::DotOfMagnitudes => product.abs(),
                Fault::DotDropsNonFinite if !product.is_finite() => 0.0,
                _ => product,
            };
        });
        sum
    }
    fn assign(&mut self, other: &Self) {
        let skip = if let Fault::AssignSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let mut numbers = self.numbers.clone();
        self.unless(skip, |i| numbers[i] = other.numbers[i]);
        self.numbers = numbers;
    }
    fn scale(&mut self, a: f64) {
        let skip = if let Fault::ScaleSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let mut numbers = self.numbers.clone();
        self.unless(skip, |i| numbers[i] *= a);
        self.numbers = numbers;
    }
    fn add_scaled(&mut self, a: f64, x: &Self) {
        let skip = if let Fault::AddScaledSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let a = if self.fault == Fault::AddScaledIgnoresFactor {
            a.signum()
        } else {
            a
        };
        let mut numbers = self.numbers.clone();
        self.unless(skip, |i| numbers[i] += a * x.numbers[i]);
        self.numbers = numbers;
    }
    fn step_from(&mut self, x: &Self, a: f64, d: &Self) {
        let skip = if let Fault::StepFromSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let mut numbers = self.numbers.clone();
        self.unless(skip, |i| {
            let kept = match self.fault {
                Fault::StepFromAccumulates => numbers[i],
                _ => 0.0,
            };
            numbers[i] = kept + x.numbers[i] + a * d.numbers[i];
        });
        self.numbers = numbers;
    }
    fn max_abs(&self) -> f64 {
        let skip = if let Fault::MaxAbsSkips(at) = self.fault {
            Some(at)
        } else {
            None
        };
        let mut most = 0.0_f64;
        self.unless(skip, |i| {
            let number = self.numbers[i];
            let size = if self.fault == Fault::MaxAbsIsMax {
                number
            } else {
                number.abs()
            };
            most = match self.fault {
                Fault::MaxAbsDropsNan => most.max(size),
                Fault::MaxAbsKeepsTheLastNan => {
                    if most > size {
                        most
                    } else {
                        size
                    }
                }
                Fault::MaxAbsDropsInfinity if size.is_infinite() => most,
                _ if most.is_nan() || size.is_nan() => f64::NAN,
                _ => most.max(size),
            };
        });
        most
    }
}

fn verdict(fault: Fault, dim: usize) -> Result<(), Broken> {
    check(
        |v: &[f64]| Faulty {
            numbers: v.to_vec(),
            fault,
        },
        dim,
    )
}

#[test]
fn a_vector_without_fault_passes() {
    for n in LENGTHS {
        assert_eq!(verdict(Fault::None, n), Ok(()));
    }
}

#[test]
fn a_broken_promise_is_found_at_every_length_and_place() {
    let mut missed = Vec::new();
    for n in LENGTHS {
        for at in 0..n {
            for (fault, broken) in [
                (Fault::DotSkips(at), Broken::Dot),
                (Fault::AssignSkips(at), Broken::Assign),
                (Fault::ScaleSkips(at), Broken::Scale),
                (Fault::AddScaledSkips(at), Broken::AddScaled),
                (Fault::StepFromSkips(at), Broken::StepFrom),
                (Fault::MaxAbsSkips(at), Broken::MaxAbs),
            ] {
                let found = verdict(fault, n);
                if found != Err(broken) {
                    missed.push(format!("{fault:?} of {n}: {found:?} instead of {broken:?}"));
                }
            }
        }
    }
    let count = missed.len();
    missed.truncate(10);
    assert!(
        count == 0,
        "{count} are missed, such as\n{}",
        missed.join("\n")
    );
}

#[test]
fn every_kind_of_broken_promise_is_named() {
    for n in [7, 8, 9, 33] {
        for (fault, broken) in [
            (Fault::Dim, Broken::Dim),
            (Fault::DotOfMagnitudes, Broken::Dot),
            (Fault::AddScaledIgnoresFactor, Broken::AddScaled),
            (Fault::StepFromAccumulates, Broken::StepFrom),
            (Fault::MaxAbsIsMax, Broken::MaxAbs),
            (Fault::MaxAbsDropsNan, Broken::LosesNan { at: 0 }),
            (Fault::MaxAbsKeepsTheLastNan, Broken::LosesNan { at: 0 }),
            (Fault::MaxAbsDropsInfinity, Broken::MaxAbs),
            (Fault::DotDropsNonFinite, Broken::HidesNonFinite { at: 0 }),
        ] {
            assert_eq!(verdict(fault, n), Err(broken), "{fault:?} of {n}");
        }
    }
}

/// A handle: its clones share one memory.
#[derive(Clone, Debug)]
struct Shared(Rc<RefCell<Vec<f64>>>);

impl Vector for Shared {
    type Scalar = f64;
    fn dim(&self) -> usize {
        self.0.borrow().len()
    }
    fn dot(&self, other: &Self) -> f64 {
        self.0.borrow().dot(&other.0.borrow())
    }
    fn assign(&mut self, other: &Self) {
        let numbers = other.0.borrow().clone();
        self.0.borrow_mut().assign(&numbers);
    }
    fn scale(&mut self, a: f64) {
        self.0.borrow_mut().scale(a);
    }
    fn add_scaled(&mut self, a: f64, x: &Self) {
        let numbers = x.0.borrow().clone();
        self.0.borrow_mut().add_scaled(a, &numbers);
    }
    fn max_abs(&self) -> f64 {
        self.0.borrow().max_abs()
    }
}

#[test]
fn clones_that_share_their_numbers_are_found() {
    let shared = |v: &[f64]| Shared(Rc::new(RefCell::new(v.to_vec())));
    for n in LENGTHS {
        assert_eq!(check(shared, n), Err(Broken::SharedClone), "length {n}");
    }
}

/// An empty vector that answers as if it had components.
#[derive(Clone, Debug)]
struct NotEmpty {
    dim: usize,
    dot: f64,
    max_abs: f64,
}

impl Vector for NotEmpty {
    type Scalar = f64;
    fn dim(&self) -> usize {
        self.dim
    }
    fn dot(&self, _: &Self) -> f64 {
        self.dot
    }
    fn assign(&mut self, _: &Self) {}
    fn scale(&mut self, _: f64) {}
    fn add_scaled(&mut self, _: f64, _: &Self) {}
    fn max_abs(&self) -> f64 {
        self.max_abs
    }
}

#[test]
fn an_empty_vector_that_answers_wrongly_is_found() {
    let empty = NotEmpty {
        dim: 0,
        dot: 0.0,
        max_abs: 0.0,
    };
    assert_eq!(check_empty(&empty), Ok(()));
    assert_eq!(check_empty(&NotEmpty { dim: 1, ..empty }), Err(Broken::Dim));
    assert_eq!(
        check_empty(&NotEmpty {
            dot: f64::NAN,
            ..empty
        }),
        Err(Broken::Dot)
    );
    assert_eq!(
        check_empty(&NotEmpty {
            max_abs: f64::NAN,
            ..empty
        }),
        Err(Broken::MaxAbs)
    );
    assert_eq!(
        check_empty(&NotEmpty {
            max_abs: f64::NEG_INFINITY,
            ..empty
        }),
        Err(Broken::MaxAbs)
    );
}

#[test]
fn every_broken_promise_is_a_sentence() {
    for (broken, sentence) in [
        (Broken::Dim, "dim() is not the number of components"),
        (Broken::Dot, "dot() is not the sum of products"),
        (Broken::Assign, "assign() does not copy every component"),
        (Broken::Scale, "scale() does not multiply every component"),
        (
            Broken::AddScaled,
            "add_scaled() does not add a x to every component",
        ),
        (Broken::StepFrom, "step_from() is not x + a d"),
        (
            Broken::MaxAbs,
            "max_abs() is not the largest magnitude, or not 0 for an empty vector",
        ),
        (
            Broken::LosesNan { at: 3 },
            "max_abs() loses the NaN of component 3: a gradient of NaN would look converged",
        ),
        (
            Broken::HidesNonFinite { at: 3 },
            "dot() is finite although component 3 is not",
        ),
        (
            Broken::SharedClone,
            "changing a clone changes the original: clones must own their components",
        ),
    ] {
        assert_eq!(broken.to_string(), sentence);
    }
}
