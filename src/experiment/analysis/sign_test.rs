//! The sign test.

/// The exact two-sided sign test: how probable so uneven a score, or a more uneven one, is if each side wins every game with
/// probability 1/2. `2 P(X <= min(wins, losses))` with `X` binomial, at most 1; 1 with no games. Ties are left out beforehand.
///
/// Exact in whole numbers up to 120 games; beyond that summed term by term, to about 1e-10 relative.
///
/// Source: W. J. Conover, Practical Nonparametric Statistics, 3rd ed. (1999), section 3.4.
///
/// ```
/// use surefoot::experiment::analysis::sign_test;
/// assert_eq!(sign_test(9, 1), 22.0 / 1024.0); // 2 (1 + 10) / 2^10
/// assert_eq!(sign_test(5, 5), 1.0);
/// ```
pub fn sign_test(wins: u64, losses: u64) -> f64 {
    let (few, games) = (wins.min(losses), wins + losses);
    if few.saturating_mul(2) >= games {
        return 1.0;
    }
    let tail = if games <= EXACT {
        whole(few, games)
    } else {
        summed(few, games)
    };
    (2.0 * tail).min(1.0)
}

/// Up to here sums of binomial coefficients, and the products on the way to them, fit in 128 bits.
const EXACT: u64 = 120;

/// `P(X <= few)` in whole numbers, rounded once.
fn whole(few: u64, games: u64) -> f64 {
    let (mut coefficient, mut sum) = (1_u128, 1_u128);
    for k in 0..u128::from(few) {
        coefficient = coefficient * (u128::from(games) - k) / (k + 1);
        sum += coefficient;
    }
    sum as f64 / 2.0_f64.powi(games as i32)
}

/// `P(X <= few)` from its largest term downwards.
fn summed(few: u64, games: u64) -> f64 {
    let n = games as f64;
    let mut log_term = -n * core::f64::consts::LN_2;
    for k in 0..few {
        log_term += ((n - k as f64) / (k as f64 + 1.0)).ln();
    }
    // The terms fall off at least geometrically; those below rounding are left.
    let (mut share, mut sum, mut k) = (1.0, 1.0, few as f64);
    while k > 0.0 && share > 1e-18 {
        share *= k / (n - k + 1.0);
        sum += share;
        k -= 1.0;
    }
    log_term.exp() * sum
}
