use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// CRAGGLVY, the extended function of Cragg and Levy, in `n` variables, even, at least 4: sixth and eighth powers, and poles.
///
/// `f = sum over j = 1, 3, ..., n-3 of (exp(xj) - x(j+1))^4 + 100 (x(j+1) - x(j+2))^6 + (tan(x(j+2) - x(j+3)) + x(j+2) - x(j+3))^4 + xj^8 + (x(j+3) - 1)^2`.
/// Start `(1, 2, ..., 2)`. Minimum 0 at `(0, 1, 1, 1)` for `n = 4`, with a singular
/// Hessian; 15.3725... for `n = 50`, 32.2699... for 100, 336.423... for 1000, where runs from the start end (recalled and
/// reproduced; 100: computed). None is stored for other `n`.
///
/// Source: CRAGGLVY of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::cragg_levy(4)?;
/// assert_eq!(problem.value(&[0.0, 1.0, 1.0, 1.0]), Ok(0.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n` is even and at least 4.
pub fn cragg_levy(n: usize) -> Result<Problem, WrongSize> {
    if n < 4 || !n.is_multiple_of(2) {
        return Err(WrongSize::NotAmong {
            problem: NAME,
            found: n,
            sizes: "an even size, at least 4",
        });
    }
    WrongSize::check(NAME, n, 4..=GREATEST)?;
    let start = (0..n).map(|j| if j == 0 { 1.0 } else { 2.0 });
    let problem = Problem::one_pass(NAME, BONGARTZ, CraggLevy, start);
    let minimum = match n {
        4 => return Ok(problem.singular(0.0, &[0.0, 1.0, 1.0, 1.0])),
        50 => 15.3725094654287,
        100 => 32.2699114585818,
        1000 => 336.423147872921,
        _ => return Ok(problem),
    };
    Ok(problem.described(minimum, "where runs from the start end"))
}

const NAME: &str = "CRAGGLVY";

#[derive(Debug)]
struct CraggLevy;

impl Formula for CraggLevy {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        slopes.clear();
        for j in (0..x.len() - 2).step_by(2) {
            let [a, b, c, d] = [x[j], x[j + 1], x[j + 2], x[j + 3]];
            let growth = a.exp();
            let tangent = (c - d).tan();
            let (p, q, t, s) = (growth - b, b - c, tangent + (c - d), d - 1.0);
            let (p3, q5, t3, a7) = (p.powi(3), q.powi(5), t.powi(3), a.powi(7));
            total.add(p3 * p + 100.0 * q5 * q + t3 * t + a7 * a + s * s);
            let of_tan = 4.0 * t3 * (2.0 + tangent * tangent);
            slopes.add(j, 4.0 * p3 * growth + 8.0 * a7);
            slopes.add(j + 1, -4.0 * p3 + 600.0 * q5);
            slopes.add(j + 2, -600.0 * q5 + of_tan);
            slopes.add(j + 3, -of_tan + 2.0 * s);
        }
        total.get()
    }
}
