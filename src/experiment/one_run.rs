//! One run of an experiment: the machine form of a driver, watched from evaluation to evaluation.

use std::any::Any;
use std::borrow::ToOwned;
use std::format;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::string::{String, ToString};
use std::time::Instant;
use std::vec::Vec;

use super::budget::Budget;
use super::contender::Contender;
use super::record::{Ending, Record, correct_digits};
use super::task::{AnyObjective, Task};
use super::trials::{TrialKeeper, TrialLog};
use crate::{
    Acceptance, Descent, Direction, Evaluations, Given, Report, Run, RunEnding, StepFinder, Want,
};

/// What is to be run, and how.
pub(super) struct Assignment<'a> {
    pub(super) task: &'a Task,
    pub(super) contender: &'a Contender,
    pub(super) start: u32,
    pub(super) repetition: u32,
    /// For the objective.
    pub(super) seed: u64,
    pub(super) budget: Budget,
    /// How many trials to keep, if any.
    pub(super) trials: Option<usize>,
}

/// Runs it; a panic on the way is recorded.
pub(super) fn run(assignment: &Assignment<'_>) -> (Record, Option<TrialLog>) {
    let Assignment {
        task, contender, ..
    } = *assignment;
    let mut conductor = Conductor {
        assignment,
        begin: Instant::now(),
        objective: None,
        pending: None,
        keeper: assignment.trials.map(TrialKeeper::new),
        record: Record {
            start: assignment.start,
            repetition: assignment.repetition,
            ..Record::new(task.name(), task.dim(), contender.name())
        },
    };
    // Nothing that a panic leaves half done is used again: objective and driver are dropped, counts are plain numbers.
    let caught = catch_unwind(AssertUnwindSafe(|| {
        conductor.objective = Some(task.objective(assignment.seed));
        contender.conduct(&mut conductor);
        conductor.objective = None;
    }));
    if let Err(panic) = caught {
        conductor.note_pending();
        conductor.end(Ending::Panicked, &format!("panicked: {}", spoken(&*panic)));
        // The objective may panic once more as it goes.
        let objective = conductor.objective.take();
        let _ = catch_unwind(AssertUnwindSafe(|| drop(objective)));
    }
    let mut record = conductor.record;
    record.correct_digits = correct_digits(record.value, record.start_value, task.minima());
    record.seconds = conductor.begin.elapsed().as_secs_f64();
    let log = conductor.keeper.map(|keeper| TrialLog {
        problem: record.problem.clone(),
        n: record.n,
        contender: record.contender.clone(),
        start: record.start,
        repetition: record.repetition,
        ..keeper.into_log()
    });
    (record, log)
}

/// Leads a driver through its run, evaluation by evaluation.
pub(super) struct Conductor<'a> {
    assignment: &'a Assignment<'a>,
    begin: Instant,
    objective: Option<AnyObjective>,
    /// The evaluation under way: a panic leaves it here.
    pending: Option<Want>,
    keeper: Option<TrialKeeper>,
    record: Record,
}

