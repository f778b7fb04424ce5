//! What each contender paid on each instance.

use crate::experiment::{Ending, Record};
use std::collections::HashMap;
use std::string::String;
use std::vec::Vec;

/// What a run costs. A run that cost less than one unit counts as one unit, so that ratios exist.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Measure {
    /// Calls of the objective: values, gradients and both at once, each as one. Unit: 1 call.
    #[default]
    Calls,
    /// Moves. Unit: 1 move.
    Iterations,
    /// Time on the clock. Unit: 1 nanosecond.
    Seconds,
}

impl Measure {
    /// What the run cost; NaN where its seconds are.
    pub fn of(self, record: &Record) -> f64 {
        match self {
            Measure::Calls => (record.evaluations() as f64).max(1.0),
            Measure::Iterations => (record.iterations as f64).max(1.0),
            // `max` would hide a NaN.
            Measure::Seconds if record.seconds < 1e-9 => 1e-9,
            Measure::Seconds => record.seconds,
        }
    }

    /// Its name in the plural, for labels.
    pub fn name(self) -> &'static str {
        match self {
            Measure::Calls => "calls",
            Measure::Iterations => "iterations",
            Measure::Seconds => "seconds",
        }
    }
}

/// The convergence test: which runs count as solved. Failures of the test are failures of the contender, at whatever cost.
///
/// A record holds the end of a run, not its course: the cost of a solved run is that of the whole run, also where it passed
/// the test earlier.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub enum Solved {
    /// The run ended as [`Ending::Converged`]. It trusts each contender's own stopping test; fair where all have the same.
    #[default]
    Converged,
    /// The largest magnitude of the final gradient is at most this (finite, above 0; units of the gradient).
    Gradient(f64),
    /// `f(x0) - f(x) >= (1 - tau) (f(x0) - f_L)` with `0 < tau < 1`, where `f_L` is the least final value that any contender
    /// reached from the same start: Moré & Wild, SIAM J. Optim. 20 (2009) 172-191, equation (2.2), doi:10.1137/080724083.
    Decrease(f64),
    /// At least this many correct digits (finite, above 0); a record without them is not solved.
    Digits(f64),
}

impl Solved {
    /// In words, to stand after "solved:".
    pub fn sentence(self) -> String {
        match self {
            Solved::Converged => "the run's own stopping test held".into(),
            Solved::Gradient(limit) => std::format!("max|g| <= {limit:e} at the end"),
            Solved::Decrease(tau) => std::format!(
                "at least {} of the best decrease that any contender reached (Moré & Wild, tau = {tau:e})",
                1.0 - tau
            ),
            Solved::Digits(digits) => std::format!("at least {digits} correct digits"),
        }
    }

    fn is_sound(self) -> bool {
        match self {
            Solved::Converged => true,
            Solved::Gradient(x) | Solved::Digits(x) => x > 0.0 && x.is_finite(),
            Solved::Decrease(tau) => tau > 0.0 && tau < 1.0,
        }
    }

    /// `least`: the least final value on the instance.
    fn holds(self, record: &Record, least: f64) -> bool {
        match self {
            Solved::Converged => record.ending == Ending::Converged,
            Solved::Gradient(limit) => record.gradient_max <= limit,
            Solved::Decrease(tau) => {
                let (fell, best) = (
                    record.start_value - record.value,
                    record.start_value - least,
                );
                // `best` is 0 where nobody went anywhere, and NaN or infinite where the start has no finite value.
                best > 0.0 && best.is_finite() && fell >= (1.0 - tau) * best
            }
            Solved::Digits(digits) => record.correct_digits.is_some_and(|found| found >= digits),
        }
    }
}

/// Why there is nothing to analyse.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum AnalysisError {
    /// No records.
    #[error("there are no records: run the experiment first, or look at the file that was read")]
    Empty,
    /// A limit of the convergence test is not above 0 and finite, or `tau` not between 0 and 1.
    #[error("the limit of the convergence test must be finite and above 0, and tau below 1")]
    Limit,
    /// No instance has a run of every contender.
    #[error(
        "no instance was run by every contender: let the experiment finish, or compare fewer contenders"
    )]
    NothingInCommon,
}

/// What is to be solved: a problem of a size, from one start.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Instance {
    /// Its name.
    pub problem: String,
    /// Number of variables.
    pub n: usize,
    /// Number of the start.
    pub start: u32,
}

/// Cost by instance and contender.
///
/// Repetitions of a run are replaced by their median (the mean of the middle two), in which a run that did not solve counts as
/// infinitely dear. Only instances with a run of *every* contender are kept, since a comparison needs both sides; the others
/// are counted. Contenders and instances stand in the order of their first record.
#[derive(Clone, Debug, PartialEq)]
pub struct CostTable {
    measure: Measure,
    solved: Solved,
    contenders: Vec<String>,
    instances: Vec<Instance>,
    /// Number of the problem (name and size) of each instance.
    problem_of: Vec<usize>,
    problems: usize,
    /// Instance by instance, one per contender; infinite where not solved.
    costs: Vec<f64>,
    incomplete: usize,
}

impl CostTable {
    /// The costs of these runs.
    ///
    /// # Errors
    /// [`AnalysisError`] for no records, a limit out of range, and if no instance was run by every contender.
    pub fn new(
        records: &[Record],
        measure: Measure,
        solved: Solved,
    ) -> Result<Self, AnalysisError> {
        Self::of(&records.iter().collect::<Vec<_>>(), measure, solved)
    }

