use super::{Problem, Squares, Vec, WrongSize, problem};

/// Chebyquad, problem 35, in `n` variables, at least 1, with `m = n`.
///
/// `ri` is the mean of `Ti(xj)` over `j` less the integral of `Ti` from 0 to 1, where `Ti` is the Chebyshev polynomial
/// of degree `i` shifted to [0, 1]: `Ti(x) = cos(i arccos(2 x - 1))` there. The integral is 0 for odd `i` and
/// `-1 / (i^2 - 1)` for even `i`. Start `xj = j / (n + 1)`. Minimum 0 for `n = 7` and 9, 3.51687...e-3 for `n = 8`,
/// 6.50395...e-3 for `n = 10`; every rearrangement of a minimizer is another. None is stored for other `n`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn chebyquad(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=usize::MAX)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [7, 8, 9, 10].map(sized).into()
}

const NAME: &str = "Chebyquad";

fn sized(n: usize) -> Problem {
    let start = (1..=n).map(|j| j as f64 / (n + 1) as f64);
    let problem = problem(35, NAME, n, residuals, start);
    match n {
        7 => problem.strict(
            0.0,
            &[
                0.05806914962097548,
                0.2351716123574216,
                0.3380440947400462,
                0.5,
                0.6619559052599538,
                0.7648283876425784,
                0.9419308503790245,
            ],
        ),
        8 => problem.strict(
            0.0035168737256779316,
            &[
                0.04315276015101663,
                0.1930908403841861,
                0.26632870689027294,
                0.5,
                0.5,
                0.7336712931097271,
                0.8069091596158139,
                0.9568472398489833,
            ],
        ),
        9 => problem.strict(
            0.0,
            &[
                0.044205346135782767,
                0.19949067230988096,
                0.23561910847106,
                0.416046907892598,
                0.5,
                0.583953092107402,
                0.76438089152894,
                0.8005093276901191,
                0.9557946538642172,
            ],
        ),
        10 => problem.strict(
            0.006503954800882306,
            &[
                0.0596199005358127,
                0.16670828183586142,
                0.2391706589426085,
                0.3988842923060445,
                0.3988842923060445,
                0.6011157076939555,
                0.6011157076939555,
                0.7608293410573915,
                0.8332917181641386,
                0.9403800994641873,
            ],
        ),
        _ => problem,
    }
}

/// Residuals computed together; they stand on the stack, so `n` may be anything.
const BLOCK: usize = 32;

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let n = x.len() as f64;
    for first in (1..=sum.residuals()).step_by(BLOCK) {
        let size = BLOCK.min(sum.residuals() + 1 - first);
        let mut block = [0.0; BLOCK];
        let block = &mut block[..size];
        for &xj in x {
            for (r, (value, _)) in block.iter_mut().zip(chebyshev(xj).skip(first)) {
                *r += value;
            }
        }
        for (r, i) in block.iter_mut().zip(first..) {
            *r = *r / n - integral(i);
            sum.add_value(*r * *r);
        }
        let block = &*block;
        sum.add_gradient(0, 2.0 / n, || {
            x.iter().map(|&xj| {
                let slopes = chebyshev(xj).skip(first).map(|(_, slope)| slope);
                block.iter().zip(slopes).map(|(r, slope)| r * slope).sum()
            })
        });
    }
}

/// The integral of the shifted polynomial of degree `i >= 1` from 0 to 1.
fn integral(i: usize) -> f64 {
    let i = i as f64;
    if i % 2.0 == 0.0 {
        -1.0 / (i * i - 1.0)
    } else {
        0.0
    }
}

/// The shifted Chebyshev polynomials and their derivatives at `x`, degree by degree from 0, by the recurrence
/// `T(k+1) = 2 (2 x - 1) T(k) - T(k-1)`.
fn chebyshev(x: f64) -> impl Iterator<Item = (f64, f64)> {
    let y = 2.0 * x - 1.0;
    // Degree -1 is degree 1: T(-k) = T(k).
    let mut before = (y, 2.0);
    let mut now = (1.0, 0.0);
    core::iter::from_fn(move || {
        let item = now;
        let next = (
            2.0 * y * now.0 - before.0,
            4.0 * now.0 + 2.0 * y * now.1 - before.1,
        );
        (before, now) = (now, next);
        Some(item)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_agree_with_cosines_beyond_a_block() {
        // T_i = cos(i theta) with theta = arccos(2 x - 1), on [0, 1].
        let n = 70;
        let problem = chebyquad(n).unwrap();
        let thetas: Vec<f64> = (0..n)
            .map(|j| 0.02 + 3.1 * ((37 * j) % n) as f64 / n as f64)
            .collect();
        let x: Vec<f64> = thetas
            .iter()
            .map(|theta| 0.5 * (theta.cos() + 1.0))
            .collect();
        let (mut f, mut g) = (0.0, std::vec![0.0; n]);
        for i in (1..=n).map(|i| i as f64) {
            let integral = if i % 2.0 == 0.0 {
                1.0 / (1.0 - i * i)
            } else {
                0.0
            };
            let r = thetas.iter().map(|theta| (i * theta).cos()).sum::<f64>() / n as f64 - integral;
            f += r * r;
            for (g, theta) in g.iter_mut().zip(&thetas) {
                // dT/dx = -i sin(i theta) dtheta/dx, dx = -sin(theta) dtheta / 2
                *g += 2.0 * r / n as f64 * 2.0 * i * (i * theta).sin() / theta.sin();
            }
        }
        let mut found = std::vec![f64::NAN; n];
        problem.gradient(&x, &mut found).unwrap();
        assert!((problem.value(&x).unwrap() - f).abs() <= 1e-13 * f);
        let largest = g.iter().fold(0.0f64, |m, g| m.max(g.abs()));
        for (found, wanted) in found.iter().zip(&g) {
            assert!(
                (found - wanted).abs() <= 2e-12 * largest,
                "{found} for {wanted}"
            );
        }
    }

    #[test]
    fn the_classical_quadrature_nodes_solve_it() {
        // Nodes t on [-1, 1] with equal weights are exact for t (symmetry) and for t^2, whose mean is 1/3.
        let (second, third) = (1.0 / 3f64.sqrt(), 0.5f64.sqrt());
        for nodes in [
            std::vec![0.0],
            std::vec![-second, second],
            std::vec![-third, 0.0, third],
        ] {
            let x: Vec<f64> = nodes.iter().map(|t| 0.5 * (1.0 + t)).collect();
            assert!(chebyquad(x.len()).unwrap().value(&x).unwrap() < 1e-30);
        }
    }
}
