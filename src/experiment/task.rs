use core::fmt;
use std::boxed::Box;
use std::format;
use std::string::{String, ToString};
use std::sync::Arc;
use std::vec::Vec;

use crate::problems::{Minimum, Problem};
use crate::{Cost, Objective};

/// An objective of any type, whose errors are sentences.
pub(super) type AnyObjective = Box<dyn Objective<Vec<f64>, Error = String>>;

/// A problem as an experiment runs it: a name, an objective, where to start, and which minimal values are known.
///
/// A [`Problem`] of this crate converts. For one of your own, implement [`Objective`] (or use [`joint`](crate::joint)) and give a
/// start:
///
/// ```
/// use surefoot::experiment::Task;
/// use surefoot::joint;
/// let bowl = joint(|x: &Vec<f64>, g: &mut Vec<f64>| { g[0] = 2.0 * x[0]; x[0] * x[0] });
/// let task = Task::new("bowl", vec![3.0], bowl).with_start(vec![-1e6]).with_minimum(0.0);
/// assert_eq!((task.name(), task.dim(), task.starts().len()), ("bowl", 1, 2));
/// ```
///
/// Every run gets an objective of its own, a clone or one built from a seed, so that no run sees what another left behind.
#[derive(Clone)]
pub struct Task {
    name: String,
    starts: Vec<Vec<f64>>,
    minima: Vec<f64>,
    build: Arc<dyn Fn(u64) -> AnyObjective + Send + Sync>,
}

impl Task {
    /// The objective, cloned for each run, from `start`.
    pub fn new<O>(name: impl Into<String>, start: impl Into<Vec<f64>>, objective: O) -> Self
    where
        O: Objective<Vec<f64>> + Clone + Send + Sync + 'static,
        O::Error: fmt::Display,
    {
        Self::seeded(name, start, move |_| objective.clone())
    }

    /// An objective built anew for each run from a seed, such as one with noise. The seed depends on that of the experiment,
    /// the problem, the start and the repetition, and not on the contender: all contenders meet the same noise.
    ///
    /// ```
    /// use surefoot::experiment::Task;
    /// use surefoot::problems::{large::tridia, wrapped::{Amplitude, Noisy}};
    /// let smooth = tridia(10)?;
    /// let wave = Amplitude::Absolute(1e-6);
    /// Noisy::new(smooth.clone(), wave, 0)?; // the amplitude is fit: no run will panic
    /// let start = smooth.start().to_vec();
    /// let task = Task::seeded("TRIDIA, noise 1e-6", start, move |seed| {
    ///     Noisy::new(smooth.clone(), wave, seed).expect("tried above")
    /// });
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    pub fn seeded<O>(
        name: impl Into<String>,
        start: impl Into<Vec<f64>>,
        build: impl Fn(u64) -> O + Send + Sync + 'static,
    ) -> Self
    where
        O: Objective<Vec<f64>> + 'static,
        O::Error: fmt::Display,
    {
        Task {
            name: name.into(),
            starts: std::vec![start.into()],
            minima: Vec::new(),
            build: Arc::new(move |seed| Box::new(Spoken(build(seed)))),
        }
    }

    /// The same under another name.
    #[must_use]
    pub fn named(mut self, name: impl Into<String>) -> Self {
        self.name = name.into();
        self
    }

    /// With one start more, of the same length.
    #[must_use]
    pub fn with_start(mut self, start: impl Into<Vec<f64>>) -> Self {
        self.starts.push(start.into());
        self
    }

    /// With one known minimal value more, in units of the objective. Correct digits are counted at the nearest known one.
    #[must_use]
    pub fn with_minimum(mut self, value: f64) -> Self {
        self.minima.push(value);
        self
    }

    /// The name.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Number of variables: the length of the first start.
    pub fn dim(&self) -> usize {
        self.starts[0].len()
    }

    /// Where runs start; at least one.
    pub fn starts(&self) -> &[Vec<f64>] {
        &self.starts
    }

    /// The known minimal values.
    pub fn minima(&self) -> &[f64] {
        &self.minima
    }

    pub(super) fn objective(&self, seed: u64) -> AnyObjective {
        (self.build)(seed)
    }
}

/// Under the usual name, with the number of residuals where that is not the number of variables, since a problem may come with
/// several; from the standard start; with the values of all known minima (saddle points are left out).
impl From<Problem> for Task {
    fn from(problem: Problem) -> Self {
        let minima = problem
            .minima()
            .iter()
            .filter(|minimum| !matches!(minimum, Minimum::Saddle { .. }))
            .map(Minimum::value)
            .collect();
        let name = match problem.residual_count() {
            Some(m) if m != problem.dim() => format!("{} (m = {m})", problem.name()),
            _ => problem.name().to_string(),
        };
        let task = Task::new(name, problem.start(), problem.clone());
        Task { minima, ..task }
    }
}

impl fmt::Debug for Task {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Task")
            .field("name", &self.name)
            .field("dim", &self.dim())
            .field("starts", &self.starts.len())
            .field("minima", &self.minima)
            .finish_non_exhaustive()
    }
}

/// The objective with its error as a sentence.
struct Spoken<O>(O);

impl<O> Objective<Vec<f64>> for Spoken<O>
where
    O: Objective<Vec<f64>>,
    O::Error: fmt::Display,
{
    type Error = String;

    fn cost(&self) -> Cost {
        self.0.cost()
    }

    fn value(&mut self, x: &Vec<f64>) -> Result<f64, String> {
        self.0.value(x).map_err(|error| error.to_string())
    }

    fn value_up_to(&mut self, x: &Vec<f64>, ceiling: Option<f64>) -> Result<f64, String> {
        self.0
            .value_up_to(x, ceiling)
            .map_err(|error| error.to_string())
    }

    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), String> {
        self.0.gradient(x, g).map_err(|error| error.to_string())
    }

    fn value_and_gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<f64, String> {
        self.0
            .value_and_gradient(x, g)
            .map_err(|error| error.to_string())
    }

    fn accepted(&mut self, x: &Vec<f64>) -> Result<(), String> {
        self.0.accepted(x).map_err(|error| error.to_string())
    }
}
