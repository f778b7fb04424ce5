//! The published tables of Moré and Thuente (1994) beside every step finder of this crate: how many evaluations each needs
//! for an acceptable step on six functions from four first steps, with the strong Wolfe rule and the published parameters.
//! An empty cell of the CSV, a dash of the table, says that the finder ended without one.
//!
//! ```sh
//! cargo run --release --features problems --example more_thuente
//! cargo run --release --features problems --example more_thuente -- --csv
//! ```

#[path = "shared/finders.rs"]
mod shared;

#[path = "shared/csv_option.rs"]
mod csv_option;
use std::error::Error;
use std::process::ExitCode;

use shared::finders;
use surefoot::acceptance::StrongWolfe;
use surefoot::problems::{RayProblem, more_thuente};
use surefoot::{BoxedFinder, Ray, StepSearch};

/// Evaluations of the published method, tables I to VI: J. J. Moré & D. J. Thuente, ACM Trans. Math. Software 20 (1994)
/// 286-307, doi:10.1145/192115.192132. One row a function, one column a first step.
const PUBLISHED: [[u32; 4]; 6] = [
    [6, 3, 1, 4],
    [12, 8, 8, 11],
    [12, 12, 10, 13],
    [4, 1, 3, 4],
    [6, 3, 7, 8],
    [13, 11, 8, 11],
];

/// Number of evaluations until a step is accepted; `None` where none is.
fn evaluations(
    problem: &RayProblem,
    first: f64,
    finder: BoxedFinder<f64>,
) -> Result<Option<u32>, Box<dyn Error>> {
    let rule = StrongWolfe::new(problem.decrease(), problem.curvature())?;
    let (value, slope) = problem.evaluate(0.0);
    let mut search = StepSearch::new(finder, rule);
    let found = search.along(Ray::new(value, slope), first, |a| problem.evaluate(a))?;
    Ok(found.outcome.accepted().map(|_| found.outcome.trials))
}

fn main() -> ExitCode {
    csv_option::main("more_thuente", run)
}

fn run(csv: bool) -> Result<(), Box<dyn Error>> {
    let names: Vec<&str> = finders().iter().map(|(name, _)| *name).collect();
    if csv {
        println!("function,first_step,published,{}", names.join(","));
    } else {
        println!("Evaluations until the strong Wolfe rule accepts, published parameters.\n");
        print!("function  first step  published");
        names.iter().for_each(|name| print!("  {name}"));
        println!();
    }
    let mut totals = vec![Some(0); names.len()];
    for (problem, published) in more_thuente().iter().zip(PUBLISHED) {
        for (first, published) in RayProblem::FIRST_STEPS.into_iter().zip(published) {
            let mut row = Vec::new();
            for (total, (_, finder)) in totals.iter_mut().zip(finders()) {
                let count = evaluations(problem, first, finder)?;
                *total = total.zip(count).map(|(sum, count)| sum + count);
                row.push(count);
            }
            let number = problem.number().to_string();
            print_row(csv, &number, &format!("{first:e}"), published, &names, &row);
        }
    }
    if !csv {
        let published = PUBLISHED.iter().flatten().sum();
        print_row(csv, "total", "", published, &names, &totals);
        println!(
            "\nA dash: no acceptable step. Values in doubles resolve the minimizer of function 2 to about 1e-8 of"
        );
        println!(
            "itself, and its set of acceptable steps is narrower: exact minimisers that read values only miss it."
        );
    }
    Ok(())
}

fn print_row(
    csv: bool,
    function: &str,
    first: &str,
    published: u32,
    names: &[&str],
    row: &[Option<u32>],
) {
    let cell = |count: &Option<u32>, none: &str| count.map_or(none.into(), |c| c.to_string());
    if csv {
        let counts: Vec<String> = row.iter().map(|count| cell(count, "")).collect();
        println!("{function},{first},{published},{}", counts.join(","));
    } else {
        print!("{function:<8}  {first:>10}  {published:>9}");
        for (name, count) in names.iter().zip(row) {
            print!("  {:>width$}", cell(count, "-"), width = name.len());
        }
        println!();
    }
}
