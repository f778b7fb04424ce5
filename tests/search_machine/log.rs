//! The log, and the account of why each trial was refused.

use super::support::cast::{Between, FINDERS, finder};
use super::{RULES, valley};
use surefoot::acceptance::{Goldstein, StrongWolfe};
use surefoot::finder::{Bisection, MoreThuente};
use surefoot::search::{Fate, KEPT, Origin};
use surefoot::{Acceptance, Limits, Ray, Relation, Sample, Side, StepFinder, StepSearch};

#[test]
fn each_trial_is_a_line_with_its_origin_and_fate() {
    let mut search = StepSearch::new(Bisection::new(), StrongWolfe::new(0.1, 0.1).unwrap());
    // Not defined from 6 on.
    let probe = |a: f64| {
        let (value, slope) = valley(a);
        if a < 6.0 {
            Sample::Both(value, slope)
        } else {
            Sample::OutsideDomain
        }
    };
    search.along(Ray::new(0.0, -1.0), 7.0, probe).unwrap();
    let lines: Vec<_> = search
        .log()
        .iter()
        .map(|e| (e.number, e.trial.step, e.origin, e.fate))
        .collect();
    assert_eq!(
        lines,
        [
            (1, 7.0, Origin::First, Fate::Outside),
            (2, 3.5, Origin::Edge, Fate::Refused(Side::TooLong)),
            (3, 1.75, Origin::Finder, Fate::Refused(Side::TooLong)),
            (4, 0.875, Origin::Finder, Fate::Refused(Side::TooShort)),
            (5, 1.3125, Origin::Finder, Fate::Refused(Side::TooLong)),
            (6, 1.09375, Origin::Finder, Fate::Accepted),
        ]
    );
    let outside = search.log().iter().next().unwrap();
    assert!(outside.trial.value.is_nan() && outside.trial.slope.is_none());
}

#[test]
fn a_long_log_keeps_the_latest_trials() {
    // A target that bisection from afar needs 100 trials for.
    let target = Between {
        low: 1e-30,
        high: 1.0000001e-30,
    };
    let limits = Limits::new(0.0, f64::INFINITY, 1000).unwrap();
    let mut search = StepSearch::new(Bisection::new(), target).with_limits(limits);
    search.along(Ray::new(0.0, -1.0), 1.0, |a: f64| -a).unwrap();
    let trials = search.log().trials();
    assert!(trials > 100, "{trials}");
    let numbers: Vec<u32> = search.log().iter().map(|entry| entry.number).collect();
    assert_eq!(
        numbers,
        (trials - KEPT as u32 + 1..=trials).collect::<Vec<_>>()
    );
    assert_eq!(search.outcome().unwrap().trials, trials);
    assert_eq!(search.log().iter().last().unwrap().fate, Fate::Accepted);
}

#[test]
fn the_account_of_a_trial_agrees_with_its_fate() {
    for rule in RULES {
        for name in FINDERS {
            for first in [0.013, 37.0] {
                let mut search = StepSearch::new(finder(name), rule.boxed());
                search
                    .along(Ray::new(2.0, -1.0), first, |a| {
                        (2.0 + valley(a).0, valley(a).1)
                    })
                    .unwrap();
                for entry in search.log().iter() {
                    let (mut all, mut count) = (true, 0);
                    search.explain(entry, &mut |condition| {
                        let holds = match condition.relation {
                            Relation::AtMost => condition.found <= condition.limit,
                            Relation::AtLeast => condition.found >= condition.limit,
                        };
                        assert_eq!(holds, condition.holds, "{condition}");
                        all &= holds;
                        count += 1;
                    });
                    assert!(count >= 1);
                    assert_eq!(
                        all,
                        entry.fate == Fate::Accepted,
                        "{name} with {rule:?}, trial {}",
                        entry.number
                    );
                }
            }
        }
    }
}

#[test]
fn conditions_are_told_with_what_was_found_and_the_limit() {
    let mut search = StepSearch::new(MoreThuente::new(), StrongWolfe::new(0.25, 0.5).unwrap());
    search.along(Ray::new(0.0, -1.0), 1.75, valley).unwrap();
    assert_eq!(
        account(&search, 0),
        [
            "sufficient decrease: -2.187500e-1 > -4.375000e-1",
            "curvature: 7.500000e-1 >= -5.000000e-1",
            "slope not too positive: 7.500000e-1 > 5.000000e-1",
        ]
    );
    let mut search = StepSearch::new(Bisection::new(), Goldstein::new(0.25).unwrap());
    search.along(Ray::new(0.0, -1.0), 0.25, valley).unwrap();
    assert_eq!(
        account(&search, 0),
        [
            "sufficient decrease: -2.187500e-1 <= -6.250000e-2",
            "not too short: -2.187500e-1 < -1.875000e-1",
        ]
    );
}

#[test]
fn there_is_no_account_of_a_trial_outside_of_the_domain() {
    let mut search = StepSearch::new(Bisection::new(), StrongWolfe::default());
    let probe = |a: f64| if a < 2.0 { valley(a) } else { (f64::NAN, 0.0) };
    search.along(Ray::new(0.0, -1.0), 3.0, probe).unwrap();
    assert_eq!(search.log().iter().next().unwrap().fate, Fate::Outside);
    assert!(account(&search, 0).is_empty());
}

fn account<F: StepFinder<f64>, A: Acceptance<f64>>(
    search: &StepSearch<f64, F, A>,
    line: usize,
) -> Vec<String> {
    let mut told = Vec::new();
    let entry = search.log().iter().nth(line).expect("a line of the log");
    search.explain(entry, &mut |condition| told.push(condition.to_string()));
    told
}
