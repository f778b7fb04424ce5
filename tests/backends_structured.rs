//! Tuples of vectors and `Blocks` keep the contract of `Vector`, tell blocks of other lengths apart, and run as `Vec` does.

mod backends;

use backends::{
    N, Numbers, another_length_is_named, another_structure_moves_nothing, none_allocates,
    same_bits, same_to_rounding,
};
use surefoot::vector::Blocks;
use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};
use surefoot::{Real, Vector};

const LENGTHS: [usize; 6] = [1, 2, 7, 8, 9, 33];

/// Cut at these shares of the length, in percent.
fn cut<'n, T, const K: usize>(numbers: &'n [T], shares: [usize; K]) -> Vec<&'n [T]> {
    let mut from = 0;
    let mut pieces: Vec<&'n [T]> = shares
        .iter()
        .map(|share| {
            let to = (numbers.len() * share / 100).max(from);
            let piece = &numbers[from..to];
            from = to;
            piece
        })
        .collect();
    pieces.push(&numbers[from..]);
    pieces
}

#[test]
fn tuples_keep_the_contract() {
    fn keeps<T: Real>() {
        for n in LENGTHS {
            // Some blocks are empty, first, in the middle and last.
            for share in [0, 30, 50, 100] {
                let pair = |numbers: &[T]| {
                    let p = cut(numbers, [share]);
                    (p[0].to_vec(), p[1].to_vec())
                };
                assert_eq!(check(pair, n), Ok(()), "{n} at {share}");
                let triple = |numbers: &[T]| {
                    let p = cut(numbers, [20, share]);
                    (p[0].to_vec(), p[1].to_vec(), p[2].to_vec())
                };
                assert_eq!(check(triple, n), Ok(()), "{n} at {share}");
                let nested = |numbers: &[T]| {
                    let p = cut(numbers, [10, 25, 60, share.max(70)]);
                    let inner = Blocks(vec![p[2].to_vec(), p[3].to_vec()]);
                    (p[0].to_vec(), (p[1].to_vec(), inner), p[4].to_vec())
                };
                assert_eq!(check(nested, n), Ok(()), "{n} at {share}");
            }
        }
        let mixed = |v: &[T]| ([v[0]], [v[1], v[2], v[3]], vec![v[4]], [v[5], v[6]]);
        assert_eq!(check(mixed, 7), Ok(()));
        let none: (Vec<T>, [T; 0], Vec<T>, [T; 0]) = Default::default();
        assert_eq!(check_empty(&none), Ok(()));
    }
    keeps::<f64>();
    keeps::<f32>();
}

fn blocks<T: Real, const K: usize>(numbers: &[T], shares: [usize; K]) -> Blocks<Vec<T>> {
    let pieces = cut(numbers, shares);
    Blocks(pieces.into_iter().map(<[T]>::to_vec).collect())
}

#[test]
fn blocks_keep_the_contract() {
    fn keeps<T: Real>() {
        for n in LENGTHS {
            assert_eq!(check(|v: &[T]| blocks(v, []), n), Ok(()));
            assert_eq!(check(|v: &[T]| blocks(v, [50]), n), Ok(()));
            let make = |v: &[T]| blocks(v, [0, 10, 10, 25, 60, 100]);
            assert_eq!(check(make, n), Ok(()));
            let singles = |v: &[T]| Blocks(v.iter().map(|&x| [x]).collect());
            assert_eq!(check(singles, n), Ok(()));
            let nested = |v: &[T]| Blocks(vec![blocks(v, [40]), Blocks(vec![]), blocks(&[], [])]);
            assert_eq!(check(nested, n), Ok(()));
        }
        assert_eq!(check_empty(&Blocks::<Vec<T>>(vec![])), Ok(()));
        assert_eq!(check_empty(&Blocks::<Vec<T>>(vec![vec![], vec![]])), Ok(()));
    }
    keeps::<f64>();
    keeps::<f32>();
}

#[test]
fn other_blocks_make_nothing_panic_and_have_no_inner_product() {
    let of = |lengths: &[usize]| Blocks(lengths.iter().map(|&n| vec![1.0_f64; n]).collect());
    let all: [&[usize]; 6] = [&[2, 3], &[3, 2], &[5], &[2, 2, 1], &[], &[2, 3, 0]];
    for one in all {
        for other in all {
            let (x, y) = (of(one), of(other));
            exercise_mismatched(&x, &y);
            assert_eq!(x.dot(&y).is_nan(), one != other, "{one:?} {other:?}");
            assert_eq!(
                x.survey(&x, &y, &[], &mut []).slope.is_nan(),
                one != other,
                "{one:?} {other:?}"
            );
        }
    }
    let pair = |a: usize, b: usize| (vec![1.0_f64; a], vec![1.0; b]);
    exercise_mismatched(&pair(2, 3), &pair(3, 2));
    assert!(pair(2, 3).dot(&pair(3, 2)).is_nan());
    assert_eq!(pair(2, 3).dot(&pair(2, 3)), 5.0);
    let inside = |a: usize, b: usize| (pair(a, b), Blocks(vec![pair(1, 1)]), vec![1.0]);
    exercise_mismatched(&inside(0, 4), &inside(4, 0));
    assert!(inside(0, 4).dot(&inside(4, 0)).is_nan());
    let four = |a: usize, b: usize| (vec![1.0_f64], vec![1.0; a], vec![1.0; b], [1.0]);
    exercise_mismatched(&four(1, 2), &four(2, 1));
    assert!(four(1, 2).dot(&four(2, 1)).is_nan());
}

