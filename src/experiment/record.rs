//! What is kept of one run.

use std::fmt;
use std::string::String;

/// One run: what it was, how it ended, what it cost. The fields stand in the order of the columns of a CSV file.
///
/// A run is known by its key: problem, `n`, contender, start and repetition. Its row is the same each time it runs, but for
/// `seconds` and for what a limit of time did to it.
///
/// ```
/// use surefoot::experiment::{Ending, Record};
/// let mut record = Record::new("Valley", 2, "weak Wolfe, three-point");
/// (record.ending, record.values, record.gradients) = (Ending::Converged, 31, 24);
/// assert_eq!(record.evaluations(), 55);
/// ```
#[derive(Clone, Debug, PartialEq, serde::Serialize, serde::Deserialize)]
#[non_exhaustive]
pub struct Record {
    /// Name of the problem.
    pub problem: String,
    /// Number of variables.
    pub n: usize,
    /// Name of the contender.
    pub contender: String,
    /// Which of the problem's starts, from 0.
    pub start: u32,
    /// Which repetition, from 0.
    pub repetition: u32,
    /// How the run ended.
    pub ending: Ending,
    /// The same in a sentence, on one line.
    pub note: String,
    /// Number of moves.
    pub iterations: u64,
    /// Calls for a value alone.
    pub values: u64,
    /// Calls for a gradient alone.
    pub gradients: u64,
    /// Calls for both at once.
    pub both: u64,
    /// Trials refused as too long.
    pub too_long: u64,
    /// Trials refused as too short.
    pub too_short: u64,
    /// Trials outside of the domain.
    pub outside: u64,
    /// The value at the start; NaN if the run did not get so far.
    #[serde(with = "number")]
    pub start_value: f64,
    /// The best value; NaN if there was none.
    #[serde(with = "number")]
    pub value: f64,
    /// The largest magnitude in the gradient there; NaN where it was not computed.
    #[serde(with = "number")]
    pub gradient_max: f64,
    /// Correct digits of the value, see [`correct_digits`]; `None` where no minimum is known or there is no value.
    #[serde(with = "optional_number")]
    pub correct_digits: Option<f64>,
    /// Seconds from the building of the driver to the end.
    #[serde(with = "number")]
    pub seconds: f64,
}

impl Record {
    /// A record of nothing yet: start 0, repetition 0, no calls, no values, [`Ending::Failed`].
    pub fn new(problem: impl Into<String>, n: usize, contender: impl Into<String>) -> Self {
        Record {
            problem: problem.into(),
            n,
            contender: contender.into(),
            start: 0,
            repetition: 0,
            ending: Ending::Failed,
            note: String::new(),
            iterations: 0,
            values: 0,
            gradients: 0,
            both: 0,
            too_long: 0,
            too_short: 0,
            outside: 0,
            start_value: f64::NAN,
            value: f64::NAN,
            gradient_max: f64::NAN,
            correct_digits: None,
            seconds: 0.0,
        }
    }

    /// The cost of the run in calls of the objective, of any kind: a value, a gradient, and both at once count 1 each.
    pub fn evaluations(&self) -> u64 {
        self.values + self.gradients + self.both
    }

    /// Whether two records say the same of the same run, `seconds` left out. NaN equals NaN here.
    pub fn agrees_with(&self, other: &Record) -> bool {
        let same = |a: f64, b: f64| a.to_bits() == b.to_bits() || (a.is_nan() && b.is_nan());
        let digits = match (self.correct_digits, other.correct_digits) {
            (Some(a), Some(b)) => same(a, b),
            (a, b) => a.is_none() && b.is_none(),
        };
        digits
            && same(self.start_value, other.start_value)
            && same(self.value, other.value)
            && same(self.gradient_max, other.gradient_max)
            && self.without_floats() == other.without_floats()
    }

    fn without_floats(&self) -> Self {
        Record {
            start_value: 0.0,
            value: 0.0,
            gradient_max: 0.0,
            correct_digits: None,
            seconds: 0.0,
            ..self.clone()
        }
    }
}

/// How a run of an experiment ended. In files it stands as a word, `converged`, `search_failed` and so on.
#[derive(
    Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, serde::Serialize, serde::Deserialize,
)]
#[serde(rename_all = "snake_case")]
#[non_exhaustive]
pub enum Ending {
    /// A stopping test held.
    Converged,
    /// Value and gradient improve no more: the arithmetic is at its end.
    AtRounding,
    /// A search found no acceptable step.
    SearchFailed,
    /// The direction does not descend.
    NotDescent,
    /// The driver's limit on moves was reached.
    IterationsSpent,
    /// The limit on evaluations, the driver's or the experiment's, was reached.
    EvaluationsSpent,
    /// The experiment's limit of time was reached.
    TimeSpent,
    /// The input was not fit: a start, value or gradient that is not finite, an empty point, a wrong length.
    Fault,
    /// The contender or the objective panicked, or the process of the run died.
    Panicked,
    /// The objective failed with an error of its own.
    Failed,
}

impl Ending {
    /// Every ending.
    pub const ALL: [Ending; 10] = [
        Ending::Converged,
        Ending::AtRounding,
        Ending::SearchFailed,
        Ending::NotDescent,
        Ending::IterationsSpent,
        Ending::EvaluationsSpent,
        Ending::TimeSpent,
        Ending::Fault,
        Ending::Panicked,
        Ending::Failed,
    ];

