use super::{BONGARTZ, Formula, Problem, Slopes, Total, WrongSize};

/// EIGENALS: the eigenvalues and eigenvectors of a diagonal matrix, as least squares, in `n = p (p + 1)` variables.
///
/// The variables are `D` (`p` numbers), then the rows of `Q` (`p` by `p`). With `A = diag(1, ..., p)`,
/// `f = sum_{i<=j} (sum_k Q_ki D_k Q_kj - A_ij)^2 + sum_{i<=j} (sum_k Q_ki Q_kj - delta_ij)^2`.
/// Start `D = (1, ..., 1)`, `Q` the identity. Minimum 0 at `D = (1, ..., p)`, `Q` the identity, and others. An evaluation costs
/// of the order of `p^3` operations.
///
/// Source: EIGENALS of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; definition and start
/// from memory.
///
/// ```
/// let problem = surefoot::problems::large::eigenals(110)?; // p = 10
/// assert_eq!(problem.value(problem.start()), Ok(285.0)); // 0^2 + 1^2 + ... + 9^2
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n = p (p + 1)` for a whole `p >= 1`.
pub fn eigenals(n: usize) -> Result<Problem, WrongSize> {
    if n == 0 || size_below(n) != n {
        return Err(WrongSize::NotAmong {
            problem: NAME,
            found: n,
            sizes: "p (p + 1) for a whole p, such as 6 or 110",
        });
    }
    WrongSize::check(NAME, n, 2..=super::GREATEST)?;
    let p = order(n);
    let start = (0..n).map(|j| {
        let diagonal = j < p || (j - p).is_multiple_of(p + 1);
        if diagonal { 1.0 } else { 0.0 }
    });
    Ok(Problem::one_pass(NAME, BONGARTZ, Eigenals, start)
        .described(0.0, "D = (1, ..., p), Q the identity, and others"))
}

/// The largest `p (p + 1)` that is at most `n`.
pub(super) fn size_below(n: usize) -> usize {
    let p = order(n);
    p * (p + 1)
}

/// The largest `p` with `p (p + 1) <= n`.
fn order(n: usize) -> usize {
    let root = n.isqrt();
    if root * root <= n - root {
        root
    } else {
        root - 1
    }
}

const NAME: &str = "EIGENALS";

#[derive(Debug)]
struct Eigenals;

impl Formula for Eigenals {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let p = order(x.len());
        let (d, q) = x.split_at(p);
        let rows = || q.chunks_exact(p);
        let mut total = Total::default();
        slopes.clear();
        for i in 0..p {
            for j in i..p {
                let (mut e, mut o) = if i == j {
                    (-((i + 1) as f64), -1.0)
                } else {
                    (0.0, 0.0)
                };
                for (row, dk) in rows().zip(d) {
                    let product = row[i] * row[j];
                    e += dk * product;
                    o += product;
                }
                total.add(e * e + o * o);
                for (k, (row, dk)) in rows().zip(d).enumerate() {
                    let weight = 2.0 * (e * dk + o);
                    slopes.add(k, 2.0 * e * row[i] * row[j]);
                    slopes.add(p + k * p + i, weight * row[j]);
                    slopes.add(p + k * p + j, weight * row[i]);
                }
            }
        }
        total.get()
    }
}
