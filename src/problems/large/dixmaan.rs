use super::{Formula, Problem, Slopes, Total, WrongSize};

/// Which of the twelve DIXMAAN problems; their parameters stand at [`dixmaan`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[allow(missing_docs)] // the letters are the names
pub enum DixmaanVariant {
    A,
    B,
    C,
    D,
    E,
    F,
    G,
    H,
    I,
    J,
    K,
    L,
}

impl DixmaanVariant {
    /// All twelve, in order.
    pub const ALL: [DixmaanVariant; 12] = {
        use DixmaanVariant::{A, B, C, D, E, F, G, H, I, J, K, L};
        [A, B, C, D, E, F, G, H, I, J, K, L]
    };

    fn name(self) -> &'static str {
        match self {
            DixmaanVariant::A => "DIXMAANA",
            DixmaanVariant::B => "DIXMAANB",
            DixmaanVariant::C => "DIXMAANC",
            DixmaanVariant::D => "DIXMAAND",
            DixmaanVariant::E => "DIXMAANE",
            DixmaanVariant::F => "DIXMAANF",
            DixmaanVariant::G => "DIXMAANG",
            DixmaanVariant::H => "DIXMAANH",
            DixmaanVariant::I => "DIXMAANI",
            DixmaanVariant::J => "DIXMAANJ",
            DixmaanVariant::K => "DIXMAANK",
            DixmaanVariant::L => "DIXMAANL",
        }
    }

    fn formula(self) -> Dixmaan {
        use DixmaanVariant::{A, B, C, D, E, F, G, H, I, J, K, L};
        let (beta, gamma) = match self {
            A | E | I => (0.0, 0.125),
            B | F | J => (0.0625, 0.0625),
            C | G | K => (0.125, 0.125),
            D | H | L => (0.26, 0.26),
        };
        let power = match self {
            A | B | C | D => 0,
            E | F | G | H => 1,
            I | J | K | L => 2,
        };
        Dixmaan { beta, gamma, power }
    }
}

/// The problems of Dixon and Maany, A to L, in `n = 3 M` variables.
///
/// ```text
/// f = 1 + sum_{i=1..n}   xi^2 (i/n)^k
///       + sum_{i=1..n-1} beta  xi^2 (x(i+1) + x(i+1)^2)^2
///       + sum_{i=1..2M}  gamma xi^2 x(i+M)^4
///       + sum_{i=1..M}   delta xi x(i+2M) (i/n)^k
/// ```
///
/// | | `beta` | `gamma = delta` | | `k` |
/// |---|---|---|---|---|
/// | A, E, I | 0 | 0.125 | A to D | 0 |
/// | B, F, J | 0.0625 | 0.0625 | E to H | 1 |
/// | C, G, K | 0.125 | 0.125 | I to L | 2 |
/// | D, H, L | 0.26 | 0.26 | | |
///
/// Start `(2, ..., 2)`. Minimum 1 at the origin. The condition number of the Hessian there is about 1, `n` and `n^2` for `k`
/// of 0, 1 and 2.
///
/// Source: L. C. W. Dixon & Z. Maany, "A family of test problems with sparse Hessians for unconstrained optimization",
/// Technical Report 206, Numerical Optimisation Centre, Hatfield Polytechnic, 1988, as tabulated in later collections; from
/// memory. (Some tables print another weight in the last sum for B.) Of the formula, L was evaluated in 50-digit arithmetic too.
///
/// ```
/// use surefoot::problems::large::{DixmaanVariant, dixmaan};
///
/// let problem = dixmaan(DixmaanVariant::L, 1500)?;
/// assert!((problem.value(problem.start()).unwrap() - 74784.87752).abs() < 1e-9);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n` is a positive multiple of 3.
pub fn dixmaan(variant: DixmaanVariant, n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(variant.name(), n, 3, "a multiple of 3, at least 3")?;
    let start = core::iter::repeat_n(2.0, n);
    Ok(
        Problem::one_pass(variant.name(), SOURCE, variant.formula(), start)
            .described(1.0, "the origin"),
    )
}

const SOURCE: &str = "L. C. W. Dixon, Z. Maany, A family of test problems with sparse Hessians for unconstrained optimization, \
     Technical Report 206, Numerical Optimisation Centre, Hatfield Polytechnic, 1988";

/// `alpha = 1` throughout, `delta = gamma`, and the powers of the second and third sum are 0.
#[derive(Debug)]
struct Dixmaan {
    beta: f64,
    gamma: f64,
    power: i32,
}

impl Formula for Dixmaan {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let &Dixmaan { beta, gamma, power } = self;
        let third = x.len() / 3;
        let size = x.len() as f64;
        let mut total = Total::default();
        total.add(1.0);
        slopes.clear();
        for (j, &xj) in x.iter().enumerate() {
            let weight = ((j + 1) as f64 / size).powi(power);
            let square = xj * xj;
            let mut term = weight * square;
            let mut slope = 2.0 * weight * xj;
            if beta != 0.0
                && let Some(&next) = x.get(j + 1)
            {
                let s = next + next * next;
                term += beta * square * s * s;
                slope += 2.0 * beta * xj * s * s;
                slopes.add(j + 1, 2.0 * beta * square * s * (1.0 + 2.0 * next));
            }
            if let Some(&far) = x.get(j + third) {
                let cube = far * far * far;
                term += gamma * square * far * cube;
                slope += 2.0 * gamma * xj * far * cube;
                slopes.add(j + third, 4.0 * gamma * square * cube);
            }
            if let Some(&last) = x.get(j + 2 * third) {
                term += gamma * weight * xj * last;
                slope += gamma * weight * last;
                slopes.add(j + 2 * third, gamma * weight * xj);
            }
            slopes.add(j, slope);
            total.add(term);
        }
        total.get()
    }
}
