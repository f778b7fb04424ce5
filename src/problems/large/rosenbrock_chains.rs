use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// The chained Rosenbrock function, in `n` variables, at least 2: one curved valley through all of them.
///
/// `f = sum_{i=1..n-1} 100 (x(i+1) - xi^2)^2 + (1 - xi)^2`. Start `(-1.2, 1, -1.2, 1, ...)`. Minimum 0 at `(1, ..., 1)`;
/// for `n >= 4` there is a local minimum near `(-1, 1, ..., 1)`, 3.98657... for `n = 10`.
///
/// Source: Ph. L. Toint, "Some numerical results using a sparse matrix updating formula in unconstrained optimization", Math.
/// Comp. 32, 1978, 839-851 (there with other weights); this form is common practice; from memory. The local minimum for
/// `n = 10`: Newton's method with 50 digits.
///
/// ```
/// let problem = surefoot::problems::large::chained_rosenbrock(50)?;
/// assert_eq!(problem.value(&[1.0; 50]), Ok(0.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn chained_rosenbrock(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(CHAINED, n, 2..=GREATEST)?;
    let start = (0..n).map(|j| if j % 2 == 0 { -1.2 } else { 1.0 });
    let formula = Chain {
        offset: 0.0,
        pulled: Pulled::First,
    };
    let problem = Problem::one_pass(CHAINED, TOINT, formula, start).described(0.0, "(1, ..., 1)");
    Ok(match n {
        10 => problem.strict(3.986579112347138, &SECOND),
        _ => problem,
    })
}

/// GENROSE, the generalised Rosenbrock function, in `n` variables, at least 2.
///
/// `f = 1 + sum_{i=2..n} 100 (xi - x(i-1)^2)^2 + (xi - 1)^2`. Start `xi = i / (n + 1)`. Minimum 1 at `(1, ..., 1)`, and at
/// `(-1, 1, ..., 1)`: `x1` appears in a square only.
///
/// Source: GENROSE of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::genrose(500)?;
/// assert_eq!(problem.value(&[1.0; 500]), Ok(1.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn genrose(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(GENROSE, n, 2..=GREATEST)?;
    let start = (1..=n).map(|i| i as f64 / (n + 1) as f64);
    let formula = Chain {
        offset: 1.0,
        pulled: Pulled::Second,
    };
    Ok(Problem::one_pass(GENROSE, BONGARTZ, formula, start)
        .described(1.0, "(1, ..., 1)")
        .described(1.0, "(-1, 1, ..., 1)"))
}

const CHAINED: &str = "Chained Rosenbrock";
const GENROSE: &str = "GENROSE";
const TOINT: &str = "Ph. L. Toint, Some numerical results using a sparse matrix updating formula in unconstrained \
     optimization, Math. Comp. 32, 1978, 839-851";

/// The second minimizer of the chain of 10.
const SECOND: [f64; 10] = [
    -0.9932633728563689,
    0.9966060394434352,
    0.9982406113911125,
    0.9989884337678006,
    0.9992261534396649,
    0.9990736481633443,
    0.9984541774029088,
    0.9970562516630378,
    0.9941793752280661,
    0.9883926301288679,
];

/// `offset + sum over neighbours (a, b) of 100 (b - a^2)^2 + (p - 1)^2`, where `p` is the first or the second of the two.
#[derive(Debug)]
struct Chain {
    offset: f64,
    pulled: Pulled,
}

#[derive(Debug)]
enum Pulled {
    First,
    Second,
}

impl Formula for Chain {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        total.add(self.offset);
        let mut a = x[0];
        let mut carried = 0.0;
        for (j, &b) in x.iter().enumerate().skip(1) {
            let r = b - a * a;
            let (p, of_a, of_b) = match self.pulled {
                Pulled::First => (a - 1.0, 2.0 * (a - 1.0), 0.0),
                Pulled::Second => (b - 1.0, 0.0, 2.0 * (b - 1.0)),
            };
            total.add(100.0 * r * r + p * p);
            slopes.set(j - 1, carried - 400.0 * r * a + of_a);
            carried = 200.0 * r + of_b;
            a = b;
        }
        slopes.set(x.len() - 1, carried);
        total.get()
    }
}
