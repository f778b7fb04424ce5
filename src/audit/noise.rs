//! How noisy is a value? Tables of differences along a ray, after Moré & Wild.

use crate::{Real, Reply};
use alloc::vec::Vec;
use core::fmt;

/// The noise in the values of a function, as [`estimate_noise`] found it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Noise<T> {
    /// Standard deviation of the noise, in the units of the objective.
    pub level: T,
    /// Order of the differences that it was read from, 1 or more: one order more than the smooth part needs to vanish.
    pub order: usize,
    /// Spacing of the table that it was read from, in units of the step.
    pub spacing: T,
    /// Number of values that were computed, all attempts together.
    pub evaluations: usize,
}

impl<T: Real> Noise<T> {
    /// Twice the level, for [`Ray::with_value_noise`](crate::Ray::with_value_noise), which wants a bound on the error of
    /// a value.
    ///
    /// Noise that is spread evenly never exceeds 1.74 levels; normally distributed noise exceeds two in one value of 22.
    pub fn bound(&self) -> T {
        T::of(2.0) * self.level
    }
}

impl<T: fmt::LowerExp> fmt::Display for Noise<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "the values carry noise with a standard deviation of {:.2e}, read from differences of order {} at a spacing \
             of {:.2e}",
            self.level, self.order, self.spacing
        )
    }
}

/// Why no noise level can be told.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum NoiseError<T, E> {
    /// `!(0 < spacing < infinity)`.
    #[error(
        "the spacing must be positive and finite: a millionth of a usual step is a good beginning"
    )]
    Spacing,
    /// A value was NaN or infinite, also with the smallest spacing tried.
    #[error(
        "the value at step {step} is not finite: begin where the function is defined on both sides"
    )]
    NotFinite {
        /// Where.
        step: T,
    },
    /// With this spacing, the largest tried, half or more of the neighbouring values are equal.
    #[error(
        "half of the neighbouring values are equal at a spacing of {spacing}: begin with a larger one"
    )]
    SpacingTooSmall {
        /// The last spacing tried.
        spacing: T,
    },
    /// With this spacing, the smallest tried, the values differ by more than a tenth of their size.
    #[error(
        "the values differ by more than a tenth at a spacing of {spacing}: begin with a smaller one"
    )]
    SpacingTooLarge {
        /// The last spacing tried.
        spacing: T,
    },
    /// With none of the spacings tried, three successive orders agree.
    #[error(
        "the orders of difference do not agree at a spacing of {spacing}: begin with another one, or use more values"
    )]
    NoAgreement {
        /// The last spacing tried.
        spacing: T,
    },
    /// The closure failed.
    #[error("the function failed at a value of the table: {0}")]
    Caller(E),
}

/// Estimates the noise in `values` around the step 0 with the default [`NoiseEstimate`].
///
/// `values` gets a step of either sign and returns the value there, plain or as a `Result`; `spacing` is where the search
/// for a good spacing begins: positive and finite, in units of the step. See [`NoiseEstimate`] for the method.
///
/// ```
/// use surefoot::{Ray, audit::estimate_noise};
/// // A simulation that prints six decimals.
/// let f = |a: f64| ((2.0 + a).sin() * 1e6).round() / 1e6;
/// let noise = estimate_noise(f, 1e-3)?;
/// let rounding = 1e-6 / 12_f64.sqrt(); // evenly spread over one unit of the last decimal
/// assert!(noise.level > rounding / 4.0 && noise.level < rounding * 4.0);
/// let ray = Ray::new(f(0.0), 2_f64.cos()).with_value_noise(noise.bound());
/// # assert!(ray.value_noise > 0.0);
/// # Ok::<(), surefoot::audit::NoiseError<f64, std::convert::Infallible>>(())
/// ```
///
/// # Errors
/// [`NoiseError`] for a spacing that is not fit, with the reason why no attempt came to a level, or with the closure's own.
pub fn estimate_noise<T, R>(
    values: impl FnMut(T) -> R,
    spacing: T,
) -> Result<Noise<T>, NoiseError<T, R::Error>>
where
    T: Real,
    R: Reply<T>,
{
    NoiseEstimate::default().around_zero(values, spacing)
}

