//! The contract of [`Vector`], as a check that a user can run on a type of their own.

use super::Vector;
use crate::Real;
use alloc::vec::Vec;
use num_traits::Float;

/// The promise of [`Vector`] that a type breaks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum Broken {
    /// `dim` differs from the number of components it was made from.
    #[error("dim() is not the number of components")]
    Dim,
    /// `dot` differs from the sum of products, exact on small integers.
    #[error("dot() is not the sum of products")]
    Dot,
    /// `assign` does not copy every component.
    #[error("assign() does not copy every component")]
    Assign,
    /// `scale` does not multiply every component.
    #[error("scale() does not multiply every component")]
    Scale,
    /// `add_scaled` does not add to every component.
    #[error("add_scaled() does not add a x to every component")]
    AddScaled,
    /// `step_from` differs from `x + a d`.
    #[error("step_from() is not x + a d")]
    StepFrom,
    /// `finite_step_from` differs from `x + a d`, or misjudges whether it is finite.
    #[error(
        "finite_step_from() is not x + a d, or does not tell whether every component is finite"
    )]
    FiniteStepFrom,
    /// `scale_add` differs from `a self + b x`.
    #[error("scale_add() is not a self + b x")]
    ScaleAdd,
    /// `subtract_from` differs from `x - self`.
    #[error("subtract_from() is not x - self")]
    SubtractFrom,
    /// `dots` differs from `dot` with each.
    #[error("dots() is not dot() with each vector")]
    Dots,
    /// `survey` differs from the inner products it stands for.
    #[error("survey() does not tell what dot(), dots() and max_abs() tell")]
    Survey,
    /// `combine` differs from `a x + c_0 v_0 + c_1 v_1 + ...`.
    #[error("combine() is not a x plus the scaled vectors")]
    Combine,
    /// `max_abs` differs from the largest magnitude.
    #[error("max_abs() is not the largest magnitude, or not 0 for an empty vector")]
    MaxAbs,
    /// A NaN component does not make `max_abs` NaN.
    #[error("max_abs() loses the NaN of component {at}: a gradient of NaN would look converged")]
    LosesNan {
        /// Where the NaN stood.
        at: usize,
    },
    /// A component that is NaN or infinite does not reach `dot`.
    #[error("dot() is finite although component {at} is not")]
    HidesNonFinite {
        /// Where it stood.
        at: usize,
    },
    /// A clone shares its components with the original.
    #[error("changing a clone changes the original: clones must own their components")]
    SharedClone,
}

