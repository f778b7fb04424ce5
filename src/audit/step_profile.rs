//! What every rule says along a ray: values, slopes and verdicts on a grid of steps.

use crate::search::{Probe, Probed};
use crate::{Acceptance, Ray, RayFault, Real, Sample, Side, Trial, Verdict};
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use core::fmt;

/// Steps to look at, strictly increasing.
///
/// ```
/// use surefoot::audit::{Grid, GridError};
/// assert_eq!(Grid::linear(0.0, 1.0, 5)?.steps(), [0.0, 0.25, 0.5, 0.75, 1.0]);
/// let decades = Grid::geometric(1e-2, 1e2, 5)?;
/// assert!((decades.steps()[2] - 1.0_f64).abs() < 1e-12);
/// assert_eq!(Grid::geometric(0.0, 1.0, 5), Err(GridError::Start)); // 0 has no decades
/// # Ok::<(), GridError>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Grid<T = f64> {
    steps: Vec<T>,
}

/// Why a [`Grid`] cannot be made.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum GridError {
    /// `!(0 <= start < infinity)`, for a geometric grid `!(0 < start < infinity)`.
    #[error("a grid must start at a finite step that is not negative, a geometric one above 0")]
    Start,
    /// `!(start < end < infinity)`.
    #[error("a grid must end at a finite step above its start")]
    End,
    /// `count < 2`.
    #[error("a grid must have at least 2 steps")]
    Count,
    /// Neighbouring steps are equal in this precision, or steps given do not increase.
    #[error("the steps of a grid must increase: use fewer of them, or a wider range")]
    NotIncreasing,
}

impl<T: Real> Grid<T> {
    /// `count` steps at equal distances, `start` and `end` among them: `0 <= start < end`, both finite, `count >= 2`.
    ///
    /// # Errors
    /// [`GridError`] otherwise, for NaN, and where neighbouring steps would be equal.
    pub fn linear(start: T, end: T, count: usize) -> Result<Self, GridError> {
        if !(start >= T::zero() && start.is_finite()) {
            return Err(GridError::Start);
        }
        Self::between(start, end, count, |share| start + share * (end - start))
    }

    /// `count` steps at equal ratios, `start` and `end` among them: `0 < start < end`, both finite, `count >= 2`.
    ///
    /// # Errors
    /// [`GridError`] otherwise, for NaN, and where neighbouring steps would be equal.
    pub fn geometric(start: T, end: T, count: usize) -> Result<Self, GridError> {
        if !(start > T::zero() && start.is_finite()) {
            return Err(GridError::Start);
        }
        // By logarithms, since end / start may overflow.
        let (low, high) = (start.ln(), end.ln());
        Self::between(start, end, count, |share| {
            (low + share * (high - low)).exp()
        })
    }

    /// These steps: at least 2, finite, not negative, strictly increasing.
    ///
    /// # Errors
    /// [`GridError`] otherwise, and for NaN.
    pub fn of(steps: Vec<T>) -> Result<Self, GridError> {
        let (Some(&first), Some(&last)) = (steps.first(), steps.last()) else {
            return Err(GridError::Count);
        };
        if steps.len() < 2 {
            Err(GridError::Count)
        } else if !(first >= T::zero() && first.is_finite()) {
            Err(GridError::Start)
        } else if !last.is_finite() {
            Err(GridError::End)
        } else if !steps.windows(2).all(|w| w[0] < w[1]) {
            Err(GridError::NotIncreasing)
        } else {
            Ok(Grid { steps })
        }
    }

    /// The steps.
    pub fn steps(&self) -> &[T] {
        &self.steps
    }

    fn between(start: T, end: T, count: usize, at: impl Fn(T) -> T) -> Result<Self, GridError> {
        if !(end > start && end.is_finite()) {
            return Err(GridError::End);
        }
        if count < 2 {
            return Err(GridError::Count);
        }
        let last = T::of((count - 1) as f64);
        let steps = (0..count).map(|i| match i {
            0 => start,
            i if i + 1 == count => end,
            i => at(T::of(i as f64) / last),
        });
        Self::of(steps.collect())
    }
}