/// Settings of the noise estimate.
///
/// A table of `m + 1` equally spaced values is differenced again and again. A smooth part dies out as the order `k`
/// grows; noise, independent and of equal variance, does not, and its variance is told by every order (Moré & Wild 2011,
/// sections 2 and 3):
///
/// `gamma_k = (k!)^2 / (2k)!`, `sigma_k^2 = gamma_k / (m + 1 - k) * sum over i of (Delta^k f_i)^2`.
///
/// The level is `sigma_k` of the lowest order `k` at which `sigma_k`, `sigma_(k+1)` and `sigma_(k+2)` agree within a factor
/// of 4 and the differences of order `k` change their sign. A table where half or more of the neighbouring values are
/// equal is too fine; one whose values differ by more than a tenth of the largest magnitude is too coarse.
///
/// Source: J. J. Moré & S. M. Wild, "Estimating computational noise", SIAM J. Sci. Comput. 33 (2011) 1292-1314,
/// doi:10.1137/100786125. The factor 4, the half, the tenth and the factor 100 between spacings are recalled from memory.
///
/// Deviations and choices of our own:
/// 1. The spacing is looked for: 100 times wider after a table that is too fine, 100 times narrower after one that is too
///    coarse or has no agreement; between the two once both are known. The search is bounded by the number of attempts.
/// 2. A spread above a tenth that a spacing a million times narrower does not bring below a tenth of itself is noise and
///    not slope: the test for too coarse a table is then passed over, so that values around 0 get their level too.
/// 3. A table with a value that is not finite counts as too coarse.
///
/// Limits: a smooth part that winds between the values of the table looks like noise, so begin with a small spacing. Values
/// near 0 with noise far below their slope times the spacing need many attempts, since the spread is judged beside the value.
///
/// ```
/// use surefoot::audit::{NoiseEstimate, NoiseSettingError};
/// assert!(NoiseEstimate::new(13, 4).is_ok());
/// assert_eq!(NoiseEstimate::new(4, 4), Err(NoiseSettingError::Values));
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct NoiseEstimate {
    values: usize,
    attempts: usize,
}

/// Why [`NoiseEstimate::new`] refuses its settings.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum NoiseSettingError {
    /// `!(5 <= values <= 64)`.
    #[error("a table must have 5 to 64 values: 11 is usual")]
    Values,
    /// `attempts == 0`.
    #[error("at least one spacing must be tried: 12 is usual")]
    Attempts,
}

impl NoiseEstimate {
    /// Tables of `values` values, 5 to 64, and at most `attempts` of them, 1 or more.
    ///
    /// # Errors
    /// [`NoiseSettingError`] outside of those ranges.
    pub fn new(values: usize, attempts: usize) -> Result<Self, NoiseSettingError> {
        if !(5..=64).contains(&values) {
            Err(NoiseSettingError::Values)
        } else if attempts == 0 {
            Err(NoiseSettingError::Attempts)
        } else {
            Ok(NoiseEstimate { values, attempts })
        }
    }