#[test]
fn every_block_moves_also_behind_one_that_is_not_finite() {
    let x = (vec![1.0, 2.0], [3.0], vec![4.0]);
    for (bad, name) in [
        ((vec![f64::INFINITY, 1.0], [1.0], vec![1.0]), "first"),
        ((vec![1.0, 1.0], [f64::NAN], vec![1.0]), "second"),
        ((vec![1.0, 1.0], [1.0], vec![f64::NEG_INFINITY]), "third"),
    ] {
        let mut to = x.clone();
        assert!(!to.finite_step_from(&x, 2.0, &bad), "{name}");
        let expected = [3.0, 4.0, 5.0, 6.0];
        let found = [to.0[0], to.0[1], to.1[0], to.2[0]];
        let finite = found.iter().zip(expected).filter(|(x, _)| x.is_finite());
        assert_eq!(finite.clone().count(), 3, "{name}");
        for (found, expected) in finite {
            assert_eq!(*found, expected, "{name}");
        }
    }
    let x = Blocks(vec![vec![1.0], vec![2.0], vec![3.0]]);
    let mut to = x.clone();
    let bad = Blocks(vec![vec![1.0], vec![f64::NAN], vec![1.0]]);
    assert!(!to.finite_step_from(&x, 2.0, &bad));
    assert_eq!((to.0[0][0], to.0[2][0]), (3.0, 5.0));
}

/// Cut 1 + 7 + 16.
impl Numbers for (Vec<f64>, [f64; 7], Vec<f64>) {
    fn of(v: &[f64]) -> Self {
        let middle = std::array::from_fn(|i| v[i + 1]);
        (v[..1].to_vec(), middle, v[8..].to_vec())
    }
    fn read(&self, numbers: &mut [f64]) {
        let all = self.0.iter().chain(&self.1).chain(&self.2);
        numbers.iter_mut().zip(all).for_each(|(n, x)| *n = *x);
    }
    fn write(&mut self, numbers: &[f64]) {
        let all = self.0.iter_mut().chain(&mut self.1).chain(&mut self.2);
        all.zip(numbers).for_each(|(x, n)| *x = *n);
    }
}

/// Cut 10 + 14.
impl Numbers for Blocks<Vec<f64>> {
    fn of(numbers: &[f64]) -> Self {
        Blocks(vec![numbers[..10].to_vec(), numbers[10..].to_vec()])
    }
    fn read(&self, numbers: &mut [f64]) {
        let all = self.0.iter().flatten();
        numbers.iter_mut().zip(all).for_each(|(n, x)| *n = *x);
    }
    fn write(&mut self, numbers: &[f64]) {
        let all = self.0.iter_mut().flatten();
        all.zip(numbers).for_each(|(x, n)| *x = *n);
    }
}

/// In one piece.
impl Numbers for Blocks<[f64; N]> {
    fn of(numbers: &[f64]) -> Self {
        Blocks(vec![std::array::from_fn(|i| numbers[i])])
    }
    fn read(&self, numbers: &mut [f64]) {
        numbers.copy_from_slice(&self.0[0]);
    }
    fn write(&mut self, numbers: &[f64]) {
        self.0[0].copy_from_slice(numbers);
    }
}

#[test]
fn runs_over_several_blocks_are_those_over_vec_to_rounding() {
    same_to_rounding::<(Vec<f64>, [f64; 7], Vec<f64>)>();
    same_to_rounding::<Blocks<Vec<f64>>>();
}

#[test]
fn runs_over_one_block_have_the_bits_of_runs_over_vec() {
    same_bits::<Blocks<[f64; N]>>();
}

#[test]
fn no_iteration_allocates() {
    none_allocates::<(Vec<f64>, [f64; 7], Vec<f64>)>();
    none_allocates::<Blocks<Vec<f64>>>();
    none_allocates::<Blocks<[f64; N]>>();
}

#[test]
fn a_gradient_of_another_length_is_named() {
    another_length_is_named(&(vec![1.0], [1.0; 7], vec![1.0; 15]));
    another_length_is_named(&(vec![], [1.0; 7], vec![1.0; 16]));
    another_length_is_named(&Blocks(vec![vec![1.0; 10], vec![1.0; 13]]));
    another_length_is_named(&Blocks(vec![vec![1.0; 10], vec![1.0; 14], vec![1.0]]));
    another_length_is_named(&Blocks::<Vec<f64>>(vec![]));
}

#[test]
fn a_gradient_whose_blocks_swapped_lengths_moves_nothing() {
    another_structure_moves_nothing(&(vec![1.0; 16], [1.0; 7], vec![1.0]));
    another_structure_moves_nothing(&Blocks(vec![vec![1.0; 14], vec![1.0; 10]]));
    another_structure_moves_nothing(&Blocks(vec![vec![1.0; N]]));
    another_structure_moves_nothing(&Blocks(vec![vec![1.0; 10], vec![1.0; 7], vec![1.0; 7]]));
}
