//! Every driver on every problem of Moré, Garbow and Hillstrom, from the standard start: who reaches a known minimum, at
//! what cost, and who does not and why.
//!
//! Problems, starts and minima: J. J. Moré, B. S. Garbow & K. E. Hillstrom, "Testing unconstrained optimization
//! software", ACM Trans. Math. Software 7 (1981) 17-41, doi:10.1145/355934.355936. What must hold stands in this file;
//! `tests/data/driver_table.csv` pins the numbers besides, so that a change of cost or of a single bit is noticed. With
//! `UPDATE_PINS=1` in the environment it is written anew.
#![cfg(feature = "problems")]

use std::collections::BTreeMap;
use std::fmt::Write;
use std::sync::OnceLock;
use surefoot::acceptance::StrongWolfe;
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::MoreThuente;
use surefoot::problems::{Minimum, Problem, more_garbow_hillstrom};
use surefoot::{
    BoxedDirection, Counted, Criterion, Descent, Ending, Evaluations, Report, RunEnding, Stopping,
};

const PINS: &str = "tests/data/driver_table.csv";

/// Absolute, in gradient units.
const GRADIENT: f64 = 1e-10;
/// Moves, for steepest descent and for the others.
const BUDGETS: [u64; 2] = [5_000, 50_000];
/// So many digits of the value, and of the point where there is one, make a minimum reached.
const VALUE_DIGITS: u32 = 6;
const POINT_DIGITS: u32 = 2;

const HEAD: &str = "\
# Drivers on the problems of J. J. Moré, B. S. Garbow & K. E. Hillstrom, ACM Trans. Math. Software 7 (1981) 17-41.
# Written by tests/driver_table.rs with UPDATE_PINS=1; a reference for changes, not a truth.
# Settings: the finder MoreThuente; strong Wolfe with decrease 1e-4 and curvature 0.1 (L-BFGS: 0.9); L-BFGS with 10 pairs;
# converged at max|g| <= 1e-10; at most 5,000 moves of steepest descent, 50,000 of the others.
# ending: the criterion that held, the limit reached, or the diagnosis of the search that failed.
# reached: the known minimum by kind and by its place in the list of the problem, or why none was reached: budget (moves
# ran out), flat (the gradient is small far from any minimum), search (no acceptable step, or none that rounding leaves).
# digits: of the value (against |f*|; where f* = 0 against 1, or f at the start if that is less) and of the point (against
# max(1, |x*|)).
# Values depend on the last bits of exp, ln, sin, cos, atan and powf: these are those of x86-64 Linux with glibc.
problem,number,n,m,driver,ending,iterations,values,gradients,value,gradient_max,reached,value_digits,point_digits
";

const GULF: &str = "Gulf research and development";
const EXTENDED_POWELL: &str = "Extended Powell singular";