    /// As [`estimate_noise`], with these settings.
    ///
    /// # Errors
    /// As [`estimate_noise`].
    pub fn around_zero<T, R>(
        &self,
        mut values: impl FnMut(T) -> R,
        spacing: T,
    ) -> Result<Noise<T>, NoiseError<T, R::Error>>
    where
        T: Real,
        R: Reply<T>,
    {
        if !(spacing > T::zero() && spacing.is_finite()) {
            return Err(NoiseError::Spacing);
        }
        let middle = T::of((self.values / 2) as f64);
        let mut table = Vec::with_capacity(self.values);
        let mut spacings = Spacings::from(spacing);
        let mut coarse_spreads = Vec::new();
        let mut evaluations = 0;
        let mut attempts = 0;
        loop {
            attempts += 1;
            let spacing = spacings.now;
            table.clear();
            let mut undefined = None;
            for i in 0..self.values {
                let step = (T::of(i as f64) - middle) * spacing;
                let value = values(step).reply().map_err(NoiseError::Caller)?;
                evaluations += 1;
                if !value.is_finite() {
                    undefined = Some(step);
                    break;
                }
                table.push(value);
            }
            let (reason, moved) = match undefined {
                Some(step) => (NoiseError::NotFinite { step }, spacings.narrower()),
                None => match judge(&table, persistent(&coarse_spreads)) {
                    Ok(TableNoise { level, order }) => {
                        return Ok(Noise {
                            level,
                            order,
                            spacing,
                            evaluations,
                        });
                    }
                    Err(TableError::TooFine) => {
                        (NoiseError::SpacingTooSmall { spacing }, spacings.wider())
                    }
                    Err(TableError::TooCoarse) => {
                        coarse_spreads.push(spread(&table));
                        (NoiseError::SpacingTooLarge { spacing }, spacings.narrower())
                    }
                    Err(_) => (NoiseError::NoAgreement { spacing }, spacings.narrower()),
                },
            };
            if !moved || attempts == self.attempts {
                return Err(reason);
            }
        }
    }
}

impl Default for NoiseEstimate {
    /// Tables of 11 values, and at most 12 of them. Of 1,000 levels, 980 or more came within a factor of 4 of the truth on
    /// each of seven curves with noise of 1e-12 to 1e-2 of the value; with 9 values 944, with 7 values 765 (our measurement,
    /// in the manner of `tests/audit.rs`).
    fn default() -> Self {
        NoiseEstimate {
            values: 11,
            attempts: 12,
        }
    }
}

/// What one table of differences tells.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TableNoise<T> {
    /// Standard deviation of the noise, in the units of the values.
    pub level: T,
    /// Order of the differences that it was read from.
    pub order: usize,
}

/// Why one table tells no level.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum TableError {
    /// Fewer than 5 values.
    #[error("a table must have at least 5 values")]
    TooShort,
    /// A value is NaN or infinite.
    #[error("a value is not finite: take the table where the function is defined")]
    NotFinite,
    /// Half or more of the neighbouring values are equal.
    #[error("half of the neighbouring values are equal: take a larger spacing")]
    TooFine,
    /// `largest - smallest > 0.1 * largest magnitude`.
    #[error("the values differ by more than a tenth: take a smaller spacing")]
    TooCoarse,
    /// No three successive orders agree within a factor of 4 where the differences change their sign.
    #[error("the orders of difference do not agree: take another spacing, or more values")]
    NoAgreement,
}

/// Reads the noise level from one table of equally spaced values, 5 or more, by the formulas of [`NoiseEstimate`].
///
/// ```
/// use surefoot::audit::{table_noise, TableError};
/// // A straight line with noise of +-0.1, drawn by coin.
/// let table = [10.1, 10.1, 10.1, 10.4, 10.3, 10.6, 10.5, 10.8, 10.7];
/// let noise = table_noise(&table)?;
/// assert!(noise.level > 0.025 && noise.level < 0.4);
/// assert_eq!(table_noise(&[1.0; 9]), Err(TableError::TooFine));
/// # Ok::<(), TableError>(())
/// ```
///
/// # Errors
/// [`TableError`] with the reason.
pub fn table_noise<T: Real>(values: &[T]) -> Result<TableNoise<T>, TableError> {
    judge(values, None)
}

/// How many tables in a row, each 100 times narrower, must be too coarse before a spread can be noise.
const PERSISTENT: usize = 3;

/// The spread of the table that was too coarse a million times wider, if all since were too coarse as well.
fn persistent<T: Real>(coarse_spreads: &[T]) -> Option<T> {
    let at = coarse_spreads.len().checked_sub(PERSISTENT)?;
    coarse_spreads.get(at).copied()
}