/// Tries the contract of [`Vector`] with vectors of length `dim` (at least 1) that `make` builds from components.
///
/// All numbers used are small integers, so every result is exact in `f32` and `f64`. A type of fixed length passes its
/// own length; run several lengths, 0 among them ([`check_empty`]), where the type allows them.
///
/// # Errors
/// The first promise that is broken.
pub fn check<V: Vector>(make: impl Fn(&[V::Scalar]) -> V, dim: usize) -> Result<(), Broken> {
    let num = |k: i64| V::Scalar::of(k as f64);
    // No component is 0, equal to its partner, or twice it: whatever is left out shows.
    let a: Vec<V::Scalar> = (0..dim).map(|i| num(-1 - (i % 7) as i64)).collect();
    let b: Vec<V::Scalar> = (0..dim).map(|i| num((i % 5) as i64 + 1)).collect();
    let (va, vb) = (make(&a), make(&b));
    let unit = |at: usize| {
        let mut unit: Vec<V::Scalar> = (0..dim).map(|_| num(0)).collect();
        unit[at] = num(1);
        make(&unit)
    };
    // Component by component, through nothing but `dot`, which is tried first.
    let same = |v: &V, want: &[V::Scalar]| {
        v.dim() == dim && (0..dim).all(|at| v.dot(&unit(at)) == want[at])
    };
    let ensure = |holds: bool, broken: Broken| if holds { Ok(()) } else { Err(broken) };

    ensure(va.dim() == dim, Broken::Dim)?;
    let zip = |f: &dyn Fn(V::Scalar, V::Scalar) -> V::Scalar| -> Vec<V::Scalar> {
        a.iter().zip(&b).map(|(&x, &y)| f(x, y)).collect()
    };
    let sum = zip(&|x, y| x * y).iter().fold(num(0), |s, &p| s + p);
    ensure(va.dot(&vb) == sum, Broken::Dot)?;
    let largest = a.iter().fold(num(0), |m, x| x.abs().max(m));
    ensure(va.max_abs() == largest, Broken::MaxAbs)?;
    for at in 0..dim {
        // One spike at each place: a component that is skipped cannot hide.
        let mut spike = a.clone();
        spike[at] = num(-50);
        ensure(make(&spike).max_abs() == num(50), Broken::MaxAbs)?;
        ensure(vb.dot(&unit(at)) == b[at], Broken::Dot)?;
    }

    let mut v = va.clone();
    v.assign(&vb);
    ensure(same(&v, &b), Broken::Assign)?;
    ensure(same(&va, &a), Broken::SharedClone)?;
    v.scale(num(3));
    ensure(same(&v, &zip(&|_, y| num(3) * y)), Broken::Scale)?;
    ensure(same(&vb, &b), Broken::SharedClone)?;
    v.assign(&va);
    v.add_scaled(num(-2), &vb);
    let moved = zip(&|x, y| x - num(2) * y);
    ensure(same(&v, &moved), Broken::AddScaled)?;
    // Over numbers that are neither 0 nor the result, then over NaN, which a buffer may hold: a method that adds to what is
    // there, or leaves it, shows.
    let nan = make(&alloc::vec![V::Scalar::nan(); dim]);
    for before in [&vb, &nan] {
        v = before.clone();
        v.assign(&va);
        ensure(same(&v, &a), Broken::Assign)?;
        v = before.clone();
        v.step_from(&va, num(-2), &vb);
        ensure(same(&v, &moved), Broken::StepFrom)?;
        v = before.clone();
        let finite = v.finite_step_from(&va, num(-2), &vb);
        ensure(finite && same(&v, &moved), Broken::FiniteStepFrom)?;
    }
    v = va.clone();
    v.scale_add(num(3), num(-2), &vb);
    let both = zip(&|x, y| num(3) * x - num(2) * y);
    ensure(same(&v, &both), Broken::ScaleAdd)?;
    v = vb.clone();
    v.subtract_from(&va);
    ensure(same(&v, &zip(&|x, y| x - y)), Broken::SubtractFrom)?;
    several(&make, &a, &b)?;

    for at in 0..dim {
        for bad in [
            V::Scalar::nan(),
            V::Scalar::infinity(),
            V::Scalar::neg_infinity(),
        ] {
            let mut tainted = b.clone();
            tainted[at] = bad;
            let tainted = make(&tainted);
            ensure(!tainted.dot(&vb).is_finite(), Broken::HidesNonFinite { at })?;
            ensure(
                !bad.is_nan() || tainted.max_abs().is_nan(),
                Broken::LosesNan { at },
            )?;
            ensure(
                bad.is_nan() || tainted.max_abs() == bad.abs(),
                Broken::MaxAbs,
            )?;
            v = va.clone();
            let judged = [
                v.finite_step_from(&tainted, num(2), &vb),
                v.finite_step_from(&vb, num(2), &tainted),
            ];
            ensure(judged == [false; 2], Broken::FiniteStepFrom)?;
            let told = tainted.survey(&va, &vb, &[], &mut []);
            let kept = told.max_abs == bad.abs() || bad.is_nan() && told.max_abs.is_nan();
            ensure(kept && !told.slope.is_finite(), Broken::Survey)?;
        }
    }
    Ok(())
}