    /// Whether the run came to an end of its own that is no failure: it converged, or rounding allows no better.
    pub fn is_success(self) -> bool {
        matches!(self, Ending::Converged | Ending::AtRounding)
    }

    /// The word that stands in files.
    pub fn word(self) -> &'static str {
        match self {
            Ending::Converged => "converged",
            Ending::AtRounding => "at_rounding",
            Ending::SearchFailed => "search_failed",
            Ending::NotDescent => "not_descent",
            Ending::IterationsSpent => "iterations_spent",
            Ending::EvaluationsSpent => "evaluations_spent",
            Ending::TimeSpent => "time_spent",
            Ending::Fault => "fault",
            Ending::Panicked => "panicked",
            Ending::Failed => "failed",
        }
    }
}

/// The word, with spaces.
impl fmt::Display for Ending {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(&self.word().replace('_', " "))
    }
}

/// Correct decimal digits of `value`, measured at the nearest of the known `minima`: `-log10(|f - f*| / |f*|)`, and
/// `-log10(|f| / |f0|)` where `f*` is 0, with `f0` the value at the start. At most 16, as doubles hold no more; negative where
/// `f` is off by more than the scale. `None` without minima, or where `f` is not finite.
///
/// ```
/// use surefoot::experiment::correct_digits;
/// assert_eq!(correct_digits(100.1, 500.0, &[100.0]).map(f64::round), Some(3.0));
/// assert_eq!(correct_digits(1e-6, 1.0, &[0.0, 48.98]), Some(6.0));
/// assert_eq!(correct_digits(f64::NAN, 1.0, &[0.0]), None);
/// ```
pub fn correct_digits(value: f64, start_value: f64, minima: &[f64]) -> Option<f64> {
    const MOST: f64 = 16.0;
    let off = |minimum: f64| (value - minimum).abs();
    let nearest = minima
        .iter()
        .copied()
        .filter(|minimum| minimum.is_finite())
        .min_by(|&a, &b| off(a).total_cmp(&off(b)))?;
    let scale = if nearest == 0.0 {
        start_value.abs()
    } else {
        nearest.abs()
    };
    if off(nearest) == 0.0 {
        return Some(MOST);
    }
    let digits = -(off(nearest) / scale).log10();
    digits.is_finite().then_some(digits.min(MOST))
}

/// A number as it stands in files.
#[derive(Clone, Copy, Debug, PartialEq, serde::Serialize, serde::Deserialize)]
#[serde(transparent)]
pub(super) struct Number(#[serde(with = "number")] pub(super) f64);

/// Numbers in files: JSON knows neither NaN nor infinities, so these stand as the strings `"NaN"`, `"inf"` and `"-inf"`.
pub(super) mod number {
    use serde::de::{Deserializer, Error, Visitor};
    use serde::ser::Serializer;
    use std::fmt;

    pub(crate) fn serialize<S: Serializer>(x: &f64, serializer: S) -> Result<S::Ok, S::Error> {
        if x.is_nan() {
            serializer.serialize_str("NaN")
        } else if *x == f64::INFINITY {
            serializer.serialize_str("inf")
        } else if *x == f64::NEG_INFINITY {
            serializer.serialize_str("-inf")
        } else {
            serializer.serialize_f64(*x)
        }
    }

    pub(crate) fn deserialize<'de, D: Deserializer<'de>>(deserializer: D) -> Result<f64, D::Error> {
        struct Number;
        impl Visitor<'_> for Number {
            type Value = f64;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("a number, or one of \"NaN\", \"inf\" and \"-inf\"")
            }
            fn visit_f64<E: Error>(self, x: f64) -> Result<f64, E> {
                Ok(x)
            }
            fn visit_u64<E: Error>(self, x: u64) -> Result<f64, E> {
                Ok(x as f64)
            }
            fn visit_i64<E: Error>(self, x: i64) -> Result<f64, E> {
                Ok(x as f64)
            }
            fn visit_str<E: Error>(self, x: &str) -> Result<f64, E> {
                match x {
                    "NaN" => Ok(f64::NAN),
                    "inf" => Ok(f64::INFINITY),
                    "-inf" => Ok(f64::NEG_INFINITY),
                    other => Err(E::invalid_value(serde::de::Unexpected::Str(other), &self)),
                }
            }
        }
        deserializer.deserialize_any(Number)
    }
}

/// The same for a number that may be missing: an empty field in CSV, `null` in JSON.
pub(super) mod optional_number {
    use super::Number;
    use serde::de::{Deserialize, Deserializer};
    use serde::ser::Serializer;

    pub(crate) fn serialize<S: Serializer>(
        x: &Option<f64>,
        serializer: S,
    ) -> Result<S::Ok, S::Error> {
        match x {
            Some(x) => serializer.serialize_some(&Number(*x)),
            None => serializer.serialize_none(),
        }
    }

    pub(crate) fn deserialize<'de, D: Deserializer<'de>>(
        deserializer: D,
    ) -> Result<Option<f64>, D::Error> {
        Ok(Option::<Number>::deserialize(deserializer)?.map(|Number(x)| x))
    }
}
