//! Problems of J. J. Moré, B. S. Garbow and K. E. Hillstrom, "Testing unconstrained optimization software",
//! ACM Trans. Math. Software 7(1), 1981, 17-41, doi:10.1145/355934.355936.
//!
//! `f(x) = sum_{i=1..m} r_i(x)^2`. A function here makes a problem; its documentation gives the residuals `r_i`, the
//! standard start and the known minima, with components counted from 1 as in the paper. Formulas and data are those of
//! the paper's problem of that number. Where more digits of a minimum are given than the paper prints, the printed
//! point was refined by Newton's method with 70 digits.
//!
//! A problem is one file: its function, its residuals, and `listed`, the sizes that go into
//! [`more_garbow_hillstrom`](fn@more_garbow_hillstrom).

use std::vec::Vec;

use super::error::{GREATEST, WrongSize};
use super::problem::{Problem, Residuals};
use super::squares::Squares;

mod bard;
mod beale;
mod biggs_exp6;
mod box_three_dimensional;
mod brown_almost_linear;
mod brown_badly_scaled;
mod brown_dennis;
mod broyden_banded;
mod broyden_tridiagonal;
mod chebyquad;
mod discrete_boundary_value;
mod discrete_integral_equation;
mod extended_powell_singular;
mod extended_rosenbrock;
mod freudenstein_roth;
mod gaussian;
mod gulf;
mod helical_valley;
mod jennrich_sampson;
mod kowalik_osborne;
mod linear_full_rank;
mod linear_rank_1;
mod linear_rank_1_with_zeros;
mod meyer;
mod osborne_1;
mod osborne_2;
mod penalty_1;
mod penalty_2;
mod powell_badly_scaled;
mod powell_singular;
mod rosenbrock;
mod trigonometric;
mod variably_dimensioned;
mod watson;
mod wood;

pub use self::bard::bard;
pub use self::beale::beale;
pub use self::biggs_exp6::biggs_exp6;
pub use self::box_three_dimensional::box_three_dimensional;
pub use self::brown_almost_linear::brown_almost_linear;
pub use self::brown_badly_scaled::brown_badly_scaled;
pub use self::brown_dennis::brown_dennis;
pub use self::broyden_banded::broyden_banded;
pub use self::broyden_tridiagonal::broyden_tridiagonal;
pub use self::chebyquad::chebyquad;
pub use self::discrete_boundary_value::discrete_boundary_value;
pub use self::discrete_integral_equation::discrete_integral_equation;
pub use self::extended_powell_singular::extended_powell_singular;
pub use self::extended_rosenbrock::extended_rosenbrock;
pub use self::freudenstein_roth::freudenstein_roth;
pub use self::gaussian::gaussian;
pub use self::gulf::gulf;
pub use self::helical_valley::helical_valley;
pub use self::jennrich_sampson::jennrich_sampson;
pub use self::kowalik_osborne::kowalik_osborne;
pub use self::linear_full_rank::linear_full_rank;
pub use self::linear_rank_1::linear_rank_1;
pub use self::linear_rank_1_with_zeros::linear_rank_1_with_zeros;
pub use self::meyer::meyer;
pub use self::osborne_1::osborne_1;
pub use self::osborne_2::osborne_2;
pub use self::penalty_1::penalty_1;
pub use self::penalty_2::penalty_2;
pub use self::powell_badly_scaled::powell_badly_scaled;
pub use self::powell_singular::powell_singular;
pub use self::rosenbrock::rosenbrock;
pub use self::trigonometric::trigonometric;
pub use self::variably_dimensioned::variably_dimensioned;
pub use self::watson::watson;
pub use self::wood::wood;

const SOURCE: &str = "J. J. Moré, B. S. Garbow, K. E. Hillstrom, Testing unconstrained optimization software, \
     ACM Trans. Math. Software 7(1), 1981, 17-41";

/// Every stored instance, in the order of the paper; problems of variable size come in several sizes.
///
/// ```
/// let problems = surefoot::problems::more_garbow_hillstrom();
/// assert!(problems.iter().all(|problem| problem.start().len() == problem.dim()));
/// ```
pub fn more_garbow_hillstrom() -> Vec<Problem> {
    // A problem missing here is an unused function, one not exported above is unreachable: the compiler tells.
    let listed: [fn() -> Vec<Problem>; 35] = [
        rosenbrock::listed,                 // 1
        freudenstein_roth::listed,          // 2
        powell_badly_scaled::listed,        // 3
        brown_badly_scaled::listed,         // 4
        beale::listed,                      // 5
        jennrich_sampson::listed,           // 6
        helical_valley::listed,             // 7
        bard::listed,                       // 8
        gaussian::listed,                   // 9
        meyer::listed,                      // 10
        gulf::listed,                       // 11
        box_three_dimensional::listed,      // 12
        powell_singular::listed,            // 13
        wood::listed,                       // 14
        kowalik_osborne::listed,            // 15
        brown_dennis::listed,               // 16
        osborne_1::listed,                  // 17
        biggs_exp6::listed,                 // 18
        osborne_2::listed,                  // 19
        watson::listed,                     // 20
        extended_rosenbrock::listed,        // 21
        extended_powell_singular::listed,   // 22
        penalty_1::listed,                  // 23
        penalty_2::listed,                  // 24
        variably_dimensioned::listed,       // 25
        trigonometric::listed,              // 26
        brown_almost_linear::listed,        // 27
        discrete_boundary_value::listed,    // 28
        discrete_integral_equation::listed, // 29
        broyden_tridiagonal::listed,        // 30
        broyden_banded::listed,             // 31
        linear_full_rank::listed,           // 32
        linear_rank_1::listed,              // 33
        linear_rank_1_with_zeros::listed,   // 34
        chebyquad::listed,                  // 35
    ];
    listed.iter().flat_map(|listed| listed()).collect()
}

/// A problem of the paper, without its minima yet.
fn problem(
    number: u32,
    name: &'static str,
    m: usize,
    residuals: Residuals,
    start: impl IntoIterator<Item = f64>,
) -> Problem {
    Problem::new(number, name, SOURCE, m, residuals, start)
}

/// The components of a point with a fixed number of variables. `Problem` has checked the length.
fn components<const N: usize>(x: &[f64]) -> [f64; N] {
    core::array::from_fn(|j| x[j])
}

/// The index, counted from 1 as in the paper, beside each item.
fn numbered<T>(items: impl IntoIterator<Item = T>) -> impl Iterator<Item = (f64, T)> {
    (1..).map(f64::from).zip(items)
}
