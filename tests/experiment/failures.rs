//! Contenders and objectives that misbehave are recorded, and the others run on.

use super::{assert_same, fresh_folder, lbfgs};
use surefoot::acceptance::{SufficientDecrease, WeakWolfe, rule};
use surefoot::direction::{Moved, SteepestDescent};
use surefoot::experiment::{Contender, Ending, Experiment, Format, Record, Task, read_records};
use surefoot::finder::{Backtracking, Bisection};
use surefoot::problems::more_garbow_hillstrom::{beale, rosenbrock};
use surefoot::{Descent, Direction, Objective, Proposal, Ray, Side, StepFinder, Trial, joint};

/// Panics at its first refused trial.
struct Fragile;

impl StepFinder<f64> for Fragile {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        panic!("cannot shorten\nthe step {}", refused.step);
    }
}

/// Points nowhere.
struct Lost;

impl Direction<Vec<f64>> for Lost {
    fn direction(&mut self, _: &Vec<f64>, _: &Vec<f64>, d: &mut Vec<f64>) -> Option<f64> {
        d.fill(f64::NAN);
        None
    }
    fn moved(&mut self, _: Moved<'_, Vec<f64>>) {}
    fn reset(&mut self) {}
}

/// `x^2` from 8, which does something else from a call on.
#[derive(Clone)]
struct Parabola {
    calls: u64,
    good: u64,
    then: Then,
}

#[derive(Clone, Copy, PartialEq)]
enum Then {
    Panics,
    Fails,
    IsNan,
}

impl Objective<Vec<f64>> for Parabola {
    type Error = String;
    fn value(&mut self, x: &Vec<f64>) -> Result<f64, String> {
        self.calls += 1;
        if self.calls > self.good {
            match self.then {
                Then::Panics => panic!("call {} is too many", self.calls),
                Then::Fails => return Err(format!("no licence\nfor call {}", self.calls)),
                Then::IsNan => return Ok(f64::NAN),
            }
        }
        Ok(x[0] * x[0])
    }
    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), String> {
        g[0] = 2.0 * x[0];
        Ok(())
    }
}

fn misbehaving(name: &str, good: u64, then: Then) -> Task {
    let objective = Parabola {
        calls: 0,
        good,
        then,
    };
    Task::new(name, vec![8.0], objective)
}

/// First steps far too short, so that a run takes many evaluations and each search is refused a trial.
fn halving() -> Contender {
    Contender::new("halving", || {
        Descent::new(
            SteepestDescent,
            Backtracking::default(),
            SufficientDecrease::default(),
        )
    })
}

fn of<'a>(records: &'a [Record], contender: &str) -> Vec<&'a Record> {
    let found: Vec<_> = records
        .iter()
        .filter(|r| r.contender == contender)
        .collect();
    assert!(!found.is_empty());
    found
}

fn troop() -> Experiment {
    let builder: fn() -> Descent<SteepestDescent, Bisection, WeakWolfe<f64>> =
        || panic!("no driver today");
    Experiment::new()
        .with_problem(rosenbrock())
        .with_problem(beale())
        .with_contender(lbfgs("sound"))
        .with_contender(Contender::new("never built", builder))
        .with_contender(Contender::new("fragile", || {
            Descent::new(SteepestDescent, Fragile, WeakWolfe::default())
        }))
        .with_contender(Contender::new("rule panics", || {
            let panics = rule(|_: &Ray<f64>, _: &Trial<f64>| panic!("no verdict"));
            Descent::new(SteepestDescent, Bisection::new(), panics)
        }))
        .with_contender(Contender::new("lost", || {
            Descent::new(Lost, Bisection::new(), WeakWolfe::default())
        }))
        .with_contender(lbfgs("sound as well"))
        .quiet()
}

