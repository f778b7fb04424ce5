//! The conformance check finds a fused method that differs from the plain ones, at every length.
#![cfg(feature = "alloc")]

use surefoot::Vector;
use surefoot::vector::Survey;
use surefoot::vector::conformance::{Broken, check};

/// What a deliberately broken vector does wrong.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Fault {
    None,
    /// `assign` scales by 0 and adds: a NaN that stood there stays.
    AssignKeepsNan,
    /// `step_from` likewise.
    StepFromKeepsNan,
    /// `finite_step_from` says yes to everything.
    FiniteStepFromIsBlind,
    /// ... leaves the last component where it was.
    FiniteStepFromSkips,
    /// `scale_add` takes its factors for each other.
    ScaleAddSwaps,
    /// `subtract_from` subtracts the other way round.
    SubtractFromIsReversed,
    /// `dots` stops after four vectors.
    DotsStopsAtFour,
    /// ... takes the first vector for all.
    DotsRepeats,
    /// `survey` forgets the products with the other vectors.
    SurveyForgetsOthers,
    /// ... has one of its seven numbers wrong.
    SurveyErrs(usize),
    /// ... drops a NaN in the largest magnitude.
    SurveyDropsNan,
    /// `combine` adds to what is there.
    CombineAccumulates,
    /// ... leaves out the last vector.
    CombineSkips,
    /// ... forgets the factor of `x`.
    CombineIgnoresFactor,
}

#[derive(Clone, Debug)]
struct Faulty(Vec<f64>, Fault);

impl Vector for Faulty {
    type Scalar = f64;
    fn dim(&self) -> usize {
        self.0.dim()
    }
    fn dot(&self, other: &Self) -> f64 {
        self.0.dot(&other.0)
    }
    fn assign(&mut self, other: &Self) {
        if self.1 == Fault::AssignKeepsNan {
            self.0.scale(0.0);
            self.0.add_scaled(1.0, &other.0);
        } else {
            self.0.assign(&other.0);
        }
    }
    fn scale(&mut self, a: f64) {
        self.0.scale(a);
    }
    fn add_scaled(&mut self, a: f64, x: &Self) {
        self.0.add_scaled(a, &x.0);
    }
    fn max_abs(&self) -> f64 {
        self.0.max_abs()
    }
    fn step_from(&mut self, x: &Self, a: f64, d: &Self) {
        if self.1 == Fault::StepFromKeepsNan {
            self.0.scale(0.0);
            self.0.add_scaled(1.0, &x.0);
            self.0.add_scaled(a, &d.0);
        } else {
            self.0.step_from(&x.0, a, &d.0);
        }
    }
    fn finite_step_from(&mut self, x: &Self, a: f64, d: &Self) -> bool {
        let last = self.0.len() - 1;
        let before = self.0[last];
        let finite = self.0.finite_step_from(&x.0, a, &d.0);
        if self.1 == Fault::FiniteStepFromSkips {
            self.0[last] = before;
        }
        finite || self.1 == Fault::FiniteStepFromIsBlind
    }
    fn scale_add(&mut self, a: f64, b: f64, x: &Self) {
        let (a, b) = match self.1 {
            Fault::ScaleAddSwaps => (b, a),
            _ => (a, b),
        };
        self.0.scale_add(a, b, &x.0);
    }
    fn subtract_from(&mut self, x: &Self) {
        self.0.subtract_from(&x.0);
        if self.1 == Fault::SubtractFromIsReversed {
            self.0.scale(-1.0);
        }
    }
    fn dots(&self, others: &[Self], out: &mut [f64]) {
        for (i, out) in out.iter_mut().enumerate() {
            let other = match self.1 {
                Fault::DotsStopsAtFour if i >= 4 => break,
                Fault::DotsRepeats => &others[0],
                _ => &others[i],
            };
            *out = self.dot(other);
        }
    }
    fn survey(&self, old: &Self, d: &Self, others: &[Self], out: &mut [f64]) -> Survey<f64> {
        let mut told = Survey::of(self, old, d);
        if self.1 != Fault::SurveyForgetsOthers {
            self.dots(others, out);
        }
        if let Fault::SurveyErrs(which) = self.1 {
            let numbers = [
                &mut told.slope,
                &mut told.max_abs,
                &mut told.square,
                &mut told.change_gradient,
                &mut told.change_square,
                &mut told.change_slope,
                &mut told.direction_square,
            ];
            *numbers.into_iter().nth(which).unwrap() += 1.0;
        }
        if self.1 == Fault::SurveyDropsNan && told.max_abs.is_nan() {
            told.max_abs = f64::INFINITY;
        }
        told
    }
    fn combine(&mut self, a: f64, x: &Self, coefficients: &[f64], vectors: &[Self]) {
        let mut sum = match self.1 {
            Fault::CombineIgnoresFactor => x.0.clone(),
            _ => x.0.iter().map(|x| a * x).collect(),
        };
        if self.1 == Fault::CombineAccumulates {
            sum.add_scaled(1.0, &self.0);
        }
        for (i, (&c, v)) in coefficients.iter().zip(vectors).enumerate() {
            if self.1 != Fault::CombineSkips || i + 1 < vectors.len() {
                sum.add_scaled(c, &v.0);
            }
        }
        self.0 = sum;
    }
}

#[test]
fn every_fault_of_a_fused_method_is_named() {
    for n in [1, 2, 7, 8, 9, 33, 70] {
        let verdict = |fault| check(|v: &[f64]| Faulty(v.to_vec(), fault), n);
        assert_eq!(verdict(Fault::None), Ok(()), "length {n}");
        let mut faults = vec![
            (Fault::AssignKeepsNan, Broken::Assign),
            (Fault::StepFromKeepsNan, Broken::StepFrom),
            (Fault::FiniteStepFromIsBlind, Broken::FiniteStepFrom),
            (Fault::FiniteStepFromSkips, Broken::FiniteStepFrom),
            (Fault::ScaleAddSwaps, Broken::ScaleAdd),
            (Fault::SubtractFromIsReversed, Broken::SubtractFrom),
            (Fault::DotsStopsAtFour, Broken::Dots),
            (Fault::DotsRepeats, Broken::Dots),
            (Fault::SurveyForgetsOthers, Broken::Survey),
            (Fault::SurveyDropsNan, Broken::Survey),
            (Fault::CombineAccumulates, Broken::Combine),
            (Fault::CombineSkips, Broken::Combine),
            (Fault::CombineIgnoresFactor, Broken::Combine),
        ];
        faults.extend((0..7).map(|which| (Fault::SurveyErrs(which), Broken::Survey)));
        for (fault, broken) in faults {
            assert_eq!(verdict(fault), Err(broken), "{fault:?} of {n}");
        }
    }
}

#[test]
fn every_broken_promise_of_a_fused_method_is_a_sentence() {
    for (broken, sentence) in [
        (
            Broken::FiniteStepFrom,
            "finite_step_from() is not x + a d, or does not tell whether every component is finite",
        ),
        (Broken::ScaleAdd, "scale_add() is not a self + b x"),
        (Broken::SubtractFrom, "subtract_from() is not x - self"),
        (Broken::Dots, "dots() is not dot() with each vector"),
        (
            Broken::Survey,
            "survey() does not tell what dot(), dots() and max_abs() tell",
        ),
        (
            Broken::Combine,
            "combine() is not a x plus the scaled vectors",
        ),
    ] {
        assert_eq!(broken.to_string(), sentence);
    }
}
