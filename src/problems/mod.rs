//! Reference problems with known answers, to try a rule, a finder or a whole driver on.
//!
//! | what | where |
//! |---|---|
//! | six published functions of one variable | [`more_thuente`] |
//! | as many random functions of one variable as you like, from a seed | [`RandomRay`] |
//! | a second such family of other kinds, on which nothing was chosen | [`FurtherRay`] |
//! | published problems of several variables, with starts and minima | [`more_garbow_hillstrom`](fn@more_garbow_hillstrom) |
//! | published problems of as many variables as you like | [`large_problems`], one by one in [`large`] |
//! | noise, delay and edges for any objective | [`wrapped`] |
//!
//! A [`Problem`] is an [`Objective`](crate::Objective) on `Vec<f64>`.

mod error;
mod formula;
mod further_ray;
mod problem;
mod random_ray;
mod rays;
mod squares;

pub mod large;
pub mod more_garbow_hillstrom;
pub mod wrapped;

pub use self::error::{WrongLength, WrongSize};
pub use self::further_ray::{FurtherRay, FurtherRayKind};
pub use self::large::large_problems;
pub use self::more_garbow_hillstrom::more_garbow_hillstrom;
pub use self::problem::{Minimum, Problem};
pub use self::random_ray::{RandomRay, RandomRayKind};
pub use self::rays::{RayProblem, more_thuente};