/// Runs that reach no known minimum, with the reason. A run that is listed here and reaches one is an error too.
const EXCEPTIONS: &[(&str, usize, usize, &str, &str)] = &[
    // Steepest descent in valleys: the condition number of the Hessian decides (Nocedal & Wright 2006, theorem 3.4), and
    // 5,000 moves are too few from 2.5e3 (extended Rosenbrock, at times) to 1e16 (Meyer).
    ("Powell badly scaled", 2, 2, "steepest descent", "budget"),
    ("Bard", 3, 15, "steepest descent", "budget"),
    ("Meyer", 3, 16, "steepest descent", "budget"),
    (GULF, 3, 99, "steepest descent", "budget"),
    (GULF, 3, 10, "steepest descent", "budget"),
    ("Powell singular", 4, 4, "steepest descent", "budget"),
    ("Kowalik and Osborne", 4, 11, "steepest descent", "budget"),
    ("Osborne 1", 5, 33, "steepest descent", "budget"),
    ("Biggs EXP6", 6, 13, "steepest descent", "budget"),
    ("Osborne 2", 11, 65, "steepest descent", "budget"),
    ("Watson", 6, 31, "steepest descent", "budget"),
    ("Watson", 9, 31, "steepest descent", "budget"),
    ("Watson", 12, 31, "steepest descent", "budget"),
    ("Extended Rosenbrock", 10, 10, "steepest descent", "budget"),
    (EXTENDED_POWELL, 12, 12, "steepest descent", "budget"),
    (EXTENDED_POWELL, 100, 100, "steepest descent", "budget"),
    ("Penalty I", 4, 5, "steepest descent", "budget"),
    ("Penalty I", 10, 11, "steepest descent", "budget"),
    ("Penalty II", 4, 8, "steepest descent", "budget"),
    ("Penalty II", 10, 20, "steepest descent", "budget"),
    ("Brown almost-linear", 10, 10, "steepest descent", "budget"),
    // Condition number 1e12, variables of size 1e6 and 1e-6: a step along the gradient is too short to change the last bit
    // of the first variable.
    ("Brown badly scaled", 2, 3, "steepest descent", "search"),
    // Condition numbers at the minimizer: Meyer 1e16, Watson 1.7e9 (n = 9) and 7e13 (n = 12). With 10 pairs, L-BFGS copes
    // with all but the last.
    ("Meyer", 3, 16, "Fletcher-Reeves", "budget"),
    ("Meyer", 3, 16, "Hager-Zhang", "budget"),
    ("Watson", 9, 31, "Fletcher-Reeves", "search"),
    ("Watson", 9, 31, "Polak-Ribiere+", "search"),
    ("Watson", 9, 31, "Hestenes-Stiefel+", "search"),
    ("Watson", 9, 31, "Hager-Zhang", "search"),
    ("Watson", 12, 31, "Fletcher-Reeves", "search"),
    ("Watson", 12, 31, "Polak-Ribiere+", "search"),
    ("Watson", 12, 31, "Hestenes-Stiefel+", "search"),
    ("Watson", 12, 31, "Dai-Yuan", "search"),
    ("Watson", 12, 31, "Hager-Zhang", "budget"),
    ("Watson", 12, 31, "L-BFGS", "search"),
];

#[test]
fn every_driver_reaches_a_known_minimum_of_every_problem_or_is_a_named_exception() {
    let mut faults = Vec::new();
    let mut seen = BTreeMap::new();
    let rows = table();
    for row in &rows {
        let key = (row.problem, row.n, row.m, row.driver);
        assert_eq!(seen.insert(key, ()), None, "{key:?} twice");
        let named = EXCEPTIONS
            .iter()
            .find(|e| (e.0, e.1, e.2, e.3) == key)
            .map(|e| e.4);
        match (&row.reached, named) {
            (Reached::Minimum { .. }, None) => {}
            (Reached::No { reason }, Some(expected)) if *reason == expected => {}
            (reached, named) => {
                faults.push(format!(
                    "{key:?}: {reached:?}, {}; named: {named:?}",
                    row.ending
                ));
            }
        }
    }
    // No driver is left out of any problem, and no exception names a run that does not exist.
    for problem in more_garbow_hillstrom() {
        for driver in DRIVERS {
            let key = (
                problem.name(),
                problem.dim(),
                problem.residual_count().unwrap(),
                driver,
            );
            assert!(seen.contains_key(&key), "{key:?} is missing");
        }
    }
    for e in EXCEPTIONS {
        assert!(
            seen.contains_key(&(e.0, e.1, e.2, e.3)),
            "no such run: {e:?}"
        );
    }
    assert_eq!(rows.len(), DRIVERS.len() * more_garbow_hillstrom().len());
    assert!(
        faults.is_empty(),
        "{} faults:\n{}",
        faults.len(),
        faults.join("\n")
    );
}

#[test]
fn what_a_run_reports_is_true_at_the_point_that_it_hands_over() {
    let mut faults = Vec::new();
    for Ran {
        problem,
        driver,
        report,
        counted,
    } in ran()
    {
        let what = format!("{} n = {}, {driver}", problem.name(), problem.dim());
        let mut g = vec![f64::NAN; problem.dim()];
        let value = problem.value_and_gradient(&report.point, &mut g).unwrap();
        let start = problem.value(problem.start()).unwrap();
        let most = g.iter().fold(0.0, |m: f64, g| m.max(g.abs()));
        assert_eq!(value, report.value, "{what}");
        assert!(value <= start, "{what}");
        assert_eq!(*counted, report.evaluations, "{what}");
        assert!(report.iterations <= budget(driver), "{what}");
        if let Some(found) = report.gradient_max {
            assert_eq!(found, most, "{what}");
        }
        // The gradients are right (tests/problems.rs), so none may be blamed.
        if matches!(
            report.ending,
            RunEnding::SearchFailed(Ending::WrongSlope { .. }) | RunEnding::NotDescent { .. }
        ) {
            faults.push(format!("{what}: {}", report.ending));
        }
        if report.ending == RunEnding::Converged(Criterion::Gradient) && !(most <= GRADIENT) {
            faults.push(format!(
                "{what}: `the gradient is small`, but at the point it is {most:e}"
            ));
        }
    }
    assert!(
        faults.is_empty(),
        "{} faults:\n{}",
        faults.len(),
        faults.join("\n")
    );
}

