//! Variables in several blocks: tuples of vectors, and [`Blocks`].

use super::components::larger;
use super::{Survey, Vector};
use crate::Real;
#[cfg(feature = "alloc")]
use alloc::vec::Vec;
use num_traits::Float;

/// Blocks of parameters of one type, as many as there are: the vector of all their components, block after block.
///
/// For blocks of different types, and where there is no allocator, take a tuple of up to four vectors. Both nest.
///
/// - Inner products are taken block by block and added from the first to the last. So iterates are those over one `Vec<T>` of
///   all components to rounding; with a single block, to the bit.
/// - [`dim`](Vector::dim) is the sum of the lengths. Vectors whose blocks differ in number or length have no inner product:
///   [`dot`](Vector::dot) is NaN, also where the sums of the lengths are equal, which `dim` cannot tell. So a gradient of the
///   wrong structure ends a run without a move.
///
/// ```
/// use surefoot::{Descent, Vector, acceptance::WeakWolfe, direction::Lbfgs, finder::ThreePoint, vector::Blocks};
/// // Two tanks, drained through valves: the levels at which each valve's flow is nearest to its share.
/// let shares = [vec![1.0, 2.0], vec![3.0, 1.0, 2.0]];
/// let descent = Descent::new(Lbfgs::new(5)?, ThreePoint::new(), WeakWolfe::default());
/// let start = Blocks(vec![vec![1.0; 2], vec![1.0; 3]]);
/// assert_eq!(start.dim(), 5);
/// let report = descent.minimize_fn(start, |levels, g| {
///     let mut off = 0.0;
///     for ((levels, g), shares) in levels.0.iter().zip(&mut g.0).zip(&shares) {
///         for ((x, g), share) in levels.iter().zip(g).zip(shares) {
///             *g = 4.0 * x * (x * x - share);
///             off += (x * x - share) * (x * x - share);
///         }
///     }
///     off
/// })?;
/// assert!(report.converged());
/// assert!((report.point.0[1][0] - 3.0_f64.sqrt()).abs() < 1e-5);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[cfg(feature = "alloc")]
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Blocks<V>(pub Vec<V>);

#[cfg(feature = "alloc")]
impl<V> Blocks<V> {
    fn pairs<'a>(&'a mut self, other: &'a Self) -> impl Iterator<Item = (&'a mut V, &'a V)> {
        self.0.iter_mut().zip(&other.0)
    }
}

#[cfg(feature = "alloc")]
impl<V: Vector> Vector for Blocks<V> {
    type Scalar = V::Scalar;

    fn dim(&self) -> usize {
        self.0.iter().map(V::dim).sum()
    }

    fn dot(&self, other: &Self) -> V::Scalar {
        if !self.same_blocks(other) {
            return V::Scalar::nan();
        }
        let both = self.0.iter().zip(&other.0);
        let products = both.map(|(x, y)| x.dot(y));
        // Begun with the first product, not with 0: a sum of one block is its product, to the sign of a zero.
        products
            .reduce(|sum, product| sum + product)
            .unwrap_or_else(num_traits::zero)
    }

    fn assign(&mut self, other: &Self) {
        self.pairs(other).for_each(|(to, x)| to.assign(x));
    }

    fn scale(&mut self, a: V::Scalar) {
        self.0.iter_mut().for_each(|y| y.scale(a));
    }

    fn add_scaled(&mut self, a: V::Scalar, x: &Self) {
        self.pairs(x).for_each(|(y, x)| y.add_scaled(a, x));
    }

    fn max_abs(&self) -> V::Scalar {
        let each = self.0.iter().map(V::max_abs);
        each.fold(num_traits::zero(), larger)
    }

    fn step_from(&mut self, x: &Self, a: V::Scalar, d: &Self) {
        for ((to, x), d) in self.pairs(x).zip(&d.0) {
            to.step_from(x, a, d);
        }
    }

    fn finite_step_from(&mut self, x: &Self, a: V::Scalar, d: &Self) -> bool {
        let mut finite = true;
        for ((to, x), d) in self.pairs(x).zip(&d.0) {
            finite &= to.finite_step_from(x, a, d); // every block moves, also behind one that is not finite
        }
        finite
    }

    fn scale_add(&mut self, a: V::Scalar, b: V::Scalar, x: &Self) {
        self.pairs(x).for_each(|(y, x)| y.scale_add(a, b, x));
    }

    fn subtract_from(&mut self, x: &Self) {
        self.pairs(x).for_each(|(y, x)| y.subtract_from(x));
    }

    fn survey(
        &self,
        old: &Self,
        d: &Self,
        others: &[Self],
        out: &mut [V::Scalar],
    ) -> Survey<V::Scalar> {
        self.dots(others, out);
        if !(self.same_blocks(old) && self.same_blocks(d)) {
            return Survey::of(self, old, d); // NaN, by way of `dot`
        }
        let each = self.0.iter().zip(&old.0).zip(&d.0);
        let surveys = each.map(|((g, old), d)| g.survey(old, d, &[], &mut []));
        let all = surveys.reduce(together);
        all.unwrap_or_else(|| Survey::of(self, old, d))
    }
}

/// Whether two variables have as many blocks, of the same lengths.
trait SameBlocks {
    fn same_blocks(&self, other: &Self) -> bool;
}

#[cfg(feature = "alloc")]
impl<V: Vector> SameBlocks for Blocks<V> {
    fn same_blocks(&self, other: &Self) -> bool {
        let mut both = self.0.iter().zip(&other.0);
        self.0.len() == other.0.len() && both.all(|(x, y)| x.dim() == y.dim())
    }
}

