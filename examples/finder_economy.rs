//! What each step finder spends: on the 24 published runs of Moré and Thuente (1994), and on random rays beside their
//! method. Strong Wolfe rule throughout, with each ray's own parameters.
//!
//! ```sh
//! cargo run --release --features problems --example finder_economy            # seeds 0 to 3999, ratios kind by kind
//! cargo run --release --features problems --example finder_economy -- 4000 8000
//! cargo run --release --features problems --example finder_economy -- --csv
//! cargo run --release --features problems --example finder_economy -- --further    # kinds on which nothing was chosen
//! ```
//!
//! The measure is the number of trials. Moré and Thuente's method is the yardstick *bare*, on its own bracket and without the
//! guard of the search; the other one is bisection, twice whose trials plus 4 no finder should exceed on any ray. The exact
//! finders minimise on where the others stop, so their figures say what exactness costs.
//!
//! With `--further` the random rays are those of [`FurtherRay`], and the yardstick is Moré and Thuente's method *with* the
//! guard, on every kind: the bare method does not know what to do with a trial beyond the edge of a barrier's domain.

#[path = "shared/finders.rs"]
mod shared;

use std::error::Error;
use std::process::ExitCode;

use shared::finders;
use surefoot::acceptance::StrongWolfe;
use surefoot::finder::{Bisection, MoreThuente};
use surefoot::problems::{FurtherRay, RandomRay, RayProblem, more_thuente};
use surefoot::{
    Acceptance, BoxedFinder, Proposal, Ray, Side, StepFinder, StepSearch, Trial, Verdict,
};

/// More trials than this are a failure.
const BUDGET: u32 = 100;

/// A ray to search along: value and slope at a step, its first step, its rule.
struct Case<'a> {
    evaluate: &'a dyn Fn(f64) -> (f64, f64),
    first: f64,
    rule: StrongWolfe<f64>,
}

/// Which random rays.
#[derive(Clone, Copy, PartialEq)]
enum Family {
    Reference,
    Further,
}

impl Family {
    /// Gives the ray of a seed, with the name of its kind.
    fn with_case<X>(
        self,
        seed: u64,
        run: impl FnOnce(&'static str, &Case<'_>) -> Result<X, Box<dyn Error>>,
    ) -> Result<X, Box<dyn Error>> {
        match self {
            Family::Reference => {
                let ray = RandomRay::new(seed);
                let case = Case {
                    evaluate: &|a| ray.evaluate(a),
                    first: ray.first_step(),
                    rule: StrongWolfe::new(ray.decrease(), ray.curvature())?,
                };
                run(ray.kind().name(), &case)
            }
            Family::Further => {
                let ray = FurtherRay::new(seed);
                let case = Case {
                    evaluate: &|a| ray.evaluate(a),
                    first: ray.first_step(),
                    rule: StrongWolfe::new(ray.decrease(), ray.curvature())?,
                };
                run(ray.kind().name(), &case)
            }
        }
    }

    /// Trials of Moré and Thuente's method, at most the budget.
    fn yardstick(self, case: &Case<'_>) -> Result<u32, Box<dyn Error>> {
        Ok(match self {
            Family::Reference => bare_trials(case),
            Family::Further => trials(case, MoreThuente::new())?.unwrap_or(BUDGET),
        })
    }
}

/// Trials until acceptance; `None` where there is none within the budget.
fn trials(case: &Case<'_>, finder: impl StepFinder<f64>) -> Result<Option<u32>, Box<dyn Error>> {
    let (value, slope) = (case.evaluate)(0.0);
    let mut search = StepSearch::new(finder, case.rule);
    let outcome = search
        .along(Ray::new(value, slope), case.first, case.evaluate)?
        .outcome;
    Ok(outcome.accepted().map(|_| outcome.trials))
}

/// Moré and Thuente's method on its own, without the guard: its trials, at most the budget.
fn bare_trials(case: &Case<'_>) -> u32 {
    let (value, slope) = (case.evaluate)(0.0);
    let mut ray = Ray::new(value, slope);
    ray.decrease = Acceptance::<f64>::decrease(&case.rule);
    let mut finder = MoreThuente::new();
    let mut step = finder.begin(&ray, case.first);
    for count in 1..=BUDGET {
        let (value, slope) = (case.evaluate)(step);
        let trial = Trial {
            step,
            value,
            slope: Some(slope),
        };
        let side: Side = match case.rule.judge(&ray, &trial) {
            Verdict::Refuse(side) => side,
            Verdict::Accept | Verdict::NeedsSlope => return count,
        };
        match finder.next(&ray, &trial, side) {
            Proposal::Try(next) => step = next,
            Proposal::Spent => return BUDGET,
        }
    }
    BUDGET
}