#[test]
#[cfg_attr(
    not(all(target_arch = "x86_64", target_os = "linux", target_env = "gnu")),
    ignore = "the last bits of exp and its like differ elsewhere"
)]
fn the_pinned_numbers_are_those_of_today() {
    let found: String = HEAD
        .lines()
        .map(|line| format!("{line}\n"))
        .chain(table().iter().map(Row::line))
        .collect();
    if std::env::var_os("UPDATE_PINS").is_some() {
        std::fs::write(PINS, &found).expect("the table can be written");
        return;
    }
    let pinned = std::fs::read_to_string(PINS).expect("the table can be read");
    let changed: Vec<String> = pinned
        .lines()
        .zip(found.lines())
        .filter(|(pinned, found)| pinned != found)
        .map(|(pinned, found)| format!("pinned {pinned}\nfound  {found}"))
        .collect();
    assert!(
        changed.is_empty(),
        "{} lines changed:\n{}",
        changed.len(),
        changed.join("\n")
    );
    assert_eq!(pinned.lines().count(), found.lines().count());
}

// ---- The table ----

const DRIVERS: [&str; 7] = [
    "steepest descent",
    "Fletcher-Reeves",
    "Polak-Ribiere+",
    "Hestenes-Stiefel+",
    "Dai-Yuan",
    "Hager-Zhang",
    "L-BFGS",
];

fn direction(driver: &str) -> BoxedDirection<Vec<f64>> {
    let conjugate = |update| Box::new(ConjugateGradient::new(update));
    match driver {
        "steepest descent" => Box::new(SteepestDescent),
        "Fletcher-Reeves" => conjugate(Update::FletcherReeves),
        "Polak-Ribiere+" => conjugate(Update::PolakRibierePlus),
        "Hestenes-Stiefel+" => conjugate(Update::HestenesStiefelPlus),
        "Dai-Yuan" => conjugate(Update::DaiYuan),
        "Hager-Zhang" => conjugate(Update::HagerZhang),
        "L-BFGS" => Box::new(Lbfgs::new(10).unwrap()),
        _ => panic!("no driver {driver}"),
    }
}

fn budget(driver: &str) -> u64 {
    BUDGETS[usize::from(driver != "steepest descent")]
}

/// One run and what it reported.
struct Ran {
    problem: Problem,
    driver: &'static str,
    report: Report<Vec<f64>>,
    /// As the objective itself counted.
    counted: Evaluations,
}

/// Every driver on every problem, run once for all tests.
fn ran() -> &'static [Ran] {
    static RAN: OnceLock<Vec<Ran>> = OnceLock::new();
    RAN.get_or_init(|| {
        more_garbow_hillstrom()
            .into_iter()
            .flat_map(|problem| DRIVERS.map(|driver| run(problem.clone(), driver)))
            .collect()
    })
}

fn run(problem: Problem, driver: &'static str) -> Ran {
    let curvature = if driver == "L-BFGS" { 0.9 } else { 0.1 };
    let rule = StrongWolfe::new(1e-4, curvature).unwrap();
    let stopping = Stopping {
        gradient: Some(GRADIENT),
        iterations: budget(driver),
        ..Stopping::default()
    };
    let mut objective = Counted::new(problem.clone());
    let report = Descent::new(direction(driver), MoreThuente::new(), rule)
        .with_stopping(stopping)
        .unwrap()
        .minimize(problem.start().to_vec(), &mut objective)
        .unwrap();
    Ran {
        problem,
        driver,
        report,
        counted: objective.evaluations(),
    }
}

fn table() -> Vec<Row> {
    ran()
        .iter()
        .map(|ran| Row::new(&ran.problem, ran.driver, &ran.report))
        .collect()
}

struct Row {
    problem: &'static str,
    number: u32,
    n: usize,
    m: usize,
    driver: &'static str,
    ending: String,
    iterations: u64,
    values: u64,
    gradients: u64,
    value: f64,
    gradient_max: Option<f64>,
    reached: Reached,
    /// Of the known minimum that is nearest in value.
    value_digits: u32,
    point_digits: Option<u32>,
}