/// What surveys of two blocks tell of both together.
fn together<T: Real>(a: Survey<T>, b: Survey<T>) -> Survey<T> {
    Survey {
        slope: a.slope + b.slope,
        max_abs: larger(a.max_abs, b.max_abs),
        square: a.square + b.square,
        change_gradient: a.change_gradient + b.change_gradient,
        change_square: a.change_square + b.change_square,
        change_slope: a.change_slope + b.change_slope,
        direction_square: a.direction_square + b.direction_square,
    }
}

macro_rules! tuple {
    ($(#[$doc:meta])* $A:ident $(, $B:ident at $at:tt)+) => {
        impl<$A: Vector $(, $B: Vector<Scalar = $A::Scalar>)+> SameBlocks for ($A $(, $B)+) {
            fn same_blocks(&self, other: &Self) -> bool {
                self.0.dim() == other.0.dim() $(&& self.$at.dim() == other.$at.dim())+
            }
        }

        $(#[$doc])*
        impl<$A: Vector $(, $B: Vector<Scalar = $A::Scalar>)+> Vector for ($A $(, $B)+) {
            type Scalar = $A::Scalar;

            fn dim(&self) -> usize {
                self.0.dim() $(+ self.$at.dim())+
            }

            fn dot(&self, other: &Self) -> $A::Scalar {
                if !self.same_blocks(other) {
                    return $A::Scalar::nan();
                }
                self.0.dot(&other.0) $(+ self.$at.dot(&other.$at))+
            }

            fn assign(&mut self, other: &Self) {
                self.0.assign(&other.0);
                $(self.$at.assign(&other.$at);)+
            }

            fn scale(&mut self, a: $A::Scalar) {
                self.0.scale(a);
                $(self.$at.scale(a);)+
            }

            fn add_scaled(&mut self, a: $A::Scalar, x: &Self) {
                self.0.add_scaled(a, &x.0);
                $(self.$at.add_scaled(a, &x.$at);)+
            }

            fn max_abs(&self) -> $A::Scalar {
                let most = self.0.max_abs();
                $(let most = larger(most, self.$at.max_abs());)+
                most
            }

            fn step_from(&mut self, x: &Self, a: $A::Scalar, d: &Self) {
                self.0.step_from(&x.0, a, &d.0);
                $(self.$at.step_from(&x.$at, a, &d.$at);)+
            }

            fn finite_step_from(&mut self, x: &Self, a: $A::Scalar, d: &Self) -> bool {
                let finite = self.0.finite_step_from(&x.0, a, &d.0);
                // Every block moves, also behind one that is not finite.
                $(let finite = self.$at.finite_step_from(&x.$at, a, &d.$at) && finite;)+
                finite
            }

            fn scale_add(&mut self, a: $A::Scalar, b: $A::Scalar, x: &Self) {
                self.0.scale_add(a, b, &x.0);
                $(self.$at.scale_add(a, b, &x.$at);)+
            }

            fn subtract_from(&mut self, x: &Self) {
                self.0.subtract_from(&x.0);
                $(self.$at.subtract_from(&x.$at);)+
            }

            fn survey(
                &self,
                old: &Self,
                d: &Self,
                others: &[Self],
                out: &mut [$A::Scalar],
            ) -> Survey<$A::Scalar> {
                self.dots(others, out);
                if !(self.same_blocks(old) && self.same_blocks(d)) {
                    return Survey::of(self, old, d); // NaN, by way of `dot`
                }
                let all = self.0.survey(&old.0, &d.0, &[], &mut []);
                $(let all = together(all, self.$at.survey(&old.$at, &d.$at, &[], &mut []));)+
                all
            }
        }
    };
}

tuple!(
    /// Two vectors as one variable: two blocks of parameters, each with a type of its own over the same scalar. Tuples of
    /// three and four work alike, and nest.
    ///
    /// What [`Blocks`] says of inner products and of lengths holds here too.
    ///
    /// ```
    /// use surefoot::{Descent, acceptance::StrongWolfe, direction::{ConjugateGradient, Update}, finder::ThreePoint};
    /// // A line through four readings of a float gauge: heights, and two numbers that all of them share (offset, drift).
    /// let readings = [2.1, 2.9, 4.2, 4.8];
    /// let rule = StrongWolfe::new(1e-4, 0.1)?;
    /// let descent = Descent::new(ConjugateGradient::new(Update::HagerZhang), ThreePoint::new(), rule);
    /// let start = ([0.0; 4], [0.0; 2]);
    /// let report = descent.minimize_fn(start, |(heights, line), (to_heights, to_line)| {
    ///     let mut off = 0.0;
    ///     *to_line = [0.0; 2];
    ///     for (i, reading) in readings.iter().enumerate() {
    ///         let (misread, bend) = (heights[i] - reading, heights[i] - line[0] - line[1] * i as f64);
    ///         off += 0.5 * (misread * misread + bend * bend);
    ///         to_heights[i] = misread + bend;
    ///         to_line[0] -= bend;
    ///         to_line[1] -= bend * i as f64;
    ///     }
    ///     off
    /// })?;
    /// assert!(report.converged());
    /// // The heights give way half-way to the readings, and the line is the regression line of the readings.
    /// let (heights, line) = report.point;
    /// assert!((line[0] - 2.09).abs() < 1e-4 && (line[1] - 0.94).abs() < 1e-4);
    /// assert!((heights[2] - 0.5 * (4.2 + 2.09 + 2.0 * 0.94)).abs() < 1e-4);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    A, B at 1
);
tuple!(
    /// Three vectors as one variable: see the pair.
    A, B at 1, C at 2
);
tuple!(
    /// Four vectors as one variable: see the pair.
    A, B at 1, C at 2, D at 3
);
