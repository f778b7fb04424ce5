//! The sets of acceptable steps on the six functions of Moré and Thuente are known exactly: rules judge by them, and
//! every finder lands in them with every rule.
#![cfg(feature = "alloc")]

mod support;

use std::collections::BTreeMap;
use support::cast::{FINDERS, Rule, finders};
use support::curves::{FIRST_STEPS, PUBLISHED, Published};
use support::table::{Line, Table};
use surefoot::{Acceptance, Limits, Ray, Side, StepSearch, Trial, Verdict};

/// The functions: J. J. Moré & D. J. Thuente, ACM Trans. Math. Software 20 (1994) 286-307, section 5. The sets were
/// enclosed by interval arithmetic.
const SETS: &str = include_str!("data/more_thuente_1994/acceptance_sets.csv");

#[test]
fn every_finder_lands_in_the_exact_set_of_every_rule() {
    let mut totals = BTreeMap::new();
    let mut faults = Vec::new();
    for set in sets() {
        for first in FIRST_STEPS {
            for (name, finder) in finders() {
                let cell = format!(
                    "{name} with {:?} on {} from {first:e}",
                    set.rule, set.curve.number
                );
                let limits = Limits::new(0.0, f64::INFINITY, 60).unwrap();
                let mut search = StepSearch::new(finder, set.rule.boxed()).with_limits(limits);
                let outcome = search
                    .along(set.ray(), first, set.curve.at)
                    .unwrap()
                    .outcome;
                *totals.entry((set.kind, name)).or_insert(0) += outcome.trials;
                match outcome.accepted() {
                    None => faults.push(format!("{cell}: {}", outcome.ending)),
                    Some(trial) if set.place(trial.step) == Place::Outside => {
                        faults.push(format!("{cell}: {:e} is not acceptable", trial.step));
                    }
                    Some(_) => {}
                }
            }
        }
    }
    println!("trials in all (six functions, four first steps each):");
    for ((kind, name), trials) in &totals {
        println!("{kind:22} {name:26} {trials:5}");
    }
    assert_eq!(
        totals.len(),
        FINDERS.len() * 5,
        "every finder with five rules"
    );
    assert!(
        faults.is_empty(),
        "{} cells fail:\n{}",
        faults.len(),
        faults.join("\n")
    );
}

#[test]
fn every_rule_judges_steps_by_its_exact_set() {
    for set in sets() {
        let (rule, ray) = (set.rule.boxed(), set.ray());
        let (mut inside, mut outside) = (0, 0);
        for step in set.samples() {
            let (value, slope) = (set.curve.at)(step);
            let verdict = rule.judge(
                &ray,
                &Trial {
                    step,
                    value,
                    slope: Some(slope),
                },
            );
            let what = format!(
                "{:?} on {} at {step:e}: {verdict:?}",
                set.rule, set.curve.number
            );
            match (set.place(step), verdict) {
                (Place::Inside, Verdict::Accept) => inside += 1,
                // The side points to where an acceptable step lies.
                (Place::Outside, Verdict::Refuse(Side::TooLong)) => {
                    assert!(set.intervals.iter().any(|i| i.low.step < step), "{what}");
                    outside += 1;
                }
                (Place::Outside, Verdict::Refuse(Side::TooShort)) => {
                    assert!(set.intervals.iter().any(|i| i.high.step > step), "{what}");
                    outside += 1;
                }
                (Place::AtAnEnd, Verdict::Accept | Verdict::Refuse(_)) => {}
                _ => panic!("{what}"),
            }
        }
        assert!(
            inside >= 50 && outside >= 30,
            "{:?}: {inside} in, {outside} out",
            set.rule
        );
    }
}

/// The exact set of one rule on one function.
struct Set {
    curve: &'static Published,
    /// Names the rule in the table of totals.
    kind: &'static str,
    rule: Rule,
    intervals: Vec<Interval>,
}

struct Interval {
    low: End,
    high: End,
}

/// An end of an interval, and how far rounding can move it.
struct End {
    step: f64,
    blur: f64,
}

#[derive(Debug, PartialEq)]
enum Place {
    Inside,
    Outside,
    /// So near to an end that rounding decides.
    AtAnEnd,
}