#[test]
fn contenders_that_panic_or_lead_nowhere_are_recorded() {
    let alone = Experiment::new()
        .with_problem(rosenbrock())
        .with_problem(beale())
        .with_contender(lbfgs("sound"))
        .quiet()
        .run()
        .unwrap();
    for format in [Format::Csv, Format::JsonLines] {
        let folder = fresh_folder(&format!("misbehave_{format:?}"));
        let records = troop().with_format(format).run_in(&folder).unwrap();
        assert_eq!(records.len(), 12);
        assert_same(&read_records(&folder).unwrap(), &records, "read again");
        for (found, wanted) in of(&records, "sound").iter().zip(&alone) {
            assert!(found.agrees_with(wanted));
            assert_eq!(found.ending, Ending::Converged);
        }
        for (a, b) in of(&records, "sound")
            .iter()
            .zip(of(&records, "sound as well"))
        {
            assert_eq!((a.value, a.evaluations()), (b.value, b.evaluations()));
        }
        for record in of(&records, "never built") {
            assert_eq!(record.ending, Ending::Panicked);
            assert_eq!(record.note, "panicked: no driver today");
            assert_eq!(record.evaluations(), 0);
            assert!(record.value.is_nan() && record.start_value.is_nan());
        }
        for record in of(&records, "fragile") {
            assert_eq!(record.ending, Ending::Panicked);
            assert!(
                record
                    .note
                    .starts_with("panicked: cannot shorten the step ")
            );
            // The start, and a first trial at the least; the value at the start is the best that is known.
            assert!(record.evaluations() >= 2);
            assert_eq!((record.value, record.iterations), (record.start_value, 0));
        }
        for record in of(&records, "rule panics") {
            assert_eq!(record.note, "panicked: no verdict");
        }
        for record in of(&records, "lost") {
            assert_eq!(record.ending, Ending::NotDescent);
            assert_eq!(record.evaluations(), 1);
            assert!(record.note.contains("check the gradient's sign"));
        }
    }
}

#[test]
fn objectives_that_panic_fail_or_are_undefined_are_recorded() {
    let finite_then_nan = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
        g[0] = f64::NAN;
        x[0]
    });
    let records = Experiment::new()
        .with_problem(misbehaving("panics", 2, Then::Panics))
        .with_problem(misbehaving("fails", 2, Then::Fails))
        .with_problem(misbehaving("nan", 2, Then::IsNan))
        .with_problem(misbehaving("panics at once", 0, Then::Panics))
        .with_problem(misbehaving("fails at once", 0, Then::Fails))
        .with_problem(misbehaving("nan at once", 0, Then::IsNan))
        .with_problem(Task::new("no slope", vec![1.0], finite_then_nan))
        .with_problem(Task::new("start", vec![f64::NAN], rosenbrock()))
        .with_problem(Task::new("empty", Vec::new(), rosenbrock()))
        .with_problem(Task::new("length", vec![1.0; 3], rosenbrock()))
        .with_contender(halving())
        .quiet()
        .run()
        .unwrap();
    let endings: Vec<_> = records
        .iter()
        .map(|r| (r.problem.as_str(), r.ending))
        .collect();
    assert_eq!(
        endings,
        [
            ("panics", Ending::Panicked),
            ("fails", Ending::Failed),
            ("nan", Ending::SearchFailed),
            ("panics at once", Ending::Panicked),
            ("fails at once", Ending::Failed),
            ("nan at once", Ending::Fault),
            ("no slope", Ending::Fault),
            ("start", Ending::Fault),
            ("empty", Ending::Fault),
            ("length", Ending::Failed),
        ]
    );
    // Every call counts, also the one that did not come back: two good ones, the start and a first trial, and the third.
    for record in &records[..3] {
        assert!(record.both + record.values >= 3, "{record:?}");
        assert!(record.value < 64.0 && record.start_value == 64.0);
        assert_eq!(record.value, records[0].value);
    }
    assert_eq!(records[0].both + records[0].values, 3);
    assert_eq!(records[1].both + records[1].values, 3);
    assert_eq!(records[0].note, "panicked: call 3 is too many");
    assert_eq!(
        records[1].note,
        "the objective failed: no licence for call 3"
    );
    assert_eq!(records[3].evaluations(), 1);
    assert!(records[9].note.contains("pass a slice of length 2"));
    assert!(records.iter().all(|record| !record.ending.is_success()));
}

#[test]
fn the_words_of_endings_are_those_in_the_files() {
    for ending in Ending::ALL {
        let text = serde_json::to_string(&ending).unwrap();
        assert_eq!(text, format!("\"{}\"", ending.word()));
        assert_eq!(format!("{ending}"), ending.word().replace('_', " "));
    }
    let successes: Vec<_> = Ending::ALL.into_iter().filter(|e| e.is_success()).collect();
    assert_eq!(successes, [Ending::Converged, Ending::AtRounding]);
}
