//! ndarray's arrays keep the contract of `Vector` in every layout, and mixed; rows first, runs have the bits of runs over
//! `Vec`.

mod backends;

use backends::{
    N, Numbers, another_length_is_named, another_structure_moves_nothing, none_allocates,
    same_bits, same_to_rounding,
};
use ndarray::{
    Array, Array0, Array1, Array2, Array3, ArrayD, Axis, Dimension, IntoDimension, Ix2, IxDyn,
    ShapeBuilder, Slice,
};
use std::cell::Cell;
use surefoot::vector::conformance::{check, check_empty, exercise_mismatched};
use surefoot::{Real, Vector};

/// How an array may lie in memory.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Layout {
    /// Standard: the last axis runs fastest, no gaps.
    RowsFirst,
    /// The first axis runs fastest, no gaps.
    ColumnsFirst,
    /// Rows first, with the first axis backwards.
    Backwards,
    /// Every other row of a larger array: gaps.
    Gaps,
    /// Columns first, with gaps, the last axis backwards.
    GapsBackwards,
}

const LAYOUTS: [Layout; 5] = [
    Layout::RowsFirst,
    Layout::ColumnsFirst,
    Layout::Backwards,
    Layout::Gaps,
    Layout::GapsBackwards,
];

/// The array of this shape with these numbers in logical order, laid out in memory as told.
fn laid_out<T: Real, D: Dimension>(shape: D, layout: Layout, numbers: &[T]) -> Array<T, D> {
    let mut double = shape.clone();
    double[0] *= 2;
    let zero = T::of(0.0);
    let mut array = match layout {
        Layout::RowsFirst | Layout::Backwards => Array::from_elem(shape, zero),
        Layout::ColumnsFirst => Array::from_elem(shape.f(), zero),
        Layout::Gaps => Array::from_elem(double, zero),
        Layout::GapsBackwards => Array::from_elem(double.f(), zero),
    };
    match layout {
        Layout::RowsFirst | Layout::ColumnsFirst => {}
        Layout::Backwards => array.invert_axis(Axis(0)),
        Layout::Gaps => array.slice_axis_inplace(Axis(0), Slice::from(..).step_by(2)),
        Layout::GapsBackwards => {
            array.slice_axis_inplace(Axis(0), Slice::from(..).step_by(2));
            array.invert_axis(Axis(array.ndim() - 1));
        }
    }
    array.iter_mut().zip(numbers).for_each(|(x, &n)| *x = n);
    array
}

#[test]
fn the_layouts_are_what_they_are_called() {
    let numbers: Vec<f64> = (0..6).map(f64::from).collect();
    let strides = [[3, 1], [1, 2], [-3, 1], [6, 1], [2, -4]];
    for (layout, strides) in LAYOUTS.into_iter().zip(strides) {
        let array = laid_out(Ix2(2, 3), layout, &numbers);
        assert_eq!(array.strides(), strides, "{layout:?}");
        assert_eq!(array[(1, 0)], 3.0);
        assert_eq!(array.clone().strides(), strides, "a clone keeps its layout");
        let without_gaps = !matches!(layout, Layout::Gaps | Layout::GapsBackwards);
        assert_eq!(array.as_slice_memory_order().is_some(), without_gaps);
        assert_eq!(array.as_slice().is_some(), layout == Layout::RowsFirst);
    }
}

fn keeps<T: Real, D: Dimension>(shape: D) {
    let n = shape.size();
    for layout in LAYOUTS {
        let make = |numbers: &[T]| laid_out(shape.clone(), layout, numbers);
        assert_eq!(check(make, n), Ok(()), "{shape:?}, {layout:?}");
    }
    // Each vector in another layout than the one before.
    for step in 1..LAYOUTS.len() {
        let made = Cell::new(0);
        let make = |numbers: &[T]| {
            made.set(made.get() + step);
            laid_out(shape.clone(), LAYOUTS[made.get() % LAYOUTS.len()], numbers)
        };
        assert_eq!(check(make, n), Ok(()), "{shape:?}, mixed by {step}");
    }
}