/// One step of a profile.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ProfileRow<'a, T> {
    /// The step `a`.
    pub step: T,
    /// `phi(a)`; `None` where it is not finite or the function is not defined.
    pub value: Option<T>,
    /// `phi'(a)`; `None` where it was not given or is not finite.
    pub slope: Option<T>,
    /// `phi'(a) / phi'(0)`: 1 at the start, 0 at a minimizer, negative beyond; on a quadratic it falls along a straight
    /// line (common practice). `None` without a slope here or at the start.
    pub slope_ratio: Option<T>,
    /// What each rule says, in the order of the rules; `None` where there is nothing to judge: at step 0, outside of the
    /// domain, and where the slope is not finite. [`Verdict::NeedsSlope`] where the probe gave none.
    pub verdicts: &'a [Option<Verdict>],
}

/// Neighbouring rows that a rule accepts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Interval<T> {
    /// The first row accepted.
    pub first_row: usize,
    /// The last row accepted.
    pub last_row: usize,
    /// The step of the first row: the rule's own interval starts between the step before it and this one.
    pub start: T,
    /// The step of the last row: the rule's own interval ends between this one and the step after it.
    pub end: T,
}

/// What was found along a ray; made by [`step_profile()`]. Its `Display` is a table.
#[derive(Clone, Debug, PartialEq)]
pub struct StepProfile<T = f64> {
    rules: Vec<String>,
    points: Vec<Point<T>>,
    /// Row by row, one per rule.
    verdicts: Vec<Option<Verdict>>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
struct Point<T> {
    step: T,
    value: Option<T>,
    slope: Option<T>,
    slope_ratio: Option<T>,
}

/// Why there is no profile.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ProfileError<E> {
    /// The ray is not fit for one of the rules.
    #[error(transparent)]
    Ray(#[from] RayFault),
    /// The closure failed.
    #[error("the function failed at a step of the grid: {0}")]
    Caller(E),
}

/// Evaluates a ray on a grid and asks every rule about every step.
///
/// `probe` gets a step and returns any of the forms of [`Probed`], once per step in the order of the grid; by-products are
/// dropped. `rules` pairs each rule with a name for the columns. Values are in the units of the objective, steps in those
/// of the ray.
///
/// ```
/// use surefoot::{Ray, acceptance::{Goldstein, WeakWolfe}, audit::{Grid, step_profile}};
/// let (wolfe, goldstein) = (WeakWolfe::new(1e-4, 0.9)?, Goldstein::new(0.25)?);
/// let profile = step_profile(
///     &Ray::new(0.5, -1.0),
///     &Grid::linear(0.0, 2.0, 9)?,
///     |a: f64| (0.5 * (a - 1.0).powi(2), a - 1.0), // least at 1
///     &[("weak Wolfe", &wolfe), ("Goldstein", &goldstein)],
/// )?;
/// assert_eq!(profile.row(3).unwrap().slope_ratio, Some(0.25)); // at 0.75
/// let interval = profile.accepted(1)[0];
/// assert_eq!((interval.start, interval.end), (0.5, 1.5));
/// for line in profile.csv_lines() { println!("{line}"); }
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// # Errors
/// [`ProfileError::Ray`] if the ray is not fit for a search with these rules, [`ProfileError::Caller`] with the closure's
/// own error.
pub fn step_profile<T: Real, S: Probed<T>>(
    ray: &Ray<T>,
    grid: &Grid<T>,
    mut probe: impl FnMut(T) -> S,
    rules: &[(&str, &dyn Acceptance<T>)],
) -> Result<StepProfile<T>, ProfileError<S::Error>> {
    let needs_slope = rules.iter().any(|(_, rule)| rule.uses_start_slope());
    if let Some(fault) = ray.fault(needs_slope) {
        return Err(fault.into());
    }
    let mut profile = StepProfile {
        rules: rules.iter().map(|(name, _)| (*name).to_string()).collect(),
        points: Vec::with_capacity(grid.steps.len()),
        verdicts: Vec::with_capacity(grid.steps.len() * rules.len()),
    };
    for &step in &grid.steps {
        let Probe { sample, .. } = probe(step).probed().map_err(ProfileError::Caller)?;
        let (value, slope) = match sample {
            Sample::Value(value) => (Some(value), None),
            Sample::Slope(slope) => (None, Some(slope)),
            Sample::Both(value, slope) => (Some(value), Some(slope)),
            Sample::NoSlope | Sample::OutsideDomain => (None, None),
        };
        let slope_is_sound = slope.is_none_or(T::is_finite);
        let value = value.filter(|v| v.is_finite());
        let slope = slope.filter(|s| s.is_finite());
        let slope_ratio = slope
            .filter(|_| ray.slope != T::zero())
            .map(|slope| slope / ray.slope);
        profile.points.push(Point {
            step,
            value,
            slope,
            slope_ratio,
        });
        let trial = value
            .filter(|_| slope_is_sound && step > T::zero())
            .map(|value| Trial { step, value, slope });
        for (_, rule) in rules {
            let ray = Ray {
                decrease: rule.decrease(),
                ..*ray
            };
            profile
                .verdicts
                .push(trial.map(|trial| rule.judge(&ray, &trial)));
        }
    }
    Ok(profile)
}

impl<T: Real> StepProfile<T> {
    /// The names of the rules, in the order they were given.
    pub fn rules(&self) -> &[String] {
        &self.rules
    }