impl Conductor<'_> {
    pub(super) fn task(&self) -> &Task {
        self.assignment.task
    }

    /// Runs the driver to its end, or to that of the budget.
    pub(super) fn conduct<D, F, A>(&mut self, descent: Descent<D, F, A>)
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        let Some(mut objective) = self.objective.take() else {
            return;
        };
        let start = self.assignment.task.starts()[self.assignment.start as usize].clone();
        let mut run = descent.with_cost(objective.cost()).start(start);
        let stopped = self.lead(&mut run, &mut objective);
        let (_, report) = run.finish();
        self.note_report(&report);
        match stopped {
            None => {
                let (ending, note) = of_run(&report.ending);
                self.end(ending, &note);
            }
            Some((ending, note)) => self.end(ending, &note),
        }
    }

    /// Evaluates until the run ends, in which case there is no answer, or is to be stopped for a reason of the experiment's.
    fn lead<D, F, A>(
        &mut self,
        run: &mut Run<Vec<f64>, D, F, A>,
        objective: &mut AnyObjective,
    ) -> Option<(Ending, String)>
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        loop {
            let calls = run.evaluations().calls();
            let request = run.request()?;
            if let Some(spent) = self.assignment.budget.spent(calls, self.begin) {
                return Some(spent);
            }
            self.pending = Some(request.want);
            let given = match request.answer(&mut **objective) {
                Ok(given) => given,
                Err(error) => {
                    self.note_pending();
                    return Some(failed(&error));
                }
            };
            self.pending = None;
            if let (0, Given::Both(value) | Given::Value(value)) = (calls, given) {
                self.record.start_value = value;
            }
            self.note_trials(run);
            let before = run.iterations();
            if let Err(refused) = run.supply(given) {
                return Some((Ending::Failed, refused.to_string()));
            }
            self.note_trials(run);
            self.note_progress(run);
            if run.iterations() > before
                && let Err(error) = objective.accepted(run.point())
            {
                return Some(failed(&error));
            }
        }
    }

    fn note_trials<D, F, A>(&mut self, run: &Run<Vec<f64>, D, F, A>)
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        let Some(keeper) = &mut self.keeper else {
            return;
        };
        let search = run.search();
        if search.request().is_some() {
            keeper.look(search.log(), search.ray());
        } else if keeper.is_within_search() {
            keeper.look(search.log(), search.ray());
            keeper.search_over();
        }
    }

    /// What a panic would leave behind.
    fn note_progress<D, F, A>(&mut self, run: &Run<Vec<f64>, D, F, A>)
    where
        D: Direction<Vec<f64>>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        self.note_counts(run.iterations(), run.evaluations());
        let refusals = run.refusals();
        let record = &mut self.record;
        record.too_long = refusals.too_long;
        record.too_short = refusals.too_short;
        record.outside = refusals.outside;
        record.value = run.value();
        record.gradient_max = run.gradient_max().unwrap_or(f64::NAN);
    }

    fn note_report(&mut self, report: &Report<Vec<f64>>) {
        // A call that failed was counted here and not by the run.
        let failed = self.record.evaluations() > report.evaluations.calls();
        if !failed {
            self.note_counts(report.iterations, report.evaluations);
        }
        let record = &mut self.record;
        record.too_long = report.refusals.too_long;
        record.too_short = report.refusals.too_short;
        record.outside = report.refusals.outside;
        record.value = report.value;
        record.gradient_max = report.gradient_max.unwrap_or(f64::NAN);
    }

    fn note_counts(&mut self, iterations: u64, evaluations: Evaluations) {
        self.record.iterations = iterations;
        self.record.values = evaluations.values;
        self.record.gradients = evaluations.gradients;
        self.record.both = evaluations.both;
    }

    /// Counts a call that did not come back as it should.
    fn note_pending(&mut self) {
        match self.pending.take() {
            Some(Want::Value) => self.record.values += 1,
            Some(Want::Gradient) => self.record.gradients += 1,
            Some(Want::Both) => self.record.both += 1,
            None => {}
        }
    }

    fn end(&mut self, ending: Ending, note: &str) {
        self.record.ending = ending;
        self.record.note = on_one_line(note);
    }
}

fn failed(error: &str) -> (Ending, String) {
    (Ending::Failed, format!("the objective failed: {error}"))
}

fn of_run(ending: &RunEnding<f64>) -> (Ending, String) {
    let word = match ending {
        RunEnding::Converged(_) => Ending::Converged,
        RunEnding::IterationsSpent => Ending::IterationsSpent,
        RunEnding::EvaluationsSpent => Ending::EvaluationsSpent,
        RunEnding::SearchFailed(_) => Ending::SearchFailed,
        RunEnding::NotDescent { .. } => Ending::NotDescent,
        RunEnding::AtRounding => Ending::AtRounding,
        RunEnding::Fault(_) => Ending::Fault,
        RunEnding::Stopped => Ending::Failed,
    };
    (word, ending.to_string())
}

/// What a panic said.
fn spoken(panic: &(dyn Any + Send)) -> String {
    if let Some(text) = panic.downcast_ref::<&str>() {
        (*text).to_owned()
    } else if let Some(text) = panic.downcast_ref::<String>() {
        text.clone()
    } else {
        "without a message".to_owned()
    }
}

/// The sentence without line breaks and other control characters, cut where it is longer than anybody reads.
pub(super) fn on_one_line(text: &str) -> String {
    const MOST: usize = 500;
    text.chars()
        .take(MOST)
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect()
}