#[derive(Debug)]
enum Reached {
    Minimum { kind: &'static str, place: usize },
    No { reason: &'static str },
}

impl Row {
    fn new(problem: &Problem, driver: &'static str, report: &Report<Vec<f64>>) -> Row {
        let start = problem.value(problem.start()).unwrap();
        let near = |minimum: &Minimum| {
            // A minimum of 0 has no digits of its own: they are counted below 1, or below f at the start if that is less.
            let scale = match minimum.value() {
                0.0 => start.min(1.0),
                value => value.abs(),
            };
            let value = digits((report.value - minimum.value()).abs() / scale);
            let point = minimum.point().map(|x| {
                let most =
                    |x: &mut dyn Iterator<Item = f64>| x.fold(0.0, |m: f64, x| m.max(x.abs()));
                let size = most(&mut x.iter().copied()).max(1.0);
                digits(most(&mut x.iter().zip(&report.point).map(|(a, b)| a - b)) / size)
            });
            (value, point)
        };
        let known: Vec<_> = problem.minima().iter().map(near).collect();
        let enough = |&(value, point): &(u32, Option<u32>)| {
            value >= VALUE_DIGITS && point.is_none_or(|p| p >= POINT_DIGITS)
        };
        // The one that is reached, with the most digits of the point; else the nearest in value.
        let place = (0..known.len())
            .max_by_key(|&i| {
                (
                    enough(&known[i]),
                    known[i].1.is_some(),
                    known[i].0,
                    known[i].1,
                )
            })
            .expect("every listed problem has a known minimum");
        let reached = if enough(&known[place]) {
            let kind = match problem.minima()[place] {
                Minimum::Strict { .. } => "strict",
                Minimum::Singular { .. } => "singular",
                Minimum::Set { .. } => "set",
                Minimum::AtInfinity { .. } => "infinity",
                Minimum::Saddle { .. } => "saddle",
                _ => panic!("a kind of minimum without a name here"),
            };
            Reached::Minimum {
                kind,
                place: place + 1,
            }
        } else {
            let reason = match report.ending {
                RunEnding::IterationsSpent => "budget",
                RunEnding::Converged(_) => "flat",
                RunEnding::SearchFailed(_) | RunEnding::AtRounding => "search",
                other => panic!("{}, {driver}: {other:?}", problem.name()),
            };
            Reached::No { reason }
        };
        Row {
            problem: problem.name(),
            number: problem.number().unwrap(),
            n: problem.dim(),
            m: problem.residual_count().unwrap(),
            driver,
            ending: ending(&report.ending),
            iterations: report.iterations,
            values: report.evaluations.all_values(),
            gradients: report.evaluations.all_gradients(),
            value: report.value,
            gradient_max: report.gradient_max,
            reached,
            value_digits: known[place].0,
            point_digits: known[place].1,
        }
    }

    fn line(&self) -> String {
        let reached = match self.reached {
            Reached::Minimum { kind, place } => format!("{kind} {place}"),
            Reached::No { reason } => reason.to_string(),
        };
        let or_nothing = |text: Option<String>| text.unwrap_or_default();
        let mut line = String::new();
        writeln!(
            line,
            "{},{},{},{},{},{},{},{},{},{:e},{},{reached},{},{}",
            self.problem,
            self.number,
            self.n,
            self.m,
            self.driver,
            self.ending,
            self.iterations,
            self.values,
            self.gradients,
            self.value,
            or_nothing(self.gradient_max.map(|g| format!("{g:e}"))),
            self.value_digits,
            or_nothing(self.point_digits.map(|d| d.to_string())),
        )
        .expect("a string takes any text");
        line
    }
}

/// The innermost name in an ending: the criterion, the limit, the diagnosis.
fn ending(ending: &RunEnding<f64>) -> String {
    let text = format!("{ending:?}");
    let inner = text
        .split_once('(')
        .map_or(text.as_str(), |(_, inner)| inner);
    inner
        .trim_end_matches(')')
        .split(' ')
        .next()
        .unwrap_or(inner)
        .to_string()
}

/// Whole decimal digits of agreement, at most 16.
fn digits(relative: f64) -> u32 {
    (0..16)
        .take_while(|d| relative <= 10.0_f64.powi(-(d + 1)))
        .count() as u32
}
