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
    v.assign(&vb); // neither 0 nor the result: a method that adds to what is there, or leaves it, shows
    v.step_from(&va, num(-2), &vb);
    ensure(same(&v, &moved), Broken::StepFrom)?;

    for at in 0..dim {
        for bad in [V::Scalar::nan(), V::Scalar::infinity()] {
            let mut tainted = b.clone();
            tainted[at] = bad;
            let tainted = make(&tainted);
            ensure(!tainted.dot(&vb).is_finite(), Broken::HidesNonFinite { at })?;
            ensure(
                !bad.is_nan() || tainted.max_abs().is_nan(),
                Broken::LosesNan { at },
            )?;
            ensure(bad.is_nan() || tainted.max_abs() == bad, Broken::MaxAbs)?;
        }
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
    if v.dim() != 0 {
        Err(Broken::Dim)
    } else if v.dot(empty) != zero {
        Err(Broken::Dot)
    } else if v.max_abs() != zero {
        Err(Broken::MaxAbs)
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
    }
}