    /// The same for a selection of records.
    pub(super) fn of(
        records: &[&Record],
        measure: Measure,
        solved: Solved,
    ) -> Result<Self, AnalysisError> {
        if records.is_empty() {
            return Err(AnalysisError::Empty);
        }
        if !solved.is_sound() {
            return Err(AnalysisError::Limit);
        }
        let keys = Keys::of(records);
        let mut least = std::vec![f64::INFINITY; keys.instances.len()];
        for (record, &(instance, _)) in records.iter().zip(&keys.cells) {
            if record.value < least[instance] {
                least[instance] = record.value;
            }
        }
        // (instance, contender, cost), sorted: the repetitions of a cell become neighbours, in order of cost.
        let mut paid: Vec<(usize, usize, f64)> = records
            .iter()
            .zip(&keys.cells)
            .map(|(record, &(instance, contender))| {
                let cost = measure.of(record);
                let counts = cost.is_finite() && solved.holds(record, least[instance]);
                (
                    instance,
                    contender,
                    if counts { cost } else { f64::INFINITY },
                )
            })
            .collect();
        paid.sort_unstable_by(|a, b| (a.0, a.1).cmp(&(b.0, b.1)).then(a.2.total_cmp(&b.2)));

        let width = keys.contenders.len();
        let mut table = CostTable {
            measure,
            solved,
            contenders: keys.contenders.iter().map(|&name| name.into()).collect(),
            instances: Vec::new(),
            problem_of: Vec::new(),
            problems: 0,
            costs: Vec::new(),
            incomplete: 0,
        };
        let mut problems: HashMap<(usize, usize), usize> = HashMap::new();
        for of_instance in paid.chunk_by(|a, b| a.0 == b.0) {
            let before = table.costs.len();
            for of_cell in of_instance.chunk_by(|a, b| a.1 == b.1) {
                table.costs.push(median(of_cell));
            }
            if table.costs.len() - before < width {
                table.costs.truncate(before);
                table.incomplete += 1;
                continue;
            }
            let (problem, n, start) = keys.instances[of_instance[0].0];
            let next = problems.len();
            table
                .problem_of
                .push(*problems.entry((problem, n)).or_insert(next));
            table.instances.push(Instance {
                problem: keys.problems[problem].into(),
                n,
                start,
            });
        }
        table.problems = problems.len();
        if table.instances.is_empty() {
            return Err(AnalysisError::NothingInCommon);
        }
        Ok(table)
    }

    /// What is counted.
    pub fn measure(&self) -> Measure {
        self.measure
    }

    /// What counts as solved.
    pub fn solved(&self) -> Solved {
        self.solved
    }

    /// Names of the contenders.
    pub fn contenders(&self) -> &[String] {
        &self.contenders
    }

    /// The instances that every contender was run on.
    pub fn instances(&self) -> &[Instance] {
        &self.instances
    }

    /// Number of different problems among them; another size counts as another problem, another start does not.
    pub fn problems(&self) -> usize {
        self.problems
    }

    /// Number of instances left out because some contender has no run on them.
    pub fn incomplete(&self) -> usize {
        self.incomplete
    }

    /// What the contender paid on the instance; `None` where it did not solve it, and for numbers past the last.
    pub fn cost(&self, instance: usize, contender: usize) -> Option<f64> {
        let row = (instance < self.instances.len()).then(|| self.row(instance))?;
        row.get(contender).copied().filter(|cost| cost.is_finite())
    }

    /// Number of instances that the contender solved; 0 for a number past the last.
    pub fn solved_by(&self, contender: usize) -> usize {
        (0..self.instances.len())
            .filter(|&instance| self.cost(instance, contender).is_some())
            .count()
    }

    /// The costs of one instance, infinite where not solved.
    pub(super) fn row(&self, instance: usize) -> &[f64] {
        let width = self.contenders.len();
        &self.costs[instance * width..(instance + 1) * width]
    }

    /// All rows.
    pub(super) fn rows(&self) -> impl Iterator<Item = &[f64]> {
        self.costs.chunks_exact(self.contenders.len())
    }

    pub(super) fn problem_of(&self) -> &[usize] {
        &self.problem_of
    }
}

/// Names as numbers, in the order of first appearance.
struct Keys<'a> {
    problems: Vec<&'a str>,
    contenders: Vec<&'a str>,
    /// Problem, size, start.
    instances: Vec<(usize, usize, u32)>,
    /// Instance and contender of each record.
    cells: Vec<(usize, usize)>,
}

impl<'a> Keys<'a> {
    fn of(records: &[&'a Record]) -> Self {
        let (mut problems, mut contenders) = (Names::default(), Names::default());
        let mut seen: HashMap<(usize, usize, u32), usize> = HashMap::new();
        let mut instances = Vec::new();
        let mut cells = Vec::with_capacity(records.len());
        for &record in records {
            let key = (problems.number(&record.problem), record.n, record.start);
            let instance = *seen.entry(key).or_insert_with(|| {
                instances.push(key);
                instances.len() - 1
            });
            cells.push((instance, contenders.number(&record.contender)));
        }
        Keys {
            problems: problems.names,
            contenders: contenders.names,
            instances,
            cells,
        }
    }
}

#[derive(Default)]
struct Names<'a> {
    numbers: HashMap<&'a str, usize>,
    names: Vec<&'a str>,
}

impl<'a> Names<'a> {
    fn number(&mut self, name: &'a str) -> usize {
        *self.numbers.entry(name).or_insert_with(|| {
            self.names.push(name);
            self.names.len() - 1
        })
    }
}

/// The median of costs in ascending order; never empty.
fn median(sorted: &[(usize, usize, f64)]) -> f64 {
    let middle = sorted.len() / 2;
    if sorted.len() % 2 == 1 {
        sorted[middle].2
    } else {
        0.5 * sorted[middle - 1].2 + 0.5 * sorted[middle].2
    }
}
