//! Published problems of as many variables as you like.
//!
//! A function here makes a problem of about any size; its documentation gives the formula, the source, the standard start
//! and the known minima, with components counted from 1 and no units. Definitions are quoted from memory unless the text
//! says otherwise; the tests say what each was checked against.
//!
//! Value and gradient come out of one pass, [`Cost::Joint`](crate::Cost::Joint), and an evaluation holds no memory of its own:
//! a problem of 1e7 variables takes the 80 MB of its start (the variably dimensioned one twice that, for its minimizer).
//!
//! A problem is one file: its function and its formula.

use std::vec::Vec;

use super::error::{GREATEST, WrongSize};
use super::formula::{Formula, Slopes, Total};
use super::problem::Problem;

mod arwhead;
mod bdqrtic;
mod cosine;
mod cragg_levy;
mod discrete_integral_equation;
mod dixmaan;
mod dqdrtic;
mod eigenals;
mod elastic_torsion;
mod engval1;
mod extended_powell_singular;
mod extended_rosenbrock;
mod extended_wood;
mod freuroth;
mod grid;
mod liarwhd;
mod minimal_surface;
mod nondia;
mod nondquar;
mod optimal_design;
mod quartc;
mod residual_sums;
mod rosenbrock_chains;
mod tridia;
mod trigonometric;

pub use self::arwhead::arwhead;
pub use self::bdqrtic::bdqrtic;
pub use self::cosine::cosine;
pub use self::cragg_levy::cragg_levy;
pub use self::discrete_integral_equation::discrete_integral_equation;
pub use self::dixmaan::{DixmaanVariant, dixmaan};
pub use self::dqdrtic::dqdrtic;
pub use self::eigenals::eigenals;
pub use self::elastic_torsion::elastic_torsion;
pub use self::engval1::engval1;
pub use self::extended_powell_singular::extended_powell_singular;
pub use self::extended_rosenbrock::extended_rosenbrock;
pub use self::extended_wood::extended_wood;
pub use self::freuroth::freuroth;
pub use self::liarwhd::liarwhd;
pub use self::minimal_surface::{SurfaceBoundary, minimal_surface};
pub use self::nondia::nondia;
pub use self::nondquar::nondquar;
pub use self::optimal_design::optimal_design;
pub use self::quartc::quartc;
pub use self::residual_sums::{
    broyden_banded, broyden_tridiagonal, discrete_boundary_value, penalty_1, penalty_2,
    variably_dimensioned,
};
pub use self::rosenbrock_chains::{chained_rosenbrock, genrose};
pub use self::tridia::tridia;
pub use self::trigonometric::trigonometric;

/// Every problem of this module, each in the largest of its sizes that is at most `n`: 42 of them.
///
/// Sizes of 100 to 1000 suit a comparison of methods. Fields are on square grids, and the second penalty function has no more
/// than 100 variables. The order is that of the names, after DIXMAANA to DIXMAANL.
///
/// ```
/// let problems = surefoot::problems::large_problems(100)?;
/// assert!(problems.iter().all(|problem| (50..=100).contains(&problem.dim())));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 5`, the least size that all have one below.
pub fn large_problems(n: usize) -> Result<Vec<Problem>, WrongSize> {
    WrongSize::check("The list of large problems", n, LEAST..=GREATEST)?;
    let [even, threes, fours] = [2, 3, 4].map(|of| n - n % of);
    let side = n.isqrt();
    let mut list = DixmaanVariant::ALL
        .iter()
        .map(|&variant| dixmaan(variant, threes))
        .collect::<Result<Vec<_>, _>>()?;
    list.extend([
        arwhead(n)?,
        bdqrtic(n)?,
        broyden_banded(n)?,
        broyden_tridiagonal(n)?,
        chained_rosenbrock(n)?,
        cosine(n)?,
        cragg_levy(even)?,
        discrete_boundary_value(n)?,
        discrete_integral_equation(n)?,
        dqdrtic(n)?,
        eigenals(eigenals::size_below(n))?,
        elastic_torsion(side, side)?,
        engval1(n)?,
        extended_powell_singular(fours)?,
        extended_rosenbrock(even)?,
        extended_wood(fours)?,
        freuroth(n)?,
        genrose(n)?,
        liarwhd(n)?,
        minimal_surface(SurfaceBoundary::Scherk, side, side)?,
        minimal_surface(SurfaceBoundary::Catenoid, side, side)?,
        nondia(n)?,
        nondquar(n)?,
        optimal_design(side, side)?,
        penalty_1(n)?,
        penalty_2(n.min(100))?,
        quartc(n)?,
        tridia(n)?,
        trigonometric(n)?,
        variably_dimensioned(n)?,
    ]);
    Ok(list)
}

const LEAST: usize = 5;

const MGH: &str = "J. J. Moré, B. S. Garbow, K. E. Hillstrom, Testing unconstrained optimization software, \
     ACM Trans. Math. Software 7(1), 1981, 17-41";

const BONGARTZ: &str = "I. Bongartz, A. R. Conn, N. Gould, Ph. L. Toint, CUTE: constrained and unconstrained testing environment, \
     ACM Trans. Math. Software 21(1), 1995, 123-160";