/// `coarse_spread` is the spread of a table with a much wider spacing that was too coarse.
fn judge<T: Real>(values: &[T], coarse_spread: Option<T>) -> Result<TableNoise<T>, TableError> {
    if values.len() < 5 {
        return Err(TableError::TooShort);
    }
    if values.iter().any(|v| !v.is_finite()) {
        return Err(TableError::NotFinite);
    }
    let equal = values.windows(2).filter(|w| w[0] == w[1]).count();
    if 2 * equal >= values.len() - 1 {
        return Err(TableError::TooFine);
    }
    let spread = spread(values);
    let is_noise = coarse_spread.is_some_and(|coarse| spread > T::of(0.1) * coarse);
    if spread > T::of(0.1) * largest(values) && !is_noise {
        return Err(TableError::TooCoarse);
    }
    // In units of the spread, so that no square overflows or vanishes. Halves first: the spread itself may overflow.
    let half = T::of(0.5);
    let unit = spread_of_halves(values);
    let mut table: Vec<T> = values.iter().map(|&v| half * v / unit).collect();
    let mut levels = Vec::with_capacity(values.len() - 1);
    let mut gamma = T::one();
    for order in 1..values.len() {
        for i in 0..table.len() - 1 {
            table[i] = table[i + 1] - table[i];
        }
        table.pop();
        let k = T::of(order as f64);
        gamma = gamma * k / (T::of(2.0) * (T::of(2.0) * k - T::one())); // (k!)^2 / (2k)!, Moré & Wild 2011, section 2
        let squares = table.iter().fold(T::zero(), |sum, &d| sum + d * d);
        let level = (gamma * squares / T::of(table.len() as f64)).sqrt();
        let zero = T::zero();
        let sign_changes = table.iter().any(|&d| d < zero) && table.iter().any(|&d| d > zero);
        levels.push((level, sign_changes));
    }
    for (at, three) in levels.windows(3).enumerate() {
        let least = three[0].0.min(three[1].0).min(three[2].0);
        let most = three[0].0.max(three[1].0).max(three[2].0);
        if most <= T::of(4.0) * least && least > T::zero() && three[0].1 {
            return Ok(TableNoise {
                level: three[0].0 * unit / half,
                order: at + 1,
            });
        }
    }
    Err(TableError::NoAgreement)
}

fn largest<T: Real>(values: &[T]) -> T {
    values.iter().fold(T::zero(), |m, v| m.max(v.abs()))
}

fn spread<T: Real>(values: &[T]) -> T {
    spread_of_halves(values) * T::of(2.0)
}

fn spread_of_halves<T: Real>(values: &[T]) -> T {
    let (low, high) = values
        .iter()
        .fold((T::infinity(), T::neg_infinity()), |(l, h), &v| {
            (l.min(v), h.max(v))
        });
    T::of(0.5) * high - T::of(0.5) * low
}

/// The search for a spacing between one that is too fine and one that is too coarse.
struct Spacings<T> {
    now: T,
    too_fine: Option<T>,
    too_coarse: Option<T>,
}

impl<T: Real> Spacings<T> {
    fn from(now: T) -> Self {
        Spacings {
            now,
            too_fine: None,
            too_coarse: None,
        }
    }

    /// Whether there is a spacing left to try.
    fn wider(&mut self) -> bool {
        self.too_fine = Some(self.now);
        self.go_to(self.now * T::of(100.0))
    }

    fn narrower(&mut self) -> bool {
        self.too_coarse = Some(self.now);
        self.go_to(self.now / T::of(100.0))
    }

    fn go_to(&mut self, far: T) -> bool {
        self.now = match (self.too_fine, self.too_coarse) {
            (Some(fine), Some(coarse)) => fine.sqrt() * coarse.sqrt(),
            _ => far,
        };
        self.now > T::zero() && self.now.is_finite()
    }
}
