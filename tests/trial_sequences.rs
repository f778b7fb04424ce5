//! The exact steps that every finder asks for with every rule on the six functions of Moré and Thuente.
//!
//! The steps are pinned as this crate found them, so that a change of behaviour is seen; that they lead to the right
//! place is shown by `acceptance_sets.rs`, and that they are as few as published by `published_rays.rs`. After a change
//! that is meant, run with `UPDATE_PINS=1` and look at the difference.
#![cfg(feature = "alloc")]

mod support;

use std::fmt::Write as _;
use support::cast::{Rule, finders};
use support::curves::PUBLISHED;
use support::table::Table;
use surefoot::{Ray, StepSearch};

const PINNED: &str = include_str!("data/trial_sequences.csv");

const HEAD: &str = "\
# The steps that each finder asks for on the six functions of More and Thuente (ACM Trans. Math.
# Software 20 (1994) 286-307, section 5), with their parameters; the last one is accepted. Steps are written in the
# fewest digits that give the same double. Pinned by running: tests/trial_sequences.rs with UPDATE_PINS=1.
function,rule,finder,steps
";

#[test]
fn every_finder_asks_for_the_same_steps_as_ever() {
    let sequences = sequences();
    if std::env::var_os("UPDATE_PINS").is_some() {
        let path = concat!(
            env!("CARGO_MANIFEST_DIR"),
            "/tests/data/trial_sequences.csv"
        );
        std::fs::write(path, written(&sequences)).unwrap();
        return;
    }
    let table = Table::read(PINNED);
    assert_eq!(table.lines().count(), sequences.len());
    for (line, sequence) in table.lines().zip(&sequences) {
        let names = [
            line.text("function"),
            line.text("rule"),
            line.text("finder"),
        ];
        assert_eq!(names, sequence.names.each_ref().map(String::as_str));
        let pinned: Vec<f64> = line
            .text("steps")
            .split(' ')
            .map(|step| step.parse().unwrap())
            .collect();
        assert_eq!(
            pinned.len(),
            sequence.steps.len(),
            "{names:?} takes another number of trials"
        );
        for (trial, (pinned, step)) in pinned.iter().zip(&sequence.steps).enumerate() {
            let difference = (pinned - step).abs();
            assert!(
                difference <= sequence.tolerance * pinned,
                "{names:?}, trial {}: {step:e}",
                trial + 1
            );
        }
    }
}

struct Sequence {
    /// Function, rule and finder.
    names: [String; 3],
    steps: Vec<f64>,
    /// Relative; 0 where the function uses nothing but `+ - * /` and `sqrt`.
    tolerance: f64,
}

fn sequences() -> Vec<Sequence> {
    let mut sequences = Vec::new();
    for curve in &PUBLISHED {
        let (decrease, curvature) = (curve.decrease, curve.curvature);
        // Sufficient decrease accepts any short step: only from a long one is there something to find.
        for (rule_name, rule, first) in [
            (
                "sufficient decrease",
                Rule::SufficientDecrease { decrease },
                1e3,
            ),
            (
                "weak Wolfe",
                Rule::WeakWolfe {
                    decrease,
                    curvature,
                },
                0.1,
            ),
            (
                "strong Wolfe",
                Rule::StrongWolfe {
                    decrease,
                    curvature,
                },
                0.1,
            ),
            ("Goldstein 0.25", Rule::Goldstein { share: 0.25 }, 0.1),
        ] {
            for (finder_name, finder) in finders() {
                let (value, slope) = (curve.at)(0.0);
                let mut search = StepSearch::new(finder, rule.boxed());
                let outcome = search
                    .along(Ray::new(value, slope), first, curve.at)
                    .unwrap()
                    .outcome;
                let names = [
                    curve.number.to_string(),
                    rule_name.into(),
                    finder_name.into(),
                ];
                assert!(
                    outcome.accepted().is_some(),
                    "{names:?}: {}",
                    outcome.ending
                );
                // Function 3 takes sines, whose last digit differs between platforms.
                let tolerance = if curve.number == 3 { 1e-9 } else { 0.0 };
                let steps = search.log().iter().map(|entry| entry.trial.step).collect();
                sequences.push(Sequence {
                    names,
                    steps,
                    tolerance,
                });
            }
        }
    }
    sequences
}

fn written(sequences: &[Sequence]) -> String {
    let mut text = String::from(HEAD);
    for sequence in sequences {
        let steps: Vec<String> = sequence
            .steps
            .iter()
            .map(|step| format!("{step:e}"))
            .collect();
        writeln!(text, "{},{}", sequence.names.join(","), steps.join(" ")).unwrap();
    }
    text
}