/// The methods that take several vectors, against those that take one; with `a` for the gradient.
fn several<V: Vector>(
    make: &impl Fn(&[V::Scalar]) -> V,
    a: &[V::Scalar],
    b: &[V::Scalar],
) -> Result<(), Broken> {
    let num = |k: i64| V::Scalar::of(k as f64);
    let dot = |x: &[V::Scalar], y: &[V::Scalar]| {
        let products = x.iter().zip(y).map(|(&x, &y)| x * y);
        products.fold(num(0), |sum, p| sum + p)
    };
    let ensure = |holds: bool, broken: Broken| if holds { Ok(()) } else { Err(broken) };
    let (va, vb) = (make(a), make(b));
    // All different, more than any kernel takes at once.
    for count in [0, 1, 2, 3, 4, 5, 7, 25] {
        let shifted = |k: usize| -> Vec<V::Scalar> {
            let each = b.iter().enumerate();
            each.map(|(i, &y)| y + num(((i + k) % 3) as i64 + k as i64))
                .collect()
        };
        let numbers: Vec<Vec<V::Scalar>> = (0..count).map(shifted).collect();
        let vectors: Vec<V> = numbers.iter().map(|v| make(v)).collect();
        let products: Vec<V::Scalar> = numbers.iter().map(|v| dot(v, a)).collect();
        let mut out = alloc::vec![V::Scalar::nan(); count];
        va.dots(&vectors, &mut out);
        ensure(out == products, Broken::Dots)?;

        let d: Vec<V::Scalar> = b.iter().rev().copied().collect();
        let y: Vec<V::Scalar> = a.iter().zip(b).map(|(&g, &old)| g - old).collect();
        out.fill(V::Scalar::nan());
        let told = va.survey(&vb, &make(&d), &vectors, &mut out);
        let largest = a.iter().fold(num(0), |m, x| x.abs().max(m));
        let right = [
            told.slope == dot(a, &d),
            told.max_abs == largest,
            told.square == dot(a, a),
            told.change_gradient == dot(&y, a),
            told.change_square == dot(&y, &y),
            told.change_slope == dot(&y, &d),
            told.direction_square == dot(&d, &d),
            out == products,
        ];
        ensure(right == [true; 8], Broken::Survey)?;

        let coefficients: Vec<V::Scalar> = (0..count).map(|k| num(k as i64 % 4 - 2)).collect();
        let mut sum: Vec<V::Scalar> = a.iter().map(|&x| num(-3) * x).collect();
        for (&c, v) in coefficients.iter().zip(&numbers) {
            for (sum, &x) in sum.iter_mut().zip(v) {
                *sum = *sum + c * x;
            }
        }
        let mut combined = make(&alloc::vec![V::Scalar::nan(); a.len()]);
        combined.combine(num(-3), &va, &coefficients, &vectors);
        let mut off = combined.clone();
        off.add_scaled(num(-1), &make(&sum));
        ensure(off.max_abs() == num(0), Broken::Combine)?;
    }
    Ok(())
}

/// The contract for an empty vector: length 0, `max_abs` 0, `dot` 0, and nothing panics.
///
/// # Errors
/// The first promise that is broken.
pub fn check_empty<V: Vector>(empty: &V) -> Result<(), Broken> {
    let zero = V::Scalar::of(0.0);
    let mut v = empty.clone();
    v.assign(empty);
    v.scale(V::Scalar::of(2.0));
    v.add_scaled(V::Scalar::of(2.0), empty);
    v.step_from(empty, V::Scalar::of(2.0), empty);
    v.scale_add(V::Scalar::of(2.0), V::Scalar::of(3.0), empty);
    v.subtract_from(empty);
    v.combine(
        zero,
        empty,
        &[V::Scalar::of(2.0)],
        core::slice::from_ref(empty),
    );
    let finite = v.finite_step_from(empty, V::Scalar::of(2.0), empty);
    let mut product = [V::Scalar::nan()];
    let told = v.survey(empty, empty, core::slice::from_ref(empty), &mut product);
    if v.dim() != 0 {
        Err(Broken::Dim)
    } else if v.dot(empty) != zero {
        Err(Broken::Dot)
    } else if v.max_abs() != zero {
        Err(Broken::MaxAbs)
    } else if !finite {
        Err(Broken::FiniteStepFrom)
    } else if product != [zero] || told.square != zero || told.max_abs != zero {
        Err(Broken::Survey)
    } else {
        Ok(())
    }
}

/// The contract for two vectors of different length: every method returns, whatever it returns, and none panics.
///
/// A driver notices a changed length itself; this makes sure that it lives to do so.
pub fn exercise_mismatched<V: Vector>(one: &V, other: &V) {
    for (x, y) in [(one, other), (other, one)] {
        let two = V::Scalar::of(2.0);
        let _ = x.dot(y);
        x.clone().assign(y);
        x.clone().add_scaled(two, y);
        x.clone().step_from(y, two, x);
        x.clone().step_from(x, two, y);
        x.clone().finite_step_from(x, two, y);
        x.clone().finite_step_from(y, two, x);
        x.clone().scale_add(two, two, y);
        x.clone().subtract_from(y);
        let (mixed, mut out) = ([y.clone(), x.clone(), y.clone()], [two; 3]);
        x.dots(&mixed, &mut out);
        x.survey(x, x, &mixed, &mut out);
        x.survey(y, x, &mixed, &mut out);
        x.survey(x, y, &mixed, &mut out);
        x.clone().combine(two, x, &[two; 3], &mixed);
        x.clone().combine(two, y, &[two; 3], &mixed);
    }
}