    /// Number of rows.
    pub fn len(&self) -> usize {
        self.points.len()
    }

    /// Whether there are no rows; never so, since a grid has two steps at least.
    pub fn is_empty(&self) -> bool {
        self.points.is_empty()
    }

    /// The row with this number, counted from 0.
    pub fn row(&self, row: usize) -> Option<ProfileRow<'_, T>> {
        let point = self.points.get(row)?;
        let width = self.rules.len();
        Some(ProfileRow {
            step: point.step,
            value: point.value,
            slope: point.slope,
            slope_ratio: point.slope_ratio,
            verdicts: &self.verdicts[row * width..(row + 1) * width],
        })
    }

    /// All rows, from the shortest step to the longest.
    pub fn rows(&self) -> impl Iterator<Item = ProfileRow<'_, T>> {
        (0..self.len()).filter_map(|row| self.row(row))
    }

    /// The intervals of steps that a rule accepts on the grid, by the rule's number; none for a number past the last.
    pub fn accepted(&self, rule: usize) -> Vec<Interval<T>> {
        let mut intervals: Vec<Interval<T>> = Vec::new();
        for (at, row) in self.rows().enumerate() {
            if row.verdicts.get(rule) != Some(&Some(Verdict::Accept)) {
                continue;
            }
            match intervals.last_mut() {
                Some(open) if open.last_row + 1 == at => {
                    open.last_row = at;
                    open.end = row.step;
                }
                _ => intervals.push(Interval {
                    first_row: at,
                    last_row: at,
                    start: row.step,
                    end: row.step,
                }),
            }
        }
        intervals
    }

    /// The table as lines of comma-separated values, a heading first; cells are empty where there is nothing to say.
    /// Numbers are written so that they read back as they are; names are quoted where they need it (RFC 4180).
    pub fn csv_lines(&self) -> impl Iterator<Item = String> {
        let mut heading = String::from("step,value,slope,slope ratio");
        for name in &self.rules {
            heading.push(',');
            heading.push_str(&quoted(name));
        }
        core::iter::once(heading).chain(self.rows().map(|row| {
            let mut line = row.step.to_string();
            for number in [row.value, row.slope, row.slope_ratio] {
                line.push(',');
                if let Some(number) = number {
                    line.push_str(&number.to_string());
                }
            }
            for verdict in row.verdicts {
                line.push(',');
                line.push_str(word(*verdict));
            }
            line
        }))
    }
}

impl<T: Real + fmt::LowerExp> fmt::Display for StepProfile<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{:>12} {:>12} {:>12} {:>12}",
            "step", "value", "slope", "slope ratio"
        )?;
        for name in &self.rules {
            write!(f, "  {name:>12}")?;
        }
        for row in self.rows() {
            write!(f, "\n{:>12.4e}", row.step)?;
            for number in [row.value, row.slope, row.slope_ratio] {
                match number {
                    Some(number) => write!(f, " {number:>12.4e}")?,
                    None => write!(f, " {:>12}", "-")?,
                }
            }
            for (name, verdict) in self.rules.iter().zip(row.verdicts) {
                let width = name.chars().count().max(12);
                write!(f, "  {:>width$}", word(*verdict))?;
            }
        }
        Ok(())
    }
}

fn word(verdict: Option<Verdict>) -> &'static str {
    match verdict {
        Some(Verdict::Accept) => "accept",
        Some(Verdict::Refuse(Side::TooLong)) => "too long",
        Some(Verdict::Refuse(Side::TooShort)) => "too short",
        Some(Verdict::NeedsSlope) => "needs slope",
        None => "",
    }
}

fn quoted(name: &str) -> String {
    if name.contains([',', '"', '\n', '\r']) {
        let mut cell = String::from("\"");
        for c in name.chars() {
            if c == '"' {
                cell.push('"');
            }
            cell.push(c);
        }
        cell.push('"');
        cell
    } else {
        name.to_string()
    }
}
