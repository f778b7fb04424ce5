//! Any finder works with any rule: on four thousand random smooth rays no search fails, thanks to the guard.
#![cfg(feature = "alloc")]

mod support;

use std::thread;
use support::cast::{Between, FINDERS, Rule, finders};
use support::rays::RandomRay;
use surefoot::search::Origin;
use surefoot::{Limits, Proposal, Ray, Side, StepFinder, StepSearch, Trial};

const SEEDS: u64 = 4000;
const TRIALS: u32 = 100;

#[test]
fn strong_wolfe() {
    let mut guarded =
        every_finder_succeeds("strong Wolfe, decrease 1e-4", |ray| Rule::StrongWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature,
        });
    for (name, decrease, least) in [
        ("strong Wolfe, decrease 0.1", 0.1, 0.1),
        ("strong Wolfe, decrease 0.4", 0.4, 0.41),
    ] {
        guarded += every_finder_succeeds(name, |ray| Rule::StrongWolfe {
            decrease,
            curvature: ray.curvature.max(least),
        });
    }
    assert!(
        guarded > 0,
        "the guard was never needed: the rays are too easy"
    );
}

#[test]
fn weak_wolfe() {
    let mut guarded = every_finder_succeeds("weak Wolfe, decrease 1e-4", |ray| Rule::WeakWolfe {
        decrease: ray.decrease(),
        curvature: ray.curvature,
    });
    for (name, decrease, least) in [
        ("weak Wolfe, decrease 0.1", 0.1, 0.1),
        ("weak Wolfe, decrease 0.4", 0.4, 0.41),
    ] {
        guarded += every_finder_succeeds(name, |ray| Rule::WeakWolfe {
            decrease,
            curvature: ray.curvature.max(least),
        });
    }
    assert!(
        guarded > 0,
        "the guard was never needed: the rays are too easy"
    );
}

#[test]
fn goldstein() {
    let guarded = every_finder_succeeds("Goldstein 0.1", |_| Rule::Goldstein { share: 0.1 })
        + every_finder_succeeds("Goldstein 0.3", |_| Rule::Goldstein { share: 0.3 });
    assert!(
        guarded > 0,
        "the guard was never needed: the rays are too easy"
    );
}

#[test]
fn sufficient_decrease() {
    every_finder_succeeds("sufficient decrease 0.1", |_| Rule::SufficientDecrease {
        decrease: 0.1,
    });
}

/// Creeps: keeps 99/100 of the bracket.
struct Creeper {
    short: f64,
    long: Option<f64>,
}

impl StepFinder<f64> for Creeper {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, side: Side) -> Proposal<f64> {
        match side {
            Side::TooLong => self.long = Some(refused.step),
            Side::TooShort => self.short = refused.step,
        }
        let long = self.long.unwrap_or(3.0 * refused.step);
        Proposal::Try(long - 0.01 * (long - self.short))
    }
}

/// Six slow trials running are left to the finder, then the bracket is halved; so it shrinks to any width.
#[test]
fn a_bracket_that_hardly_shrinks_is_halved() {
    let target = Between {
        low: 0.7,
        high: 0.7 + 1e-6,
    };
    let finder = Creeper {
        short: 0.0,
        long: None,
    };
    let limits = Limits::new(0.0, f64::INFINITY, 1000).unwrap();
    let mut search = StepSearch::new(finder, target).with_limits(limits);
    let falls = |a: f64| -a;
    let outcome = search
        .along(Ray::new(0.0, -1.0), 0.5, falls)
        .unwrap()
        .outcome;
    assert!(outcome.accepted().is_some(), "{}", outcome.ending);
    // From 0.5 to 1e-6 takes 19 halvings, each after six slow trials at most; creeping alone would take 1300 trials.
    assert!(outcome.trials <= 19 * 7 + 10, "{}", outcome.trials);
    let by_guard: Vec<u32> = search
        .log()
        .iter()
        .filter(|entry| entry.origin == Origin::Guard)
        .map(|entry| entry.number)
        .collect();
    // The finder has its say in between.
    assert!(
        by_guard.len() >= 5 && by_guard.windows(2).all(|pair| pair[1] - pair[0] >= 6),
        "{by_guard:?}"
    );
}

/// Returns how many trials the guard placed.
fn every_finder_succeeds(name: &str, rule: impl Fn(&RandomRay) -> Rule + Sync) -> usize {
    let half = SEEDS / 2;
    let mut tally = thread::scope(|scope| {
        let upper = scope.spawn(|| search_all(half..SEEDS, &rule));
        let mut lower = search_all(0..half, &rule);
        lower.add(upper.join().expect("no panic"));
        lower
    });
    println!("{name}:");
    for (finder, (trials, longest)) in FINDERS.iter().zip(&tally.trials) {
        let mean = f64::from(*trials) / SEEDS as f64;
        println!("    {finder:26} {trials:6} trials, {mean:5.2} a ray, at most {longest}");
    }
    println!(
        "    {} trials were put where they are by the guard",
        tally.guarded
    );
    let failures = tally.failures.len();
    tally.failures.truncate(10);
    assert!(
        failures == 0,
        "{failures} of {} searches fail, such as\n{}",
        SEEDS as usize * FINDERS.len(),
        tally.failures.join("\n")
    );
    tally.guarded
}

#[derive(Default)]
struct Tally {
    guarded: usize,
    /// Per finder: trials in all, and of the longest search.
    trials: [(u32, u32); FINDERS.len()],
    failures: Vec<String>,
}

impl Tally {
    fn add(&mut self, other: Tally) {
        self.guarded += other.guarded;
        for (mine, theirs) in self.trials.iter_mut().zip(other.trials) {
            *mine = (mine.0 + theirs.0, mine.1.max(theirs.1));
        }
        self.failures.extend(other.failures);
    }
}

fn search_all(seeds: std::ops::Range<u64>, rule: &impl Fn(&RandomRay) -> Rule) -> Tally {
    let limits = Limits::new(0.0, f64::INFINITY, TRIALS).unwrap();
    let mut tally = Tally::default();
    for seed in seeds {
        let ray = RandomRay::new(seed);
        let start = ray.at(0.0);
        assert!(start.1 < 0.0, "every member of the family descends at 0");
        let rule = rule(&ray);
        for ((name, finder), tally_of) in finders().into_iter().zip(&mut tally.trials) {
            let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
            let found = search.along(Ray::new(start.0, start.1), ray.first, |a| ray.at(a));
            let outcome = found.expect("a ray fit for a search").outcome;
            *tally_of = (tally_of.0 + outcome.trials, tally_of.1.max(outcome.trials));
            let by_guard = search.log().iter().filter(|e| e.origin == Origin::Guard);
            tally.guarded += by_guard.count();
            let fault = match outcome.accepted() {
                None => outcome.ending.to_string(),
                Some(trial) if !rule.holds(start, trial.step, ray.at(trial.step)) => {
                    format!("{:e} was accepted and breaks the rule", trial.step)
                }
                Some(_) => continue,
            };
            let shape = ray.shape;
            tally.failures.push(format!(
                "{name} with {rule:?}, seed {seed}, shape {shape}: {fault}"
            ));
        }
    }
    tally
}