#[test]
fn arrays_of_any_dimension_and_layout_keep_the_contract() {
    fn all<T: Real>() {
        for n in [1, 2, 7, 8, 9, 33] {
            keeps::<T, _>(n.into_dimension());
        }
        for shape in [(1, 1), (1, 9), (9, 1), (2, 3), (5, 7)] {
            keeps::<T, _>(shape.into_dimension());
        }
        keeps::<T, _>((2, 3, 4).into_dimension());
        keeps::<T, _>((3, 1, 2, 3).into_dimension());
        keeps::<T, _>(IxDyn(&[2, 3, 2, 1, 2]));
        let single = |numbers: &[T]| Array0::from_elem((), numbers[0]);
        assert_eq!(check(single, 1), Ok(()));
        assert_eq!(check_empty(&Array1::<T>::from_elem(0, T::of(1.0))), Ok(()));
        for shape in [(0, 3), (3, 0), (0, 0)] {
            let empty = Array2::from_elem(shape, T::of(1.0));
            assert_eq!(check_empty(&empty), Ok(()));
            let empty = Array2::from_elem(shape.f(), T::of(1.0));
            assert_eq!(check_empty(&empty), Ok(()));
        }
    }
    all::<f64>();
    all::<f32>();
}

#[test]
fn arrays_of_other_shapes_make_nothing_panic_and_have_no_inner_product() {
    let ones = |shape: &[usize], layout| {
        let n = shape.iter().product();
        laid_out(IxDyn(shape), layout, &vec![1.0; n])
    };
    let shapes: [&[usize]; 8] = [
        &[6],
        &[2, 3],
        &[3, 2],
        &[1, 6],
        &[2, 4],
        &[1, 1],
        &[2, 3, 1],
        &[5, 0],
    ];
    for one in shapes {
        for other in shapes {
            for (first, second) in LAYOUTS.into_iter().zip(LAYOUTS.into_iter().rev()) {
                let (x, y) = (ones(one, first), ones(other, second));
                exercise_mismatched(&x, &y);
                let product = Vector::dot(&x, &y);
                let n: usize = one.iter().product();
                if one == other {
                    assert_eq!(product, n as f64);
                } else {
                    assert!(product.is_nan(), "{one:?} . {other:?} = {product}");
                }
            }
        }
    }
}

macro_rules! numbers {
    ($($V:ty => $shape:expr),+ $(,)?) => {$(
        impl Numbers for $V {
            fn of(numbers: &[f64]) -> Self {
                laid_out($shape.into_dimension(), LAYOUT.get(), numbers)
            }
            fn read(&self, numbers: &mut [f64]) {
                numbers.iter_mut().zip(self).for_each(|(n, x)| *n = *x);
            }
            fn write(&mut self, numbers: &[f64]) {
                self.iter_mut().zip(numbers).for_each(|(x, n)| *x = *n);
            }
        }
    )+};
}

thread_local! {
    /// The layout of the arrays that this thread makes.
    static LAYOUT: Cell<Layout> = const { Cell::new(Layout::RowsFirst) };
}

numbers!(
    Array1<f64> => N,
    Array2<f64> => (4, 6),
    Array3<f64> => (2, 3, 4),
    ArrayD<f64> => IxDyn(&[2, 2, 3, 2]),
);

#[test]
fn runs_over_standard_layouts_have_the_bits_of_runs_over_vec() {
    same_bits::<Array1<f64>>();
    same_bits::<Array2<f64>>();
    same_bits::<Array3<f64>>();
    same_bits::<ArrayD<f64>>();
}

#[test]
fn runs_over_other_layouts_are_the_same_to_rounding() {
    for layout in LAYOUTS {
        LAYOUT.set(layout);
        same_to_rounding::<Array1<f64>>();
        same_to_rounding::<Array2<f64>>();
        same_to_rounding::<Array3<f64>>();
        same_to_rounding::<ArrayD<f64>>();
    }
}

#[test]
fn no_iteration_allocates_in_any_layout() {
    for layout in LAYOUTS {
        LAYOUT.set(layout);
        none_allocates::<Array1<f64>>();
        none_allocates::<Array2<f64>>();
        none_allocates::<Array3<f64>>();
    }
}

#[test]
fn a_gradient_of_another_length_is_named() {
    another_length_is_named(&Array1::from_elem(N + 1, 1.0));
    another_length_is_named(&Array1::from_elem(0, 1.0));
    another_length_is_named(&Array2::from_elem((4, 5), 1.0));
    another_length_is_named(&ArrayD::from_elem(IxDyn(&[2]), 1.0));
}

#[test]
fn a_gradient_of_another_shape_moves_nothing() {
    another_structure_moves_nothing(&Array2::from_elem((6, 4), 1.0));
    another_structure_moves_nothing(&Array2::from_elem((1, N), 1.0));
    another_structure_moves_nothing(&ArrayD::from_elem(IxDyn(&[N]), 1.0));
}
