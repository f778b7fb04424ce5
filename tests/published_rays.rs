//! Moré and Thuente's method does what its authors published: the number of evaluations, the step and the slope of
//! all 24 runs of tables I to VI.
#![cfg(feature = "alloc")]

mod support;

use support::curves::PUBLISHED;
use support::table::Table;
use surefoot::acceptance::StrongWolfe;
use surefoot::finder::MoreThuente;
use surefoot::{Cost, Need, Ray, Sample, StepSearch};

/// J. J. Moré & D. J. Thuente, ACM Trans. Math. Software 20 (1994) 286-307, doi:10.1145/192115.192132, tables I to VI.
const RUNS: &str = include_str!("data/more_thuente_1994/published_runs.csv");

#[test]
fn all_published_runs_come_out_with_separate_values_and_slopes() {
    assert_eq!(runs_come_out(Cost::Separate), 24);
}

#[test]
fn all_published_runs_come_out_with_joint_evaluations() {
    assert_eq!(runs_come_out(Cost::Joint), 24);
}

fn runs_come_out(cost: Cost) -> usize {
    let table = Table::read(RUNS);
    let mut compared = 0;
    for run in table.lines() {
        let curve = &PUBLISHED[run.get::<usize>("function") - 1];
        let first: f64 = run.get("first_step");
        let (decrease, curvature) = (run.get("decrease"), run.get("curvature"));
        assert_eq!((decrease, curvature), (curve.decrease, curve.curvature));
        let (value, slope) = (curve.at)(0.0);
        let rule = StrongWolfe::new(decrease, curvature).unwrap();
        let mut search = StepSearch::new(MoreThuente::new(), rule).with_cost(cost);
        let mut evaluations = 0;
        let found = search
            .along_lazily(Ray::new(value, slope), first, |step, need| {
                let (value, slope) = (curve.at)(step);
                evaluations += u32::from(need != Need::Slope);
                match need {
                    Need::Value => Sample::Value(value),
                    Need::Slope => Sample::Slope(slope),
                    Need::Both => Sample::Both(value, slope),
                }
            })
            .unwrap();
        let name = format!("function {} from {first:e}", curve.number);
        let accepted = found.outcome.accepted().expect("a step");
        assert_eq!(evaluations, run.get::<u32>("evaluations"), "{name}");
        assert_eq!(found.outcome.trials, evaluations, "{name}");
        assert_eq!(
            two_digits(accepted.step),
            two_digits(run.get("step")),
            "{name}"
        );
        if !run.text("slope").is_empty() {
            let slope = accepted.slope.expect("strong Wolfe reads it");
            assert_eq!(two_digits(slope), two_digits(run.get("slope")), "{name}");
        }
        compared += 1;
    }
    compared
}

/// As the tables print them.
fn two_digits(x: f64) -> String {
    format!("{x:.1e}")
}