/// What one finder spent.
struct Account {
    name: &'static str,
    published: u32,
    /// Trials on the random rays, and those of the yardstick, by kind.
    by_kind: Vec<(&'static str, u64, u64)>,
    worst_excess: i64,
    failures: u32,
}

impl Account {
    fn ratio(&self) -> f64 {
        let total =
            |pick: fn(&(&'static str, u64, u64)) -> u64| self.by_kind.iter().map(pick).sum::<u64>();
        total(|k| k.1) as f64 / total(|k| k.2) as f64
    }

    /// Books one run; the trials, the budget where it failed.
    fn book(&mut self, found: Option<u32>, bisection: u32) -> u32 {
        if found.is_none() {
            self.failures += 1;
        }
        let spent = found.unwrap_or(BUDGET);
        let excess = i64::from(spent) - 2 * i64::from(bisection);
        self.worst_excess = self.worst_excess.max(excess);
        spent
    }
}

fn account(
    name: &'static str,
    make: impl Fn() -> BoxedFinder<f64>,
    family: Family,
    seeds: std::ops::Range<u64>,
) -> Result<Account, Box<dyn Error>> {
    let mut account = Account {
        name,
        published: 0,
        by_kind: Vec::new(),
        worst_excess: i64::MIN,
        failures: 0,
    };
    for problem in more_thuente() {
        for first in RayProblem::FIRST_STEPS {
            let case = Case {
                evaluate: &|a| problem.evaluate(a),
                first,
                rule: StrongWolfe::new(problem.decrease(), problem.curvature())?,
            };
            let bisection = trials(&case, Bisection::new())?.unwrap_or(BUDGET);
            account.published += account.book(trials(&case, make())?, bisection);
        }
    }
    for seed in seeds {
        family.with_case(seed, |kind, case| {
            let bisection = trials(case, Bisection::new())?.unwrap_or(BUDGET);
            let spent = u64::from(account.book(trials(case, make())?, bisection));
            let yardstick = u64::from(family.yardstick(case)?);
            match account.by_kind.iter_mut().find(|k| k.0 == kind) {
                Some(sums) => {
                    sums.1 += spent;
                    sums.2 += yardstick;
                }
                None => account.by_kind.push((kind, spent, yardstick)),
            }
            Ok(())
        })?;
    }
    account.by_kind.sort_by_key(|k| k.0);
    Ok(account)
}

fn run(csv: bool, family: Family, seeds: std::ops::Range<u64>) -> Result<(), Box<dyn Error>> {
    let names: Vec<&str> = finders().iter().map(|(name, _)| *name).collect();
    let mut accounts = Vec::new();
    for (index, name) in names.into_iter().enumerate() {
        accounts.push(account(
            name,
            || finders().swap_remove(index).1,
            family,
            seeds.clone(),
        )?);
    }
    if csv {
        println!(
            "finder,published_runs_total,ratio_to_more_thuente,worst_excess_over_bisection,failures"
        );
        for a in &accounts {
            println!(
                "{},{},{:.4},{},{}",
                a.name,
                a.published,
                a.ratio(),
                a.worst_excess,
                a.failures
            );
        }
        return Ok(());
    }
    let (rays, yardstick) = match family {
        Family::Reference => ("random rays", "the bare method of Moré and Thuente"),
        Family::Further => (
            "random rays of further kinds",
            "the method of Moré and Thuente, guarded as every finder is (the bare one knows no edge of a domain)",
        ),
    };
    println!(
        "24 published runs, and {rays} with seeds {} to {}.",
        seeds.start,
        seeds.end - 1
    );
    println!("Excess: the largest (trials - 2 x bisection's trials) on one ray.\n");
    println!("{:<27} published  ratio  excess  failures", "finder");
    for a in &accounts {
        println!(
            "{:<27} {:>9}  {:>5.3}  {:>6}  {:>8}",
            a.name,
            a.published,
            a.ratio(),
            a.worst_excess,
            a.failures
        );
    }
    println!("\nTrials over those of {yardstick}, kind by kind:\n");
    print!("{:<27}", "finder");
    for kind in accounts.iter().take(1).flat_map(|a| &a.by_kind) {
        print!("  {}", kind.0);
    }
    println!();
    for a in &accounts {
        print!("{:<27}", a.name);
        for (kind, spent, yardstick) in &a.by_kind {
            print!(
                "  {:>width$.3}",
                *spent as f64 / *yardstick as f64,
                width = kind.len()
            );
        }
        println!();
    }
    Ok(())
}

fn main() -> ExitCode {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let words: Vec<&str> = arguments.iter().map(String::as_str).collect();
    let (family, words) = match words[..] {
        ["--further", ref rest @ ..] => (Family::Further, rest),
        ref all => (Family::Reference, all),
    };
    let (csv, seeds) = match *words {
        [] => (false, 0..4000),
        ["--csv"] => (true, 0..4000),
        [from, to] => match (from.parse(), to.parse()) {
            (Ok(from), Ok(to)) if from < to => (false, from..to),
            _ => {
                eprintln!(
                    "the seeds must be two whole numbers, the first smaller, such as 4000 8000"
                );
                return ExitCode::from(2);
            }
        },
        _ => {
            eprintln!("usage: finder_economy [--further] [--csv | FIRST_SEED PAST_LAST_SEED]");
            return ExitCode::from(2);
        }
    };
    match run(csv, family, seeds) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("{error}");
            ExitCode::FAILURE
        }
    }
}