fn sets() -> Vec<Set> {
    let table = Table::read(SETS);
    let mut sets: Vec<Set> = Vec::new();
    for line in table.lines() {
        let curve = &PUBLISHED[line.get::<usize>("function") - 1];
        let decrease = line.get("decrease");
        let curvature = || line.get("curvature");
        let (kind, rule) = match line.text("rule") {
            "sufficient decrease" => ("sufficient decrease", Rule::SufficientDecrease { decrease }),
            "weak Wolfe" => (
                "weak Wolfe",
                Rule::WeakWolfe {
                    decrease,
                    curvature: curvature(),
                },
            ),
            "strong Wolfe" => (
                "strong Wolfe",
                Rule::StrongWolfe {
                    decrease,
                    curvature: curvature(),
                },
            ),
            "Goldstein" if decrease == 0.1 => {
                ("Goldstein 0.1", Rule::Goldstein { share: decrease })
            }
            "Goldstein" => ("Goldstein 0.25", Rule::Goldstein { share: decrease }),
            other => panic!("no rule is called {other}"),
        };
        let interval = Interval {
            low: End::read(curve, line, "low", "low_by"),
            high: End::read(curve, line, "high", "high_by"),
        };
        match sets.last_mut() {
            Some(set) if set.curve.number == curve.number && set.rule == rule => {
                set.intervals.push(interval);
            }
            _ => sets.push(Set {
                curve,
                kind,
                rule,
                intervals: vec![interval],
            }),
        }
    }
    assert_eq!(sets.len(), 6 * 5);
    sets
}

impl Set {
    fn ray(&self) -> Ray<f64> {
        let (value, slope) = (self.curve.at)(0.0);
        Ray::new(value, slope)
    }

    fn place(&self, step: f64) -> Place {
        let ends = || self.intervals.iter().flat_map(|i| [&i.low, &i.high]);
        if ends().any(|end| (step - end.step).abs() <= end.blur) {
            Place::AtAnEnd
        } else if self
            .intervals
            .iter()
            .any(|i| i.low.step < step && step < i.high.step)
        {
            Place::Inside
        } else {
            Place::Outside
        }
    }

    /// Steps over eight decades, within each interval, and closer and closer to both sides of each end.
    fn samples(&self) -> Vec<f64> {
        let mut steps: Vec<f64> = (0..400)
            .map(|i| 1e-6 * 10_f64.powf(f64::from(i) / 50.0))
            .collect();
        for Interval { low, high } in &self.intervals {
            let width = high.step - low.step;
            steps.extend((1..50).map(|i| low.step + width * f64::from(i) / 50.0));
            for end in [low, high] {
                for power in 1..16 {
                    let away = width * 0.1_f64.powi(power);
                    steps.extend([end.step - away, end.step + away]);
                }
            }
        }
        steps.retain(|step| *step > 0.0);
        steps
    }
}

impl End {
    fn read(curve: &Published, line: Line<'_>, step: &str, by: &str) -> End {
        let step: f64 = line.get(step);
        let (value0, slope0) = (curve.at)(0.0);
        let decrease: f64 = line.get("decrease");
        let decided = |a: f64| match line.text(by) {
            "decrease" => (curve.at)(a).0 - value0 - decrease * a * slope0,
            "steeper" => (curve.at)(a).0 - value0 - (1.0 - decrease) * a * slope0,
            "curvature" | "positive" => (curve.at)(a).1,
            "start" => a,
            other => panic!("nothing is called {other}"),
        };
        // Where the decided quantity has slope s and rounding error r, its zero is known to r / s.
        let (value, slope) = rounding(curve.number, step);
        let rounding = match line.text(by) {
            "decrease" | "steeper" => value + rounding(curve.number, 0.0).0,
            "curvature" | "positive" => slope,
            _ => 0.0,
        };
        let aside = 1e-7 * step.max(1e-7);
        let steepness = (decided(step + aside) - decided(step - aside)) / (2.0 * aside);
        // The step itself is rounded, too.
        let blur = rounding / steepness.abs() + f64::EPSILON * step;
        assert!(
            blur <= 1e-10 * step,
            "function {}: blur {blur:e} at {step:e}",
            curve.number
        );
        End { step, blur }
    }
}

/// Bounds on the rounding errors of value and slope: half a unit in the last place per operation on the largest terms,
/// with at most eight operations upon another.
fn rounding(function: usize, a: f64) -> (f64, f64) {
    let t = a + 0.004;
    let (value, slope) = match function {
        1 => (a / (a * a + 2.0), 1.0 / (a * a + 2.0)),
        2 => (t * t * t * t * (t + 2.0), t * t * t * (5.0 * t + 8.0)),
        // The argument of the wave, 61 a, is rounded before the sine is taken.
        3 => (1.0 + 2.0 * a, 1.0 + a / 0.01 + 61.0 * a),
        _ => (1.0 + 2.0 * a, 2.0),
    };
    (4.0 * f64::EPSILON * value, 4.0 * f64::EPSILON * slope)
}
